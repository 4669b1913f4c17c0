"""All files of a run, or none: how a folder passes from its old set of files to the new one.

A set may reach into folders inside the folder, one for each receiver of a package: all of them are one set
and change together. What is promised:

- A folder that does not exist yet is made beside its place, and appears there whole, by one rename.
- In a folder that exists, every new file is first written and flushed into ``.layoutgen-stage`` inside it.
  Renaming that to ``.layoutgen-commit`` is the point of no return; then each file is renamed to its place,
  ``report.json`` last. A run that is killed before the point leaves the old set, and leftovers that the next
  run removes. A run that is killed during the renames (a few milliseconds for all packages; interrupts wait
  until they are done) is completed by the next run; until then ``.layoutgen-commit`` is there and tells that
  the set is mixed, and so do the hashes in ``report.json``.
- When a rename fails (a file held open elsewhere, a full disk) all renames are undone, under the name
  ``.layoutgen-undo``; the next run ends an undoing that was killed.
- Files that the tool did not write are never touched. Touchstone files of the last run whose number of ports
  has changed are removed together with it, as ``report.json`` or the package's ``README.txt`` lists them.

Two runs into one folder at the same moment are not kept apart: one of them ends with an error.
"""

from __future__ import annotations

import contextlib
import json
import os
import re
import shutil
import signal
import tempfile
from collections.abc import Iterable, Iterator, Mapping, Sequence
from pathlib import Path

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault, Location

__all__ = ["older_packages", "prepare_folder", "recover", "write_files"]

_STAGE, _COMMIT, _UNDO = ".layoutgen-stage", ".layoutgen-commit", ".layoutgen-undo"
_JOURNAL, _KEPT = "journal.json", "kept"
_LAST, _README = "report.json", "README.txt"
_PACKAGE_TITLE = re.compile(rb".+: files for the [a-z A-Z]+\r?\n=+\r?\n")
_NUMBERED = re.compile(r"(wanted|as_drawn)\.s\d+p")


def prepare_folder(folder: Path, names: Sequence[str] = ()) -> None:
    """Make sure, before any work, that the files can be written; mends what a killed run left, adds nothing.

    Args:
        folder: Where the files will go; it need not exist.
        names: Names of files that will be written, as for :func:`write_files`.

    Raises:
        WrongInputError: The folder cannot be made or written to, or a folder stands where a file must go.
    """
    try:
        there = _nearest_existing(folder)
        with tempfile.TemporaryFile(dir=there):
            pass
        if folder.exists():
            recover(folder)
            for inner in _inner_folders(folder, names):
                with tempfile.TemporaryFile(dir=inner):
                    pass
        blocked = [name for name in names if (folder / name).is_dir()]
    except OSError as error:
        raise _unwritable(folder, _reason(error)) from error
    if blocked:
        raise _unwritable(folder, f"a folder named {blocked[0]} stands in it")


def _inner_folders(folder: Path, names: Iterable[str]) -> list[Path]:
    """Return what there is, folders or not, where files of a set need folders inside the folder."""
    places = dict.fromkeys((folder / name).parent for name in names)
    return [place for place in places if place != folder and place.exists()]


def _nearest_existing(folder: Path) -> Path:
    """Return the folder, or the nearest one above it that exists."""
    there = folder
    while not there.exists() and there != there.parent:
        there = there.parent
    return there


def write_files(folder: Path, files: Mapping[str, bytes]) -> None:
    """Write all files into a folder, or none.

    Args:
        folder: Where they go; made when it does not exist.
        files: Contents by plain name, or by the name of a folder inside and a plain name, with a slash.

    Raises:
        WrongInputError: The folder cannot be written; the old files are as they were.
    """
    try:
        if folder.exists():
            recover(folder)
            _replace(folder, files)
        else:
            _create(folder, files)
    except OSError as error:
        raise _unwritable(folder, _reason(error)) from error


def older_packages(folder: Path, files: Iterable[str]) -> list[str]:
    """Return the packages in a folder that an earlier run has written and this one has not.

    Args:
        folder: The folder.
        files: Names of the files of this run, as for :func:`write_files`.
    """
    written = _folders_of(files)
    places = sorted(path.parent for path in folder.glob(f"*/{_README}"))
    return [place.name for place in places if place.name not in written and _is_package(place)]


def _is_package(place: Path) -> bool:
    try:
        return _PACKAGE_TITLE.match((place / _README).read_bytes()) is not None
    except OSError:
        return False


def recover(folder: Path) -> None:
    """Finish or undo what a killed run left in the folder; does nothing in a clean one.

    Raises:
        OSError: A file cannot be moved.
    """
    with _uninterrupted():
        if (folder / _UNDO).is_dir():
            _put_back(folder)
        if (folder / _COMMIT).is_dir():
            _finish(folder)
        if (folder / _STAGE).is_dir():
            shutil.rmtree(folder / _STAGE)


def _create(folder: Path, files: Mapping[str, bytes]) -> None:
    """Make the folder whole beside its place, then rename it there."""
    folder.parent.mkdir(parents=True, exist_ok=True)
    stage = folder.parent / f".{folder.name}{_STAGE}"
    shutil.rmtree(stage, ignore_errors=True)
    stage.mkdir()
    try:
        _write_flushed(stage, files)
        with _uninterrupted():
            stage.rename(folder)
            _flush_folder(folder.parent)
    except BaseException:
        shutil.rmtree(stage, ignore_errors=True)
        raise


