"""A corporate feed from 8 to 256 ways: seconds per stage, peak memory, and how both grow.

Run: python benchmarks/bench_corporate.py [MOST_WAYS]

Every size runs in a process of its own: placed, poured, fenced, checked and written, without its response.
The exponent is that of the whole time from the smallest to the largest feed.
"""

from __future__ import annotations

import json
import math
import resource
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

ROOT = Path(__file__).parents[1]
LEAST_WAYS = 8
MOST_EXPONENT = 1.3
MOST_MEGABYTES = 2048.0
_NO_TIMES = ("errors", "megabytes", "lines")


def measured(ways: int) -> dict[str, float]:
    """Return the seconds of each stage for one feed, and the peak memory [MB]; run in its own process."""
    sys.path.insert(0, str(ROOT / "examples"))
    import corporate

    import layoutgen

    seconds: dict[str, float] = {}
    with timed(seconds, "reading"):
        inputs = layoutgen.inputs_from_data(corporate.feed(ways))
    with timed(seconds, "sizing"):
        sized = layoutgen.size_circuit(layoutgen.build_circuit(inputs.circuit, inputs.rules))
    with timed(seconds, "placement"):
        placement = layoutgen.place(sized)
    with timed(seconds, "artwork"):
        artwork = layoutgen.draw(placement)
    with timed(seconds, "checks"):
        checks = layoutgen.check(artwork)
    with timed(seconds, "writing"), tempfile.TemporaryDirectory() as folder:
        result = layoutgen.Result(artwork=artwork, checks=checks, response=None, seconds=seconds)
        layoutgen.write(result, folder, layoutgen.Job(stem=f"corporate_{ways}"))
    errors = sum(finding.severity == "error" for finding in checks.findings)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
    return {**seconds, "errors": errors, "megabytes": peak, "lines": len(placement.lines)}


@contextmanager
def timed(seconds: dict[str, float], stage: str) -> Iterator[None]:
    """Note the seconds of a stage."""
    start = time.perf_counter()
    yield
    seconds[stage] = time.perf_counter() - start


def in_own_process(ways: int) -> dict[str, float]:
    """Return what :func:`measured` finds in a fresh process."""
    code = f"import json, bench_corporate as b; print(json.dumps(b.measured({ways})))"
    command = [sys.executable, "-c", code]
    done = subprocess.run(command, capture_output=True, text=True, check=True, cwd=Path(__file__).parent)
    found: dict[str, float] = json.loads(done.stdout.splitlines()[-1])
    return found


def _power(stage: str, first: dict[str, float], last: dict[str, float], ways: int) -> float:
    """Return the exponent with which a stage grows from the least ways to these."""
    if ways == LEAST_WAYS or first[stage] <= 0.0:
        return 0.0
    return math.log(last[stage] / first[stage]) / math.log(ways / LEAST_WAYS)


def main() -> int:
    """Print a row for each size, then the exponents; the exit status says whether the limits are kept."""
    most = int(sys.argv[1]) if len(sys.argv) > 1 else 256
    rows: dict[int, dict[str, float]] = {}
    ways = LEAST_WAYS
    while ways <= most:
        row = rows[ways] = in_own_process(ways)
        spent = {k: v for k, v in row.items() if k not in _NO_TIMES}
        row["all"] = sum(spent.values())
        text = ", ".join(f"{stage} {value:.2f}" for stage, value in spent.items())
        print(
            f"{ways:4d} ways, {row['lines']:.0f} lines, {row['errors']:.0f} errors: {row['all']:.1f} s",
            end="",
        )
        print(f" ({text}), {row['megabytes']:.0f} MB", flush=True)
        ways *= 2
    first, last = rows[LEAST_WAYS], rows[max(rows)]
    powers = {stage: _power(stage, first, last, max(rows)) for stage in last if stage not in _NO_TIMES}
    for stage, power in powers.items():
        print(f"  {stage:<12} grows with the ways to the power {power:.2f}")
    kept = powers["all"] <= MOST_EXPONENT and last["megabytes"] <= MOST_MEGABYTES and not last["errors"]
    print(f"exponent {powers['all']:.2f} of at most {MOST_EXPONENT}: {'kept' if kept else 'MISSED'}")
    return 0 if kept else 1


if __name__ == "__main__":
    sys.exit(main())
