"""The bias point: net voltages and the current of every element, by nodal analysis.

Lines have the resistances handed in, inductors ``series_resistance`` or none, resistors their value;
capacitors, RF ports and parts of other kinds are open. Currents enter and leave at ports that draw one
and at the pins of parts with ``dc`` entries. Dc ports and ground hold their nets.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from layoutgen.circuit.queries import GROUND, OPEN, collect_ends, two_nets
from layoutgen.circuit.records import DcSolution
from layoutgen.circuit.shorts import short_faults
from layoutgen.errors import WrongInputError
from layoutgen.reading import CircuitFile

__all__ = ["conductor_keys", "nominal_resistances", "solve_dc"]

NOMINAL_SQUARES = 20.0
"""Length over width of every line in the first solution, before any width is known [-]."""


@dataclass(frozen=True, slots=True)
class _Branch:
    """A conductor between two nets; no resistance [ohm] means that it holds them at one voltage."""

    key: str
    start: str
    end: str
    resistance: float


def conductor_keys(file: CircuitFile) -> dict[str, tuple[str, str]]:
    """Return the nets that each line and each strip of a coupled pair (``name:0``, ``name:1``) joins."""
    found = {name: (line.nets[0], line.nets[1]) for name, line in file.lines.items() if len(line.nets) == 2}
    for name, pair in file.coupled.items():
        for i, strip in enumerate((pair.nets[:2], pair.nets[2:])):
            if OPEN not in strip:
                found[f"{name}:{i}"] = (strip[0], strip[1])
    return found


def nominal_resistances(file: CircuitFile) -> dict[str, float]:
    """Return the resistance [ohm] of each line before it is sized: the same number of squares for all."""
    substrate = file.substrate
    sheet = 1.0 / (substrate.conductivity * substrate.copper_thickness)
    return dict.fromkeys(conductor_keys(file), NOMINAL_SQUARES * sheet)


def solve_dc(file: CircuitFile, resistances: Mapping[str, float]) -> DcSolution:
    """Return the bias point of a circuit.

    Args:
        file: The circuit.
        resistances: Resistance of each line, and of each strip of a coupled pair as ``name:0`` and
            ``name:1``, at least for those with two nets [ohm].

    Raises:
        WrongInputError: A dc port is joined to ground or to another voltage by lines and inductors.
        KeyError: A line's resistance is missing.
    """
    ends = collect_ends(file)
    faults = short_faults(file, ends)
    if faults:
        raise WrongInputError(faults)
    branches = _branches(file, resistances)
    held = {port.net: port.voltage or 0.0 for port in file.ports.values() if port.kind == "dc"}
    held[GROUND] = 0.0
    fed, notes = _injections(file)
    groups = _Groups([*ends, GROUND], branches, held)
    lost = groups.drop_unheld(fed)
    levels = {net: held.get(source, 0.0) for net, source in groups.levels(held).items()}
    above = _voltages_above(groups, branches, {net: held[net] - levels[net] for net in held}, fed)
    flows = _resistive_flows(branches, above)
    flows |= _lossless_flows(groups, branches, held, fed, flows)
    currents = _currents(file, branches, flows, fed)
    return DcSolution(
        voltages={net: levels[net] + above[net] for net in ends},
        currents=currents,
        notes=(*notes, *_open_parts(file), *groups.notes(tuple(ends)), *lost),
    )


def _branches(file: CircuitFile, resistances: Mapping[str, float]) -> list[_Branch]:
    """Return everything that conducts, in file order."""
    found = [_Branch(key, *nets, resistances[key]) for key, nets in conductor_keys(file).items()]
    for name, part in file.parts.items():
        nets = two_nets(part)
        if nets is None:
            continue
        if part.kind == "inductor" or (part.kind == "other" and part.series_resistance > 0.0):
            found.append(_Branch(name, *nets, part.series_resistance))
        elif part.kind == "resistor" and part.value is not None:
            found.append(_Branch(name, *nets, part.value + part.series_resistance))
    return found


def _injections(file: CircuitFile) -> tuple[dict[str, float], list[str]]:
    """Return the current [A] put into each net by pins and by ports that draw one (negative), and notes."""
    fed: dict[str, float] = {}
    notes = []
    for name, port in file.ports.items():
        if port.current is None:
            continue
        if port.kind == "dc":
            notes.append(f"ports.{name}: its current follows from the circuit; the one given is not used")
        else:
            fed[port.net] = fed.get(port.net, 0.0) - port.current
    for part in file.parts.values():
        for draw in part.dc:
            pins = part.pins or {}
            fed[pins[draw.from_]] = fed.get(pins[draw.from_], 0.0) - draw.current
            fed[pins[draw.to]] = fed.get(pins[draw.to], 0.0) + draw.current
    return fed, notes


def _open_parts(file: CircuitFile) -> list[str]:
    """Return a note for each part that may conduct in truth but is open here; none without a dc port."""
    if all(port.kind != "dc" for port in file.ports.values()):
        return []
    silent = [name for name, part in file.parts.items() if part.kind == "transistor" and not part.dc]
    other = [
        name
        for name, part in file.parts.items()
        if part.kind == "other" and part.series_resistance == 0.0 and not part.dc
    ]
    notes = [f"no dc currents are given, taken as none: part {', '.join(silent)}"] if silent else []
    if other:
        notes.append(
            f"kind other without series_resistance, taken as open for direct current: {', '.join(other)}"
        )
    return notes


class _Groups:
    """Nets joined without resistance, and the islands that resistances join them to."""

    def __init__(self, nets: list[str], branches: list[_Branch], held: Mapping[str, float]) -> None:
        """Join the nets."""
        self.nets = tuple(dict.fromkeys(nets))
        self.group = _joined(self.nets, [branch for branch in branches if branch.resistance <= 0.0])
        self.island = _joined(self.nets, branches)
        self.held_islands = {self.island[net] for net in held if net in self.island}

    def is_held(self, net: str) -> bool:
        """Tell whether a net has a DC path to ground or to a dc port."""
        return self.island[net] in self.held_islands

    def drop_unheld(self, fed: dict[str, float]) -> list[str]:
        """Take out of ``fed`` the currents of islands that could not return, and return a note for each."""
        total: dict[str, float] = {}
        for net, current in fed.items():
            if not self.is_held(net):
                total[self.island[net]] = total.get(self.island[net], 0.0) + current
        lost = {island for island, current in total.items() if abs(current) > 1e-12}
        notes = []
        for net in [net for net in fed if self.island[net] in lost]:
            current = fed.pop(net)
            notes.append(f"net {net}: {abs(current):g} A have no DC path and are left out")
        return notes

    def levels(self, held: Mapping[str, float]) -> dict[str, str]:
        """Return for each net the first held net of its island, or the island's own first net."""
        first: dict[str, str] = {}
        for net in held:
            if net in self.island:
                first.setdefault(self.island[net], net)
        return {net: first.get(self.island[net], net) for net in self.nets}

    def notes(self, ends: tuple[str, ...]) -> list[str]:
        """Return a note that names the nets without a DC path."""
        unheld = [net for net in ends if not self.is_held(net)]
        return [f"no DC path to gnd or to a dc port, taken as 0 V: net {', '.join(unheld)}"] if unheld else []


