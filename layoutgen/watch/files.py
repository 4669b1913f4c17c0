"""Which files a circuit depends on: itself, its own rule file, its data files."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

__all__ = ["Mark", "folders_of", "marks_of", "watched_files"]

Mark = tuple[int, int, int] | None
"""Time of the last change [ns], size [byte] and number of a file; None where there is none."""


def watched_files(circuit: Path) -> frozenset[Path] | None:
    """Return the absolute paths of a circuit file and of the files it names; they need not exist.

    Rule files that come with the program are not among them. None when the circuit file cannot be read as
    TOML at the moment: whoever watches keeps to what was known before.
    """
    own = circuit.absolute()
    try:
        data = tomllib.loads(own.read_bytes().decode("utf-8-sig"))
    except (OSError, ValueError, RecursionError):
        return None
    named = {own.parent / name for name in _named(data) if not Path(name).is_absolute()}
    return frozenset({own, *named})


def _named(data: Mapping[str, Any]) -> Iterator[str]:
    """Yield the relative paths that the circuit's data name; the data may be faulty in any way."""
    board = data.get("board")
    rules = board.get("rules") if isinstance(board, dict) else None
    if isinstance(rules, str) and rules.endswith(".toml"):
        yield rules
    parts = data.get("parts")
    for part in parts.values() if isinstance(parts, dict) else ():
        file = part.get("data") if isinstance(part, dict) else None
        if isinstance(file, str) and file and "\0" not in file:
            yield file


def folders_of(files: frozenset[Path]) -> tuple[Path, ...]:
    """Return the folders to watch, sorted: the nearest that exists to each file and to where links lead."""
    folders = {_existing(path.parent) for file in files for path in (file, file.resolve())}
    return tuple(sorted(folders))


def _existing(folder: Path) -> Path:
    return next(path for path in (folder, *folder.parents) if path.is_dir())


def marks_of(files: frozenset[Path]) -> dict[Path, Mark]:
    """Return what tells a saved file from the one before: its time, its size, which file it is."""
    return {file: _mark(file) for file in sorted(files)}


def _mark(file: Path) -> Mark:
    try:
        status = file.stat()
    except (OSError, ValueError):
        return None
    return status.st_mtime_ns, status.st_size, status.st_ino
