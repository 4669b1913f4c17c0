"""From a network to its S-parameters, for all frequencies (and samples) at once.

In: a :class:`Network`. Out: S-parameters (B, N, N) as power waves (Kurokawa 1965), so that complex
reference impedances are allowed.

Formulation: nodal admittances, with the ports' own impedances as loads. A two-port whose admittances are
large or infinite - a line near a multiple of half a wavelength, an element of no impedance - keeps its far
current as an unknown instead, with the equation ``V1 - a V2 - b I2 = 0``, which is regular at any length;
measured data keep their incident waves, regular for any S. Only the frequencies that need extra unknowns
get them. Parts of a network that only ground joins are solved one by one. Everything is scaled to 50 ohm.
Small networks go through one batched dense solution, networks of more than ``SPARSE_FROM`` unknowns through
a sparse one per frequency.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
import numpy.typing as npt

from layoutgen.response.chain import Chain, ComplexArray, FloatArray, series
from layoutgen.response.network import GROUND, Block, Branch, Ends, Network, Port, between
from layoutgen.response.reduce import islands, reduce_network

if TYPE_CHECKING:
    from scipy.sparse import csc_array

__all__ = ["SPARSE_FROM", "solve"]

SPARSE_FROM = 300
"""Number of unknowns from which on each frequency is solved by a sparse factorisation."""

_R = 50.0  # scale of all impedances [ohm]
_STIFF = 1e3  # largest scaled admittance between two nodes: costs three digits
_STIFF_TO_GROUND = 1e9  # on the diagonal alone it costs none
_CHUNK_BYTES = 1e6  # of matrices at once: they stay in a processor's cache
_BLOCK = 16  # right-hand sides of one sparse solution

_Rows = npt.NDArray[np.intp]
_Values = ComplexArray | FloatArray | complex
_Stamps = dict[tuple[int, int], ComplexArray]


def solve(network: Network) -> ComplexArray:
    """Return the S-parameters (B, N, N) [-] between the network's ports, to the ports' own impedances.

    Where a lossless part that no port can see is exactly at resonance, the smallest solution is taken; the
    S-parameters do not depend on it.

    >>> from layoutgen.response.chain import line
    >>> from layoutgen.response.network import between
    >>> half_wave = between("a", "b", line(70.0, [np.pi]))
    >>> s = solve(Network(1, (Port("a", 50.0), Port("b", 50.0)), (half_wave,)))
    >>> np.abs(s[0, 0]).round(12).tolist()
    [0.0, 1.0]
    """
    small = reduce_network(_without_grounded_ports(network))
    voltages = np.zeros((small.size, len(small.ports), len(small.ports)), dtype=np.complex128)
    for numbers, island in islands(small):
        voltages[:, numbers[:, None], numbers] = _port_voltages(island)
    return _power_waves(voltages, small.ports)


def _port_voltages(network: Network) -> ComplexArray:
    """Return port voltages for unit currents into loaded ports, (B, N, N) [ohm]."""
    stiff = np.empty((len(network.branches), network.size), dtype=np.bool_)
    for k, branch in enumerate(network.branches):
        stiff[k] = _is_stiff(branch)
    special = np.any(stiff, axis=0)
    voltages = np.empty((network.size, len(network.ports), len(network.ports)), dtype=np.complex128)
    for rows in (np.flatnonzero(~special), np.flatnonzero(special)):
        if rows.size:
            voltages[rows] = _loaded_impedances(network, rows, np.any(stiff[:, rows], axis=1))
    return voltages


def _without_grounded_ports(network: Network) -> Network:
    """Return the network with ports on ground at nodes of their own, shorted to it."""
    ports, shorts = list(network.ports), []
    for k, port in enumerate(ports):
        if port.node == GROUND:
            ports[k] = replace(port, node=f"{GROUND} of port {k}")
            shorts.append(between(ports[k].node, GROUND, series(0.0)))
    return replace(network, ports=tuple(ports), branches=(*network.branches, *shorts))


def _power_waves(loaded: ComplexArray, ports: Sequence[Port]) -> ComplexArray:
    """Return S (B, N, N) from the impedance matrix [ohm] of the network with its ports loaded."""
    z = np.array([port.impedance for port in ports], dtype=np.complex128)
    scale = np.sqrt(z.real) / z
    s = 2.0 * scale[:, None] * loaded * scale[None, :]
    index = np.arange(len(ports))
    s[:, index, index] -= np.conj(z) / z
    return s


def _is_stiff(branch: Branch) -> npt.NDArray[np.bool_]:
    """Say at which frequencies the branch's admittances would spoil the nodal equations."""
    a, b, _, d = branch.chain
    to_ground = any(all(node == GROUND for node, _ in side) for side in (branch.near, branch.far))
    limit = _STIFF_TO_GROUND if to_ground else _STIFF
    largest = np.maximum(1.0, np.abs(a))
    if d is not a:
        largest = np.maximum(largest, np.abs(d))
    return np.asarray(np.abs(b) * (limit / _R) < largest)


