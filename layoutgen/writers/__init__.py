"""Writers: the results of all stages in, files out; one format, one file, one signature.

In: a :class:`Result` and a :class:`Job`. Out: the bytes of each file (:func:`encode`), or a folder that holds
either all of them or what it held before (:func:`write`). Writers compute nothing that the stages before them
could have: they turn values into text, polygons and pictures.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace
from importlib import import_module
from pathlib import Path

from layoutgen.writers.dxf import write_dxf
from layoutgen.writers.folder import older_packages, prepare_folder, write_files
from layoutgen.writers.gds import write_gds
from layoutgen.writers.png import write_png
from layoutgen.writers.records import DEFAULT_DPI, Job, Result
from layoutgen.writers.report_html import write_report_html
from layoutgen.writers.report_json import findings_report, write_report_json
from layoutgen.writers.response_files import TRACE_HEADS, response_files, trace_values
from layoutgen.writers.svg import artwork_svg, write_svg
from layoutgen.writers.touchstone import write_as_drawn, write_wanted

__all__ = [
    "ABOUT_ALL",
    "DEFAULT_DPI",
    "FORMATS",
    "TRACE_HEADS",
    "Job",
    "Result",
    "Writer",
    "artwork_svg",
    "encode",
    "file_names",
    "findings_report",
    "load_libraries",
    "older_packages",
    "prepare_folder",
    "response_files",
    "trace_values",
    "write",
    "write_files",
]

Writer = Callable[[Result, Job], bytes]

FORMATS: dict[str, Writer] = {
    "{stem}.gds": write_gds,
    "{stem}.dxf": write_dxf,
    "{stem}.svg": write_svg,
    "{stem}.png": write_png,
    "wanted.s{ports}p": write_wanted,
    "as_drawn.s{ports}p": write_as_drawn,
    "report.html": write_report_html,
    "report.json": write_report_json,
}
"""File names and their writers, in the order of writing: the last two quote or list the files before them."""
ABOUT_ALL = ("report.html", "report.json")
"""Those that list all other files of a run."""


def encode(result: Result, job: Job, formats: Iterable[str] = FORMATS) -> dict[str, bytes]:
    """Return the files by name, in the order of :data:`FORMATS`; none is written to disk.

    Args:
        result: Every stage's result.
        job: Stem, resolution, and whether to leave out what differs from run to run; its ``files`` are taken
            as written before these.
        formats: Keys of :data:`FORMATS`; those of the response are skipped where there is none.
    """
    files: dict[str, bytes] = {}
    for pattern in formats:
        if "{ports}" in pattern and result.response is None:
            continue
        ports = len(result.response.ports) if result.response else 0
        name = pattern.format(stem=job.stem, ports=ports)
        files[name] = FORMATS[pattern](result, replace(job, files={**job.files, **files}))
    return files


def load_libraries() -> None:
    """Import what the writers need, which takes a while and can be done before there is a result."""
    for name in ("ezdxf", "matplotlib.backends.backend_agg", "matplotlib.textpath", "PIL.PngImagePlugin"):
        import_module(name)


def file_names(stem: str) -> list[str]:
    """Return the names that are known before the circuit is: those without a number of ports."""
    return [pattern.format(stem=stem) for pattern in FORMATS if "{ports}" not in pattern]


def write(result: Result, folder: str | Path, job: Job) -> list[Path]:
    """Write every file into a folder, all or none; return their paths in the order of :data:`FORMATS`.

    Raises:
        WrongInputError: The folder cannot be written; it holds what it held before.
    """
    files = encode(result, job)
    write_files(Path(folder), files)
    return [Path(folder, name) for name in files]
