"""Tolerance: samples against boards worked out one by one, known yields, the same bytes anywhere."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from layoutgen.artwork import Artwork
from layoutgen.errors import WrongInputError
from layoutgen.response import Tolerance, tolerance
from layoutgen.response.drawn import DrawnBoard, drawing_of, drawn_network
from layoutgen.response.limits import read_limits
from layoutgen.response.medium import medium_of
from layoutgen.response.samples import Job, spreads
from layoutgen.response.solve import solve
from layoutgen.response.trace import trace_copper

MAKER = Callable[..., Artwork]
PORTS = dict[str, Any]
LIMITS = {"relative_permittivity": 0.1, "height": "0.03 mm", "width": "0.03 mm", "value": "10 %"}
LAUNCH = {"nets": ["o", "out"], "impedance": "50 ohm", "length": "free"}


def by_angle(near: str, far: str, impedance: float, angle: float) -> dict[str, Any]:
    nets = [near, far] if far else [near]
    return {"nets": nets, "impedance": f"{impedance} ohm", "angle": f"{angle} deg"}


@pytest.fixture(scope="module")
def tables(ports: PORTS) -> dict[str, Any]:
    """Tees, a grounded and an open stub, a radial stub, a coupled pair's kind of losses, three parts."""
    lines = {
        "a": by_angle("in", "m", 50, 40),
        "b": by_angle("m", "n", 65, 60),
        "c": by_angle("n", "k", 50, 30),
        "d": by_angle("l", "o", 50, 30),
        "open": by_angle("m", "", 35, 35),
        "shorted": by_angle("n", "gnd", 60, 60),
        "arm": by_angle("o", "r", 50, 30),
        "fan": {"nets": ["k"], "shape": "radial", "sector": "60 deg", "radius": "5 mm"},
        "launch": LAUNCH,
    }
    parts = {
        "R1": {"kind": "resistor", "nets": ["r", "gnd"], "value": "120 ohm", "case": "0402"},
        "C1": {"kind": "capacitor", "nets": ["k", "l"], "value": "8 pF", "case": "0603"},
    }
    return {"ports": ports, "lines": lines, "parts": parts, "tolerance": LIMITS}


@pytest.fixture(scope="module")
def board(artwork_of: MAKER, tables: dict[str, Any]) -> Artwork:
    return artwork_of(tables)


def job_of(artwork: Artwork, points: int = 7) -> Job:
    """Return the job of an artwork's tolerance over 2.2 to 2.29 GHz."""
    circuit = artwork.placement.sized.circuit
    f = np.linspace(*circuit.file.design.band, points)
    nominal = solve(drawn_network(artwork, f, {}))
    limits = read_limits((), ["p1", "p2"])
    spread = spreads(circuit.file, {})
    return Job(drawing_of(artwork), medium_of(circuit, f), {}, spread, limits, nominal, nominal)


def everything(found: Tolerance) -> tuple[object, ...]:
    """Return all that a result holds, arrays by their bytes."""
    arrays = (found.frequencies, found.nominal, found.least, found.most)
    values = (found.yield_share, found.limits, found.contributors, found.corners)
    return (*values, *(array.tobytes() for array in arrays))


