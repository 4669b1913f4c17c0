"""The nodal solution against identities and against scikit-rf."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.response import solve as solve_module
from layoutgen.response.chain import Chain, line, series, shunt
from layoutgen.response.network import (
    GROUND,
    Block,
    Branch,
    Network,
    Port,
    Shunt,
    between,
    coupled_pair,
    spread,
)
from layoutgen.response.reduce import reduce_network
from layoutgen.response.solve import solve

FREQUENCIES = np.linspace(1e9, 4e9, 31)
OMEGA = 2.0 * np.pi * FREQUENCIES


def random_element(rng: np.random.Generator, lossless: bool) -> Chain:
    """Return a line or a chip part with values of the trade."""
    kind = int(rng.integers(0, 4 if lossless else 5))
    if kind == 0:
        return series(1j * OMEGA * rng.uniform(0.2e-9, 10e-9))
    if kind == 1:
        return series(1.0 / (1j * OMEGA * rng.uniform(0.3e-12, 30e-12)))
    if kind == 4:
        return series(np.full_like(OMEGA, rng.uniform(1.0, 300.0)))
    loss = 0.0 if lossless else 1j * rng.uniform(0.0, 0.05)
    return line(rng.uniform(15.0, 120.0), rng.uniform(0.1, 6.0) * FREQUENCIES / 2e9 * (1.0 - loss))


def random_network(
    seed: int, nodes: int = 8, extra: int = 4, lossless: bool = False, pairs: int = 1
) -> Network:
    """Return a connected random network with three ports, of which one may be complex.

    A random tree over the nodes, ``extra`` more elements that close loops or go to ground, and coupled
    pairs between four different nodes.
    """
    rng = np.random.default_rng(seed)
    branches: list[Branch] = [
        between(f"n{k}", f"n{rng.integers(0, k)}", random_element(rng, lossless)) for k in range(1, nodes)
    ]
    for _ in range(extra):
        near, far = rng.choice(nodes + 1, 2, replace=False)
        names = [GROUND if k == nodes else f"n{k}" for k in (near, far)]
        branches.append(between(names[0], names[1], random_element(rng, lossless)))
    for _ in range(pairs):
        four = [f"n{k}" for k in rng.choice(nodes, 4, replace=False)]
        odd, angle = rng.uniform(30.0, 50.0), rng.uniform(0.2, 4.0) * FREQUENCIES / 2e9
        even = odd + rng.uniform(1.0, 60.0)
        branches += coupled_pair(
            (four[0], four[1], four[2], four[3]), line(even, angle), line(odd, 0.9 * angle)
        )
    at = rng.choice(nodes, 3, replace=False)
    ports = (
        Port(f"n{at[0]}", 50.0),
        Port(f"n{at[1]}", complex(rng.uniform(5.0, 100.0), rng.uniform(-40.0, 40.0))),
        Port(f"n{at[2]}", complex(rng.uniform(5.0, 100.0))),
    )
    return Network(FREQUENCIES.size, ports, tuple(branches))


def two_port(*branches: Branch, ports: tuple[complex, complex] = (50.0, 50.0), size: int = 1) -> np.ndarray:
    """Return S (B, 2, 2) between the nodes a and b."""
    return solve(Network(size, (Port("a", ports[0]), Port("b", ports[1])), branches))


class TestSingularElements:
    """What has no admittance matrix: the usual nodal equations give infinities here."""

    @pytest.mark.parametrize("halves", [0, 1, 2, 3, 7, 100])
    def test_a_line_of_whole_half_waves_passes_all(self, halves: int) -> None:
        s = two_port(between("a", "b", line(93.0, [halves * math.pi])))
        assert s[0] == pytest.approx(np.array([[0.0, (-1.0) ** halves], [(-1.0) ** halves, 0.0]]), abs=1e-12)

    @pytest.mark.parametrize("offset", [1e-3, 1e-6, 1e-9, 1e-12, 1e-15])
    def test_near_a_half_wave_the_result_stays_exact(self, offset: float) -> None:
        """An ill-conditioned formulation loses digits as the offset falls."""
        z, theta = 2.0, math.pi + offset
        s = two_port(between("a", "b", line(100.0, [theta])))
        bottom = 2.0 * math.cos(theta) + 1j * (z + 1.0 / z) * math.sin(theta)
        assert s[0, 1, 0] == pytest.approx(2.0 / bottom, abs=1e-12)
        assert s[0, 0, 0] == pytest.approx(1j * (z - 1.0 / z) * math.sin(theta) / bottom, abs=1e-12)

    def test_an_element_of_no_impedance_joins_its_nodes(self) -> None:
        assert two_port(between("a", "b", series([0.0])))[0] == pytest.approx(
            np.array([[0, 1], [1, 0]]), abs=1e-15
        )

    def test_a_short_to_ground_reflects_all(self) -> None:
        through = between("a", "b", line(50.0, [0.3]))
        s = two_port(through, between("b", GROUND, series([0.0])))
        assert s[0, 1, 1] == pytest.approx(-1.0, abs=1e-14)
        assert abs(s[0, 1, 0]) < 1e-14

    def test_a_quarter_wave_open_stub_shorts_its_node(self) -> None:
        s = two_port(between("a", "b", line(50.0, [0.3])), between("a", "end", line(70.0, [math.pi / 2])))
        assert s[0, 0, 0] == pytest.approx(-1.0, abs=1e-12)
        assert abs(s[0, 1, 0]) < 1e-12

    def test_half_wave_coupled_pair(self) -> None:
        """Both modes of the pair are singular at once."""
        chains = line(70.0, [math.pi]), line(36.0, [math.pi])
        ports = tuple(Port(node, 50.0) for node in ("a1", "a2", "b1", "b2"))
        s = solve(Network(1, ports, coupled_pair(("a1", "a2", "b1", "b2"), *chains)))[0]
        expected = np.zeros((4, 4))
        expected[[0, 1, 2, 3], [1, 0, 3, 2]] = -1.0
        assert s == pytest.approx(expected, abs=1e-12)

    def test_a_resonance_that_no_port_sees_does_no_harm(self) -> None:
        """Two equal lines to ground behind a balanced bridge: an exactly singular matrix at resonance."""
        half, quarter = line(50.0, [math.pi]), line(50.0, [math.pi / 2])
        ring = (between("x", "y", half), between("x", "y", half), between("a", "x", quarter))
        s = two_port(*ring, between("y", "b", quarter))
        assert abs(s[0, 1, 0]) == pytest.approx(1.0, abs=1e-12)


class TestOpenAndUnseen:
    def test_a_port_with_nothing_else_reflects_all(self) -> None:
        assert solve(Network(1, (Port("a", 50.0),)))[0, 0, 0] == pytest.approx(1.0)

    def test_a_part_no_port_reaches_changes_nothing(self) -> None:
        """A half-wave line on nets of its own is a resonance that would make the matrix singular."""
        through = between("a", "b", line(60.0, [0.7]))
        island = between("p", "q", line(60.0, [math.pi]))
        assert np.array_equal(two_port(through, island), two_port(through))

    def test_what_is_joined_through_ground_only_is_unseen(self) -> None:
        through = between("a", "b", line(60.0, [0.7]))
        assert np.array_equal(two_port(through, between("p", GROUND, series([1.0]))), two_port(through))

    def test_two_ports_on_one_node_share_it(self) -> None:
        s = solve(Network(1, (Port("a", 50.0), Port("a", 50.0))))
        assert s[0] == pytest.approx(np.array([[0.0, 1.0], [1.0, 0.0]]), abs=1e-15)


class TestPorts:
    def test_a_port_at_the_conjugate_impedance_sees_no_reflection(self) -> None:
        """Power waves; with voltage waves this would be 0.6 and not 0."""
        z = 9.0 - 6.0j
        s = two_port(between("a", "b", series([0.0])), ports=(z, z.conjugate()))
        assert np.abs(s[0, 0, 0]) == pytest.approx(0.0, abs=1e-15)
        assert np.abs(s[0, 1, 0]) == pytest.approx(1.0, abs=1e-15)

    def test_lossless_is_unitary_at_complex_ports(self) -> None:
        s = two_port(between("a", "b", line(33.0, [1.1])), ports=(9.0 - 6.0j, 7.0 + 4.0j))
        assert s[0].conj().T @ s[0] == pytest.approx(np.eye(2), abs=1e-14)

    def test_a_port_on_ground_is_shorted(self) -> None:
        """Its power wave is -z*/z of what came in, and nothing reaches the other port."""
        z = 9.0 - 6.0j
        s = solve(Network(1, (Port("a", 50.0), Port(GROUND, z))))[0]
        assert s == pytest.approx(np.diag([1.0, -z.conjugate() / z]), abs=1e-15)

    def test_no_ports_no_parameters(self) -> None:
        assert solve(Network(3, ())).shape == (3, 0, 0)


class TestIdentities:
    @pytest.mark.parametrize("seed", range(20))
    def test_reciprocal(self, seed: int) -> None:
        s = solve(random_network(seed))
        assert np.max(np.abs(s - np.swapaxes(s, 1, 2))) < 1e-12

    @pytest.mark.parametrize("seed", range(20))
    def test_lossless_is_unitary(self, seed: int) -> None:
        s = solve(random_network(seed, lossless=True))
        assert np.max(np.abs(np.swapaxes(s.conj(), 1, 2) @ s - np.eye(3))) < 1e-12

    @given(st.integers(0, 2**32 - 1), st.integers(4, 16), st.integers(0, 12))
    @settings(max_examples=60, deadline=None)
    def test_passive(self, seed: int, nodes: int, extra: int) -> None:
        s = solve(random_network(seed, nodes, extra))
        assert np.max(np.linalg.norm(s, 2, axis=(1, 2))) < 1.0 + 1e-10

    @given(st.integers(0, 2**32 - 1))
    @settings(max_examples=30, deadline=None)
    def test_chains_as_one_two_port_change_nothing(self, seed: int) -> None:
        """The reduction must leave the same S as the network with all its nodes."""
        network = random_network(seed, 12, 3)
        everywhere = tuple(Port(f"n{k}", 1e12) for k in range(12))
        kept = Network(network.size, network.ports + everywhere, network.branches)
        assert solve(network) == pytest.approx(solve(kept)[:, :3, :3], abs=1e-8)

    @pytest.mark.parametrize("seed", range(5))
    def test_sparse_equals_dense(self, seed: int, monkeypatch: pytest.MonkeyPatch) -> None:
        network = random_network(seed, 40, 15)
        dense = solve(network)
        monkeypatch.setattr(solve_module, "SPARSE_FROM", 0)
        assert solve(network) == pytest.approx(dense, abs=1e-12)

    def test_batch_in_chunks_equals_one_by_one(self, monkeypatch: pytest.MonkeyPatch) -> None:
        network = random_network(3, 20, 8)
        whole = solve(network)
        monkeypatch.setattr(solve_module, "_CHUNK_BYTES", 1.0)
        assert np.array_equal(solve(network), whole)


class TestReduction:
    def test_a_chain_with_a_shunt_becomes_one_two_port(self) -> None:
        parts = (between("a", "m", line(50.0, [0.4])), between("b", "m", series([3.0 + 4.0j])))
        network = Network(1, (Port("a", 50.0), Port("b", 50.0)), parts, (Shunt("m", np.array([0.01j])),))
        assert len(reduce_network(network).branches) == 1
        assert reduce_network(network).shunts == ()
        ended = Network(1, (*network.ports, Port("m", 1e12)), parts, network.shunts)
        assert solve(network) == pytest.approx(solve(ended)[:, :2, :2], abs=1e-10)

    def test_a_resistor_between_two_arms_stays(self) -> None:
        """Merging across a node of degree three would lose a branch."""
        arms = [between("a", x, line(70.7, [math.pi / 2])) for x in ("b", "c")]
        network = Network(1, tuple(Port(n, 50.0) for n in "abc"), (*arms, between("b", "c", series([100.0]))))
        assert len(reduce_network(network).branches) == 3

    def test_a_bank_becomes_one_admittance(self) -> None:
        """Shunt parts on a strip, and a supply line beyond them that ends open: all at the feed's tee."""
        rng = np.random.default_rng(1)
        ladder = [between(f"s{k}", f"s{k + 1}", random_element(rng, True)) for k in range(4)]
        shunts = [between(GROUND, f"s{k}", series([3.0 + 5.0j * k])) for k in range(1, 4)]
        feed = between("m", "s0", line(90.0, 1.4 * FREQUENCIES / 2e9))
        through = (between("a", "m", line(50.0, [0.4])), between("m", "b", line(60.0, [0.7])))
        network = Network(FREQUENCIES.size, two_ports(), (*through, feed, *ladder, *shunts))
        small = reduce_network(network)
        assert len(small.branches) == 1 and small.shunts == ()
        watched = replace(network, ports=(*network.ports, *(Port(f"s{k}", 1e12) for k in range(5))))
        assert solve(network) == pytest.approx(solve(watched)[:, :2, :2], abs=1e-9)

    def test_a_stub_that_shorts_its_node_stays(self) -> None:
        """At a quarter wave its admittance has no end: the two-port's own equations must be kept."""
        stub = between("m", "end", line(50.0, 0.5 * np.pi * np.array([0.9, 1.0, 1.1])))
        through = (between("a", "m", line(50.0, [0.4])), between("m", "b", line(60.0, [0.7])))
        network = Network(3, two_ports(), (*through, stub))
        assert len(reduce_network(network).branches) == 3
        assert abs(solve(network)[1, 1, 0]) < 1e-12
        short = between("m", GROUND, series([0.0]))
        assert solve(network)[1] == pytest.approx(
            solve(Network(1, two_ports(), (*through, short)))[0], abs=1e-12
        )

    def test_parts_that_only_ground_joins_are_solved_apart(self) -> None:
        """Input and output of an amplifier without its device: nothing passes, each is as if alone."""
        left, right = random_network(3, pairs=0), random_network(4, pairs=1)
        moved = [renamed(branch, "r ") for branch in right.branches]
        ports = (left.ports[0], *(replace(port, node=f"r {port.node}") for port in right.ports))
        both = Network(FREQUENCIES.size, (*ports, *left.ports[1:]), (*left.branches, *moved))
        s = solve(both)
        here, there = [0, 4, 5], [1, 2, 3]
        assert s[:, here][:, :, here] == pytest.approx(solve(left), abs=1e-12)
        assert s[:, there][:, :, there] == pytest.approx(solve(right), abs=1e-12)
        assert np.max(np.abs(s[:, here][:, :, there])) == 0.0


