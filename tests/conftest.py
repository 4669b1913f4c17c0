"""The shipped examples, each drawn once for all tests and all of their processes."""

from __future__ import annotations

import functools
import os
import pickle
import time
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import settings

from layoutgen import pipeline
from layoutgen.writers import Result

settings.register_profile("same every time", derandomize=True)
settings.load_profile("same every time")

EXAMPLES = Path(__file__).parents[1] / "examples"
PATIENCE = 300.0  # for another process's drawing [s]


@pytest.fixture(scope="session")
def drawn_example(tmp_path_factory: pytest.TempPathFactory) -> Callable[[str], Result]:
    """Return the function that gives every stage's result for an example's name.

    Drawings are kept in the run's temporary folder: the first process that asks for one makes it.
    """
    folder = tmp_path_factory.getbasetemp()
    if os.environ.get("PYTEST_XDIST_WORKER"):
        folder = folder.parent
    return functools.cache(lambda name: _drawn(name, folder))


def _drawn(name: str, folder: Path) -> Result:
    """Return an example's result, from the folder when another process has made it or is at it."""
    kept, claim = folder / f"{name}.drawn", folder / f"{name}.at-work"
    try:
        claim.touch(exist_ok=False)
    except FileExistsError:
        return _waited_for(kept, claim) or pipeline.run(EXAMPLES / f"{name}.toml")
    try:
        result = pipeline.run(EXAMPLES / f"{name}.toml")
        part = kept.with_suffix(".part")
        part.write_bytes(pickle.dumps(result))
        part.replace(kept)
    finally:
        if not kept.exists():
            claim.unlink()
    return result


def _waited_for(kept: Path, claim: Path) -> Result | None:
    """Return what another process has drawn; None when it failed or takes too long."""
    end = time.monotonic() + PATIENCE
    while not kept.exists():
        if not claim.exists() or time.monotonic() > end:
            return None
        time.sleep(0.05)
    found: Result = pickle.loads(kept.read_bytes())
    return found
