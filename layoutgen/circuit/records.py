"""What the circuit stage hands on: nets with what meets in them, the DC solution, the RF path."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

from layoutgen.reading import CircuitFile, RuleFile

__all__ = ["Circuit", "DcSolution", "End", "EndKind", "Net"]


class EndKind(StrEnum):
    """What kind of thing ends in a net."""

    LINE = "line"
    COUPLED = "coupled"
    PAD = "pad"
    PORT = "port"


@dataclass(frozen=True, slots=True, order=True)
class End:
    """One end of one element: what a net joins.

    ``index`` is the position in the element's ``nets`` (0 or 1 for a line or a two-pad part, 0 to 3 for a
    coupled pair, 0 for a port); ``pin`` is the pin's name for parts with pins, else the empty text.
    """

    element: str
    index: int
    kind: EndKind
    pin: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Net:
    """A net and its ends in file order.

    ``bank`` holds the names of the shunt parts that stand on a common strip, in the order they are to be
    met from the feed (empty unless there are two or more); ``feed`` is the end that leads to an RF port or
    pin (None when no bank).
    """

    name: str
    ends: tuple[End, ...]
    voltage: float | None
    bank: tuple[str, ...] = ()
    feed: End | None = None
    is_dc: bool = False

    def of_kind(self, kind: EndKind) -> tuple[End, ...]:
        """Return the ends of one kind, in file order."""
        return tuple(end for end in self.ends if end.kind is kind)


@dataclass(frozen=True, slots=True, kw_only=True)
class DcSolution:
    """The bias point: net voltages [V], currents [A] by element, and what was assumed.

    Currents flow from ``nets[0]`` to ``nets[1]`` when positive; a transistor's are keyed ``Q1.drain`` and
    positive into the pin; a port's are positive out of the board. Coupled pairs have ``name:0`` and
    ``name:1``.
    """

    voltages: Mapping[str, float]
    currents: Mapping[str, float]
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Circuit:
    """The schematic, understood: the inputs, the nets, the bias point, the RF path.

    ``spine`` names the elements along the path that is drawn straight, port to port (lines, parts and
    ports, in order); ``loops`` holds one tuple of element names for each independent loop.
    """

    file: CircuitFile
    rules: RuleFile
    nets: Mapping[str, Net]
    dc: DcSolution
    spine: tuple[str, ...]
    loops: tuple[tuple[str, ...], ...]
