"""What junctions and ends add to a line's electrical angle: the entries of its budget that are not its own.

Signs: an entry is what the discontinuity adds to the line's angle. A tee or cross takes off (its planes lie
outside the crossing, so the copper from centre-line to centre-line is electrically shorter), an open end,
a wider pad and a via's inductance add, a step adds to or takes off each side.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

from layoutgen.circuit import Circuit, EndKind
from layoutgen.formulas.bends import bend_excess, douville_james_1978_mitre
from layoutgen.formulas.ends import open_end
from layoutgen.formulas.pads import pad_excess
from layoutgen.formulas.steps import step
from layoutgen.formulas.tees import cross, tee
from layoutgen.formulas.vias import goldfarb_pucel_1991, via_array_inductance, via_inductance
from layoutgen.sizing.records import BudgetEntry, SizedCircuit

__all__ = [
    "Arm",
    "cross_order",
    "junction_corrections",
    "junction_flags",
    "open_end_correction",
    "pad_correction",
    "tee_order",
    "via_correction",
]

_SAME_WIDTH = 1e-9
_COLLINEAR_DEG = 1.0
_CACHE = 4096


@dataclass(frozen=True, slots=True)
class Arm:
    """One arm of a junction: an end of an element, its heading away from the node [deg], its width [m].

    ``is_line`` is True for lines and strips of coupled pairs (they get an entry), False for pads.
    """

    element: str
    index: int
    heading_deg: float
    width: float
    is_line: bool = True


@dataclass(frozen=True, slots=True)
class _Board:
    """What the junction formulas need of the board: er [-], t/h [-], f h [Hz m], h [m]."""

    er: float
    t: float
    fh: float
    h: float


def _board(circuit: Circuit) -> _Board:
    """Return a circuit's board."""
    substrate = circuit.file.substrate
    h = substrate.height
    return _Board(
        substrate.relative_permittivity, substrate.copper_thickness / h, circuit.file.design.frequency * h, h
    )


@lru_cache(maxsize=_CACHE)
def _tee(
    u_a: float, u_b: float, u_side: float, er: float, fh: float, t: float
) -> tuple[float, float, float, bool]:
    """Return the planes of both mains and the side over h [-], and whether the fit holds."""
    found = tee(u_a, u_b, u_side, er, fh, t)
    return float(found.d_a), float(found.d_b), float(found.d_side), bool(found.in_range)


@lru_cache(maxsize=_CACHE)
def _cross(
    u_w: float, u_e: float, u_n: float, u_s: float, er: float, fh: float, t: float
) -> tuple[float, float, float, float, bool]:
    """Return the planes of the west, east, north and south arm over h [-], and whether the fit holds."""
    found = cross(u_w, u_e, u_n, u_s, er, fh, t)
    return float(found.d_w), float(found.d_e), float(found.d_n), float(found.d_s), bool(found.in_range)


@lru_cache(maxsize=_CACHE)
def _step(u_a: float, u_b: float, er: float, t: float) -> tuple[float, float, bool]:
    """Return what both lines gain at a step over h [-], and whether the fit holds."""
    found = step(u_a, u_b, er, t)
    return float(found.d_1), float(found.d_2), bool(found.in_range)


@lru_cache(maxsize=_CACHE)
def bend_change(u: float, er: float, mitre_percent: float, turn: float, t: float) -> float:
    """Return what a bend adds to the centre-line over h [-]; the turn [deg] is positive."""
    return float(bend_excess(u, er, mitre_percent, turn, t).length_change)


def beta_of(sized: SizedCircuit, element: str) -> float:
    """Return the phase constant [rad/m] of a line, or the mean one of a coupled pair."""
    line = sized.lines.get(element)
    return line.beta if line is not None else sized.pairs[element].beta


def junction_corrections(
    sized: SizedCircuit, net: str, arms: Sequence[Arm], corner_mitre: float | None = None
) -> dict[tuple[str, int], BudgetEntry]:
    """Return what a junction adds to each of its lines, by (element, index of the end).

    Two lines in one direction make a step (no entry when the widths agree within 1 nm), two at an angle a
    bend of which each gets half; three arms a tee, whose side is the arm without an opposite one; four a
    cross, whose mains are the wider opposite pair. Pads are arms with their width and get no entry. One
    line with one pad is no junction (see :func:`pad_correction`), and a bank's node has no entry.

    Args:
        sized: The sized circuit.
        net: The junction's net.
        arms: All arms that meet in the node.
        corner_mitre: Mitre [%] drawn where two lines meet at an angle; None for that of a bend.

    Raises:
        ValueError: More than four arms.
    """
    lines = [arm for arm in arms if arm.is_line]
    if not lines or len(arms) < 2 or sized.circuit.nets[net].bank:
        return {}
    if len(arms) > 4:
        raise ValueError(f"net {net}: {len(arms)} arms, at most 4")
    if len(arms) == 2:
        return _two(sized, net, arms, corner_mitre) if len(lines) == 2 else {}
    cause, ordered = ("tee", tee_order(arms)) if len(arms) == 3 else ("cross", cross_order(arms))
    planes = _planes(_board(sized.circuit), ordered)[0]
    h = sized.circuit.file.substrate.height
    return {
        (arm.element, arm.index): BudgetEntry(cause, -beta_of(sized, arm.element) * plane * h, net)
        for arm, plane in zip(ordered, planes, strict=True)
        if arm.is_line
    }


