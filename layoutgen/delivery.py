"""All files of one drawing, encoded: the usual ones and the receivers' packages; nothing is written here."""

from __future__ import annotations

from collections.abc import Sequence
from contextlib import nullcontext
from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from layoutgen.writers import Job, Result

__all__ = ["encoded"]


def encoded(result: Result, job: Job, receivers: Sequence[str]) -> dict[str, bytes]:
    """Return all files by their paths; the packages are encoded while the picture is painted.

    Args:
        result: The drawing.
        job: Stem, resolution and the like.
        receivers: Names of the packages to encode as well; may be empty.
    """
    from layoutgen.aside import aside
    from layoutgen.writers import ABOUT_ALL, FORMATS, encode

    pictures = ("{stem}.png",)
    files = encode(result, job, [name for name in FORMATS if name not in (*pictures, *ABOUT_ALL)])
    work = partial(_packages, result, replace(job, files=dict(files)), receivers)
    with aside(work) if receivers else nullcontext(dict) as packages:
        files |= encode(result, job, pictures)
        files |= packages()
    return files | encode(result, replace(job, files=files), ABOUT_ALL)


def _packages(result: Result, job: Job, receivers: Sequence[str]) -> dict[str, bytes]:
    """Return all receivers' files by their paths."""
    from layoutgen.writers.packages import encode_packages

    return encode_packages(result, job, receivers)