def _joined(nets: tuple[str, ...], branches: list[_Branch]) -> dict[str, str]:
    """Return a representative net for each net: the first of those that the branches join it to."""
    parent = {net: net for net in nets}

    def root(net: str) -> str:
        while parent[net] != net:
            parent[net] = parent[parent[net]]
            net = parent[net]
        return net

    rank = {net: i for i, net in enumerate(nets)}
    for branch in branches:
        a, b = sorted((root(branch.start), root(branch.end)), key=rank.__getitem__)
        parent[b] = a
    return {net: root(net) for net in nets}


def _voltages_above(
    groups: _Groups, branches: list[_Branch], held: Mapping[str, float], fed: Mapping[str, float]
) -> dict[str, float]:
    """Return every net's voltage [V] above its island's level; ``held`` likewise.

    Solving for the drops alone keeps microvolts exact beside a supply of many volts.
    """
    fixed = {groups.group[net]: voltage for net, voltage in held.items()}
    live = {groups.island[net] for net, value in (*held.items(), *fed.items()) if value != 0.0}
    for island in sorted(live - groups.held_islands):
        fixed[groups.group[island]] = 0.0  # nothing holds it: its first net is the reference
    unknown = [
        net
        for net in groups.nets
        if groups.group[net] == net and net not in fixed and groups.island[net] in live
    ]
    solved = _nodal(groups, branches, fixed, fed, unknown)
    return {net: solved.get(groups.group[net], 0.0) for net in groups.nets}


