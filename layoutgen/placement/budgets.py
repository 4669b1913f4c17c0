"""Centre-line lengths during the search: end corrections from the walk, bends from the word."""

from __future__ import annotations

from layoutgen.circuit import OPEN, End, EndKind
from layoutgen.geometry import mitre_for_turn
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.tour import Hub, Tour
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

__all__ = ["LineLengths"]

MOST_BENDS = 15


class LineLengths:
    """Lengths of all lines of one circuit, worked out when first asked for."""

    def __init__(self, model: Model, tour: Tour) -> None:
        """Keep the circuit and the walk; nothing is computed yet."""
        self.model, self.tour = model, tour
        self._ends: dict[str, tuple[BudgetEntry, ...]] = {}
        self._lengths: dict[str, list[int]] = {}

    def ends(self, name: str) -> tuple[BudgetEntry, ...]:
        """Return the corrections at both ends of a line."""
        if name not in self._ends:
            nets = self.model.file.lines[name].nets
            found = [self._end(name, i, net) for i, net in enumerate(nets)]
            if len(nets) == 1:
                found.append(open_end_correction(self.model.sized, name, nets[0]))
            self._ends[name] = tuple(entry for entry in found if entry is not None)
        return self._ends[name]

    def by_bends(self, name: str) -> list[int]:
        """Return a line's centre-line length [nm] with 0, 1, 2, ... right-angle bends.

        Raises:
            WrongInputError: The straight line would have no positive length.
        """
        if name not in self._lengths:
            straight = self.length(name, ())
            change = self.length(name, (90.0,)) - straight
            lengths = [straight + k * change for k in range(MOST_BENDS + 1)]
            lengths = [length for length in lengths if length > 0]
            self._lengths[name] = lengths
        return self._lengths[name]

    def length(self, name: str, word: Word) -> int:
        """Return a line's centre-line length [nm] with a word of turns."""
        line = self.model.sized.lines[name]
        if line.length is not None and not line.free:
            return to_nm(line.length)
        return to_nm(line_budget(self.model.sized, name, self.ends(name), self.turns(name, word))[0])

    def turns(self, name: str, word: Word) -> tuple[tuple[float, float], ...]:
        """Return (turn [deg], mitre drawn [%]) for each bend of a word."""
        width, neck = self.model.widths[name], self.model.limits.neck
        percent = self.model.sized.lines[name].mitre_percent
        return tuple((turn, mitre_for_turn(percent, turn, width, neck)) for turn in word)

    def budget(self, name: str, word: Word, centre_line: float) -> tuple[float, tuple[BudgetEntry, ...]]:
        """Return a line's angle [rad] and its budget for the centre-line [nm] that was laid."""
        sized = self.model.sized
        turns = self.turns(name, word)
        line = sized.lines[name]
        if line.angle is not None and line.length is None and not line.free:
            return line.angle, line_budget(sized, name, self.ends(name), turns)[1]
        return budget_for_length(sized, name, centre_line * 1e-9, self.ends(name), turns)

    def pair_length(self, name: str) -> int:
        """Return a coupled pair's centre-line length [nm]."""
        pair = self.model.sized.pairs[name]
        if pair.length is not None:
            return to_nm(pair.length)
        return to_nm(line_budget(self.model.sized, name, self._pair_ends(name))[0])

    def pair_budget(self, name: str, centre_line: float) -> tuple[float, tuple[BudgetEntry, ...]]:
        """Return a coupled pair's angle [rad] and budget for the length [nm] that was laid."""
        sized = self.model.sized
        pair = sized.pairs[name]
        if pair.angle is not None and pair.length is None:
            return pair.angle, line_budget(sized, name, self._pair_ends(name))[1]
        return budget_for_length(sized, name, centre_line * 1e-9, self._pair_ends(name))

    def _pair_ends(self, name: str) -> tuple[BudgetEntry, ...]:
        found = []
        for index, net in enumerate(self.model.file.coupled[name].nets):
            if net == OPEN:
                found.append(open_end_correction(self.model.sized, name, net))
            elif (entry := self._end(name, index, net)) is not None:
                found.append(entry)
        return halved(found)

    def _end(self, name: str, index: int, net: str) -> BudgetEntry | None:
        sized = self.model.sized
        if net == GROUND:
            return via_correction(
                sized, name, net, self.model.limits.ground_vias, self.model.limits.drill * 1e-9
            )
        hub = self.tour.hubs[net]
        if hub.bank:
            return None
        headings = tuple(item for item in hub.canonical_headings() if item[0].element not in sized.radials)
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
        return strip_width(self.model, self.tour.hubs[net.name])


def strip_width(model: Model, hub: Hub) -> int:
    """Return the width [nm] of a net's strip: the narrowest of the lines, or else pads, that it joins."""
    ends = model.circuit.nets[hub.net].ends
    lines = [model.widths[end.element] for end in ends if end.element in model.widths]
    pads = [model.bodies[end.element].land_at(end).across for end in ends if end.kind is EndKind.PAD]
    return min(lines or pads or [model.limits.land])