def two_ports() -> tuple[Port, Port]:
    """Return ports of 50 ohm at the nodes a and b."""
    return Port("a", 50.0), Port("b", 50.0)


def renamed(branch: Branch, prefix: str) -> Branch:
    """Return a branch between nodes of other names."""
    near, far = (
        tuple((node if node == GROUND else prefix + node, weight) for node, weight in side)
        for side in (branch.near, branch.far)
    )
    return Branch(near, far, branch.chain)


class TestSpread:
    def test_samples_beside_frequencies(self) -> None:
        """Samples along the wrong axis, or numbers spread where they need not be."""
        impedances, angles = np.array([[40.0], [70.0]]), np.array([0.3, 0.9, 1.5])
        stub = Shunt("b", np.array([0.01j, 0.02j, 0.03j]))
        network = Network(6, two_ports(), (between("a", "b", line(impedances, angles)),), (stub,))
        s = solve(spread(network, (2, 3))).reshape(2, 3, 2, 2)
        for i, impedance in enumerate(impedances[:, 0]):
            alone = Network(3, two_ports(), (between("a", "b", line(impedance, angles)),), (stub,))
            assert s[i] == pytest.approx(solve(alone), abs=1e-14)

    def test_real_functions_give_the_complex_line(self) -> None:
        """The quick way for lossy lines against numpy's own complex functions."""
        angle = np.linspace(-1.0, 40.0, 50) * (1.0 - 0.02j)
        chain = line(60.0, angle)
        assert chain.a == pytest.approx(np.cos(angle), rel=1e-13)
        assert chain.b == pytest.approx(60.0j * np.sin(angle), rel=1e-13)