def _nodal(
    groups: _Groups,
    branches: list[_Branch],
    fixed: dict[str, float],
    fed: Mapping[str, float],
    unknown: list[str],
) -> dict[str, float]:
    """Return the voltage [V] of the fixed and unknown groups."""
    place = {net: i for i, net in enumerate(unknown)}
    matrix = np.zeros((len(unknown), len(unknown)))
    right = np.zeros(len(unknown))
    for net, current in fed.items():
        if groups.group[net] in place:
            right[place[groups.group[net]]] += current
    for branch in branches:
        if branch.resistance <= 0.0:
            continue
        a, b = groups.group[branch.start], groups.group[branch.end]
        for here, there in ((a, b), (b, a)):
            if here not in place or here == there:
                continue
            i = place[here]
            matrix[i, i] += 1.0 / branch.resistance
            if there in place:
                matrix[i, place[there]] -= 1.0 / branch.resistance
            else:
                right[i] += fixed[there] / branch.resistance
    voltages = np.linalg.solve(matrix, right) if unknown else right
    return fixed | {net: float(voltages[i]) for net, i in place.items()}


def _resistive_flows(branches: list[_Branch], voltages: Mapping[str, float]) -> dict[str, float]:
    """Return the current [A] of each branch that has a resistance, from its start to its end."""
    return {
        branch.key: (voltages[branch.start] - voltages[branch.end]) / branch.resistance
        for branch in branches
        if branch.resistance > 0.0
    }


def _lossless_flows(
    groups: _Groups,
    branches: list[_Branch],
    held: Mapping[str, float],
    fed: Mapping[str, float],
    flows: Mapping[str, float],
) -> dict[str, float]:
    """Return the current [A] of each branch without resistance; equal ones in parallel share equally.

    Each net's balance gives one equation; sources at held nets are unknown too. Of the solutions (several
    where such branches form a loop) the one with the least sum of squares is taken.
    """
    lossless = [branch for branch in branches if branch.resistance <= 0.0]
    if not lossless:
        return {}
    nets = list(dict.fromkeys(net for branch in lossless for net in (branch.start, branch.end)))
    row = {net: i for i, net in enumerate(nets)}
    held_here = [net for net in nets if net in held or _is_reference(groups, net)]
    matrix = np.zeros((len(nets), len(lossless) + len(held_here)))
    for k, branch in enumerate(lossless):
        matrix[row[branch.start], k] += 1.0
        matrix[row[branch.end], k] -= 1.0
    for k, net in enumerate(held_here):
        matrix[row[net], len(lossless) + k] = -1.0
    right = np.array([fed.get(net, 0.0) - _leaving(branches, flows, net) for net in nets])
    solved = np.linalg.lstsq(matrix, right, rcond=None)[0]
    return {branch.key: float(solved[k]) for k, branch in enumerate(lossless)}


def _is_reference(groups: _Groups, net: str) -> bool:
    """Tell whether a net is the reference of an island that nothing holds."""
    return not groups.is_held(net) and groups.island[net] == net


def _leaving(branches: list[_Branch], flows: Mapping[str, float], net: str) -> float:
    """Return the current [A] that leaves a net through branches whose flow is known."""
    out = 0.0
    for branch in branches:
        current = flows.get(branch.key, 0.0)
        out += current * ((branch.start == net) - (branch.end == net))
    return out


def _currents(
    file: CircuitFile, branches: list[_Branch], flows: Mapping[str, float], fed: Mapping[str, float]
) -> dict[str, float]:
    """Return the current [A] of every element under its key; a line's own ``current`` overrides."""
    scale = max([abs(value) for value in (*flows.values(), *fed.values())], default=0.0)
    currents = {key: _snapped(flows.get(key, 0.0), scale) for key in _all_keys(file)}
    for name, line in file.lines.items():
        if line.current is not None:
            currents[name] = line.current
    for name, part in file.parts.items():
        for draw in part.dc:
            currents[f"{name}.{draw.from_}"] += draw.current
            currents[f"{name}.{draw.to}"] -= draw.current
    sharing = [port.net for port in file.ports.values() if port.kind == "dc"]
    for name, port in file.ports.items():
        if port.kind == "dc":
            source = _leaving(branches, flows, port.net) - fed.get(port.net, 0.0)
            currents[name] = -_snapped(source, scale) / sharing.count(port.net) or 0.0
        else:
            currents[name] = port.current or 0.0
    return currents


def _snapped(current: float, scale: float) -> float:
    """Return a current [A], zero where it is only the rounding of others as large as ``scale``."""
    return current if abs(current) > 1e-12 * scale else 0.0


def _all_keys(file: CircuitFile) -> list[str]:
    """Return the key of every current: lines, strips, parts, pins, ports, in file order."""
    strips = [f"{name}:{i}" for name in file.coupled for i in (0, 1)]
    parts = []
    for name, part in file.parts.items():
        two_pads = two_nets(part) is not None
        parts += [name] if two_pads else []
        parts += [f"{name}.{pin}" for pin in part.pins or ()] if part.dc or not two_pads else []
    return [*file.ports, *file.lines, *strips, *parts]
