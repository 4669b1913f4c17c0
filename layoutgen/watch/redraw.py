"""One drawing of a circuit file: the files written and the page, or what is wrong with it."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path

from layoutgen.errors import InfeasibleError, LayoutgenError, WrongInputError
from layoutgen.pipeline import run
from layoutgen.writers import Job, Result, encode, write_files
from layoutgen.writers.report_html import report_page

__all__ = ["Draw", "Drawing", "redraw"]


@dataclass(frozen=True, slots=True)
class Drawing:
    """What became of one attempt: the page and its version, or the faults as one text each."""

    page: bytes = b""
    version: str = ""
    faults: tuple[str, ...] = ()


Draw = Callable[[Path], Result]


def redraw(circuit: Path, folder: Path, job: Job, draw: Draw = run) -> Drawing:
    """Draw a circuit file and write its files, all or none; a faulty one changes no file.

    Args:
        circuit: The circuit file.
        folder: Where the files go.
        job: Stem, resolution, and whether to leave out what differs from run to run.
        draw: Makes every stage's result of a circuit file, as the pipeline does.
    """
    try:
        result = draw(circuit)
        files = encode(result, job)
        write_files(folder, files)
    except LayoutgenError as error:
        return Drawing(faults=_faults(error))
    version = hashlib.sha256(files["report.html"]).hexdigest()[:16]
    others = {name: data for name, data in files.items() if not name.startswith("report.")}
    return Drawing(report_page(result, replace(job, files=others), version), version)


def _faults(error: LayoutgenError) -> tuple[str, ...]:
    if isinstance(error, WrongInputError):
        return tuple(str(fault) for fault in error.faults)
    if isinstance(error, InfeasibleError):
        return (f"no placement: {error}",)
    return (str(error),)
