"""The circuit stage's one function."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from layoutgen.circuit.banks import bank_order, feed_end
from layoutgen.circuit.dc import nominal_resistances, solve_dc
from layoutgen.circuit.graph import Graph, build_graph
from layoutgen.circuit.loops import independent_loops
from layoutgen.circuit.queries import GROUND, collect_ends, element_key
from layoutgen.circuit.records import Circuit, DcSolution, End, Net
from layoutgen.circuit.shorts import short_faults
from layoutgen.circuit.spine import find_spine
from layoutgen.circuit.supply import dc_nets, width_faults
from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile, RuleFile

__all__ = ["build_circuit", "with_dc"]


def build_circuit(file: CircuitFile, rules: RuleFile) -> Circuit:
    """Return the schematic understood: nets, banks, bias point, spine and loops.

    The bias point is a first one, every line taken as the same number of squares; sizing refines it.

    Args:
        file: The circuit file.
        rules: The rule file it names.

    Raises:
        WrongInputError: No port; elements that hang on no port; a line whose width cannot be told; a
            shorted supply; a spine that cannot be followed. All but the last are reported together.
    """
    ends = collect_ends(file)
    graph = build_graph(file)
    dc = dc_nets(file, ends)
    faults = [*_island_faults(file, graph), *width_faults(file, dc), *short_faults(file, ends)]
    if faults:
        raise WrongInputError(faults)
    solution = solve_dc(file, nominal_resistances(file))
    return Circuit(
        file=file,
        rules=rules,
        nets=_nets(file, ends, dc, solution),
        dc=solution,
        spine=find_spine(file, graph, dc),
        loops=independent_loops(graph),
    )


def with_dc(circuit: Circuit, solution: DcSolution) -> Circuit:
    """Return the circuit with another bias point: its ``dc`` and the voltages of its nets."""
    nets = {
        name: replace(net, voltage=solution.voltages.get(name, 0.0)) for name, net in circuit.nets.items()
    }
    return replace(circuit, dc=solution, nets=nets)


def _nets(
    file: CircuitFile, ends: Mapping[str, tuple[End, ...]], dc: frozenset[str], solution: DcSolution
) -> dict[str, Net]:
    """Return every net; ground is there even when nothing ends on it."""
    nets = {}
    for name, held in ends.items():
        bank = bank_order(file, held) if name != GROUND else ()
        nets[name] = Net(
            name=name,
            ends=held,
            voltage=solution.voltages[name],
            bank=bank,
            feed=feed_end(file, ends, name) if bank else None,
            is_dc=name in dc,
        )
    nets.setdefault(GROUND, Net(name=GROUND, ends=(), voltage=0.0))
    return nets


def _island_faults(file: CircuitFile, graph: Graph) -> list[Fault]:
    """Return a fault for each group of elements that no port belongs to."""
    if not file.ports:
        return [Fault(file.location("ports"), "ports", "no port", "at least one port")]
    faults = []
    for island in graph.islands():
        if any(name in file.ports for name in island):
            continue
        key = element_key(file, island[0])
        rest = f" with {', '.join(island[1:6])}" if island[1:] else ""
        more = f" and {len(island) - 6} more" if len(island) > 6 else ""
        faults.append(
            Fault(
                file.location(key),
                key,
                f"joined to no port{rest}{more}",
                "every element hangs on a port through lines, parts or pairs (gnd joins nothing)",
            )
        )
    return faults
