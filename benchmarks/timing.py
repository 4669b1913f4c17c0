"""Wall time and peak memory of commands, taken in turns so that a busy machine slows all of them alike."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Sequence
from typing import NamedTuple


class Spent(NamedTuple):
    """Best wall time [s] and largest resident memory [MiB] of a command."""

    seconds: float
    mebibytes: float


def python(code: str, *arguments: str) -> list[str]:
    """Return the command that runs a piece of Python with this interpreter."""
    return [sys.executable, "-c", code, *arguments]


def best(commands: Sequence[list[str]], rounds: int) -> list[Spent]:
    """Run each command once for the caches, then all in turns; return the best of each."""
    for command in commands:
        _run(command)
    runs = [[_run(command) for command in commands] for _ in range(rounds)]
    return [
        Spent(min(run.seconds for run in column), max(run.mebibytes for run in column))
        for column in zip(*runs, strict=True)
    ]


def show(name: str, spent: Spent, bare: Spent | None = None, limit: float = 0.0) -> bool:
    """Print one line; beside a bare import also the ratio, and whether it is within the limit."""
    line = f"{name:<24} {spent.seconds:7.3f} s  {spent.mebibytes:6.0f} MiB"
    if bare is None:
        print(line)
        return True
    ratio = spent.seconds / bare.seconds
    kept = ratio <= limit
    print(f"{line}  {ratio:5.2f} times the bare import, limit {limit:.1f}: {'kept' if kept else 'MISSED'}")
    return kept


def _run(command: list[str]) -> Spent:
    """Run a command that must not fail."""
    start = time.perf_counter()
    process = subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    _, status, usage = os.wait4(process.pid, 0)
    seconds = time.perf_counter() - start
    process.returncode = os.waitstatus_to_exitcode(status)
    if process.returncode not in (0, 1):
        raise SystemExit(f"{' '.join(command)} ended with status {process.returncode}")
    return Spent(seconds, usage.ru_maxrss / 1024)
