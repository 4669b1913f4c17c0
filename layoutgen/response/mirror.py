"""Which lines of a schematic are mirror images of each other, so that what is done to one is done to all.

In: a circuit file. Out: its lines and pairs given by angle, in groups. Two elements belong together when
they are equal and, as far as one follows the nets from them, surrounded by equal elements: found by giving
elements and nets numbers and refining them by their neighbours' until nothing more is told apart.
"""

from __future__ import annotations

import itertools
from collections.abc import Hashable, Iterable, Mapping
from dataclasses import dataclass

from layoutgen.circuit import GROUND, OPEN
from layoutgen.reading import CircuitFile, Part
from layoutgen.response.rings import loop_numbers

__all__ = ["grouped", "length_groups", "mirror_groups", "mirror_images"]

_PLAIN = ((0, 1), (1, 0))
_PAIR = ((0, 1, 2, 3), (1, 0, 3, 2), (2, 3, 0, 1), (3, 2, 1, 0))
_NO_PART_OF_RF = {"nets", "pins", "rating", "dc", "current", "edge", "at", "to_edge", "net", "voltage"}


@dataclass(frozen=True, slots=True)
class _Element:
    """An element: what it is, its nets, and the orders of its ends that are the same thing."""

    kind: Hashable
    nets: tuple[str, ...]
    orders: tuple[tuple[int, ...], ...]


def mirror_groups(file: CircuitFile) -> tuple[tuple[str, ...], ...]:
    """Return the lines and coupled pairs given by angle, those that are mirror images together.

    Returns:
        Names in file order within a group, groups in the order of their first names.
    """
    colours, _ = mirror_images(file)
    given = [
        name for name in (*file.lines, *file.coupled) if (file.lines.get(name) or file.coupled[name]).angle
    ]
    return grouped(given, colours)


def length_groups(file: CircuitFile) -> tuple[tuple[str, ...], ...]:
    """Return the lines and coupled pairs given by angle, those together that are drawn equally long.

    These are mirror images, and lines that are alike and lie on loops: opposite sides of a hybrid are no
    mirror images when its ports see different things, but drawn to different lengths they might not close.
    """
    loops = loop_numbers({name: element.nets for name, element in _elements(file).items()})
    joined: dict[tuple[str, ...], set[Hashable]] = {}
    for group in mirror_groups(file):
        kinds = {
            (loops[name], _facts(file.lines[name])) for name in group if name in loops and name in file.lines
        }
        met = [other for other, known in joined.items() if kinds & known]
        known = kinds.union(*(joined.pop(other) for other in met))
        joined[tuple(itertools.chain(*met, group))] = known
    return tuple(joined)


def mirror_images(file: CircuitFile) -> tuple[dict[str, int], dict[str, int]]:
    """Return a number for each element and for each net, the same for those that are mirror images."""
    return _refined(_elements(file))


def grouped(names: Iterable[str], colours: Mapping[str, int]) -> tuple[tuple[str, ...], ...]:
    """Return names in groups of the same number, in the order of their first names."""
    groups: dict[int, list[str]] = {}
    for name in names:
        groups.setdefault(colours[name], []).append(name)
    return tuple(tuple(group) for group in groups.values())


def _elements(file: CircuitFile) -> dict[str, _Element]:
    """Return all elements by name."""
    found: dict[str, _Element] = {}
    for name, line in file.lines.items():
        nets = line.nets if len(line.nets) == 2 else (*line.nets, OPEN)
        found[name] = _Element(("line", _facts(line)), nets, _PLAIN)
    for name, pair in file.coupled.items():
        found[name] = _Element(("pair", _facts(pair)), pair.nets, _PAIR)
    for name, port in file.ports.items():
        found[name] = _Element(("port", _facts(port)), (port.net,), ((0,),))
    for name, part in file.parts.items():
        nets = part.nets if part.nets is not None else tuple((part.pins or {}).values())
        pins = tuple(part.pins or {})
        found[name] = _Element(("part", pins, _facts(part)), nets, _part_orders(part, len(nets)))
    return found


def _facts(record: object) -> str:
    """Return what RF knows of a record, as text."""
    fields = type(record).model_fields  # type: ignore[attr-defined]
    return repr([(key, getattr(record, key)) for key in sorted(fields) if key not in _NO_PART_OF_RF])


def _part_orders(part: Part, ends: int) -> tuple[tuple[int, ...], ...]:
    """Return the orders of a part's ends: a chip by value may be turned round."""
    return _PLAIN if part.nets is not None and part.data is None else (tuple(range(ends)),)


def _refined(elements: dict[str, _Element]) -> tuple[dict[str, int], dict[str, int]]:
    """Return a number for each element and each net; equal numbers for those that cannot be told apart."""
    nets = dict.fromkeys(itertools.chain.from_iterable(e.nets for e in elements.values()), 0)
    nets |= {OPEN: 1, GROUND: 2}
    colours = _numbered((name, element.kind) for name, element in elements.items())
    while True:
        before = len(set(colours.values())), len(set(nets.values()))
        met: dict[str, list[tuple[int, int]]] = {net: [] for net in nets}
        for name, element in elements.items():
            for end, net in enumerate(element.nets):
                role = end if len(element.orders) == 1 else 0
                met[net].append((colours[name], role))
        signs: dict[str, Hashable] = {net: (nets[net], tuple(sorted(seen))) for net, seen in met.items()}
        signs |= {OPEN: OPEN, GROUND: GROUND}
        nets = _numbered(signs.items())
        colours = _numbered((name, (colours[name], _seen(e, nets))) for name, e in elements.items())
        if (len(set(colours.values())), len(set(nets.values()))) == before:
            return colours, nets


def _seen(element: _Element, nets: dict[str, int]) -> tuple[int, ...]:
    """Return the numbers of an element's nets, in the smallest of its equal orders."""
    return min(tuple(nets[element.nets[k]] for k in order) for order in element.orders)


def _numbered(items: Iterable[tuple[str, Hashable]]) -> dict[str, int]:
    """Return a number for each name, the same for equal signs."""
    known: dict[Hashable, int] = {}
    return {name: known.setdefault(sign, len(known)) for name, sign in items}
