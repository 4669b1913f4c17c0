"""The stages in order: a circuit file in, every stage's result out. Nothing is printed or written here.

A few drawings are made: the pour as drawn moves the widths a little, and the response as drawn the lengths.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager, suppress
from dataclasses import dataclass, replace
from datetime import date
from functools import partial
from pathlib import Path

from layoutgen.artwork import Artwork, Sketch, complete, sketch
from layoutgen.aside import aside
from layoutgen.checks import check
from layoutgen.circuit import Circuit, build_circuit
from layoutgen.errors import InfeasibleError, LayoutgenError
from layoutgen.pins import loosened
from layoutgen.placement import Choices, PlacedLine, Placement, fits, place
from layoutgen.placement.likes import with_like_lines
from layoutgen.reading import CircuitFile, RuleFile, read_inputs
from layoutgen.response import NOTE_RULE, LengthFit, correct_lengths, respond
from layoutgen.sizing import SizedCircuit, placed_dc, size_circuit, sized_beside
from layoutgen.writers import Result

__all__ = ["Result", "run", "run_inputs"]

MAX_ROUNDS = 4
"""Most drawings made to let widths, corrected lengths and the pour's measured distances agree [-]."""
SETTLED = 1e-6
"""Widths that move by less than this [m] count as settled."""
WORTH_A_NOTE = 0.002
"""Share of its width [-] by which a line may miss what its pour asks for without a note: 0.1 % of impedance.

A pour that drops or gains a piece as the board grows by a step can keep a wide line from settling for good.
"""

WORSE_FIT = 0.002
"""By how much a drawing with widths at rest may miss the schematic more than one without [-]."""

Fit = Callable[..., LengthFit]
Tell = Callable[[str], None]
Note = tuple[str, str, str]


def run(
    path: str | Path,
    tell: Tell = lambda stage: None,
    *,
    correction: bool = True,
    today: date | None = None,
    meanwhile: Callable[[], None] = lambda: None,
) -> Result:
    """Return every stage's result for a circuit file and the rule file it names.

    Args:
        path: The circuit file.
        tell: Called with the name of each stage as it begins.
        correction: False leaves the lengths as their budgets alone give them, whatever the response.
        today: The day on which waivers are judged; None takes none as expired.
        meanwhile: Called while a copy of the process may still be at the checks: for what the results need.

    Raises:
        WrongInputError: A faulty file, or a circuit outside what the formulas cover.
        InfeasibleError: No placement, or a hint that cannot be kept.
    """
    clock = _Clock(tell)
    with clock("reading"):
        inputs = read_inputs(path)
    return _run(inputs.circuit, inputs.rules, clock, None, correction, today, meanwhile)


def run_inputs(
    file: CircuitFile,
    rules: RuleFile,
    tell: Tell = lambda stage: None,
    *,
    folder: Path | None = None,
    correction: bool = True,
    today: date | None = None,
) -> Result:
    """Return every stage's result for records built in code; otherwise as :func:`run`.

    Args:
        file: The circuit.
        rules: The board house's rules.
        tell: Called with the name of each stage as it begins.
        folder: What the paths of data files start from; None: the folder of the circuit file, for a circuit
            built in code the current one.
        correction: As for :func:`run`.
        today: As for :func:`run`.
    """
    return _run(file, rules, _Clock(tell), folder, correction, today)


def _run(
    file: CircuitFile,
    rules: RuleFile,
    clock: _Clock,
    folder: Path | None,
    correction: bool,
    today: date | None,
    meanwhile: Callable[[], None] = lambda: None,
) -> Result:
    with clock("circuit"):
        circuit = build_circuit(file, rules)
    fit = partial(correct_lengths, folder=folder) if correction and has_response(file) else None
    artwork, notes = _settled(circuit, clock, fit)
    with aside(partial(check, artwork, today)) as checked:
        with clock("response"):
            response = respond(artwork, folder) if has_response(file) else None
        meanwhile()
        with clock("checks"):
            checks = checked()
    return Result(artwork=artwork, checks=checks, response=response, seconds=clock.seconds, notes=notes)


def has_response(file: CircuitFile) -> bool:
    """Tell whether a circuit has ports of the response: RF ports or terminations."""
    rf = any(port.kind == "rf" for port in file.ports.values())
    return rf or any(part.terminations for part in file.parts.values())


