"""Centre-line lengths during the search: end corrections from the walk, bends from the word."""

from __future__ import annotations

from collections.abc import Mapping

from layoutgen.circuit import OPEN, End, EndKind
from layoutgen.geometry import mitre_for_turn
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.tour import Headings, Tour
from layoutgen.placement.words import Word
from layoutgen.sizing import (
    Arm,
    BudgetEntry,
    budget_for_length,
    halved,
    junction_corrections,
    line_budget,
    open_end_correction,
    pad_correction,
    via_correction,
)
from layoutgen.units import to_nm

__all__ = ["LineLengths", "Roles", "strip_width"]

MOST_BENDS = 15

Roles = Mapping[str, Headings]
"""How the ends of some nets stand, by net."""

Key = tuple[str, tuple[Headings | None, ...]]
_WALK: Roles = {}


class LineLengths:
    """Lengths of all lines of one circuit, worked out when first asked for.

    ``roles`` say how the ends stand in nets whose headings come with a cluster's drawing; other nets have
    those of the walk.
    """

    def __init__(self, model: Model, tour: Tour) -> None:
        """Keep the circuit and the walk; nothing is computed yet."""
        self.model, self.tour = model, tour
        self._ends: dict[Key, tuple[BudgetEntry, ...]] = {}
        self._lengths: dict[Key, list[int]] = {}

    def ends(self, name: str, roles: Roles = _WALK) -> tuple[BudgetEntry, ...]:
        """Return the corrections at both ends of a line."""
        nets = self.model.file.lines[name].nets
        key = _key(name, nets, roles)
        if key not in self._ends:
            found = [self._end(name, i, net, roles) for i, net in enumerate(nets)]
            if len(nets) == 1:
                found.append(open_end_correction(self.model.sized, name, nets[0]))
            self._ends[key] = tuple(entry for entry in found if entry is not None)
        return self._ends[key]

    def by_bends(self, name: str, roles: Roles = _WALK) -> list[int]:
        """Return a line's centre-line length [nm] with 0, 1, 2, ... right-angle bends.

        Raises:
            WrongInputError: The straight line would have no positive length.
        """
        key = _key(name, self.model.file.lines[name].nets, roles)
        if key not in self._lengths:
            straight = self.length(name, (), roles)
            change = self.length(name, (90.0,), roles) - straight
            lengths = [straight + k * change for k in range(MOST_BENDS + 1)]
            lengths = [length for length in lengths if length > 0]
            self._lengths[key] = lengths
        return self._lengths[key]

    def length(self, name: str, word: Word, roles: Roles = _WALK) -> int:
        """Return a line's centre-line length [nm] with a word of turns."""
        line = self.model.sized.lines[name]
        if line.length is not None and not line.free:
            return to_nm(line.length)
        ends, turns = self.ends(name, roles), self.turns(name, word)
        return to_nm(line_budget(self.model.sized, name, ends, turns)[0])

    def turns(self, name: str, word: Word) -> tuple[tuple[float, float], ...]:
        """Return (turn [deg], mitre drawn [%]) for each bend of a word."""
        width, neck = self.model.widths[name], self.model.limits.neck
        percent = self.model.sized.lines[name].mitre_percent
        return tuple((turn, mitre_for_turn(percent, turn, width, neck)) for turn in word)

    def budget(
        self, name: str, word: Word, centre_line: float, roles: Roles = _WALK
    ) -> tuple[float, tuple[BudgetEntry, ...]]:
        """Return a line's angle [rad] and its budget for the centre-line [nm] that was laid."""
        sized = self.model.sized
        turns, ends = self.turns(name, word), self.ends(name, roles)
        line = sized.lines[name]
        if line.angle is not None and line.length is None and not line.free:
            return line.angle, line_budget(sized, name, ends, turns)[1]
        return budget_for_length(sized, name, centre_line * 1e-9, ends, turns)

    def pair_length(self, name: str, roles: Roles = _WALK) -> int:
        """Return a coupled pair's centre-line length [nm]."""
        pair = self.model.sized.pairs[name]
        if pair.length is not None:
            return to_nm(pair.length)
        return to_nm(line_budget(self.model.sized, name, self._pair_ends(name, roles))[0])

    def pair_budget(
        self, name: str, centre_line: float, roles: Roles = _WALK
    ) -> tuple[float, tuple[BudgetEntry, ...]]:
        """Return a coupled pair's angle [rad] and budget for the length [nm] that was laid."""
        sized = self.model.sized
        pair, ends = sized.pairs[name], self._pair_ends(name, roles)
        if pair.angle is not None and pair.length is None:
            return pair.angle, line_budget(sized, name, ends)[1]
        return budget_for_length(sized, name, centre_line * 1e-9, ends)

    def _pair_ends(self, name: str, roles: Roles) -> tuple[BudgetEntry, ...]:
        found = []
        for index, net in enumerate(self.model.file.coupled[name].nets):
            if net == OPEN:
                found.append(open_end_correction(self.model.sized, name, net))
            elif (entry := self._end(name, index, net, roles)) is not None:
                found.append(entry)
        return halved(found)

    def _end(self, name: str, index: int, net: str, roles: Roles) -> BudgetEntry | None:
        sized = self.model.sized
        if net == GROUND:
            return via_correction(
                sized, name, net, self.model.limits.ground_vias, self.model.limits.drill * 1e-9
            )
        hub = self.tour.hubs[net]
        if hub.bank:
            return None
        found = roles[net] if net in roles else hub.canonical_headings()
        headings = tuple(item for item in found if item[0].element not in sized.radials)
        if len(headings) == 2:
            other = next(end for end, _ in headings if (end.element, end.index) != (name, index))
            if other.kind is EndKind.PORT:
                return None
            if other.kind is EndKind.PAD:
                land = self.model.bodies[other.element].land_at(other)
                return pad_correction(sized, name, net, land.across * 1e-9, land.along * 1e-9)
        arms = tuple(self._arm(end, heading) for end, heading in headings)
        return junction_corrections(sized, net, arms).get((name, index))

    def _arm(self, end: End, heading: float) -> Arm:
        width = 0
        if end.kind is EndKind.PAD:
            width = self.model.bodies[end.element].land_at(end).across
        elif end.element in self.model.widths:
            width = self.model.widths[end.element]
        elif end.kind is EndKind.PORT:
            width = self.port_strip_width(end)
        is_line = end.kind in (EndKind.LINE, EndKind.COUPLED)
        return Arm(
            element=end.element, index=end.index, heading_deg=heading, width=width * 1e-9, is_line=is_line
        )

    def port_strip_width(self, end: End) -> int:
        """Return the width [nm] of the strip from a net's copper to its port: as wide as what it joins."""
        net = next(net for net in self.model.circuit.nets.values() if any(other == end for other in net.ends))
        return strip_width(self.model, net.name)


def _key(name: str, nets: tuple[str, ...], roles: Roles) -> Key:
    """Return under what a length is remembered: the element, and how its ends stand."""
    return name, tuple(roles.get(net) for net in nets) if roles else ()


def strip_width(model: Model, name: str) -> int:
    """Return the width [nm] of a net's strip: the narrowest of the lines, or else pads, that it joins."""
    ends = model.circuit.nets[name].ends
    lines = [model.widths[end.element] for end in ends if end.element in model.widths]
    pads = [model.bodies[end.element].land_at(end).across for end in ends if end.kind is EndKind.PAD]
    return min(lines or pads or [model.limits.land])