def junction_flags(sized: SizedCircuit, net: str, arms: Sequence[Arm]) -> tuple[str, ...]:
    """Return a text when a junction's model is used outside its range, else nothing."""
    if len(arms) not in (2, 3, 4) or sized.circuit.nets[net].bank or not any(arm.is_line for arm in arms):
        return ()
    board = _board(sized.circuit)
    u = [arm.width / board.h for arm in arms]
    if len(arms) == 2:
        if abs(u[0] - u[1]) * board.h <= _SAME_WIDTH or not all(arm.is_line for arm in arms):
            return ()
        name, holds = "step (fit to field solutions)", _step(u[0], u[1], board.er, board.t)[2]
    else:
        ordered = tee_order(arms) if len(arms) == 3 else cross_order(arms)
        name, holds = "tee (fit to field solutions; Hammerstad 1981 used)", _planes(board, ordered)[1]
    widths = ", ".join(f"{value:.3g}" for value in u)
    return () if holds else (f"net {net}: {name}: W/h {widths} (0.5 to 5), er {board.er:g} (to 13)",)


def _two(
    sized: SizedCircuit, net: str, arms: Sequence[Arm], corner_mitre: float | None
) -> dict[tuple[str, int], BudgetEntry]:
    """Return the entries of two lines that meet: of a step, or of a bend."""
    a, b = arms
    board = _board(sized.circuit)
    turn = 180.0 - _between(a.heading_deg, b.heading_deg)
    if turn > _COLLINEAR_DEG:
        return {
            (arm.element, arm.index): BudgetEntry(
                "bend",
                0.5 * beta_of(sized, arm.element) * board.h * _corner(board, arm.width, turn, corner_mitre),
                net,
            )
            for arm in arms
        }
    if abs(a.width - b.width) <= _SAME_WIDTH:
        return {}
    gain_a, gain_b, _ = _step(a.width / board.h, b.width / board.h, board.er, board.t)
    return {
        (arm.element, arm.index): BudgetEntry("step", beta_of(sized, arm.element) * gain * board.h, net)
        for arm, gain in ((a, gain_a), (b, gain_b))
    }


def _corner(board: _Board, width: float, turn: float, mitre: float | None) -> float:
    """Return what a corner of two lines adds over h [-], for a line of one of the widths."""
    u = width / board.h
    percent = mitre if mitre is not None else float(douville_james_1978_mitre(u))
    return bend_change(u, board.er, percent, turn, board.t)


def _between(a: float, b: float) -> float:
    """Return the angle between two headings [deg], 0 to 180."""
    return abs((a - b + 180.0) % 360.0 - 180.0)


def tee_order(arms: Sequence[Arm]) -> tuple[Arm, Arm, Arm]:
    """Return the two arms that are most nearly opposite, and the third as the side."""
    i, j = max(
        itertools.combinations(range(3), 2),
        key=lambda pair: round(_between(arms[pair[0]].heading_deg, arms[pair[1]].heading_deg), 6),
    )
    return arms[i], arms[j], arms[3 - i - j]


def cross_order(arms: Sequence[Arm]) -> tuple[Arm, Arm, Arm, Arm]:
    """Return the opposite pair that is wider in sum (the mains), then the other; ties keep the order."""
    turned = sorted(range(4), key=lambda k: (arms[k].heading_deg - arms[0].heading_deg) % 360.0)
    first, second = (turned[0], turned[2]), (turned[1], turned[3])
    wide = sum(arms[k].width for k in first) >= sum(arms[k].width for k in second) - _SAME_WIDTH
    mains, sides = (first, second) if wide else (second, first)
    return arms[mains[0]], arms[mains[1]], arms[sides[0]], arms[sides[1]]