class TestSamples:
    def test_all_at_once_is_one_by_one(self, board: Artwork) -> None:
        """A quantity spread along the wrong axis, or shared between samples, differs from scalar boards."""
        job = job_of(board)
        assert list(job.spread) == ["relative_permittivity", "height", "width", "R1", "C1"]
        rows = np.random.default_rng(3).uniform(-1.0, 1.0, (4, 5))
        many = job.responses(rows)
        for row, found in zip(rows, many, strict=True):
            medium = replace(
                job.medium,
                er=3.55 + 0.1 * row[0],
                height=0.508e-3 + 0.03e-3 * row[1],
                width_change=0.03e-3 * row[2],
            )
            scales = {"R1": 1.0 + 0.1 * row[3], "C1": 1.0 + 0.1 * row[4]}
            alone = solve(DrawnBoard(job.drawing, medium, {}, scales).network())
            assert found == pytest.approx(alone, abs=1e-9)

    def test_no_deviation_is_the_drawing(self, board: Artwork) -> None:
        job = job_of(board)
        assert job.responses(np.zeros((1, 5)))[0] == pytest.approx(job.nominal, abs=1e-9)

    def test_a_board_of_another_substrate(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Permittivity and height must reach every formula: the same copper on a board that really is so."""
        lines = {"a": by_angle("in", "m", 50, 40), "b": by_angle("m", "o", 50, 50), "launch": LAUNCH}
        lines["stub"] = by_angle("m", "gnd", 60, 60)
        tables = {"ports": ports, "lines": lines, "tolerance": {**LIMITS, "width": "0 mm"}}
        job = job_of(artwork_of(tables))
        base = {"loss_tangent": 0.0027, "copper_thickness": "35 um", "copper_roughness": "1.2 um"}
        other = {**base, "relative_permittivity": 3.65, "height": "0.538 mm"}
        medium = medium_of(
            artwork_of({**tables, "substrate": other}).placement.sized.circuit, job.medium.frequencies
        )
        truly = solve(DrawnBoard(job.drawing, medium, {}).network())
        assert job.responses(np.ones((1, 2)))[0] == pytest.approx(truly, abs=1e-9)
        assert np.max(np.abs(truly - job.nominal)) > 0.01

    def test_etching_moves_every_edge(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Wider lines, smaller gaps, open ends half as much longer: as copper drawn so."""
        lines = {
            "a": by_angle("in", "m", 50, 40),
            "b": by_angle("m", "o", 50, 50),
            "stub": by_angle("m", "", 45, 40),
            "launch": LAUNCH,
        }
        artwork = artwork_of({"ports": ports, "lines": lines, "tolerance": {"width": "0.03 mm"}})
        job, copper = job_of(artwork), trace_copper(artwork)
        more = 0.03e-3
        pieces = tuple(
            replace(
                piece,
                width=piece.width + more,
                gaps=(piece.gaps[0] - more, piece.gaps[1] - more),
                length=piece.length + 0.5 * more * piece.is_open,
            )
            for piece in copper.pieces
        )
        joints = tuple(
            replace(joint, arms=[replace(arm, width=arm.width + more) for arm in joint.arms])
            for joint in copper.joints
        )
        drawn = replace(copper, pieces=pieces, joints=joints)
        expected = solve(drawn_network(artwork, job.medium.frequencies, {}, copper=drawn))
        assert job.responses(np.ones((1, 1)))[0] == pytest.approx(expected, abs=1e-9)
        assert np.max(np.abs(expected - job.nominal)) > 0.005


@pytest.fixture(scope="module")
def attenuator(artwork_of: MAKER, ports: PORTS) -> Artwork:
    """One resistor in series whose value alone varies: what comes of it can be known."""
    lines = {"a": by_angle("in", "c", 50, 30), "b": by_angle("d", "o", 50, 30), "launch": LAUNCH}
    parts = {"R1": {"kind": "resistor", "nets": ["c", "d"], "value": "40 ohm", "case": "0603"}}
    return artwork_of({"ports": ports, "lines": lines, "parts": parts, "tolerance": {"value": "10 %"}})


class TestYield:
    def test_a_limit_at_the_middle_passes_half(self, attenuator: Artwork) -> None:
        """Uniform values: the share below a magnitude between the ends is where it lies between them."""
        ends = tolerance(attenuator, samples=2, points=5)
        (one,) = ends.contributors
        assert (one.name, one.limit) == ("R1", 0.1)
        low, high = (-20 * np.log10(100 / (100 + 40 * (1 + s))) for s in (0.1, -0.1))
        middle = 20 * np.log10(np.max(ends.nominal[:, 1, 0]))
        found = tolerance(attenuator, samples=1500, limits=[f"S21 <= {middle:.6f} dB"], points=5)
        assert found.yield_share == pytest.approx(0.5, abs=0.04)
        assert found.limits[0].share == found.yield_share
        assert abs(high - low) == pytest.approx(
            20 * np.log10(np.max(found.most[:, 1, 0]) / np.max(found.least[:, 1, 0])), abs=0.05
        )

    def test_all_limits_together(self, attenuator: Artwork) -> None:
        """A yield that looks at one limit only, or takes at least for at most."""
        texts = ["S(p2, p1) <= 0 dB", "S(p2, p1) >= 0 dB"]
        found = tolerance(attenuator, samples=50, limits=texts, points=5)
        assert [limit.share for limit in found.limits] == [1.0, 0.0] and found.yield_share == 0.0
        assert [limit.limit for limit in found.limits] == texts
        assert found.limits[1].worst <= found.limits[1].median <= found.limits[0].worst

    def test_the_default_is_the_change_from_wanted(self, attenuator: Artwork) -> None:
        found = tolerance(attenuator, samples=20, points=5)
        assert found.limits[0].limit == "change <= 0.1"
        assert found.limits[0].nominal > 1e-3

    def test_worst_contributors_first(self, board: Artwork) -> None:
        """Each alone at its worse limit, by boards worked out here."""
        found = tolerance(board, samples=10, points=7)
        job = job_of(board)
        for item in found.contributors:
            k = list(job.spread).index(item.name)
            ends = job.responses(np.array([np.eye(5)[k], -np.eye(5)[k]]))
            change = np.max(np.abs(ends - job.nominal), axis=(1, 2, 3))
            assert item.change == pytest.approx(np.max(change), abs=1e-9)
            assert item.sign == (1 if change[0] >= change[1] else -1)
        changes = [item.change for item in found.contributors]
        assert changes == sorted(changes, reverse=True) and len(changes) == 5

    def test_corners(self, board: Artwork) -> None:
        """All signs of board quantities and of all values together, worked out here for the worst."""
        found = tolerance(board, samples=10, points=7)
        assert len({corner.signs for corner in found.corners}) == 16
        worst = found.corners[0]
        signs = dict(worst.signs)
        row = [signs[name] for name in ("relative_permittivity", "height", "width", "value", "value")]
        job = job_of(board)
        change = np.max(np.abs(job.responses(np.array([row], dtype=float))[0] - job.nominal))
        assert worst.change == pytest.approx(change, abs=1e-9)
        assert worst.change == max(corner.change for corner in found.corners)


class TestSameBytes:
    @pytest.fixture(scope="class")
    @classmethod
    def alone(cls, board: Artwork) -> Tolerance:
        return tolerance(board, samples=700, seed=5, points=101)

    def test_same_seed_again(self, board: Artwork, alone: Tolerance) -> None:
        assert everything(tolerance(board, samples=700, seed=5)) == everything(alone)

    def test_another_seed(self, board: Artwork, alone: Tolerance) -> None:
        """A seed that is not used would show the same samples."""
        assert tolerance(board, samples=700, seed=6).limits != alone.limits

    def test_two_processes(self, board: Artwork, alone: Tolerance) -> None:
        """Batches by the number of processes, or joined as they come, would differ."""
        assert everything(tolerance(board, samples=700, seed=5, processes=2)) == everything(alone)

    def test_a_local_cluster(self, board: Artwork, alone: Tolerance) -> None:
        """Batches joined as they come back; over sockets, so that everything has to be sent."""
        distributed = pytest.importorskip("distributed")
        quiet = {"dashboard_address": None, "processes": False, "n_workers": 2, "threads_per_worker": 1}
        quiet["protocol"] = "tcp://"
        with distributed.LocalCluster(**quiet) as cluster:
            found = tolerance(board, samples=700, seed=5, scheduler=cluster.scheduler_address)
        assert everything(found) == everything(alone)

    def test_read_only(self, alone: Tolerance) -> None:
        for values in (alone.frequencies, alone.nominal, alone.least, alone.most):
            with pytest.raises(ValueError, match="read-only"):
                values.flat[0] = 0.0


class TestLimits:
    @pytest.mark.parametrize(
        ("text", "place", "at_least", "value"),
        [
            ("S21 >= -1 dB", (1, 0), True, 10 ** (-1 / 20)),
            ("S11<=-15dB", (0, 0), False, 10 ** (-15 / 20)),
            ("S(Q1.gate, rf-in) >= -0.5 dB", (1, 0), True, 10 ** (-0.5 / 20)),
            ("change <= .05", None, False, 0.05),
        ],
    )
    def test_forms(self, text: str, place: object, at_least: bool, value: float) -> None:
        (limit,) = read_limits([text], ["rf-in", "Q1.gate"])
        assert (limit.place, limit.at_least) == (place, at_least)
        assert limit.value == pytest.approx(value)

    def test_all_faults_in_one_go(self) -> None:
        texts = ["S31 >= -1 dB", "S21 >= -1", "S(a, x) <= 0 dB", "change >= 0.1", "gain > 3", "S11 <= -15 dB"]
        with pytest.raises(WrongInputError) as caught:
            read_limits(texts, ["a", "b"])
        messages = [str(fault) for fault in caught.value.faults]
        assert len(messages) == 5
        assert "1, 2" in messages[0] and "dB" in messages[1] and "a, b" in messages[2]

    def test_measured_is_the_worst_in_the_band(self) -> None:
        """The middle of the band, or the best of it, would be another number."""
        s = np.array([[[[0.1]], [[0.4]], [[0.2]]]], dtype=complex)
        low, high = read_limits(["S11 >= -60 dB", "S11 <= 0 dB"], ["a"])
        assert low.measured(s, s[0]) == pytest.approx([0.1]) and high.measured(s, s[0]) == pytest.approx(
            [0.4]
        )


class TestRefused:
    def test_nothing_varies(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {"t": by_angle("in", "out", 50, 90)}
        for table in ({}, {"tolerance": {"height": "0 mm"}}):
            with pytest.raises(WrongInputError, match="tolerance"):
                tolerance(artwork_of({"ports": ports, "lines": lines, **table}))

    def test_no_line_left(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Negative widths give numbers, not answers."""
        lines = {"t": by_angle("in", "out", 50, 90)}
        artwork = artwork_of({"ports": ports, "lines": lines, "tolerance": {"width": "2 mm"}})
        with pytest.raises(WrongInputError, match=r"tolerance.width.*narrowest line"):
            tolerance(artwork)

    def test_no_gap_left(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Strips of a pair that overlap have a coupling all the same, and nobody would see it."""
        pair = {"nets": ["in", "open", "open", "out"], "even_impedance": "63 ohm", "odd_impedance": "41 ohm"}
        tables = {
            "ports": ports,
            "coupled": {"p": {**pair, "angle": "90 deg"}},
            "tolerance": {"width": "0.5 mm"},
        }
        artwork = artwork_of(tables)
        assert artwork.placement.pairs["p"].width > 500_000 > artwork.placement.pairs["p"].gap
        with pytest.raises(WrongInputError, match=r"tolerance.width.*narrowest gap"):
            tolerance(artwork)

    @pytest.mark.parametrize("address", ["inproc://10.0.0.1/1/1", "nonsense:::1", "foo://x:1", ""])
    def test_an_address_that_is_none(self, attenuator: Artwork, address: str) -> None:
        """The library waits long for these, and leaves a traceback behind."""
        with pytest.raises(WrongInputError, match="another form of address"):
            tolerance(attenuator, samples=2, points=2, scheduler=address)

    @pytest.mark.filterwarnings("ignore")
    def test_a_scheduler_that_is_not_there(
        self, attenuator: Artwork, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        """A traceback, or a wait without end."""
        pytest.importorskip("distributed")
        import importlib

        module = importlib.import_module("layoutgen.response.batches")
        monkeypatch.setattr(module, "PATIENCE", "1s")
        with pytest.raises(WrongInputError, match="scheduler"):
            tolerance(attenuator, samples=2, points=2, scheduler="tcp://127.0.0.1:1")
