"""A network as a value: what is joined to what, with the values of its elements for all frequencies.

In: names of nodes and arrays of values. Out: :class:`Network`, which ``solve`` turns into S-parameters. It
knows nothing of boards or circuits. The batch axis (B) of every array is frequency, or samples times
frequencies laid out flat: the solver does not ask which.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from layoutgen.response.chain import Chain, ComplexArray, FloatArray

__all__ = [
    "GROUND",
    "Block",
    "Branch",
    "Ends",
    "Network",
    "Port",
    "Shunt",
    "between",
    "coupled_pair",
    "spread",
]

GROUND = "gnd"
"""The node all voltages refer to."""

Ends = tuple[tuple[str, float], ...]
"""One side of an element: nodes with weights [-]; the side's voltage is the weighted sum."""

_HALF = 0.5**0.5


@dataclass(frozen=True, slots=True, eq=False)
class Branch:
    """A two-port between two weighted sums of node voltages; one node of weight 1 each, in the plain case.

    The current into each node is the side's current times the node's weight, so that power is kept.
    """

    near: Ends
    far: Ends
    chain: Chain


@dataclass(frozen=True, slots=True, eq=False)
class Shunt:
    """An admittance [S], shape (B,), from a node to ground."""

    node: str
    admittance: ComplexArray

    @classmethod
    def susceptance(cls, node: str, value: FloatArray) -> Shunt:
        """Return a lossless shunt of a susceptance [S]."""
        return cls(node, np.asarray(1j * value, dtype=np.complex128))


@dataclass(frozen=True, slots=True, eq=False)
class Block:
    """Measured data: S-parameters ``s`` (B, N, N) [-] to real impedances ``z0`` (N,) [ohm].

    ``ends`` holds for each of the N ports the two nodes that its voltage is counted between.
    """

    ends: tuple[tuple[str, str], ...]
    s: ComplexArray
    z0: FloatArray


@dataclass(frozen=True, slots=True)
class Port:
    """A port of the response: node and reference impedance [ohm], real part positive."""

    node: str
    impedance: complex


@dataclass(frozen=True, slots=True, eq=False)
class Network:
    """Elements and ports, for ``size`` frequencies; a node is a name that an element mentions."""

    size: int
    ports: tuple[Port, ...]
    branches: tuple[Branch, ...] = ()
    shunts: tuple[Shunt, ...] = ()
    blocks: tuple[Block, ...] = ()


def between(near: str, far: str, chain: Chain) -> Branch:
    """Return the plain two-port between two nodes, ground allowed as either."""
    return Branch(((near, 1.0),), ((far, 1.0),), chain)


def coupled_pair(nodes: tuple[str, str, str, str], even: Chain, odd: Chain) -> tuple[Branch, Branch]:
    """Return a symmetric coupled pair as its two modes, each a line of its own.

    Args:
        nodes: First line's ends, then the second's: a1, a2, b1, b2, with a1 beside b1.
        even: Chain parameters of one strip in the even mode.
        odd: The same in the odd mode.
    """
    a1, a2, b1, b2 = nodes
    modes = []
    for chain, sign in ((even, _HALF), (odd, -_HALF)):
        modes.append(Branch(((a1, _HALF), (b1, sign)), ((a2, _HALF), (b2, sign)), chain))
    return modes[0], modes[1]


def spread(network: Network, shape: tuple[int, ...]) -> Network:
    """Return the network with all values to one shape, samples times frequencies, laid out flat.

    Values of the batch's own shape are kept, numbers stand for the whole batch as they are.
    """
    if len(shape) == 1:
        return network
    branches = tuple(
        replace(branch, chain=Chain(*(_flat(value, shape) for value in branch.chain)))
        for branch in network.branches
    )
    shunts = tuple(replace(shunt, admittance=_flat(shunt.admittance, shape)) for shunt in network.shunts)
    blocks = tuple(
        replace(b, s=np.broadcast_to(b.s, (*shape, *b.s.shape[-2:])).reshape(-1, *b.s.shape[-2:]))
        for b in network.blocks
    )
    return replace(network, branches=branches, shunts=shunts, blocks=blocks)


def _flat(value: ComplexArray, shape: tuple[int, ...]) -> ComplexArray:
    """Return a value to a shape, laid out flat."""
    if np.ndim(value) == 0:
        return value
    if value.shape == shape:
        return value.reshape(-1)
    laid_out = np.empty(shape, dtype=np.complex128)
    laid_out[...] = value
    return laid_out.reshape(-1)
