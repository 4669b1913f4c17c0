"""What would do where nothing did: changes of the request, each tried before it is named.

A remedy is a change for which a placement was found: another board size, another place or heading of a
hinted part, a longer line where a short one leaves no room. Where none of those tried helps, the message
names no figure.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import chain, islice

from layoutgen.circuit.queries import elements
from layoutgen.placement.chains import is_strip
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.records import Placement
from layoutgen.placement.requests import with_angles, with_hint, with_port_order, with_size
from layoutgen.placement.state import EDGES
from layoutgen.reading import Hint
from layoutgen.sizing import SizedCircuit
from layoutgen.units import to_nm

__all__ = ["Remedies", "Tried"]

_MOST_TRIED = 8  # changes placed for one message
_LARGE = 60  # elements from which on only two are
_ANGLES = (5.0, 8.0, 10.0, 12.0, 15.0, 20.0)  # of a line that is too short [deg]
_PARTS_OF_HINT = (("at",), ("heading",), ("at", "heading"), ("leave",), ("route",), ("leave", "route"))
_NAMES = {0.0: "east", 90.0: "north", 180.0: "west", 270.0: "south"}

Tried = Callable[[SizedCircuit], Placement | None]
Size = tuple[int, int]


@dataclass(frozen=True, slots=True)
class Remedies:
    """Looks for changes that do.

    ``tried`` returns the placement of a changed request, or None; ``roomy`` the size [nm] of the board that
    would be drawn if none were given, or None.
    """

    model: Model
    tried: Tried
    roomy: Callable[[], Size | None]

    def best(self, element: str) -> str:
        """Return the first remedy that does for an element that found no place; else what can be changed."""
        layout = self.model.file.layout
        hinted = layout is not None and element in layout.hints
        first = (self._hints(element), self._sizes()) if hinted else (self._sizes(), self._hints(element))
        some = chain(*first, self._port_orders(), self._short_lines(element))
        most = _MOST_TRIED if len(elements(self.model.file)) < _LARGE else 2
        return next((text for text in islice(some, most) if text is not None), self._plain(element))

    def _sizes(self) -> Iterator[str | None]:
        """Try the board that would be drawn of itself, as little as possible smaller than the given one."""
        size = self.model.file.board.size
        needed = None if size is None else self.roomy()
        if size is None or needed is None:
            return
        given = to_nm(size[0]), to_nm(size[1])
        wide, high = max(given[0], needed[0]), max(given[1], needed[1])
        for width, height in dict.fromkeys(((wide, high), (needed[0], high), (wide, needed[1]), needed)):
            if (width, height) != given:
                does = self.tried(with_size(self.model.sized, width, height)) is not None
                yield f"a board of {_mm(width)} x {_mm(height)} would do" if does else None

    def _hints(self, element: str) -> Iterator[str | None]:
        """Try what comes out when a hint, that of the element first, is given up in part."""
        layout = self.model.file.layout
        held = {} if layout is None else layout.hints
        hints = {name: hint for name, hint in held.items() if not is_strip(name)}
        for name in sorted(hints, key=lambda name: name != element):
            for keys in _PARTS_OF_HINT:
                if all(getattr(hints[name], key) is not None for key in keys):
                    yield self._without(name, hints[name], keys)

    def _without(self, name: str, hint: Hint, keys: tuple[str, ...]) -> str | None:
        """Return what a placement without parts of a hint would have them say, if that does."""
        sized, loose = self.model.sized, hint.model_copy(update=dict.fromkeys(keys))
        found = self.tried(with_hint(sized, name, loose))
        if found is None:
            return None
        texts, values = [], dict[str, object]()
        if "at" in keys:
            part = found.parts[name]
            values["at"] = (part.x * 1e-9, part.y * 1e-9)
            texts.append(f'at = ["{_mm(part.x)}", "{_mm(part.y)}"]')
        if "heading" in keys:
            values["heading"] = found.parts[name].heading
            texts.append(f"heading = {_named(found.parts[name].heading)}")
        if keys == ("leave",) and name in found.lines:
            (ax, ay), (bx, by) = found.lines[name].path[:2]
            values["leave"] = math.degrees(math.atan2(by - ay, bx - ax)) % 360.0
            texts.append(f"leave = {_named(math.degrees(math.atan2(by - ay, bx - ax)) % 360.0)}")
        if texts and self.tried(with_hint(sized, name, loose.model_copy(update=values))) is not None:
            return f"{' with '.join(texts)} in [layout.hints.{name}] would do"
        return f"without {' and '.join(keys)} in [layout.hints.{name}] there is a placement"

    def _port_orders(self) -> Iterator[str | None]:
        """Try the ports of an edge, of one edge after the other, in the opposite order, then two swapped."""
        ports = self.model.file.ports
        for edge in EDGES:
            names = [name for name, port in ports.items() if port.edge == edge and port.at is None]
            if len(names) < 2:
                continue
            for other in _other_orders(names):
                left = iter(other)
                order = [next(left) if name in names else name for name in ports]
                does = self.tried(with_port_order(self.model.sized, order)) is not None
                listed = ", ".join(f"[ports.{name}]" for name in other)
                yield f"{listed} in this order in the file would do" if does else None

    def _short_lines(self, element: str) -> Iterator[str | None]:
        """Try short lines that meet an element with greater angles."""
        model, near = self.model, set(self.model.owner_nets.get(element, ()))
        for name, line in model.sized.lines.items():
            nets = set(line.nets) - {GROUND}
            if line.angle is None or line.free or len(nets) < 2 or not nets & near:
                continue
            for angle in _ANGLES:
                if angle > math.degrees(line.angle):
                    does = self.tried(with_angles(model.sized, {name: angle})) is not None
                    yield f'angle = "{angle:g} deg" for {name} would do' if does else None

    def _part_ending(self, pair: str) -> str | None:
        """Return the first part with a pad straight on the end of a pair, None without one."""
        nets = self.model.owner_nets[pair]
        return next((name for name in self.model.file.parts if nets & self.model.owner_nets[name]), None)

    def _plain(self, element: str) -> str:
        """Return what can be changed for the kind of element, where nothing that was tried does."""
        model, file = self.model, self.model.file
        asked = file.layout is not None and not is_strip(element)
        hint = file.layout.hints.get(element) if asked else None
        keys = (
            [] if hint is None else [key for key in hint.model_fields_set if getattr(hint, key) is not None]
        )
        if keys:
            return f"give up {' or '.join(sorted(keys))} in [layout.hints.{element}]"
        if element in file.ports:
            return f"another edge or at for {element}, or longer lines beside it"
        if element in file.coupled:
            part = self._part_ending(element)
            first = "" if part is None else f"a line between {element} and {part}, or "
            return f"{first}mode impedances nearer to each other for {element}, or narrower lines at its ends"
        line = model.sized.lines.get(element)
        if line is not None and line.free:
            return f"another order of the arms or ports, or leave or route in [layout.hints.{element}]"
        if element in file.parts and not self._given_lines(element):
            return f"more distance: a line between {element} and what stands beside it"
        return f'longer lines beside {element}, or length = "free" for one of them'

    def _given_lines(self, element: str) -> bool:
        """True where a line of given length meets an element."""
        near = self.model.owner_nets.get(element, frozenset())
        return any(not line.free and near & set(line.nets) for line in self.model.sized.lines.values())


def _other_orders(names: Sequence[str]) -> Iterator[Sequence[str]]:
    """Yield orders of an edge's ports to try: the opposite one, then each with two neighbours swapped."""
    yield names[::-1]
    for k in range(len(names) - 1 if len(names) > 2 else 0):
        yield [*names[:k], names[k + 1], names[k], *names[k + 2 :]]


def _mm(nm: int) -> str:
    """Return a length in mm, as short as it is exact, with one decimal at least."""
    text = f"{nm / 1e6:.6f}".rstrip("0")
    return f"{text}0 mm" if text.endswith(".") else f"{text} mm"


def _named(heading: float) -> str:
    """Return a heading [deg] as a file has it."""
    return f'"{_NAMES[heading]}"' if heading in _NAMES else f'"{heading:g} deg"'