class _Unknowns(NamedTuple):
    """Numbers of the unknowns: nodes by name, then a current for each stiff branch, waves for each block."""

    node: dict[str, int]
    current: dict[int, int]
    wave: dict[int, int]
    total: int


def _number(network: Network, stiff: npt.NDArray[np.bool_]) -> _Unknowns:
    """Number the unknowns, in the order in which the network mentions them."""
    node: dict[str, int] = {}
    mentioned = [port.node for port in network.ports]
    mentioned += [name for branch in network.branches for name, _ in branch.near + branch.far]
    mentioned += [name for block in network.blocks for pair in block.ends for name in pair]
    for name in mentioned:
        if name != GROUND:
            node.setdefault(name, len(node))
    count = len(node)
    current = {}
    for k, flag in enumerate(stiff):
        if flag:
            current[k] = count
            count += 1
    wave = {}
    for k, block in enumerate(network.blocks):
        wave[k] = count
        count += len(block.ends)
    return _Unknowns(node, current, wave, count)


def _loaded_impedances(network: Network, rows: _Rows, stiff: npt.NDArray[np.bool_]) -> ComplexArray:
    """Return port voltages for unit currents into loaded ports, (rows, N, N) [ohm]."""
    unknowns = _number(network, stiff)
    own_rows = rows if unknowns.current else slice(None)  # most rows have no extra unknowns: cut them last
    with np.errstate(divide="ignore", invalid="ignore"):
        stamps = _assemble(network, own_rows, unknowns)
    values = np.empty((len(stamps), rows.size if unknowns.current else network.size), dtype=np.complex128)
    for k, value in enumerate(stamps.values()):
        values[k] = value
    if values.shape[1] != rows.size:
        values = values[:, rows]
    positions = np.array(list(stamps))
    at = np.array([unknowns.node[port.node] for port in network.ports])
    right = np.zeros((unknowns.total, at.size), dtype=np.complex128)
    right[at, np.arange(at.size)] = _R
    method = _solve_sparse if unknowns.total > SPARSE_FROM else _solve_dense
    return method(positions, values, right, at)


# -- equations, all scaled by 50 ohm


def _assemble(network: Network, rows: _Rows | slice, unknowns: _Unknowns) -> _Stamps:
    """Return the matrix's non-zero places with their values (rows,)."""
    stamps: _Stamps = {}
    for port in network.ports:
        k = unknowns.node[port.node]
        _add(stamps, k, k, _R / port.impedance)
    for element in network.shunts:
        k = unknowns.node[element.node]
        _add(stamps, k, k, _R * _pick(element.admittance, rows))
    at_once = [k for k in range(len(network.branches)) if _is_usual(network, k, unknowns)]
    if at_once:
        _stamp_usual(stamps, network, at_once, rows, unknowns)
    for number in sorted(set(range(len(network.branches))) - set(at_once)):
        branch = network.branches[number]
        chain = Chain(*(_pick(value, rows) for value in branch.chain))
        near, far = _numbered(branch.near, unknowns), _numbered(branch.far, unknowns)
        if number in unknowns.current:
            _stamp_current(stamps, near, far, chain, unknowns.current[number])
        else:
            _stamp_admittance(stamps, near, far, chain)
    for number, block in enumerate(network.blocks):
        _stamp_block(stamps, block, rows, unknowns, unknowns.wave[number])
    return stamps


