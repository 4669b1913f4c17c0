"""Length budgets: centre-line lengths at which line, bends and ends add up to the angle asked for."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

from layoutgen.circuit import GROUND, OPEN, Circuit, End, EndKind, ends_of
from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.sizing.junctions import (
    Arm,
    bend_change,
    cross_order,
    junction_corrections,
    junction_flags,
    open_end_correction,
    pad_correction,
    tee_order,
    via_correction,
)
from layoutgen.sizing.records import BudgetEntry, Land, SizedCircuit, SizedLine, SizedPair

__all__ = [
    "Arm",
    "bend_entries",
    "budget_for_length",
    "correction_entries",
    "cross_order",
    "default_arms",
    "default_budgets",
    "default_junctions",
    "halved",
    "junction_corrections",
    "junction_flags",
    "line_budget",
    "open_end_correction",
    "pad_correction",
    "tee_order",
    "via_correction",
]

Turns = Sequence[tuple[float, float]]

_MOST_ARMS = 4
_SIDES = (90.0, 270.0)


def line_budget(
    sized: SizedCircuit, name: str, ends: Sequence[BudgetEntry], turns: Turns = ()
) -> tuple[float, tuple[BudgetEntry, ...]]:
    """Return the centre-line length [m] at which a line has the angle asked for, and its budget.

    Args:
        sized: The sized circuit.
        name: A line or coupled pair given by angle. A pair's ends are those of both strips :func:`halved`.
        ends: What junctions and ends add.
        turns: Of each bend, turn [deg, either sign] and mitre drawn [%].

    Returns:
        The length through the sharp corners, and the entries (the line's first); they add up to the angle.
        A response correction of the line is one of them.

    Raises:
        WrongInputError: The length is not positive; the least angle that works is named.
        ValueError: The line is not given by angle.
    """
    held = _held(sized, name)
    if held.angle is None:
        raise ValueError(f"{name} is not given by angle")
    others = (*ends, *bend_entries(sized, name, turns), *correction_entries(sized, name))
    own = held.angle - math.fsum(entry.angle for entry in others)
    if own <= 0.0:
        raise WrongInputError([_too_short(sized, name, held.angle, held.angle - own)])
    return own / held.beta, (BudgetEntry("line", own, name), *others)


def budget_for_length(
    sized: SizedCircuit, name: str, length: float, ends: Sequence[BudgetEntry], turns: Turns = ()
) -> tuple[float, tuple[BudgetEntry, ...]]:
    """Return the angle [rad] of a line whose centre-line has a given length, and its budget.

    Args:
        sized: The sized circuit.
        name: A line or coupled pair.
        length: Centre-line through the sharp corners [m].
        ends: What junctions and ends add.
        turns: Of each bend, turn [deg, either sign] and mitre drawn [%].
    """
    own = _held(sized, name).beta * length
    entries = (BudgetEntry("line", own, name), *ends, *bend_entries(sized, name, turns))
    return math.fsum(entry.angle for entry in entries), entries


def bend_entries(sized: SizedCircuit, name: str, turns: Turns) -> tuple[BudgetEntry, ...]:
    """Return one entry for each bend of a line, ``bend 1`` first; each turn [deg] with its mitre [%]."""
    if not turns:
        return ()
    held, substrate = _held(sized, name), sized.circuit.file.substrate
    h = substrate.height
    u, er, t = held.width / h, substrate.relative_permittivity, substrate.copper_thickness / h
    return tuple(
        BudgetEntry("bend", held.beta * h * bend_change(u, er, mitre, abs(turn), t), f"bend {i}")
        for i, (turn, mitre) in enumerate(turns, 1)
    )


def correction_entries(sized: SizedCircuit, name: str) -> tuple[BudgetEntry, ...]:
    """Return the entry of a line's response correction; nothing for a line without one."""
    angle = sized.corrections.get(name, 0.0)
    return (BudgetEntry("response_correction", angle, name),) if angle else ()


def halved(entries: Sequence[BudgetEntry]) -> tuple[BudgetEntry, ...]:
    """Return the ends of a pair's two strips as those of the pair, whose angle is the strips' mean."""
    return tuple(replace(entry, angle=0.5 * entry.angle) for entry in entries)


def _held(sized: SizedCircuit, name: str) -> SizedLine | SizedPair:
    """Return a line or pair."""
    line = sized.lines.get(name)
    return line if line is not None else sized.pairs[name]


def _too_short(sized: SizedCircuit, name: str, asked: float, least: float) -> Fault:
    """Return the fault of a line that its corrections leave no length."""
    key = f"{'lines' if name in sized.lines else 'coupled'}.{name}.angle"
    above = math.ceil(math.degrees(least) * 100.0 + 1.0) / 100.0
    return Fault(
        sized.circuit.file.location(key),
        key,
        f"{math.degrees(asked):g} deg, less than junctions, ends and bends take up",
        f"at least {above:.2f} deg",
    )


def default_budgets(sized: SizedCircuit) -> dict[str, tuple[float, tuple[BudgetEntry, ...]]]:
    """Return length [m] and budget of every line and pair drawn straight, before anything is placed.

    Roles at junctions are those of :func:`default_arms`. Free lines have length 0 and no entries.

    Raises:
        WrongInputError: Lines whose corrections leave no length, all in one go.
    """
    ends = _default_ends(sized)
    budgets: dict[str, tuple[float, tuple[BudgetEntry, ...]]] = {}
    faults: list[Fault] = []
    for name in (*sized.lines, *sized.pairs):
        held = _held(sized, name)
        given = ends.get(name, [])
        added = halved(given) if name in sized.pairs else tuple(given)
        if isinstance(held, SizedLine) and held.free:
            budgets[name] = (0.0, ())
        elif held.length is not None:
            budgets[name] = (held.length, budget_for_length(sized, name, held.length, added)[1])
        else:
            try:
                budgets[name] = line_budget(sized, name, added)
            except WrongInputError as error:
                faults.extend(error.faults)
    if faults:
        raise WrongInputError(faults)
    return budgets


def _default_ends(sized: SizedCircuit) -> dict[str, list[BudgetEntry]]:
    """Return what junctions and ends add to each line and pair, in file order of the nets."""
    found: dict[str, list[BudgetEntry]] = {}
    circuit = sized.circuit
    for net in circuit.nets:
        if net == GROUND:
            continue
        arms = default_arms(sized, net)
        for junction in default_junctions(sized, net):
            for (element, _), entry in junction_corrections(sized, net, junction).items():
                found.setdefault(element, []).append(entry)
        for arm in arms:
            if arm.is_line and len(arms) == 2 and not all(other.is_line for other in arms):
                other = next(other for other in arms if not other.is_line)
                length = _pad_length(sized, other)
                found.setdefault(arm.element, []).append(
                    pad_correction(sized, arm.element, net, other.width, length)
                )
    for name in (*sized.lines, *sized.pairs):
        found.setdefault(name, []).extend(_far_ends(sized, name))
    return found


def _far_ends(sized: SizedCircuit, name: str) -> list[BudgetEntry]:
    """Return the entries of a line's or pair's open and grounded ends."""
    circuit = sized.circuit
    nets = _held(sized, name).nets
    if name in sized.lines and len(nets) == 1:
        nets = (*nets, OPEN)
    vias = circuit.rules.vias
    entries = []
    for net in nets:
        if net == OPEN:
            entries.append(open_end_correction(sized, name))
        elif net == GROUND:
            entries.append(via_correction(sized, name, GROUND, 1, vias.drill))
    return entries


def default_arms(sized: SizedCircuit, net: str) -> tuple[Arm, ...]:
    """Return the arms that meet in a net, with the headings they have before anything is placed.

    The two that follow one another on the spine, else the two widest, point west and east; further ones
    north, south, and so on. Ports and radial stubs are no arms.
    """
    circuit = sized.circuit
    arms = [arm for end in circuit.nets[net].ends if (arm := _arm(sized, end)) is not None]
    mains = _mains(circuit, arms)
    rest = [arm for arm in arms if arm not in mains]
    headings = [*_SIDES, 45.0, 135.0, 225.0, 315.0]
    straight = [replace(arm, heading_deg=heading) for arm, heading in zip(mains, (180.0, 0.0), strict=False)]
    return (*straight, *(replace(arm, heading_deg=headings[i % 6]) for i, arm in enumerate(rest)))


def default_junctions(sized: SizedCircuit, net: str) -> tuple[tuple[Arm, ...], ...]:
    """Return the arms of a net by junction: one of up to four arms, or a chain of them joined by strips.

    The arms are those of :func:`default_arms`; a chain has its straight ones at its ends, and two of the
    others at each junction. A strip is an arm without an element, as wide as the wider straight arm. Banks
    and ``gnd`` are no junctions: all of their arms are returned as one.
    """
    arms = default_arms(sized, net)
    if len(arms) <= _MOST_ARMS or sized.circuit.nets[net].bank or net == GROUND:
        return (arms,)
    first, last, *rest = arms
    width = max(first.width, last.width)
    back, on = (Arm("", -1, heading, width, is_line=False) for heading in (180.0, 0.0))
    found = []
    for k in range(0, len(rest), 2):
        sides = (replace(arm, heading_deg=side) for arm, side in zip(rest[k : k + 2], _SIDES, strict=False))
        found.append((back if k else first, *sides, on if k + 2 < len(rest) else last))
    return tuple(found)


def _mains(circuit: Circuit, arms: Sequence[Arm]) -> list[Arm]:
    """Return the two arms drawn straight through."""
    place = {name: i for i, name in enumerate(circuit.spine)}
    on_spine = sorted((arm for arm in arms if arm.element in place), key=lambda arm: place[arm.element])
    if len(on_spine) >= 2:
        return on_spine[:2]
    by_width = sorted((arm for arm in arms if arm not in on_spine), key=lambda arm: -arm.width)
    return [*on_spine, *by_width][:2]


def _arm(sized: SizedCircuit, end: End) -> Arm | None:
    """Return the arm of one end; None for ports, radial stubs and pins that meet the carrier."""
    if end.kind is EndKind.LINE:
        line = sized.lines.get(end.element)
        return Arm(end.element, end.index, 0.0, line.width) if line is not None else None
    if end.kind is EndKind.COUPLED:
        return Arm(end.element, end.index, 0.0, sized.pairs[end.element].width)
    if end.kind is EndKind.PORT:
        return None
    across, along = _pad_size(_land(sized, end))
    return Arm(end.element, end.index, 0.0, across, is_line=False) if along > 0.0 else None


def _land(sized: SizedCircuit, end: End) -> Land:
    """Return the land of a part's end."""
    lands = sized.lands[end.element]
    if end.pin:
        return lands.pad(end.pin)
    return lands.pads[end.index]


def _pad_size(land: Land) -> tuple[float, float]:
    """Return a land's size across and along its heading [m]."""
    upright = round(land.heading / 90.0) % 2 == 1
    return (land.width, land.height) if upright else (land.height, land.width)


def _pad_length(sized: SizedCircuit, arm: Arm) -> float:
    """Return the size of a pad arm along its heading [m]."""
    ends = (end for end, _ in ends_of(sized.circuit.file, arm.element))
    end = next(end for end in ends if end.index == arm.index)
    return _pad_size(_land(sized, end))[1]
