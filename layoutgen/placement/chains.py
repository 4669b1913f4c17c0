"""Nets in which more than four ends meet: a chain of junctions with at most four arms each, joined by strips.

The walk is to meet nothing but tees and crosses. So such a net is taken apart before it (``chained``): each
junction becomes a net of its own, the strips between them lines of given length, drawn straight. ``links``
says who leaves where, and how wide and long the strips are. Once all has a place the names are again the
circuit's, and the strips are strips (``unchained``): in no line's budget, but part of what is drawn. Names
made here hold a space, which those of a circuit file cannot.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

from layoutgen.circuit import Circuit, Net
from layoutgen.circuit.queries import collect_ends, element_key
from layoutgen.errors import InfeasibleError
from layoutgen.origin import Origin
from layoutgen.placement.links import Chain, chain_of
from layoutgen.placement.loops import Loops, find_loops
from layoutgen.placement.model import GROUND, strip_owner
from layoutgen.placement.records import PlacedLine, PlacedPart, Placement, Strip
from layoutgen.placement.tour import MOST_ARMS, walked_hubs
from layoutgen.reading import CircuitFile, Hint, Line, Part, Route
from layoutgen.sizing import BudgetEntry, Lands, SizedCircuit, SizedLine

__all__ = ["chained", "holds_chain", "is_strip", "told", "unchained"]

Homes = Mapping[tuple[str, int], str]
"""The junction's net of each end that is moved to one, by element and number of the end."""


def chained(sized: SizedCircuit, longer: float = 0.0, *, combed: bool = False) -> SizedCircuit:
    """Return the circuit with its nets of more than four arms as chains of junctions; most are as they were.

    A net with a bank stays: its parts stand on a strip of their own.

    Args:
        sized: The circuit.
        longer: How much longer strips are to be than the arms on them ask, in widths of the spacing rule [-].
        combed: Whether lines that leave a chain sideways are to be straight, out of each other's way.
    """
    if not any(_is_crowded(net) for net in sized.circuit.nets.values()) or not sized.lines:
        return sized
    loops = _loops(sized)
    for hub in walked_hubs(sized.circuit, loops).values():
        net = sized.circuit.nets[hub.net]
        arms = [end for end in net.ends if end.element not in loops.companions]
        if _is_crowded(net) and len(arms) > MOST_ARMS:
            chain = chain_of(sized, hub, arms, loops, longer)
            sized = _with_chain(sized, chain, _to_comb(sized, chain, loops) if combed else ())
    return sized


def _to_comb(sized: SizedCircuit, chain: Chain, loops: Loops) -> list[str]:
    """Return the lines of given length that leave a chain sideways and that no hint or loop holds."""
    bound = {*chain.mains, *sized.circuit.file.layout.hints}
    bound |= {name for cluster in loops.clusters for name in cluster.elements}
    lines = (sized.lines.get(end.element) for group in chain.groups for end in group)
    return [line.name for line in lines if line is not None and not line.free and line.name not in bound]


def holds_chain(sized: SizedCircuit) -> bool:
    """True for a circuit that :func:`chained` changed."""
    return any(name != _net_name(name) for name in sized.circuit.nets)


def is_strip(element: str) -> bool:
    """True for a strip of a chain, while it is a line; no element of a circuit file has such a name."""
    return element != _net_name(element)


def _is_crowded(net: Net) -> bool:
    """True for a net in which more ends meet than a junction has arms."""
    return len(net.ends) > MOST_ARMS and net.name != GROUND and not net.bank


def _loops(sized: SizedCircuit) -> Loops:
    """Return how loops are laid; those without a line to cut them at as wide ones."""
    try:
        return find_loops(sized)
    except InfeasibleError:
        return find_loops(sized, wide=True)


def _junction(net: str, k: int) -> str:
    """Return the name of a chain's junction: the first has the net's own."""
    return net if k == 0 else f"{net} ({k + 1})"


def _strip_name(net: str, k: int) -> str:
    """Return the name of a chain's strip while it is a line."""
    return f"strip {k + 1} of {net}"


def _net_name(name: str) -> str:
    """Return the circuit's net of a junction."""
    return name.partition(" ")[0]


# -- taking apart ----------------------------------------------------------------------------------------


