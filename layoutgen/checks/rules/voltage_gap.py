"""The gap between two nets stands the voltage between them.

What: the distance between copper of two nets is at least what IPC-2221B table 6-1 (column
``voltage.condition``) or ``voltage.table`` asks for the direct voltage between them. With both given both
are checked.
Why: across too small a gap dirt and moisture creep, and in the end it arcs.
How measured: exactly, polygon to polygon, on finished copper of both layers; net voltages from the DC
solution, of nets joined by lines the pair with the largest difference. Voltages between the table's rows
belong to the next row; beyond the last row of ``voltage.table`` that row holds and a line of the
not-checked list says so. 10 nm short passes. Nets at one voltage are left to ``copper.min_gap``. RF peak
voltages are not added: the circuit file gives no power.
Source: IPC-2221B (2012) table 6-1 as independent public code cites it; the standard's text was not read.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.near import near_nets
from layoutgen.checks.nodes import joined_nets
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.planar import TOLERANCE_NM
from layoutgen.checks.records import NotChecked
from layoutgen.formulas.limits import ipc2221b_clearance

__all__ = ["RULE"]

CONDITION = "voltage.condition"
TABLE = "voltage.table"
_SAME_VOLTAGE = 1e-9


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each pair of nets too near for their voltage."""
    voltages = _node_voltages(board)
    for name in (CONDITION, TABLE):
        if board.limits.get(name) is None:
            continue
        yield NotChecked(f"{name} (RF peak)", "the circuit file gives no power")
        yield from _beyond(board, name, voltages)
        most = _clearance(board, name, _largest(voltages))
        for layer in board.layers:
            yield from _near(board, layer, name, most, voltages)


def _node_voltages(board: Board) -> Mapping[str, tuple[float, float]]:
    """Return for each node the lowest and highest voltage [V] of its nets."""
    if board.artwork is None:
        return {}
    circuit = board.artwork.placement.sized.circuit
    found: dict[str, list[float]] = {}
    for net, node in joined_nets(circuit.file).items():
        found.setdefault(node, []).append(circuit.dc.voltages.get(net, 0.0))
    return {node: (min(volts), max(volts)) for node, volts in found.items()}


def _between(a: tuple[float, float], b: tuple[float, float]) -> float:
    """Return the largest difference [V] of two ranges."""
    return max(a[1] - b[0], b[1] - a[0])


def _largest(voltages: Mapping[str, tuple[float, float]]) -> float:
    """Return the largest voltage [V] between any two nodes."""
    lows, highs = [low for low, _ in voltages.values()], [high for _, high in voltages.values()]
    return max(highs, default=0.0) - min(lows, default=0.0)


def _clearance(board: Board, name: str, volts: float) -> float:
    """Return the distance [nm] that a voltage [V] asks for."""
    if name == CONDITION:
        return float(ipc2221b_clearance(volts, board.limits.get(CONDITION))) * 1e9
    rows = sorted((float(up_to), float(gap)) for up_to, gap in board.limits.get(TABLE))
    return next((gap for up_to, gap in rows if volts <= up_to), rows[-1][1]) * 1e9


def _beyond(board: Board, name: str, voltages: Mapping[str, tuple[float, float]]) -> Iterator[NotChecked]:
    """Yield a remark when a voltage lies beyond the last row of the user's table."""
    if name != TABLE:
        return
    last = max(float(up_to) for up_to, _ in board.limits.get(TABLE))
    if _largest(voltages) > last:
        yield NotChecked(
            f"{TABLE} (above {last:g} V)", f"voltages reach {_largest(voltages):g} V; the last row is used"
        )


def _near(
    board: Board, layer: Layer, name: str, most: float, voltages: Mapping[str, tuple[float, float]]
) -> Iterator[Hit]:
    """Yield the pairs of one layer that are too near for their voltage."""
    for pair in near_nets(layer, most):
        a, b = layer.pieces[pair.first], layer.pieces[pair.second]
        one, other = voltages.get(a.node or ""), voltages.get(b.node or "")
        if one is None or other is None:
            continue
        volts = _between(one, other)
        limit = _clearance(board, name, volts)
        if abs(volts) > _SAME_VOLTAGE and pair.distance < limit - TOLERANCE_NM:
            asked = f"at least {mm(limit)} for {volts:.1f} V"
            yield Hit(
                rule=name,
                text=f"gap between {a.item} and {b.item} {mm(pair.distance)}, {asked}",
                items=named(a.item, b.item),
                at=pair.at,
                measured=pair.distance / 1e6,
                limit=limit / 1e6,
                unit="mm",
                layer=layer.name,
                nets=named(a.net or "", b.net or ""),
            )


RULE = Rule(names=(CONDITION, TABLE), find=find, either=True, needs_circuit=True)