class TestBlocks:
    def test_data_of_a_line_equal_the_line(self) -> None:
        """A block is measured to 75 ohm here, the response is to 50 ohm: the reference must be taken off."""
        chain = line(38.0, [0.9])
        measured = two_port(between("a", "b", chain), ports=(75.0, 75.0))
        block = Block((("a", GROUND), ("b", GROUND)), measured, np.array([75.0, 75.0]))
        s = solve(Network(1, (Port("a", 50.0), Port("b", 50.0)), blocks=(block,)))
        assert s == pytest.approx(two_port(between("a", "b", chain)), abs=1e-14)

    @pytest.mark.parametrize(("reflection", "expected"), [(-1.0, -1.0), (1.0, 1.0), (0.0, 0.0)])
    def test_short_open_and_match_as_data(self, reflection: float, expected: float) -> None:
        """A short has no Z, an open no Y: neither may spoil the equations."""
        block = Block((("a", GROUND),), np.array([[[reflection + 0j]]]), np.array([50.0]))
        s = solve(Network(1, (Port("a", 50.0),), blocks=(block,)))
        assert s[0, 0, 0] == pytest.approx(expected, abs=1e-14)

    def test_a_common_terminal_off_ground(self) -> None:
        """A two-port whose reference is lifted by an inductance: the textbook sum of impedance matrices."""
        s_device = np.array([[[0.3 - 0.5j, 0.05 + 0.02j], [-2.1 + 1.4j, 0.2 - 0.3j]]])
        lift = 4.0j
        block = Block((("a", "common"), ("b", "common")), s_device, np.array([50.0, 50.0]))
        network = Network(
            1, (Port("a", 50.0), Port("b", 50.0)), (between("common", GROUND, series([lift])),), (), (block,)
        )
        one = np.eye(2)
        z = 50.0 * (one + s_device[0]) @ np.linalg.inv(one - s_device[0]) + lift
        expected = (z / 50.0 - one) @ np.linalg.inv(z / 50.0 + one)
        assert solve(network)[0] == pytest.approx(expected, abs=1e-13)


def test_shunt_and_chain_agree() -> None:
    """An admittance given to a node and the same as a two-port are one thing."""
    as_shunt = Network(1, (Port("a", 50.0),), (), (Shunt("a", np.array([0.03 + 0.01j])),))
    y = shunt([0.03 + 0.01j])
    far = between("a", "end", Chain(y.a, y.b, y.c, y.d))
    assert solve(as_shunt) == pytest.approx(solve(Network(1, (Port("a", 50.0),), (far,))), abs=1e-15)


@pytest.mark.parametrize("seed", range(12))
def test_equals_scikit_rf(seed: int, in_scikit_rf: Callable[[Network, np.ndarray], np.ndarray]) -> None:
    """Any error of sign, weight or reference in the equations shows against an independent method."""
    network = random_network(1000 + seed, 10, 5, pairs=2)
    assert solve(network) == pytest.approx(in_scikit_rf(network, FREQUENCIES), abs=1e-9)