def _with_chain(sized: SizedCircuit, chain: Chain, combed: Sequence[str]) -> SizedCircuit:
    """Return the circuit with one net as a chain; the lines ``combed`` are to be straight, too."""
    homes = {
        (end.element, end.index): _junction(chain.net, k)
        for k, group in enumerate(chain.groups)
        for end in group
    }
    strips = dict(_strips(sized, chain))
    file = _file_with(sized.circuit.file, homes, strips, combed)
    return replace(
        sized,
        circuit=_circuit_with(sized.circuit, file, chain),
        lines={name: _moved(line, homes) for name, line in sized.lines.items()} | strips,
        pairs={name: replace(pair, nets=_nets(name, pair.nets, homes)) for name, pair in sized.pairs.items()},
        radials={
            name: replace(stub, nets=_nets(name, stub.nets, homes)) for name, stub in sized.radials.items()
        },
        lands={name: _lands_with(lands, chain, homes, file) for name, lands in sized.lands.items()},
    )


def _nets(name: str, nets: Sequence[str], homes: Homes) -> tuple[str, ...]:
    """Return an element's nets with those of junctions."""
    return tuple(homes.get((name, index), net) for index, net in enumerate(nets))


def _moved(line: SizedLine, homes: Homes) -> SizedLine:
    """Return a line between its junctions."""
    return replace(line, nets=_nets(line.name, line.nets, homes))


def _strips(sized: SizedCircuit, chain: Chain) -> Iterator[tuple[str, SizedLine]]:
    """Yield a chain's strips as lines; what they are worth is that of the net's line nearest in width."""
    at = [end.element for group in chain.groups for end in group if end.element in sized.lines]
    like = min(
        (sized.lines[name] for name in (at or sized.lines)), key=lambda line: abs(line.width - chain.width)
    )
    for k, (length, current) in enumerate(zip(chain.lengths, chain.currents, strict=True)):
        name = _strip_name(chain.net, k)
        yield (
            name,
            replace(
                like,
                name=name,
                nets=(_junction(chain.net, k), _junction(chain.net, k + 1)),
                width=chain.width,
                asked_impedance=None,
                angle=None,
                length=length,
                free=False,
                rf=not sized.circuit.nets[chain.net].is_dc,
                current=current,
            ),
        )


def _file_with(
    file: CircuitFile, homes: Homes, strips: Mapping[str, SizedLine], combed: Sequence[str]
) -> CircuitFile:
    """Return the circuit file with junctions and strips, and with lines that are to be straight."""
    made = {
        name: Line.model_construct(nets=line.nets, width=line.width, length=line.length)
        for name, line in strips.items()
    }
    straight = Hint.model_construct(route=Route((None,), ()))
    layout = file.layout.model_copy(
        update={"hints": {**file.layout.hints, **dict.fromkeys((*strips, *combed), straight)}}
    )
    return file.model_copy(
        update={
            "ports": {
                name: port.model_copy(update={"net": homes.get((name, 0), port.net)})
                for name, port in file.ports.items()
            },
            "lines": {
                name: line.model_copy(update={"nets": _nets(name, line.nets, homes)})
                for name, line in file.lines.items()
            }
            | made,
            "coupled": {
                name: pair.model_copy(update={"nets": _nets(name, pair.nets, homes)})
                for name, pair in file.coupled.items()
            },
            "parts": {name: _part_with(name, part, homes) for name, part in file.parts.items()},
            "layout": layout,
        }
    )


def _part_with(name: str, part: Part, homes: Homes) -> Part:
    """Return a part at its junctions."""
    if part.nets is not None:
        return part.model_copy(update={"nets": _nets(name, part.nets, homes)})
    pins = part.pins or {}
    moved = dict(zip(pins, _nets(name, tuple(pins.values()), homes), strict=True))
    return part.model_copy(update={"pins": moved})


def _circuit_with(circuit: Circuit, file: CircuitFile, chain: Chain) -> Circuit:
    """Return the circuit of a file in which one net is a chain."""
    ends = collect_ends(file)
    nets: dict[str, Net] = {}
    for name, net in circuit.nets.items():
        junctions = [_junction(name, k) for k in range(len(chain.groups))] if name == chain.net else [name]
        nets |= {inner: replace(net, name=inner, ends=ends.get(inner, ())) for inner in junctions}
    strips = [_strip_name(chain.net, k) for k in range(len(chain.lengths))]
    currents = {**circuit.dc.currents, **dict(zip(strips, chain.currents, strict=True))}
    return replace(
        circuit,
        file=file,
        nets=nets,
        dc=replace(circuit.dc, currents=currents),
        spine=tuple(_spine_with(circuit.spine, chain, strips)),
    )


def _spine_with(spine: Sequence[str], chain: Chain, strips: Sequence[str]) -> Iterator[str]:
    """Yield the spine with a chain's strips between the two of its elements that are its ends."""
    before, after = chain.mains
    for k, name in enumerate(spine):
        yield name
        if name == before and after in spine[k + 1 : k + 2]:
            yield from strips