def _is_usual(network: Network, number: int, unknowns: _Unknowns) -> bool:
    """Tell whether a branch is a plain two-port between nodes of weight 1, known at every frequency."""
    branch = network.branches[number]
    if number in unknowns.current or len(branch.near) + len(branch.far) != 2:
        return False
    plain = branch.near[0][1] == branch.far[0][1] == 1.0
    return plain and all(np.shape(value) == (network.size,) for value in branch.chain)


def _stamp_usual(
    stamps: _Stamps, network: Network, numbers: Sequence[int], rows: _Rows | slice, unknowns: _Unknowns
) -> None:
    """Add plain two-ports by their admittances, (1/b) [[d, -1], [-1, a]], worked out for all at once."""
    branches = [network.branches[number] for number in numbers]
    a, b, d = (np.array([getattr(branch.chain, key) for branch in branches])[:, rows] for key in "abd")
    transfer = -_R / b
    far_own, near_own = -transfer * a, -transfer * d
    for k, branch in enumerate(branches):
        i, j = (unknowns.node.get(side[0][0], -1) for side in (branch.near, branch.far))
        if i >= 0:
            _add(stamps, i, i, near_own[k])
        if j >= 0:
            _add(stamps, j, j, far_own[k])
        if i >= 0 and j >= 0:
            _add(stamps, i, j, transfer[k])
            _add(stamps, j, i, transfer[k])


def _pick(value: npt.ArrayLike, rows: _Rows | slice) -> ComplexArray:
    """Return the values of some frequencies; a single number stands for all."""
    array = np.asarray(value, dtype=np.complex128)
    return array[rows] if array.ndim else array


def _numbered(ends: Ends, unknowns: _Unknowns) -> list[tuple[int, float]]:
    """Return the numbers and weights of a side, ground left out."""
    return [(unknowns.node[node], weight) for node, weight in ends if node != GROUND]


def _add(stamps: _Stamps, row: int, column: int, value: _Values) -> None:
    """Add a value to one place of the matrix."""
    place = (row, column)
    if place in stamps:
        stamps[place] = stamps[place] + value
    else:
        stamps[place] = np.asarray(value, dtype=np.complex128)


def _stamp_admittance(
    stamps: _Stamps, near: list[tuple[int, float]], far: list[tuple[int, float]], chain: Chain
) -> None:
    """Add a two-port by its admittances: (1/b) [[d, -1], [-1, a]]."""
    transfer = -_R / chain.b
    for sides, value in (((near, near), -transfer * chain.d), ((far, far), -transfer * chain.a)):
        _add_weighted(stamps, *sides, value)
    _add_weighted(stamps, near, far, transfer)
    _add_weighted(stamps, far, near, transfer)


def _add_weighted(
    stamps: _Stamps, side: list[tuple[int, float]], other: list[tuple[int, float]], value: _Values
) -> None:
    """Add a value between two weighted sides."""
    for row, weight in side:
        for column, factor in other:
            _add(stamps, row, column, value if weight == factor == 1.0 else weight * factor * value)


def _stamp_current(
    stamps: _Stamps, near: list[tuple[int, float]], far: list[tuple[int, float]], chain: Chain, k: int
) -> None:
    """Add a two-port by its far current, unknown k: V1 - a V2 - b I2 = 0, its row scaled to order one."""
    a, b, c, d = chain
    scale = 1.0 / (1.0 + np.abs(a) + np.abs(b) / _R)
    this = [(k, 1.0)]
    _add(stamps, k, k, -b / _R * scale)
    _add_weighted(stamps, this, near, scale)
    _add_weighted(stamps, this, far, -a * scale)
    _add_weighted(stamps, near, far, _R * c)
    _add_weighted(stamps, near, this, d)
    _add_weighted(stamps, far, this, -1.0)


