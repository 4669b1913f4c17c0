"""`draw --for LIST` killed at random moments: all packages are those of before, or all are the new ones."""

from __future__ import annotations

import os
import random
import signal
import time
from dataclasses import replace
from pathlib import Path

import pytest

from layoutgen.cli import status_of
from layoutgen.writers import Result
from layoutgen.writers.folder import recover

KILLS, RECEIVERS = 20, "pcb-designer,mask-house,test"


def contents(folder: Path) -> dict[str, bytes]:
    """Return all files by path, working folders left out."""
    paths = [path.relative_to(folder) for path in folder.rglob("*") if path.is_file()]
    return {p.as_posix(): (folder / p).read_bytes() for p in paths if not p.parts[0].startswith(".layoutgen")}


def revised(result: Result, revision: str) -> Result:
    """Return the result of a circuit that differs in its revision, which most files show."""
    file = result.circuit.file
    file = file.model_copy(update={"design": file.design.model_copy(update={"revision": revision})})
    sized = replace(result.sized, circuit=replace(result.circuit, file=file))
    placement = replace(result.placement, sized=sized)
    return replace(result, artwork=replace(result.artwork, placement=placement))


def draw(result: Result, folder: Path) -> int:
    """Run the command; its stages before the writers are known to be over."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("layoutgen.pipeline.run", lambda *_, **__: result)
        return status_of(
            ["draw", "board.toml", "--out", str(folder), "--repeatable", "--for", RECEIVERS, "-q"]
        )


def started(result: Result, folder: Path) -> int:
    """Run the command in a copy of this process; return its number."""
    child = os.fork()
    if child == 0:
        os._exit(draw(result, folder))
    return child


@pytest.mark.skipif(not hasattr(os, "fork"), reason="needs a process that can be copied")
def test_killed_at_twenty_random_moments_no_package_is_half(handmade: Result, tmp_path: Path) -> None:
    """Old and new packages side by side would be built from two drawings; half a file from none."""
    results = [revised(handmade, "one"), revised(handmade, "two")]
    folder = tmp_path / "0"
    assert [draw(result, tmp_path / str(number)) for number, result in enumerate(results)] == [1, 1]
    sets = [contents(tmp_path / "0"), contents(tmp_path / "1")]
    assert sets[0].keys() == sets[1].keys()
    assert sum(sets[0][name] != sets[1][name] for name in sets[0]) > 5
    start = time.perf_counter()
    os.waitpid(started(results[0], folder), 0)
    seconds = time.perf_counter() - start
    rng = random.Random(7)
    for kill in range(KILLS):
        child = started(results[1 - kill % 2], folder)
        time.sleep(rng.uniform(0.1, 1.4) * seconds)
        os.kill(child, signal.SIGKILL)
        os.waitpid(child, 0)
        if (folder / ".layoutgen-commit").exists():  # killed in the few milliseconds of the renames
            recover(folder)
        assert contents(folder) in sets, f"kill {kill}"
    for result, files in zip(results, sets, strict=True):
        assert draw(result, folder) == 1
        assert contents(folder) == files
    assert [path.name for path in folder.iterdir() if path.name.startswith(".layoutgen")] == []