def _settled(circuit: Circuit, clock: _Clock, fit: Fit | None) -> tuple[Artwork, tuple[Note, ...]]:
    """Size, place and draw until the pour and the response as drawn leave the sizes where they are.

    Args:
        circuit: The circuit.
        clock: Takes the time.
        fit: Says how lengths should be corrected; None leaves them.
    """
    with clock("sizing"):
        sized = size_circuit(circuit)
    try:
        best = _best_draft(sized, clock, fit)
    except _UncorrectableError as error:
        return _uncorrected(circuit, clock, str(error))
    except InfeasibleError:
        settled = _loosely_settled(circuit, clock, fit)
        if settled is None:
            raise
        best = _best_draft(settled, clock, fit)
    if best.found.now > best.found.uncorrected:
        text = f"corrected lengths give a difference of {best.found.now:.4f}, the budgets' own less"
        return _uncorrected(circuit, clock, text)
    with clock("artwork"):
        artwork = complete(best.draft)
    with clock("sizing"):  # a piece of pour that holds no vias is dropped from the final drawing only
        asked, alike = _sizes_by_pour(artwork, best.alike)
        artwork = with_drawn_pour(artwork)
    told = {note[1] for note in artwork.placement.notes}
    widths = _unsettled_widths(artwork.placement.sized, asked)
    notes = (note for note in alike if note[1] not in told)
    return artwork, (*notes, *widths, *_unsettled_lengths(best.found))


class _UncorrectableError(Exception):
    """No placement with corrected lengths, while there is one with those of the budgets."""


def _best_draft(sized: SizedCircuit, clock: _Clock, fit: Fit | None) -> _Round:
    """Return the draft whose sizes settled, or the nearest to the schematic.

    Args:
        sized: The sizes of the first draft, with or without corrections.
        clock: Takes the time.
        fit: Says how lengths should be corrected; None leaves them.

    Raises:
        _UncorrectableError: The lengths that a draft asks for cannot be placed; no draft had corrected ones.
        LayoutgenError: There is no first draft, or its widths do not settle to a placement.
    """
    rounds: list[_Round] = []
    corrected = bool(sized.corrections)
    while len(rounds) < MAX_ROUNDS:
        try:
            draft = _draft(sized, rounds[-1].draft.placement.choices if rounds else None, clock)
        except LayoutgenError as error:
            if corrected and rounds:
                return _best(rounds)
            if corrected or not sized.corrections:
                raise
            raise _UncorrectableError(f"no placement with corrected lengths ({error})") from error
        rounds.append(_asked(sized, draft, clock, fit, bool(rounds) and rounds[-1].alike))
        if rounds[-1].settled or _goes_round(rounds):
            break
        sized = rounds[-1].again
    best = _best(rounds)
    if best.move >= SETTLED and not _goes_round(rounds):
        best = _with_rested_widths(best, clock, fit)
    return best


def _loosely_settled(circuit: Circuit, clock: _Clock, fit: Fit | None) -> SizedCircuit | None:
    """Return sizes that settle with the hints loosened; the first that fit the hints, else the first of all.

    None where no hint asks a place or a length, or where nothing settles.
    """
    found: list[SizedCircuit] = []
    for file in loosened(circuit.file):
        with suppress(LayoutgenError, _UncorrectableError):
            loose = _best_draft(size_circuit(build_circuit(file, circuit.rules)), clock, fit)
            found.append(replace(loose.draft.placement.sized, circuit=circuit))
            if fits(found[-1]):
                return found[-1]
    return found[0] if found else None


@dataclass(frozen=True, slots=True, eq=False)
class _Round:
    """A draft, the sizes that it asks for, and what its response says of its lengths.

    ``alike`` is True from the draft on whose loops close only with one cross-section for like lines.
    """

    draft: Sketch
    again: SizedCircuit
    found: LengthFit
    alike: bool

    @property
    def settled(self) -> bool:
        """Whether the draft is as it asks to be."""
        return self.move < SETTLED and self.again.corrections == self.draft.placement.sized.corrections

    @property
    def move(self) -> float:
        """By how much the pour asks a width to change, at most [m]."""
        return largest_move(self.draft.placement.sized, self.again)[1]


def _goes_round(rounds: Sequence[_Round]) -> bool:
    """Tell whether the last draft asks for the sizes of an earlier one: more drafts would only repeat them.

    A piece of pour that comes and goes with a step of the board's size can do that.
    """
    asked = rounds[-1].again
    drawn = [earlier.draft.placement.sized for earlier in rounds]
    return any(
        sized.corrections == asked.corrections and largest_move(sized, asked)[1] < SETTLED for sized in drawn
    )


def _draft(sized: SizedCircuit, choices: Choices | None, clock: _Clock) -> Sketch:
    """Place and draw as far as pour and lines go; ``choices`` are those of the draft before."""
    with clock("placement"):
        placement = with_placed_bias(place(sized, choices))
    with clock("artwork"):
        return sketch(placement)