def _stamp_block(stamps: _Stamps, block: Block, rows: _Rows | slice, unknowns: _Unknowns, first: int) -> None:
    """Add data by their incident waves x: V = root(z0) (1 + S) x and I = (1 - S) x / root(z0)."""
    s = _pick(block.s, rows)
    root = np.sqrt(block.z0 / _R)
    for i, (plus, minus) in enumerate(block.ends):
        side = _numbered(((plus, 1.0), (minus, -1.0)), unknowns)
        _add_weighted(stamps, [(first + i, 1.0)], side, 1.0)
        for j in range(len(block.ends)):
            own = 1.0 if i == j else 0.0
            _add(stamps, first + i, first + j, -root[i] * (own + s[:, i, j]))
            _add_weighted(stamps, side, [(first + j, 1.0)], (own - s[:, i, j]) / root[i])


# -- solutions


def _solve_dense(positions: _Rows, values: ComplexArray, right: ComplexArray, at: _Rows) -> ComplexArray:
    """Solve for every frequency and keep the unknowns ``at`` (N,): result (F, N, N).

    ``positions`` (K, 2) are the matrix's non-zero places, ``values`` (K, F) what stands there, ``right``
    (n, N) the right-hand sides.
    """
    n, count = right.shape[0], values.shape[1]
    flat = positions[:, 1] * n + positions[:, 0]  # column by column, as the library's solver wants them
    chunk = max(1, int(_CHUNK_BYTES / (16 * n * n)))
    solution = np.empty((count, at.size, right.shape[1]), dtype=np.complex128)
    matrix = np.zeros((min(chunk, count), n * n), dtype=np.complex128)
    for start in range(0, count, chunk):
        part = values[:, start : start + chunk].T
        matrix[: len(part), flat] = part  # the same places every time
        stack = matrix[: len(part)].reshape(-1, n, n).swapaxes(1, 2)
        solution[start : start + chunk] = _solve_batch(stack, right)[:, at]
    return solution


def _solve_batch(matrix: ComplexArray, right: ComplexArray) -> ComplexArray:
    """Solve a stack of equations; where one is exactly singular, the solution of least energy."""
    try:
        return np.asarray(np.linalg.solve(matrix, right))
    except np.linalg.LinAlgError:
        if matrix.shape[0] > 1:
            return np.concatenate([_solve_batch(one[None], right) for one in matrix])
        return np.asarray(np.linalg.lstsq(matrix[0], right)[0], dtype=np.complex128)[None]


def _solve_sparse(positions: _Rows, values: ComplexArray, right: ComplexArray, at: _Rows) -> ComplexArray:
    """Solve as :func:`_solve_dense` does, one sparse factorisation for each frequency."""
    from scipy.sparse import csc_array

    n = right.shape[0]
    order = np.lexsort((positions[:, 0], positions[:, 1]))
    rows = positions[order, 0].astype(np.int32)
    starts = np.searchsorted(positions[order, 1], np.arange(n + 1)).astype(np.int32)
    solution = np.empty((values.shape[1], at.size, right.shape[1]), dtype=np.complex128)
    for k, column in enumerate(np.ascontiguousarray(values[order].T)):
        matrix = csc_array((column, rows, starts), shape=(n, n))
        solution[k] = _solve_one_sparse(matrix, right, at)
    return solution


def _solve_one_sparse(matrix: csc_array, right: ComplexArray, at: _Rows) -> ComplexArray:
    """Factorise one sparse matrix and solve in narrow blocks, which keeps the dense kernels on one thread."""
    from scipy.sparse.linalg import splu

    try:
        factors = splu(matrix, permc_spec="MMD_AT_PLUS_A")
    except RuntimeError:  # exactly singular
        return np.asarray(np.linalg.lstsq(matrix.toarray(), right)[0], dtype=np.complex128)[at]
    blocks = range(0, right.shape[1], _BLOCK)
    return np.concatenate([factors.solve(right[:, k : k + _BLOCK])[at] for k in blocks], axis=1)
