"""Speed and memory of the response, each against a library or a bare way in the same run.

Run as ``python benchmarks/bench_response.py``; the last column is the limit that the ratio must keep to, and
the exit status is 1 when one is missed. Times are processor time on one thread, the least of several runs, so
that other programs on the machine matter little.
"""

from __future__ import annotations

import os
import sys
import time
import tracemalloc
from collections.abc import Callable
from pathlib import Path

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # read when numpy is loaded

import numpy as np

from layoutgen.artwork import Artwork, draw
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import Tolerance, read_inputs
from layoutgen.response import correct_lengths, respond, tolerance
from layoutgen.response.chain import line, series
from layoutgen.response.drawn import drawn_network
from layoutgen.response.network import GROUND, Branch, Network, Port, between
from layoutgen.response.solve import solve
from layoutgen.sizing import size_circuit

F = np.linspace(1e9, 4e9, 401)
EXAMPLE = Path(__file__).parents[1] / "examples" / "telemetry_driver.toml"


def best(*runs: Callable[[], object], repeats: int = 15) -> list[float]:
    """Return the least processor time of each run [s], taken in turn so that all have the same machine."""
    times = [[] for _ in runs]
    for _ in range(repeats):
        for run, found in zip(runs, times, strict=True):
            start = time.process_time()
            run()
            found.append(time.process_time() - start)
    return [min(found) for found in times]


def peak_megabytes(run: Callable[[], object]) -> float:
    """Return the most memory held at once during a run [MB]."""
    tracemalloc.start()
    run()
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    return peak / 1e6


def tree(nodes: int = 80, extra: int = 20, seed: int = 1) -> Network:
    """Return 99 lines between 80 nodes: a random tree with loops, three ports."""
    rng = np.random.default_rng(seed)
    ends = [(k, int(rng.integers(0, k))) for k in range(1, nodes)]
    ends += [tuple(map(int, rng.choice(nodes, 2, replace=False))) for _ in range(extra)]
    return lines_between(ends, rng)


def mesh(side: int = 7, seed: int = 1) -> Network:
    """Return 98 lines on a closed grid of 49 nodes, where no chain can be shortened."""
    rng = np.random.default_rng(seed)
    number = [(x, y) for x in range(side) for y in range(side)]
    ends = [(x * side + y, (x + 1) % side * side + y) for x, y in number]
    ends += [(x * side + y, x * side + (y + 1) % side) for x, y in number]
    return lines_between(ends, rng)


def lines_between(ends: list[tuple[int, int]], rng: np.random.Generator) -> Network:
    branches = []
    for near, far in ends:
        angle = rng.uniform(0.2, 2.5) * F / 2e9
        branches.append(between(f"n{near}", f"n{far}", line(rng.uniform(20.0, 100.0), angle)))
    ports = (Port("n3", 50.0), Port("n40", 50.0), Port("n20", 20.0 + 5.0j))
    return Network(F.size, ports, tuple(branches))


def nodal_matrices(network: Network) -> tuple[np.ndarray, np.ndarray]:
    """Return the plain nodal matrices (B, n, n) and right-hand sides, for the bare solution."""
    names = sorted({node for b in network.branches for side in (b.near, b.far) for node, _ in side})
    number = {name: k for k, name in enumerate(names)}
    matrix = np.zeros((network.size, len(names), len(names)), dtype=np.complex128)
    for branch in network.branches:
        i, j = number[branch.near[0][0]], number[branch.far[0][0]]
        a, b, _, d = branch.chain
        matrix[:, i, i] += d / b
        matrix[:, j, j] += a / b
        matrix[:, i, j] -= 1.0 / b
        matrix[:, j, i] -= 1.0 / b
    right = np.zeros((len(names), len(network.ports)), dtype=np.complex128)
    for k, port in enumerate(network.ports):
        matrix[:, number[port.node], number[port.node]] += 1.0 / port.impedance
        right[number[port.node], k] = 1.0
    return matrix, right


def scikit_rf(network: Network) -> Callable[[], object]:
    """Return a run of scikit-rf's Circuit in its faster mode, the elements made beforehand."""
    import skrf
    from skrf.circuit import Circuit

    frequency = skrf.Frequency.from_f(F, unit="hz")
    at: dict[str, list[tuple[object, int]]] = {}
    for k, port in enumerate(network.ports):
        at.setdefault(port.node, []).append((Circuit.Port(frequency, f"port{k}", z0=port.impedance), 0))
    for k, branch in enumerate(network.branches):
        abcd = np.moveaxis(np.array([branch.chain[:2], branch.chain[2:]]), 2, 0)
        s = skrf.network.a2s(abcd)
        element = skrf.Network(frequency=frequency, s=s, z0=50.0, name=f"e{k}")
        for end, side in enumerate((branch.near, branch.far)):
            at.setdefault(side[0][0], []).append((element, end))
    for k, (node, ends) in enumerate(list(at.items())):
        if len(ends) == 1:
            at[node] = [*ends, (Circuit.Open(frequency, f"open{k}"), 0)]
    connections = list(at.values())
    return lambda: Circuit(connections, auto_reduce=True).network.s