def _asked(sized: SizedCircuit, draft: Sketch, clock: _Clock, fit: Fit | None, alike: bool) -> _Round:
    """Return a draft with the sizes that its pour and its response ask for; ``alike`` is the last one's."""
    with clock("artwork"):
        artwork = draft.artwork
    with clock("sizing"):
        alike = alike or largest_move(sized, artwork.placement.sized)[1] > 0.0
        again, _ = _sizes_by_pour(artwork, alike)
    found = LengthFit({})
    if fit is not None:
        with clock("correction"):
            found = fit(artwork, sized=again)
    return _Round(draft, replace(again, corrections=found.corrections), found, alike)


def _sizes_by_pour(artwork: Artwork, alike: bool) -> tuple[SizedCircuit, tuple[Note, ...]]:
    """Return the sizes that a drawing's pour asks for, with a note for each line that is drawn otherwise.

    Args:
        artwork: The drawing.
        alike: Whether like lines at loops were given one cross-section, which they then keep.
    """
    again = size_circuit(artwork.placement.sized.circuit, measured_gaps(artwork))
    return with_like_lines(again) if alike else (again, ())


def _best(rounds: Sequence[_Round]) -> _Round:
    """Return the last draft when its lengths settled, else the one nearest to the schematic."""
    last = rounds[-1]
    if last.found.expected >= last.found.now:
        return last
    return min(reversed(rounds), key=lambda drawn: drawn.found.now)


def _with_rested_widths(best: _Round, clock: _Clock, fit: Fit | None) -> _Round:
    """Return a draft drawn once more with the widths that its pour asks for, where these then stay.

    Its corrections stay as they are. The draft itself is returned where widths do not rest even so, or where
    the drawing moves away from the schematic.
    """
    drawn = best.draft.placement
    sized = replace(best.again, corrections=drawn.sized.corrections)
    try:
        again = _asked(sized, _draft(sized, drawn.choices, clock), clock, fit, best.alike)
    except LayoutgenError:
        return best
    return again if again.move < SETTLED and again.found.now <= best.found.now + WORSE_FIT else best


def _uncorrected(circuit: Circuit, clock: _Clock, reason: str) -> tuple[Artwork, tuple[Note, ...]]:
    """Return the drawing with the lengths of the budgets alone, with a note that says why."""
    artwork, notes = _settled(circuit, clock, None)
    return artwork, (*notes, (NOTE_RULE, "", f"{reason}; no length is corrected"))


def _unsettled_widths(drawn: SizedCircuit, asked: SizedCircuit) -> tuple[Note, ...]:
    """Return a note when the drawing's pour asks for a width that is worth one."""
    moved = largest_move(drawn, asked)
    if moved[1] < SETTLED or moved[1] < WORTH_A_NOTE * _widths(drawn)[moved[0]]:
        return ()
    text = (
        f"widths had not settled after {MAX_ROUNDS} drawings: with the pour as drawn, {moved[0]} would be "
        f"{moved[1] * 1e6:.1f} um wider or narrower"
    )
    return (("assumption.pour", moved[0], text),)


def _unsettled_lengths(found: LengthFit) -> tuple[Note, ...]:
    """Return a note when other lengths promise to bring a drawing nearer to the schematic."""
    if found.expected >= found.now:
        return ()
    text = (
        f"the response correction had not settled after {MAX_ROUNDS} drawings: the largest difference in the "
        f"band is {found.now:.4f}, other lengths promise {found.expected:.4f}"
    )
    return ((NOTE_RULE, "", text),)


def with_placed_bias(placement: Placement) -> Placement:
    """Return the placement with the bias point that the lengths as placed give; nothing moves."""
    lengths = {name: line.centre_line * 1e-9 for name, line in placement.lines.items()}
    lengths |= {name: pair.centre_line * 1e-9 for name, pair in placement.pairs.items()}
    return replace(placement, sized=placed_dc(placement.sized, lengths))


def with_drawn_pour(artwork: Artwork) -> Artwork:
    """Return the artwork with what its lines are worth beside the pour as drawn; nothing moves.

    Angles of lines given by length follow; the budget of a line given by angle stays the one it was laid by.
    """
    placement = artwork.placement
    sized = sized_beside(placement.sized, measured_gaps(artwork))
    lines = {
        name: line if sized.lines[name].angle is not None else _with_beta(line, placement.sized, sized)
        for name, line in placement.lines.items()
    }
    return replace(artwork, placement=replace(placement, sized=sized, lines=lines))


def _with_beta(line: PlacedLine, old: SizedCircuit, new: SizedCircuit) -> PlacedLine:
    """Return a line with the angles of its own length and of its bends in its new cross-section."""
    share = new.lines[line.name].beta / old.lines[line.name].beta
    budget = tuple(
        replace(entry, angle=entry.angle * share) if entry.cause in ("line", "bend") else entry
        for entry in line.budget
    )
    return replace(line, budget=budget, angle=math.fsum(entry.angle for entry in budget))


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