def _planes(board: _Board, ordered: Sequence[Arm]) -> tuple[tuple[float, ...], bool]:
    """Return each arm's plane over h [-], and whether the model holds."""
    u = [arm.width / board.h for arm in ordered]
    if len(u) == 3:
        *planes, holds = _tee(u[0], u[1], u[2], board.er, board.fh, board.t)
    else:
        *planes, holds = _cross(u[0], u[1], u[2], u[3], board.er, board.fh, board.t)
    return tuple(planes), bool(holds)


def pad_correction(
    sized: SizedCircuit, element: str, net: str, pad_width: float, pad_length: float
) -> BudgetEntry:
    """Return what the pad at a line's end adds, the line being drawn to the pad's inner edge.

    The line's copper covers a pad that is not wider, which then adds nothing. A pad that the part's measured
    data include (``planes = "pad_outer"``) takes its own length off: there the line ends at the outer edge.

    Args:
        sized: The sized circuit.
        element: The line or pair.
        net: The net of line and pad.
        pad_width: The pad's size across the line [m].
        pad_length: The pad's size along the line [m].
    """
    beta = beta_of(sized, element)
    if _in_data(sized.circuit, net):
        return BudgetEntry("pad", -beta * pad_length, net)
    board = _board(sized.circuit)
    u = _width_of(sized, element) / board.h
    excess = (
        0.0
        if pad_width <= u * board.h
        else _pad(u, pad_width / board.h, pad_length / board.h, board.er, board.t)
    )
    return BudgetEntry("pad", beta * excess * board.h, net)


def _in_data(circuit: Circuit, net: str) -> bool:
    """Tell whether the data of a part at a net include its pad."""
    parts = circuit.file.parts
    pads = (parts[end.element] for end in circuit.nets[net].ends if end.kind is EndKind.PAD)
    return any(part.data is not None and part.planes == "pad_outer" for part in pads)


@lru_cache(maxsize=_CACHE)
def _pad(u_line: float, u_pad: float, length: float, er: float, t: float) -> float:
    """Return what a pad adds over h [-]."""
    return float(pad_excess(u_line, u_pad, length, er, t))


def open_end_correction(sized: SizedCircuit, element: str, net: str = "open") -> BudgetEntry:
    """Return what an open end adds; a strip of a coupled pair is taken as a single line of its width."""
    board = _board(sized.circuit)
    extension = _open(_width_of(sized, element) / board.h, board.er, board.t)
    return BudgetEntry("open_end", beta_of(sized, element) * extension * board.h, net)


@lru_cache(maxsize=_CACHE)
def _open(u: float, er: float, t: float) -> float:
    """Return an open end's extension over h [-]."""
    return float(open_end(u, er, t))


def via_correction(
    sized: SizedCircuit, element: str, net: str, count: int, drill: float, pitch: float | None = None
) -> BudgetEntry:
    """Return what the inductance of ground vias at a line's end adds, the line being drawn to their axes.

    Args:
        sized: The sized circuit.
        element: The line or pair.
        net: The net (``gnd``).
        count: Vias in a row across the line, at least 1.
        drill: Finished hole diameter [m].
        pitch: Distance of neighbouring axes [m]; None: ``vias.min_pitch``, or twice the drill.
    """
    circuit = sized.circuit
    rules = circuit.rules.vias
    radius = 0.5 * drill + (rules.plating or 0.0)
    spacing = pitch or rules.min_pitch or 2.0 * drill
    h, width = circuit.file.substrate.height, _width_of(sized, element)
    inductance = _via(radius, h, width, count, spacing)
    reactance = 2.0 * math.pi * circuit.file.design.frequency * inductance
    return BudgetEntry("via", math.atan(reactance / _impedance_of(sized, element)), net)


@lru_cache(maxsize=_CACHE)
def _via(radius: float, h: float, width: float, count: int, pitch: float) -> float:
    """Return the inductance [H] of a row of vias at the end of a strip, from the plane of their axes."""
    one = float(via_inductance(radius, h, width))
    if count == 1:
        return one
    share = float(via_array_inductance(count, pitch, radius, h)) / float(goldfarb_pucel_1991(radius, h))
    return one * share


def _width_of(sized: SizedCircuit, element: str) -> float:
    """Return the width [m] of a line or of a strip of a pair."""
    line = sized.lines.get(element)
    return line.width if line is not None else sized.pairs[element].width


def _impedance_of(sized: SizedCircuit, element: str) -> float:
    """Return the impedance [ohm] of a line, or sqrt(Z_even Z_odd) of a pair."""
    line = sized.lines.get(element)
    if line is not None:
        return line.impedance
    pair = sized.pairs[element]
    return math.sqrt(pair.even_impedance * pair.odd_impedance)
