"""Touchstone files, read back by a network library."""

from __future__ import annotations

import math
import re
import warnings
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from layoutgen.writers import Job, Result
from layoutgen.writers.touchstone import renormalised, write_as_drawn, write_wanted

JOB = Job(stem="board")


@pytest.mark.parametrize("ports", [1, 2, 3, 4, 5, 9])
def test_a_library_reads_the_same_matrices(
    with_ports: Callable[[int], Result], tmp_path: Path, ports: int
) -> None:
    """A two-port in row order, rows of more than four pairs, S to the ports' own impedances."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        skrf = pytest.importorskip("skrf")
    result = with_ports(ports)
    response = result.response
    assert response is not None
    path = tmp_path / f"as_drawn.s{ports}p"
    path.write_bytes(write_as_drawn(result, JOB))
    read = skrf.Network(str(path))
    own = skrf.Network(
        f=response.frequencies,
        s=response.as_drawn,
        z0=np.array(response.impedances),
        s_def="power",
        f_unit="Hz",
    )
    own.renormalize(50.0, s_def="power")
    assert read.f == pytest.approx(response.frequencies)
    assert np.abs(read.s - own.s).max() < 1e-9
    assert np.all(read.z0 == 50.0)


def test_the_two_files_differ(with_ports: Callable[[int], Result]) -> None:
    """The same matrices in both files would hide what the drawing did."""
    assert write_wanted(with_ports(2), JOB) != write_as_drawn(with_ports(2), JOB)


def test_lines_are_those_of_the_format(with_ports: Callable[[int], Result]) -> None:
    """Version 1.1: one option line, comments by !, at most four pairs a line, rows on new lines, ASCII."""
    text = write_wanted(with_ports(5), JOB).decode("ascii")
    lines = [line for line in text.splitlines() if not line.startswith("!")]
    assert lines[0] == "# Hz S RI R 50"
    assert sum(line.startswith("#") for line in lines) == 1
    first = [line.split() for line in lines[1:11]]
    assert [len(row) for row in first] == [9, 2, 8, 2, 8, 2, 8, 2, 8, 2]
    assert all(re.fullmatch(r"-?\d+\.\d+", word) for row in first for word in row)
    frequencies = [float(row.split()[0]) for row in lines[1:] if not row.startswith(" ")]
    assert frequencies == sorted(set(frequencies))


def test_a_comment_line_tells_each_port(with_ports: Callable[[int], Result]) -> None:
    """Without it nobody knows which port is the gate, what the schematic had there, where its plane is."""
    comments = [
        line for line in write_wanted(with_ports(3), JOB).decode().splitlines() if line.startswith("! port")
    ]
    assert comments == [
        "! port 1: rf_in, net in, 50 ohm in the schematic; plane at the end of its copper, x 0.3 mm, y 4 mm",
        "! port 2: rf_out, net out, 40 - j3 ohm in the schematic; "
        "plane at the end of its copper, x 19.7 mm, y 8.000001 mm",
        "! port 3: Q1.pin0, 9 - j2 ohm in the schematic",
    ]


def test_planes_of_terminations_are_on_the_pads(driver: Result) -> None:
    """A plane at a pad's middle or outer edge would be half a pad off: some degrees at a wide drain."""
    part = driver.placement.parts["Q1"]
    text = write_as_drawn(driver, JOB).decode()
    for pad in part.pads:
        if f"Q1.{pad.pin}" not in driver.response.ports:
            continue
        points = np.array(pad.outline.chords()) / 1e6
        out = np.array([math.cos(math.radians(pad.heading)), math.sin(math.radians(pad.heading))])
        (line,) = (row for row in text.splitlines() if row.startswith("! port") and f"Q1.{pad.pin}" in row)
        x, y = map(float, re.search(r"inner edge, x (\S+) mm, y (\S+) mm", line).groups())
        assert np.dot((x, y), out) == pytest.approx(np.min(points @ out), abs=1e-5)
        assert np.dot((x, y), out) < np.dot((pad.x / 1e6, pad.y / 1e6), out) - 0.5


def test_power_is_kept_by_renormalising() -> None:
    """A lossless network stays lossless at any port impedances; with pseudo-waves it would not."""
    rng = np.random.default_rng(7)
    raw = rng.normal(size=(4, 3, 3)) + 1j * rng.normal(size=(4, 3, 3))
    unitary = np.linalg.qr(raw)[0]
    moved = renormalised(unitary, np.array([50, 9 - 6j, 7 + 4j]), np.full(3, 50.0))
    assert np.abs(moved @ moved.conj().swapaxes(1, 2) - np.eye(3)).max() < 1e-12


def test_renormalising_back_and_forth_changes_nothing() -> None:
    """A transposed factor shows here, though not for symmetric networks at equal impedances."""
    rng = np.random.default_rng(8)
    s = 0.3 * (rng.normal(size=(5, 4, 4)) + 1j * rng.normal(size=(5, 4, 4)))
    old, new = np.array([50, 40 - 3j, 9 - 6j, 7 + 4j]), np.array([50, 50, 75 + 1j, 10])
    assert np.abs(renormalised(renormalised(s, old, new), new, old) - s).max() < 1e-12


def test_a_termination_of_the_conjugate_is_matched() -> None:
    """The contract: a network that shows the conjugate of a port's impedance reflects nothing there."""
    shown = 9 + 6j
    s_50 = np.array([[[(shown - 50) / (shown + 50)]]])
    assert abs(renormalised(s_50, [50.0], [shown.conjugate()])[0, 0, 0]) < 1e-15