def feed(ways: int = 256) -> Network:
    """Return a corporate feed: a binary tree of quarter-wave lines with isolation resistors, 257 ports."""
    f = np.linspace(1.8e9, 2.4e9, 51)
    theta = 0.5 * np.pi * f / 2.1e9
    branches: list[Branch] = []
    for k in range(1, ways):
        branches += [between(f"t{k}", f"t{2 * k + side}", line(70.71, theta)) for side in (0, 1)]
        branches.append(between(f"t{2 * k}", f"t{2 * k + 1}", series(100.0)))
    ports = (Port("t1", 50.0), *(Port(f"t{k}", 50.0) for k in range(ways, 2 * ways)))
    return Network(f.size, ports, tuple(branches))


def report(name: str, ours: float, other: float, limit: float, at_least: bool = False) -> bool:
    """Print one row; return whether the ratio keeps to its limit."""
    ratio = other / ours if at_least else ours / other
    kept = ratio >= limit if at_least else ratio <= limit
    sign = ">=" if at_least else "<="
    print(f"{name:<58}{ours * 1e3:>9.1f} ms{other * 1e3:>9.1f} ms{ratio:>8.2f}  {sign} {limit:g}")
    return kept


def solver_rows() -> list[bool]:
    kept = []
    for name, network in (("tree, 99 lines, 80 nodes", tree()), ("mesh, 98 lines, 49 nodes", mesh())):
        matrix, right = nodal_matrices(network)
        ours, bare = best(lambda n=network: solve(n), lambda m=matrix, r=right: np.linalg.solve(m, r))
        kept.append(report(f"{name} x 401: bare batched solve", ours, bare, 1.5))
        (library,) = best(scikit_rf(network), repeats=3)
        kept.append(report(f"{name} x 401: scikit-rf Circuit", ours, library, 20.0, at_least=True))
        print(f"    peak memory {peak_megabytes(lambda n=network: solve(n)):.0f} MB")
    return kept


def feed_row() -> bool:
    from scipy.linalg import lu_factor

    network = feed()
    matrix = np.random.default_rng(1).normal(size=(511, 511)) + 1j
    ours, one = best(lambda: solve(network), lambda: lu_factor(matrix), repeats=3)
    kept = report("256-way feed, 257 ports x 51: one dense LU", ours, one, 60.0)
    print(f"    peak memory {peak_megabytes(lambda: solve(network)):.0f} MB")
    return kept


def amplifier() -> Artwork:
    """Return the amplifier's drawing, with tolerances of a usual board and parts of 5 %."""
    inputs = read_inputs(EXAMPLE)
    limits = Tolerance(relative_permittivity=0.05, height="0.02 mm", width="0.02 mm", value="5 %")
    file = inputs.circuit.model_copy(update={"tolerance": limits})
    return draw(place(size_circuit(build_circuit(file, inputs.rules))))


def amplifier_rows() -> list[bool]:
    artwork = amplifier()
    seconds, fit = best(lambda: respond(artwork), lambda: correct_lengths(artwork))
    print(f"    peak memory {peak_megabytes(lambda: respond(artwork)):.0f} MB")
    return [
        report("amplifier, both responses x 304 and all else: 0.3 s", seconds, 0.3, 1.0),
        report("amplifier, corrected lengths: 0.3 s", fit, 0.3, 1.0),
    ]


def tolerance_row() -> bool:
    """Compare a tolerance analysis with the bare solution of its nodal equations for each sample, no more."""
    artwork = amplifier()
    f = np.linspace(*artwork.placement.sized.circuit.file.design.band, 101)
    network = drawn_network(artwork, f, {})
    nodes = {node for b in network.branches for side in (b.near, b.far) for node, _ in side} - {GROUND}
    rng = np.random.default_rng(1)
    matrix = rng.normal(size=(1000, len(nodes), len(nodes))) + 1j
    right = rng.normal(size=(len(nodes), len(network.ports))) + 0j

    def solutions() -> None:
        for _ in range(f.size):
            np.linalg.solve(matrix, right)

    ours, bare = best(lambda: tolerance(artwork, samples=1000, points=101), solutions, repeats=2)
    megabytes = peak_megabytes(lambda: tolerance(artwork, samples=1000))
    print(f"    {len(nodes)} nodes, peak memory {megabytes:.0f} MB")
    return report("amplifier, tolerance 1000 x 101: bare nodal solutions", ours, bare, 3.0)


def main() -> int:
    print(f"{'case: compared with':<58}{'here':>12}{'there':>12}{'ratio':>8}  limit")
    kept = [*solver_rows(), feed_row(), *amplifier_rows(), tolerance_row()]
    return 0 if all(kept) else 1


if __name__ == "__main__":
    sys.exit(main())