def _replace(folder: Path, files: Mapping[str, bytes]) -> None:
    """Replace the tool's files in a folder that exists."""
    stage = folder / _STAGE
    stage.mkdir()
    try:
        journal = {
            "files": sorted(files, key=lambda name: name == _LAST),
            "new": [name for name in files if not (folder / name).exists()],
            "folders": [place for place in _folders_of(files) if not (folder / place).exists()],
            "remove": _outdated(folder, files),
        }
        _write_flushed(stage, {**files, _JOURNAL: json.dumps(journal).encode()})
        (stage / _KEPT).mkdir()
    except BaseException:
        shutil.rmtree(stage, ignore_errors=True)
        raise
    with _uninterrupted():
        stage.rename(folder / _COMMIT)
        try:
            _finish(folder)
        except OSError:
            (folder / _COMMIT).rename(folder / _UNDO)
            _put_back(folder)
            raise


def _finish(folder: Path) -> None:
    """Keep the old files, move every new file that has not been moved yet, remove what is outdated."""
    commit = folder / _COMMIT
    journal = _read_journal(commit)
    pending = [name for name in journal["files"] if (commit / name).exists()]
    for name in (*pending, *journal["remove"]):
        _keep(folder / name, commit / _KEPT / name)
    for place in _folders_of(pending):
        (folder / place).mkdir(exist_ok=True)
    for name in pending:
        (commit / name).replace(folder / name)
    for name in journal["remove"]:
        (folder / name).unlink(missing_ok=True)
    for place in (*_folders_of(journal["files"]), "."):
        _flush_folder(folder / place)
    _discard(folder, commit)


def _put_back(folder: Path) -> None:
    """Undo the renames that a failed run had made."""
    undo, kept = folder / _UNDO, folder / _UNDO / _KEPT
    journal = _read_journal(undo)
    for name in journal["new"]:
        if not (undo / name).exists():
            (folder / name).unlink(missing_ok=True)
    for old in sorted(path for path in kept.rglob("*") if not path.is_dir()):
        old.replace(folder / old.relative_to(kept))
    for place in journal["folders"]:
        with contextlib.suppress(OSError):  # somebody has put something into it
            (folder / place).rmdir()
    _discard(folder, undo)


def _folders_of(names: Iterable[str]) -> list[str]:
    """Return the folders that names with a slash begin with, each once."""
    return list(dict.fromkeys(name.split("/", 1)[0] for name in names if "/" in name))


def _discard(folder: Path, done: Path) -> None:
    """Delete a working folder; under the name of a stage first, which is rubbish however far this gets."""
    done.rename(folder / _STAGE)
    shutil.rmtree(folder / _STAGE)


def _keep(old: Path, kept: Path) -> None:
    """Give an old file a second name, so that it can be put back."""
    if not old.exists() or kept.exists():
        return
    kept.parent.mkdir(exist_ok=True)
    try:
        kept.hardlink_to(old)
    except OSError:
        shutil.copy2(old, kept)


def _read_journal(where: Path) -> dict[str, list[str]]:
    journal: dict[str, list[str]] = json.loads((where / _JOURNAL).read_bytes())
    return journal


def _outdated(folder: Path, files: Mapping[str, bytes]) -> list[str]:
    """Return Touchstone files that the last run listed and the new set does not have under that name."""
    listed = _listed(folder)
    for place in _folders_of(files):
        listed += [f"{place}/{name}" for name in _named_in_readme(folder / place)]
    return [name for name in listed if name not in files and (folder / name).is_file()]


def _listed(folder: Path) -> list[str]:
    """Return the Touchstone files that the report of the last run lists."""
    try:
        listed = [entry["path"] for entry in json.loads((folder / _LAST).read_bytes())["files"]]
    except (OSError, ValueError, KeyError, TypeError):
        return []
    return [name for name in listed if isinstance(name, str) and _NUMBERED.fullmatch(name)]


def _named_in_readme(place: Path) -> list[str]:
    """Return the Touchstone files that the README of a package names."""
    try:
        words = (place / _README).read_text("utf-8").split()
    except (OSError, ValueError):
        return []
    return sorted({word for word in words if _NUMBERED.fullmatch(word)})


def _write_flushed(folder: Path, files: Mapping[str, bytes]) -> None:
    for place in _folders_of(files):
        (folder / place).mkdir()
    for name, data in files.items():
        with (folder / name).open("wb") as stream:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
    for place in (*_folders_of(files), "."):
        _flush_folder(folder / place)


def _flush_folder(folder: Path) -> None:
    """Flush a folder's own entries, where the system knows how."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


@contextlib.contextmanager
def _uninterrupted() -> Iterator[None]:
    """Hold back interrupts while files change places, where the system can."""
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT, signal.SIGTERM, signal.SIGHUP})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _reason(error: OSError) -> str:
    return (error.strerror or str(error)).lower()


def _unwritable(folder: Path, reason: str) -> WrongInputError:
    fault = Fault(
        Location(str(folder), 0), "", f"a folder that cannot be written ({reason})", "a writable folder"
    )
    return WrongInputError([fault])
