"""Speed of the formulas against the same expressions written bare in numpy, as ratios from one run.

    python benchmarks/bench_formulas.py

Goals: a million analyses within 1.5 times the bare expressions; 1e5 syntheses within 30 times one analysis.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable

import numpy as np

from layoutgen.formulas.microstrip import hammerstad_jensen_1980
from layoutgen.formulas.pour import microstrip_beside_pour
from layoutgen.formulas.synthesis import width_for_impedance

ETA0 = 376.730313668
REPEATS = 7


def bare_microstrip(u, er, t):
    """Return impedance and permittivity by the paper's expressions, nothing else."""
    du_air = t / math.pi * np.log(1.0 + 4.0 * math.e / (t / np.tanh(np.sqrt(6.517 * u)) ** 2))
    du = 0.5 * du_air * (1.0 + 1.0 / np.cosh(np.sqrt(er - 1.0)))
    z_air, z_wide = bare_air(u + du), bare_air(u + du_air)
    v = u + du
    a = 1.0 + np.log((v**4 + (v / 52.0) ** 2) / (v**4 + 0.432)) / 49.0 + np.log(1.0 + (v / 18.1) ** 3) / 18.7
    b = 0.564 * ((er - 0.9) / (er + 3.0)) ** 0.053
    ee = 0.5 * (er + 1.0) + 0.5 * (er - 1.0) * (1.0 + 10.0 / v) ** (-a * b)
    return z_air / np.sqrt(ee), ee * (z_wide / z_air) ** 2


def bare_air(u):
    """Return the thin air line's impedance."""
    f = 6.0 + (2.0 * math.pi - 6.0) * np.exp(-((30.666 / u) ** 0.7528))
    return ETA0 / (2.0 * math.pi) * np.log(f / u + np.sqrt(1.0 + (2.0 / u) ** 2))


def seconds(call: Callable[[], object]) -> float:
    """Return the shortest of several runs."""
    best = math.inf
    for _ in range(REPEATS):
        start = time.perf_counter()
        call()
        best = min(best, time.perf_counter() - start)
    return best


def inputs(count: int) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Return widths, permittivities, thicknesses and gaps."""
    rng = np.random.default_rng(1)
    u = np.exp(rng.uniform(math.log(0.2), math.log(8.0), count))
    return u, rng.uniform(2.0, 10.0, count), rng.uniform(0.01, 0.1, count), rng.uniform(0.3, 5.0, count)


def measure() -> dict[str, float]:
    """Return the ratios by name."""
    u, er, t, _ = inputs(1_000_000)
    analysis = seconds(lambda: hammerstad_jensen_1980(u, er, t)) / seconds(lambda: bare_microstrip(u, er, t))
    u, er, t, gap = inputs(100_000)
    z = hammerstad_jensen_1980(u, er, t).impedance
    synthesis = seconds(lambda: width_for_impedance(z, er, t)) / seconds(
        lambda: hammerstad_jensen_1980(u, er, t)
    )
    z = microstrip_beside_pour(u, er, t, gap, gap).impedance
    pour = seconds(lambda: width_for_impedance(z, er, t, gap, gap))
    pour /= seconds(lambda: microstrip_beside_pour(u, er, t, gap, gap))
    return {
        "analysis over bare numpy": analysis,
        "synthesis over analysis": synthesis,
        "the same with pour": pour,
    }


if __name__ == "__main__":
    for name, ratio in measure().items():
        print(f"{name:28s} {ratio:6.2f}")
