"""All files of a run, or none: killed, failing and repeated writes."""

from __future__ import annotations

import os
import random
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest

import layoutgen.writers.folder as folder_module
from layoutgen.errors import WrongInputError
from layoutgen.writers.folder import prepare_folder, recover, write_files

OLD = {"board.gds": b"old gds", "board.svg": b"old svg", "wanted.s4p": b"old", "report.json": b""}
OLD["report.json"] = b'{"files": [{"path": "board.gds"}, {"path": "board.svg"}, {"path": "wanted.s4p"}]}'
NEW = {"board.gds": b"new gds", "board.png": b"new png", "board.svg": b"new svg", "wanted.s2p": b"new"}
NEW["report.json"] = b'{"files": [{"path": "board.gds"}]}'
OLD |= {"test/README.txt": b"wanted.s4p  90  response", "test/wanted.s4p": b"old", "test/ports.csv": b"old"}
NEW |= {"test/README.txt": b"wanted.s2p  90  response", "test/wanted.s2p": b"new", "test/ports.csv": b"new"}
NEW |= {"assembly/README.txt": b"new"}
FOREIGN = {"notes.txt": b"mine", "board.toml": b"mine", "as_drawn.s9p": b"mine", "test/as_drawn.s4p": b"mine"}
FOREIGN |= {"photos/one.jpg": b"mine"}

LOADS = f"""
import importlib.util, os, sys
from pathlib import Path
spec = importlib.util.spec_from_file_location("folder", {folder_module.__file__!r})
module = importlib.util.module_from_spec(spec)
spec.loader.exec_module(module)
write_files = module.write_files
"""
"""Loads the module without the package around it, which would take longest of all to import."""

STEPS = ("rename", "replace", "unlink", "rmdir", "mkdir", "link")


def status_of_dying(folder: Path, limit: int) -> int:
    """Write the new set in a process that dies before one of its steps; 0 when it has got through."""
    child = os.fork()
    if child:
        return os.waitstatus_to_exitcode(os.waitpid(child, 0)[1])
    count = 0

    def dying(real: Callable[..., object]) -> Callable[..., object]:
        def call(*args: object, **kwargs: object) -> object:
            nonlocal count
            if count == limit:
                os._exit(9)
            count += 1
            return real(*args, **kwargs)

        return call

    for name in STEPS:
        setattr(os, name, dying(getattr(os, name)))
    try:
        write_files(folder, NEW)
    except BaseException:
        os._exit(1)
    os._exit(0)


def contents(folder: Path) -> dict[str, bytes]:
    """Return the files by path; working folders are not looked into."""
    paths = [path.relative_to(folder) for path in folder.rglob("*") if path.is_file()]
    return {p.as_posix(): (folder / p).read_bytes() for p in paths if not p.parts[0].startswith(".layoutgen")}


def leftovers(folder: Path) -> list[str]:
    """Return the folders that no set and nobody else has made."""
    own = {name.split("/")[0] for name in OLD | NEW | FOREIGN if "/" in name}
    return sorted(path.name for path in folder.iterdir() if path.is_dir() and path.name not in own)


def fill(folder: Path, files: dict[str, bytes]) -> None:
    for name, data in files.items():
        (folder / name).parent.mkdir(exist_ok=True)
        (folder / name).write_bytes(data)


@pytest.fixture
def filled(tmp_path: Path) -> Path:
    """A folder with the old set and files of other people."""
    folder = tmp_path / "out"
    folder.mkdir()
    fill(folder, OLD | FOREIGN)
    return folder


def test_a_new_folder_appears_with_all_files(tmp_path: Path) -> None:
    """Missing parents are made; nothing but the files is left."""
    folder = tmp_path / "a" / "b" / "out"
    write_files(folder, NEW)
    assert contents(folder) == NEW
    assert leftovers(folder) == []
    assert [path.name for path in folder.parent.iterdir()] == ["out"]


