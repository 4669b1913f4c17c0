"""The stages in order: a circuit file in, every stage's result out. Nothing is printed or written here."""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path

from layoutgen.artwork import Artwork, draw
from layoutgen.checks import check
from layoutgen.circuit import Circuit, build_circuit
from layoutgen.placement import Placement, place
from layoutgen.reading import CircuitFile, RuleFile, read_inputs
from layoutgen.response import Response, respond
from layoutgen.sizing import SizedCircuit, placed_dc, size_circuit
from layoutgen.writers import Result

__all__ = ["Result", "run", "run_inputs"]

MAX_ROUNDS = 4
"""Most drawings made to let widths and the pour's measured distances agree [-]."""
SETTLED = 1e-6
"""Widths that move by less than this [m] count as settled."""

Tell = Callable[[str], None]
Note = tuple[str, str, str]


def run(path: str | Path, tell: Tell = lambda stage: None) -> Result:
    """Return every stage's result for a circuit file and the rule file it names.

    Args:
        path: The circuit file.
        tell: Called with the name of each stage as it begins.

    Raises:
        WrongInputError: A faulty file, or a circuit outside what the formulas cover.
        InfeasibleError: No placement, or a hint that cannot be kept.
    """
    clock = _Clock(tell)
    with clock("reading"):
        inputs = read_inputs(path)
    return _run(inputs.circuit, inputs.rules, clock)


def run_inputs(file: CircuitFile, rules: RuleFile, tell: Tell = lambda stage: None) -> Result:
    """Return every stage's result for records built in code; otherwise as :func:`run`."""
    return _run(file, rules, _Clock(tell))


def _run(file: CircuitFile, rules: RuleFile, clock: _Clock) -> Result:
    with clock("circuit"):
        circuit = build_circuit(file, rules)
    artwork, notes = _settled(circuit, clock)
    with clock("checks"):
        checks = check(artwork)
    with clock("response"):
        response = _respond(artwork)
    return Result(artwork=artwork, checks=checks, response=response, seconds=clock.seconds, notes=notes)


def _settled(circuit: Circuit, clock: _Clock) -> tuple[Artwork, tuple[Note, ...]]:
    """Size, place and draw until the pour's distances as drawn leave the widths where they are."""
    with clock("sizing"):
        sized = size_circuit(circuit)
    choices = None
    for _ in range(MAX_ROUNDS):
        with clock("placement"):
            placement = with_placed_bias(place(sized, choices))
            choices = placement.choices
        with clock("artwork"):
            artwork = draw(placement)
        with clock("sizing"):
            again = size_circuit(circuit, gaps=measured_gaps(artwork))
        moved = largest_move(sized, again)
        if moved[1] < SETTLED:
            return artwork, ()
        sized = again
    text = (
        f"widths had not settled after {MAX_ROUNDS} drawings: with the pour as drawn, {moved[0]} would be "
        f"{moved[1] * 1e6:.1f} um wider or narrower"
    )
    return artwork, (("assumption.pour", moved[0], text),)


def with_placed_bias(placement: Placement) -> Placement:
    """Return the placement with the bias point that the lengths as placed give; nothing moves."""
    lengths = {name: line.centre_line * 1e-9 for name, line in placement.lines.items()}
    lengths |= {name: pair.centre_line * 1e-9 for name, pair in placement.pairs.items()}
    return replace(placement, sized=placed_dc(placement.sized, lengths))


def measured_gaps(artwork: Artwork) -> dict[str, tuple[float, float]]:
    """Return the pour's distance left and right of each line and pair as drawn [m], infinity for none."""
    return {
        name: (_metres(copper.gap_left), _metres(copper.gap_right))
        for name, copper in artwork.line_copper.items()
    }


def largest_move(old: SizedCircuit, new: SizedCircuit) -> tuple[str, float]:
    """Return which line or pair changes its width most between two sizings, and by how much [m]."""
    before, after = _widths(old), _widths(new)
    moves = {name: abs(after[name] - width) for name, width in before.items()}
    return max(moves.items(), key=lambda item: item[1], default=("", 0.0))


def _widths(sized: SizedCircuit) -> dict[str, float]:
    both: Mapping[str, float] = {
        **{name: line.width for name, line in sized.lines.items()},
        **{name: pair.width for name, pair in sized.pairs.items()},
    }
    return dict(both)


def _metres(nm: int | None) -> float:
    return math.inf if nm is None else nm * 1e-9


def _respond(artwork: Artwork) -> Response | None:
    """Return the response, None for a circuit without RF ports."""
    ports = artwork.placement.sized.circuit.file.ports.values()
    return respond(artwork) if any(port.kind == "rf" for port in ports) else None


class _Clock:
    """Names each stage as it begins, and adds up the time spent in it [s]."""

    def __init__(self, tell: Tell) -> None:
        self.tell = tell
        self.seconds: dict[str, float] = {}

    @contextmanager
    def __call__(self, stage: str) -> Iterator[None]:
        self.tell(stage)
        start = time.perf_counter()
        try:
            yield
        finally:
            spent = time.perf_counter() - start
            self.seconds[stage] = self.seconds.get(stage, 0.0) + spent
