"""Puts seeded faults into the examples and looks whether the right rule finds them at the right place.

``python -m tests.seeded_faults.harness 2000 --processes 2 --out RESULT.json`` runs that many seeds over all
examples, prints what was missed and how often each kind of fault was put into how many boards, and writes it
board by board; boards that have no place for a kind are passed over and counted.
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
from collections.abc import Callable, Iterable, Iterator, Sequence
from pathlib import Path
from typing import NamedTuple

from layoutgen.artwork import Artwork
from layoutgen.checks import check
from layoutgen.pipeline import run
from tests.seeded_faults.copper_faults import CHARGED, COPPER
from tests.seeded_faults.hole_faults import HOLES
from tests.seeded_faults.part_faults import PARTS
from tests.seeded_faults.tools import Fault, Seeded

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
STEMS = tuple(path.stem for path in EXAMPLES)
AMPLIFIER = "telemetry_driver"
THIN_FILM = "alumina_filter"
QUICK = ("quarter_wave_transformer", "shorted_stub_tee", "stub_notch", THIN_FILM, AMPLIFIER)
"""Examples that are placed in a second or two: those that tests use; the command above uses all."""
TESTED = STEMS if os.environ.get("ALL_EXAMPLES") else QUICK
"""The examples that tests judge whole: the quick ones, or all with ``ALL_EXAMPLES=1`` in the environment."""
EVERYWHERE: tuple[Fault, ...] = (*COPPER, *HOLES)
WITH_PARTS: tuple[Fault, ...] = (*CHARGED, *PARTS)
KINDS = (*EVERYWHERE, *WITH_PARTS)
LEAST_BOARDS = 2
"""On how many boards each kind of fault has to have a place, at least."""
_SHARE_OF_AMPLIFIER = 0.12


@functools.cache
def drawn(stem: str) -> Artwork:
    """Return an example's artwork, as ``layoutgen draw`` leaves it."""
    return run(next(path for path in EXAMPLES if path.stem == stem)).artwork


def kind_of(seed: int) -> Fault:
    """Return the kind of fault of a seed; kinds come in turns, so that all of them come."""
    return KINDS[seed % len(KINDS)]


class Case(NamedTuple):
    """A seed's example, its drawing with the fault, and the examples that had no place for it."""

    stem: str
    fault: Seeded
    passed_over: tuple[str, ...]


class Outcome(NamedTuple):
    """Where a seed's fault was put, what went wrong or nothing, and the examples that had no place for it."""

    stem: str
    wrong: str
    passed_over: tuple[str, ...]


def seeded(seed: int, stems: Sequence[str] = QUICK) -> Case:
    """Return a seed's example and its drawing with the fault.

    Boards come in an order of the seed; where one has no place for the fault the next one is taken.

    Raises:
        LookupError: no board has one.
    """
    kind, order = kind_of(seed), _order(seed, stems)
    for n, stem in enumerate(order):
        try:
            fault = kind(drawn(stem), random.Random(f"{stem} {kind.__name__} {seed}"))
        except LookupError:
            continue
        return Case(stem, fault, tuple(order[:n]))
    raise LookupError(f"no board has a place for {kind.__name__}")


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
    return _outcome(seed, stems).wrong


def _outcome(seed: int, stems: Sequence[str]) -> Outcome:
    """Return where a seed's fault was put, and what went wrong or nothing."""
    case = seeded(seed, stems)
    places = [
        math.dist(f.at, case.fault.at)
        for f in check(case.fault.artwork).findings
        if f.rule in case.fault.rules and f.severity != "note" and f.at is not None
    ]
    nearest = min(places, default=math.inf)
    wrong = ""
    if nearest > case.fault.within:
        what = f"seed {seed}: {kind_of(seed).__name__} in {case.stem} at {case.fault.at}"
        wrong = f"{what}: nearest finding {nearest:.0f} nm away"
    return Outcome(case.stem, wrong, case.passed_over)


def false_alarms(stem: str) -> list[str]:
    """Return the errors and warnings on an example that nobody has harmed."""
    found = check(drawn(stem)).findings
    return [f"{stem}: {f.severity} {f.rule}: {f.text}" for f in found if f.severity != "note"]


def outcomes(count: int, processes: int) -> list[Outcome]:
    """Return each seed's outcome; the drawings are made once, then shared by a fork."""
    judge = functools.partial(_outcome, stems=STEMS)
    for stem in STEMS:
        drawn(stem)
    if processes < 2:
        return [judge(seed) for seed in range(count)]
    with multiprocessing.get_context("fork").Pool(processes) as pool:
        return list(pool.imap(judge, range(count), chunksize=8))


def report(found: Sequence[Outcome], alarms: Sequence[str], seconds: float) -> dict[str, object]:
    """Return the result as it is written: figures, what was missed, seeds by kind and board."""
    held, passed = by_kind(found), _by_kind_and_board(found, lambda outcome: outcome.passed_over)
    return {
        "seeds": len(found),
        "kinds": len(KINDS),
        "missed": [outcome.wrong for outcome in found if outcome.wrong],
        "findings_on_unharmed_boards": list(alarms),
        "seeds_by_kind_and_board": {kind: dict(sorted(boards.items())) for kind, boards in held.items()},
        "no_place_by_kind_and_board": {kind: dict(sorted(boards.items())) for kind, boards in passed.items()},
        "seconds": round(seconds, 1),
    }


def by_kind(found: Sequence[Outcome]) -> dict[str, Counter[str]]:
    """Return for each kind how often it was put into each board."""
    return _by_kind_and_board(found, lambda outcome: (outcome.stem,))


def _by_kind_and_board(
    found: Sequence[Outcome], boards_of: Callable[[Outcome], Iterable[str]]
) -> dict[str, Counter[str]]:
    """Return for each kind how often each board comes in the outcomes of its seeds."""
    boards: dict[str, Counter[str]] = {kind.__name__: Counter() for kind in KINDS}
    for seed, outcome in enumerate(found):
        boards[kind_of(seed).__name__].update(boards_of(outcome))
    return boards


def by_kind_text(found: Sequence[Outcome]) -> Iterator[str]:
    """Yield a line for each kind: seeds, missed ones, boards it was put into, times a board had no place."""
    missed_of = Counter(kind_of(seed).__name__ for seed, outcome in enumerate(found) if outcome.wrong)
    passed = _by_kind_and_board(found, lambda outcome: outcome.passed_over)
    for kind, boards in by_kind(found).items():
        figures = f"{boards.total():5d} seeds, {missed_of[kind]} missed, on {len(boards):2d} boards"
        yield f"{kind:<20} {figures}, {passed[kind].total()} times no place"


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
    misses = [outcome.wrong for outcome in found if outcome.wrong]
    few = [kind for kind, boards in by_kind(found).items() if len(boards) < LEAST_BOARDS]
    for text in (*by_kind_text(found), *misses, *alarms, *(f"{kind}: on too few boards" for kind in few)):
        print(text)  # noqa: T201
    figures = f"{len(misses)} missed, {len(alarms)} findings on unharmed boards"
    print(f"{len(found)} seeds, {len(KINDS)} kinds, {len(STEMS)} boards: {figures}, {result['seconds']} s")  # noqa: T201
    if options.out is not None:
        options.out.write_text(json.dumps(result, indent=1) + "\n")
    return 1 if misses or alarms or few else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
