"""Puts seeded faults into the examples and looks whether the right rule finds them at the right place.

``python -m tests.seeded_faults.harness 2000`` runs that many seeds and prints what was missed.
"""

from __future__ import annotations

import functools
import math
import random
import sys
import time
from collections.abc import Sequence
from pathlib import Path

from layoutgen.artwork import Artwork, draw
from layoutgen.checks import check
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import read_inputs
from layoutgen.sizing import size_circuit
from tests.seeded_faults.faults import ANYWHERE, WITH_BANKS, Fault, Seeded
from tests.seeded_faults.more_faults import MORE_ANYWHERE, MORE_WITH_PARTS

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
AMPLIFIER = "telemetry_driver"
QUICK = ("quarter_wave_transformer", "shorted_stub_tee", "stub_notch", AMPLIFIER)
"""Examples that are placed in a second or two: those that tests use; the command below uses all."""
EVERYWHERE: tuple[Fault, ...] = (*ANYWHERE, *MORE_ANYWHERE)
WITH_PARTS: tuple[Fault, ...] = (*WITH_BANKS, *MORE_WITH_PARTS)
KINDS = (*EVERYWHERE, *WITH_PARTS)
_SHARE_OF_AMPLIFIER = 0.12


@functools.cache
def drawn(stem: str) -> Artwork:
    """Return an example's artwork."""
    path = next(path for path in EXAMPLES if path.stem == stem)
    inputs = read_inputs(path)
    return draw(place(size_circuit(build_circuit(inputs.circuit, inputs.rules))))


def kind_of(seed: int) -> Fault:
    """Return the kind of fault of a seed; kinds come in turns, so that all of them come."""
    return KINDS[seed % len(KINDS)]


def seeded(seed: int, stems: Sequence[str] = QUICK) -> tuple[str, Seeded]:
    """Return a seed's example and its drawing with the fault.

    Where a board has no place for the fault the next one is taken.

    Raises:
        LookupError: no board has one.
    """
    rng = random.Random(seed)
    fault = kind_of(seed)
    small = [stem for stem in stems if stem != AMPLIFIER]
    rng.shuffle(small)
    first = fault in WITH_PARTS or rng.random() < _SHARE_OF_AMPLIFIER
    for stem in (AMPLIFIER, *small) if first else (*small, AMPLIFIER):
        try:
            return stem, fault(drawn(stem), random.Random(f"{stem} {fault.__name__} {seed}"))
        except LookupError:
            continue
    raise LookupError(f"no board has a place for {fault.__name__}")


def missed(seed: int, stems: Sequence[str] = QUICK) -> str:
    """Return what went wrong with a seed, empty when the right rule found its fault at the right place."""
    stem, case = seeded(seed, stems)
    places = [
        math.dist(f.at, case.at)
        for f in check(case.artwork).findings
        if f.rule in case.rules and f.severity != "note" and f.at is not None
    ]
    nearest = min(places, default=math.inf)
    if nearest <= case.within:
        return ""
    return (
        f"seed {seed}: {kind_of(seed).__name__} in {stem} at {case.at}: nearest finding {nearest:.0f} nm away"
    )


def main() -> int:
    """Run so many seeds on all examples, and look that the unharmed ones have no error."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 300
    start = time.perf_counter()
    stems = [path.stem for path in EXAMPLES]
    faults = [
        f"{stem}: {finding.text}"
        for stem in stems
        for finding in check(drawn(stem)).findings
        if finding.severity == "error"
    ]
    faults += [text for seed in range(count) if (text := missed(seed, stems))]
    for text in faults:
        print(text)  # noqa: T201
    seconds = time.perf_counter() - start
    print(f"{count} seeds, {len(KINDS)} kinds, {len(faults)} missed, {seconds:.1f} s")  # noqa: T201
    return 1 if faults else 0


if __name__ == "__main__":
    sys.exit(main())