def test_a_new_folder_can_be_read_by_others(tmp_path: Path) -> None:
    """A private temporary folder renamed would stay private."""
    write_files(tmp_path / "out", NEW)
    (tmp_path / "plain").mkdir()
    assert (tmp_path / "out").stat().st_mode == (tmp_path / "plain").stat().st_mode


def test_files_of_others_stay(filled: Path) -> None:
    """Touchstone files of the last run with another number of ports go; what it did not list stays."""
    write_files(filled, NEW)
    assert contents(filled) == NEW | FOREIGN
    assert leftovers(filled) == []


def test_the_report_comes_last(filled: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Its hashes tell a mixed set from a whole one only if it is the last to change."""
    moved: list[str] = []
    real = os.replace

    def recording(source: str, target: str) -> None:
        moved.append(Path(target).name)
        real(source, target)

    monkeypatch.setattr(os, "replace", recording)
    write_files(filled, dict(sorted(NEW.items(), reverse=True)))
    assert sorted(moved) == sorted(Path(name).name for name in NEW)
    assert moved[-1] == "report.json"


def test_a_set_without_a_response_removes_the_old_one(filled: Path) -> None:
    """Left behind, it would be taken for the response of the board beside it."""
    silent = {name: data for name, data in NEW.items() if not name.startswith("wanted")}
    write_files(filled, silent)
    assert contents(filled) == silent | FOREIGN


@pytest.mark.parametrize(
    "report", [b"not json", b"[]", b'{"files": 3}', b'{"files": [{"path": "../x.s4p"}, 7]}']
)
def test_a_strange_report_of_before_harms_nothing(filled: Path, report: bytes) -> None:
    """Somebody else's report.json must not stop the run, nor make it delete anything."""
    (filled / "report.json").write_bytes(report)
    write_files(filled, NEW)
    assert contents(filled) == NEW | FOREIGN | {"wanted.s4p": b"old"}


def test_every_place_of_death_leaves_the_old_or_the_new_set(filled: Path) -> None:
    """Killed before each single step in turn; the next run finds one whole set, others' files untouched."""
    seen = set()
    for limit in range(100):
        for name in NEW:
            (filled / name).unlink(missing_ok=True)
        fill(filled, OLD)
        status = status_of_dying(filled, limit)
        recover(filled)
        found = contents(filled)
        assert found in (OLD | FOREIGN, NEW | FOREIGN), f"died before step {limit}"
        assert leftovers(filled) == []
        seen.add(found["board.gds"])
        if status == 0:
            break
    assert status == 0
    assert limit > 10
    assert seen == {b"old gds", b"new gds"}


def test_death_in_a_new_folder_leaves_none(tmp_path: Path) -> None:
    """The folder appears by one rename: either it is not there or it is whole."""
    for limit in range(20):
        folder = tmp_path / str(limit) / "out"
        folder.parent.mkdir()
        status = status_of_dying(folder, limit)
        assert not folder.exists() or contents(folder) == NEW
        write_files(folder, NEW)
        assert contents(folder) == NEW
        assert [path.name for path in folder.parent.iterdir()] == ["out"]
        if status == 0:
            break
    assert status == 0


WRITES = """
folder = Path(sys.argv[1])
print("ready", flush=True)
k = 0
while True:
    k += 1
    names = [f"{place}file{n}" for place in ("", "test/", "assembly/") for n in range(5)]
    files = {name: str(k).encode() * 2000 for name in names}
    write_files(folder, files | {"report.json": str(k).encode()})
"""


def test_killed_at_random_moments_the_set_is_whole(filled: Path) -> None:
    """Twenty kills of a process that does nothing but replace the set."""
    rng = random.Random(5)
    for _ in range(20):
        process = subprocess.Popen(
            [sys.executable, "-c", LOADS + WRITES, str(filled)], stdout=subprocess.PIPE
        )
        assert process.stdout is not None
        process.stdout.readline()
        time.sleep(rng.uniform(0.0, 0.05))
        process.send_signal(signal.SIGKILL)
        process.wait()
        process.stdout.close()
        recover(filled)
        versions = {name: data for name, data in contents(filled).items() if "file" in name}
        assert len(set(versions.values())) <= 1
        assert len(versions) in (0, 15)
        assert contents(filled).items() >= FOREIGN.items()


def test_a_failing_rename_is_undone(filled: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A file held open elsewhere, at any of the renames: the old set is back, and the message says why."""
    real, failures = os.replace, 0
    for limit in range(20):
        calls = 0

        def failing(source: str, target: str, limit: int = limit) -> None:
            nonlocal calls
            calls += 1
            if calls == limit + 1:
                raise PermissionError(13, "Permission denied", str(target))
            real(source, target)

        monkeypatch.setattr(os, "replace", failing)
        try:
            write_files(filled, NEW)
        except WrongInputError as error:
            failures += 1
            assert "permission denied" in str(error)
            assert contents(filled) == OLD | FOREIGN
            assert leftovers(filled) == []
            assert not (filled / "assembly").exists()
        else:
            break
    assert failures == len(NEW)
    assert not (filled / "test" / "wanted.s4p").exists()
    assert contents(filled) == NEW | FOREIGN


def test_a_full_disk_leaves_the_old_set(filled: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Written in place, a full disk would leave half a file."""

    def full(handle: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(WrongInputError, match="no space left"):
        write_files(filled, NEW)
    assert contents(filled) == OLD | FOREIGN
    assert leftovers(filled) == []


def test_preparing_leaves_no_trace(tmp_path: Path) -> None:
    """A probe file, or the folder itself, would be left behind by a run that then fails."""
    prepare_folder(tmp_path / "a" / "out", ["x.gds"])
    assert list(tmp_path.iterdir()) == []


def test_a_file_in_the_way_is_refused_before_any_work(tmp_path: Path) -> None:
    """Found out only when writing, minutes of work would be lost."""
    (tmp_path / "out").write_bytes(b"a file")
    for folder in (tmp_path / "out", tmp_path / "out" / "deeper"):
        with pytest.raises(WrongInputError, match="cannot be written"):
            prepare_folder(folder)
    assert (tmp_path / "out").read_bytes() == b"a file"


def test_a_file_where_a_package_must_go_is_refused(tmp_path: Path) -> None:
    """Found half way, the files above it would have been replaced already."""
    (tmp_path / "assembly").write_bytes(b"a file")
    with pytest.raises(WrongInputError, match="cannot be written"):
        prepare_folder(tmp_path, ["x.svg", "assembly/README.txt"])


def test_a_folder_where_a_file_must_go_is_refused(tmp_path: Path) -> None:
    """A file cannot replace a folder; found half way, others would have been replaced."""
    (tmp_path / "x.gds").mkdir()
    with pytest.raises(WrongInputError, match=r"x\.gds"):
        prepare_folder(tmp_path, ["x.svg", "x.gds"])


@pytest.mark.skipif(not Path("/proc/self").is_dir(), reason="needs a folder that nobody can write to")
def test_a_folder_that_nobody_can_write_to_is_refused() -> None:
    """Also for a user who may do everything else."""
    with pytest.raises(WrongInputError, match="cannot be written"):
        prepare_folder(Path("/proc/self/out"))


def test_preparing_mends_what_a_killed_run_left(filled: Path) -> None:
    """A stage that was never committed is rubbish; the next run must not trip over it."""
    (filled / ".layoutgen-stage").mkdir()
    (filled / ".layoutgen-stage" / "board.gds").write_bytes(b"half")
    prepare_folder(filled)
    assert leftovers(filled) == []
    assert contents(filled) == OLD | FOREIGN


def test_a_relative_folder_and_the_current_one_work(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """--out . is common."""
    monkeypatch.chdir(tmp_path)
    for folder in (Path(), Path("deep/er")):
        prepare_folder(folder)
        write_files(folder, NEW)
        assert contents(folder) == NEW
