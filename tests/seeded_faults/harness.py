"""Puts seeded faults into the examples and looks whether the right rule finds them at the right place.

``python -m tests.seeded_faults.harness 2000 --processes 2 --out RESULT.json`` runs that many seeds over all
examples, prints what was missed and writes how often each kind of fault was put into each board.
"""

from __future__ import annotations

import argparse
import functools
import json
import math
import multiprocessing
import os
import random
import sys
import time
from collections import Counter
from collections.abc import Iterable, Sequence
from pathlib import Path

from layoutgen.artwork import Artwork
from layoutgen.checks import check
from layoutgen.pipeline import run
from tests.seeded_faults.faults import ANYWHERE, WITH_BANKS, Fault, Seeded
from tests.seeded_faults.more_faults import MORE_ANYWHERE, MORE_WITH_PARTS

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
STEMS = tuple(path.stem for path in EXAMPLES)
AMPLIFIER = "telemetry_driver"
QUICK = ("quarter_wave_transformer", "shorted_stub_tee", "stub_notch", AMPLIFIER)
"""Examples that are placed in a second or two: those that tests use; the command above uses all."""
TESTED = STEMS if os.environ.get("ALL_EXAMPLES") else QUICK
"""The examples that tests judge whole: the quick ones, or all with ``ALL_EXAMPLES=1`` in the environment."""
EVERYWHERE: tuple[Fault, ...] = (*ANYWHERE, *MORE_ANYWHERE)
WITH_PARTS: tuple[Fault, ...] = (*WITH_BANKS, *MORE_WITH_PARTS)
KINDS = (*EVERYWHERE, *WITH_PARTS)
_SHARE_OF_AMPLIFIER = 0.12


@functools.cache
def drawn(stem: str) -> Artwork:
    """Return an example's artwork, as ``layoutgen draw`` leaves it."""
    return run(next(path for path in EXAMPLES if path.stem == stem)).artwork


def kind_of(seed: int) -> Fault:
    """Return the kind of fault of a seed; kinds come in turns, so that all of them come."""
    return KINDS[seed % len(KINDS)]


def seeded(seed: int, stems: Sequence[str] = QUICK) -> tuple[str, Seeded]:
    """Return a seed's example and its drawing with the fault.

    Boards come in an order of the seed; where one has no place for the fault the next one is taken.

    Raises:
        LookupError: no board has one.
    """
    for stem in _order(seed, stems):
        try:
            return stem, kind_of(seed)(drawn(stem), random.Random(f"{stem} {kind_of(seed).__name__} {seed}"))
        except LookupError:
            continue
    raise LookupError(f"no board has a place for {kind_of(seed).__name__}")


def _order(seed: int, stems: Sequence[str]) -> list[str]:
    """Return the boards in the order in which a seed tries them.

    Among the quick ones the amplifier, the slowest, mostly comes last: a test has to be done in a minute.
    """
    rng = random.Random(seed)
    order = list(stems)
    rng.shuffle(order)
    if tuple(stems) == QUICK and kind_of(seed) not in WITH_PARTS and rng.random() > _SHARE_OF_AMPLIFIER:
        order.sort(key=lambda stem: stem == AMPLIFIER)
    return order


def missed(seed: int, stems: Sequence[str] = QUICK) -> str:
    """Return what went wrong with a seed, empty when the right rule found its fault at the right place."""
    return _outcome(seed, stems)[1]


def _outcome(seed: int, stems: Sequence[str]) -> tuple[str, str]:
    """Return a seed's example, and what went wrong or nothing."""
    stem, case = seeded(seed, stems)
    places = [
        math.dist(f.at, case.at)
        for f in check(case.artwork).findings
        if f.rule in case.rules and f.severity != "note" and f.at is not None
    ]
    nearest = min(places, default=math.inf)
    if nearest <= case.within:
        return stem, ""
    name = kind_of(seed).__name__
    return stem, f"seed {seed}: {name} in {stem} at {case.at}: nearest finding {nearest:.0f} nm away"


def false_alarms(stem: str) -> list[str]:
    """Return the errors and warnings on an example that nobody has harmed."""
    found = check(drawn(stem)).findings
    return [f"{stem}: {f.severity} {f.rule}: {f.text}" for f in found if f.severity != "note"]


def outcomes(count: int, processes: int) -> list[tuple[str, str]]:
    """Return each seed's example and what went wrong; the drawings are made once, then shared by a fork."""
    judge = functools.partial(_outcome, stems=STEMS)
    for stem in STEMS:
        drawn(stem)
    if processes < 2:
        return [judge(seed) for seed in range(count)]
    with multiprocessing.get_context("fork").Pool(processes) as pool:
        return list(pool.imap(judge, range(count), chunksize=8))


def report(found: Sequence[tuple[str, str]], alarms: Sequence[str], seconds: float) -> dict[str, object]:
    """Return the result as it is written: figures, what was missed, seeds by kind and board."""
    boards: dict[str, Counter[str]] = {kind.__name__: Counter() for kind in KINDS}
    for seed, (stem, _) in enumerate(found):
        boards[kind_of(seed).__name__][stem] += 1
    return {
        "seeds": len(found),
        "kinds": len(KINDS),
        "missed": [text for _, text in found if text],
        "findings_on_unharmed_boards": list(alarms),
        "seeds_by_kind_and_board": {kind: dict(sorted(held.items())) for kind, held in boards.items()},
        "seconds": round(seconds, 1),
    }


def main(arguments: Iterable[str]) -> int:
    """Run so many seeds on all examples, and look that the unharmed ones have no finding."""
    parser = argparse.ArgumentParser(description="seeded faults on all examples")
    parser.add_argument("seeds", type=int, nargs="?", default=2000)
    parser.add_argument("--processes", type=int, default=1)
    parser.add_argument("--out", type=Path, help="file for the result, JSON")
    options = parser.parse_args(list(arguments))
    start = time.perf_counter()
    found = outcomes(options.seeds, options.processes)
    alarms = [text for stem in STEMS for text in false_alarms(stem)]
    result = report(found, alarms, time.perf_counter() - start)
    misses = [text for _, text in found if text]
    for text in (*misses, *alarms):
        print(text)  # noqa: T201
    figures = f"{len(misses)} missed, {len(alarms)} findings on unharmed boards"
    print(f"{len(found)} seeds, {len(KINDS)} kinds, {len(STEMS)} boards: {figures}, {result['seconds']} s")  # noqa: T201
    if options.out is not None:
        options.out.write_text(json.dumps(result, indent=1) + "\n")
    return 1 if misses or alarms else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