def _lands_with(lands: Lands, chain: Chain, homes: Homes, file: CircuitFile) -> Lands:
    """Return a part's footprint with its pads on the nets of their junctions."""
    part = file.parts[lands.part]
    if all(land.net != chain.net for land in lands.pads):
        return lands
    own = dict(enumerate(part.nets)) if part.nets is not None else {}
    pinned = [homes[lands.part, end] for end in range(len(part.pins or ())) if (lands.part, end) in homes]
    ports = [homes[name, 0] for name in file.ports if (name, 0) in homes]  # a launch stands at its port
    home = next(iter([*pinned, *ports]), chain.net)
    pads = tuple(
        replace(land, net=own.get(index, home)) if land.net == chain.net else land
        for index, land in enumerate(lands.pads)
    )
    return replace(lands, pads=pads)


# -- putting together ------------------------------------------------------------------------------------


def unchained(found: Placement, sized: SizedCircuit) -> Placement:
    """Return a placement as one of the circuit asked for: its own nets, and the strips of chains as strips.

    Args:
        found: The placement of :func:`chained`.
        sized: The circuit asked for.
    """
    strips = [line for name, line in found.lines.items() if name not in sized.lines]
    if not strips:
        return replace(found, sized=replace(found.sized, circuit=sized.circuit))
    return replace(
        found,
        sized=_sized_again(found.sized, sized),
        lines={name: _line_again(line) for name, line in found.lines.items() if name in sized.lines},
        pairs={
            name: replace(pair, nets=_nets_again(pair.nets), budget=_budget_again(pair.budget))
            for name, pair in found.pairs.items()
        },
        radials={name: replace(stub, nets=_nets_again(stub.nets)) for name, stub in found.radials.items()},
        parts={name: _part_again(part) for name, part in found.parts.items()},
        ports={name: replace(port, net=_net_name(port.net)) for name, port in found.ports.items()},
        strips=tuple(_strips_again(found, strips, sized)),
        notes=tuple((rule, element, told(text, found.sized)) for rule, element, text in found.notes),
    )


def _sized_again(found: SizedCircuit, sized: SizedCircuit) -> SizedCircuit:
    """Return the sizes that a placement was made with, between the circuit's own nets."""
    return replace(
        found,
        circuit=sized.circuit,
        lines={name: replace(found.lines[name], nets=line.nets) for name, line in sized.lines.items()},
        pairs={name: replace(found.pairs[name], nets=pair.nets) for name, pair in sized.pairs.items()},
        radials=sized.radials,
        lands=sized.lands,
    )


def _nets_again(nets: Sequence[str]) -> tuple[str, ...]:
    return tuple(_net_name(net) for net in nets)


def _budget_again(budget: Sequence[BudgetEntry]) -> tuple[BudgetEntry, ...]:
    """Return a budget whose entries name the circuit's nets; bends keep their number."""
    return tuple(
        replace(entry, at=_net_name(entry.at)) if entry.at.endswith(")") else entry for entry in budget
    )


def _line_again(line: PlacedLine) -> PlacedLine:
    return replace(line, nets=_nets_again(line.nets), budget=_budget_again(line.budget))


def _part_again(part: PlacedPart) -> PlacedPart:
    return replace(part, pads=tuple(replace(pad, net=_net_name(pad.net)) for pad in part.pads))


def _strips_again(found: Placement, lines: Sequence[PlacedLine], sized: SizedCircuit) -> Iterator[Strip]:
    """Yield all strips under their nets' names, numbered where a net has several: those of chains first."""
    made = [
        Strip(
            name="",
            net=_net_name(line.nets[0]),
            width=line.width,
            path=line.path,
            current=found.sized.lines[line.name].current,
            origin=_origin(line, sized),
        )
        for line in lines
    ]
    count: dict[str, int] = {}
    for strip in (*made, *found.strips):
        net = _net_name(strip.net)
        count[net] = count.get(net, 0) + 1
        name = strip_owner(net) if count[net] == 1 else f"{strip_owner(net)}.{count[net]}"
        yield replace(strip, name=name, net=net)


def _origin(strip: PlacedLine, sized: SizedCircuit) -> Origin:
    """Return where a strip comes from: what ends first in its net."""
    file = sized.circuit.file
    element = sized.circuit.nets[_net_name(strip.nets[0])].ends[0].element
    return Origin(element, file.location(element_key(file, element)))


def told(text: str, sized: SizedCircuit) -> str:
    """Return a text about a circuit made by :func:`chained` in which junctions have their net's name."""
    for name in sized.circuit.nets:
        if name != _net_name(name):
            text = text.replace(name, _net_name(name))
    return text
