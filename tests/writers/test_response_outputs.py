"""What is written of the response and of a tolerance analysis: tables, JSON, pictures, CSV."""

from __future__ import annotations

import csv
import io
import json
import xml.etree.ElementTree as ET
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from layoutgen.numbers import json_text
from layoutgen.reading import Tolerance as Limits
from layoutgen.response import Correction, Holder, Response, Tolerance, tolerance
from layoutgen.writers import Job, Result, response_files
from layoutgen.writers.response_files import trace_values, write_plot
from layoutgen.writers.response_json import response_entries
from layoutgen.writers.response_png import write_response_png
from layoutgen.writers.response_tables import response_tables, tolerance_tables
from layoutgen.writers.tolerance_files import tolerance_files

JOB = Job(stem="board")
HELD = Correction(
    before=0.0464,
    after=0.0405,
    losses=0.0078,
    angles={"arm": 0.0077},
    reachable=0.0399,
    holders=(Holder(element="R1", what="its pads", without=0.016, alike=("R2",)),),
    unallowed=0.0557,
)


@pytest.fixture(scope="module")
def spread(driver: Result) -> Tolerance:
    """Return an analysis of the amplifier's drawing, few samples."""
    sized = driver.sized
    limits = Limits(relative_permittivity=0.05, height="0.02 mm", width="0.02 mm", value="5 %")
    file = sized.circuit.file.model_copy(update={"tolerance": limits})
    circuit = replace(sized.circuit, file=file)
    placement = replace(driver.placement, sized=replace(sized, circuit=circuit))
    return tolerance(replace(driver.artwork, placement=placement), samples=20, points=5)


def held(response: Response) -> Response:
    return replace(response, correction=HELD)


class TestPictures:
    def test_all_plots_are_in_the_svg(self, driver: Result) -> None:
        """Levels alone would say nothing of phase, nor of what a port looks like."""
        tree = ET.fromstring(write_plot(driver, driver.response))
        plots = tree.findall(".//{*}svg")
        titles = [plot.find("{*}title").text for plot in plots]
        assert titles == ["Reflection"] * 3 + ["Transmission"] * 2
        bottoms = [float(p.get("y")) + float(p.get("height")) for p in plots]
        assert bottoms == sorted(bottoms) and bottoms[-1] <= float(tree.get("height"))

    def test_the_key_of_many_ports_has_room(self, with_ports: Callable[[int], Result]) -> None:
        """The names of traces below the plot's lower edge would be cut off."""
        result = with_ports(9)
        tree = ET.fromstring(write_plot(result, result.response))
        for plot in tree.findall(".//{*}svg"):
            height = float(plot.get("viewBox").split()[3])
            assert max(float(text.get("y")) for text in plot.findall(".//{*}text") if text.get("y")) < height

    def test_long_names_have_room(self, with_ports: Callable[[int], Result]) -> None:
        """A name such as "antenna to receiver_1" would end at the plot's right edge."""
        result = with_ports(2)
        names = ("a_long_name_of_an_antenna", "a_receiver_far_up_the_river")
        tree = ET.fromstring(write_plot(result, replace(result.response, ports=names)))
        for plot in tree.findall(".//{*}svg"):
            width = float(plot.get("viewBox").split()[2])
            keys = plot.findall(".//{*}g[@data-key]/{*}text")
            assert keys
            for text in keys:
                assert float(text.get("x")) + 6.5 * len(text.text) < width

    def test_the_png_is_a_picture_and_the_same_each_time(self, driver: Result) -> None:
        from PIL import Image

        data = write_response_png(driver, driver.response, 40)
        assert data == write_response_png(driver, driver.response, 40)
        dots = np.asarray(Image.open(io.BytesIO(data)).convert("RGB"))
        assert dots.shape[1] == 15 * 40
        assert len(np.unique(dots.reshape(-1, 3), axis=0)) > 50


def test_all_files_are_there(driver: Result) -> None:
    """A plot that is made but never written."""
    names = {"wanted.s4p", "as_drawn.s4p", "response.csv", "response.svg", "response.png", "response.json"}
    assert set(response_files(driver, replace(JOB, dpi=30))) == names


class TestTables:
    def test_the_terminal_gets_all_of_it(self, driver: Result) -> None:
        """Impedances at the device, isolation of feeds and doubts that only the page would show."""
        tables = {table.title: table for table in response_tables(driver.response)}
        pins = tables["Impedance into the board (ohm)"]
        assert len(pins.heads) == 7 and pins.heads[-1] == "4.49 GHz"
        assert [row[:3] for row in pins.rows[:2]] == [
            ("Q1.gate", "9.00 - 6.00j", "wanted"),
            ("Q1.gate", "9.00 - 6.00j", "as drawn"),
        ]
        assert {row[1] for row in tables["Magnitude of the impedance into the feeds (ohm)"].rows} == {
            "vg",
            "vd",
        }
        doubts = tables["Where the circuit model is doubtful"].rows
        assert len(doubts) == len(driver.response.doubts)
        assert all(len(row) == len(table.heads) for table in tables.values() for row in table.rows)

    def test_notes_on_data_are_not_lost(self, driver: Result) -> None:
        """A part's data that are not passive would be used without a word."""
        noted = replace(
            driver.response, notes=(("response", "C1", "c1.s2p is not passive"), ("response", "", "x"))
        )
        tables = {table.title: table for table in response_tables(noted)}
        rows = tables["Assumptions of the response"].rows
        assert rows == [("C1", "c1.s2p is not passive"), ("-", "x")]

    def test_what_holds_is_named_with_figures(self, driver: Result) -> None:
        tables = {table.title: table for table in response_tables(held(driver.response))}
        assert tables["What holds the difference"].rows == [("R1", "its pads, and those of R2", "0.0160")]
        figures = dict(tables["Largest difference of S in the band, without losses"].rows)
        assert list(figures.values()) == ["0.0557", "0.0464", "0.0405", "0.0399", "0.0078"]

    def test_corners_and_contributors(self, spread: Tolerance) -> None:
        """Limits in metres, or the corner's signs lost."""
        limits, worst, corners = tolerance_tables(spread)
        assert limits.rows[0][0] == "change <= 0.1"
        assert ("height", "0.02 mm") in [row[:2] for row in worst.rows]
        assert ("C1", "5 %") in [row[:2] for row in worst.rows]
        assert len(corners.rows) == 12
        assert corners.rows[0][0].startswith("relative_permittivity ")
        assert [float(row[1]) for row in corners.rows] == sorted(
            (float(r[1]) for r in corners.rows), reverse=True
        )


class TestJson:
    def test_the_match_and_the_device(self, driver: Result) -> None:
        entries = json.loads(json_text(response_entries(held(driver.response))))
        assert entries["response_correction"]["after"] == pytest.approx(0.0405)
        assert entries["response_correction"]["holders"] == [
            {"element": "R1", "alike": ["R2"], "what": "its pads", "without": pytest.approx(0.016)}
        ]
        pin = entries["device"]["pins"][0]
        seen = driver.response.device.pins[0].as_drawn
        assert pin["as_drawn_ohm"][1] == pytest.approx([seen[1].real, seen[1].imag], abs=1e-4)
        assert len(entries["doubts"]) == len(driver.response.doubts)

    def test_an_open_feed_is_null(self, driver: Result) -> None:
        """Infinity is no JSON number."""
        view = driver.response.device
        open_feed = replace(view.feeds[0], wanted=(complex("inf"),) * 4)
        response = replace(driver.response, device=replace(view, feeds=(open_feed,)))
        entries = json.loads(json_text(response_entries(response)))
        assert entries["device"]["feeds"][0]["wanted_ohm"] == [None] * 4

    def test_no_response_no_entries(self) -> None:
        assert response_entries(None) == {}


class TestTolerance:
    def test_json_has_all(self, spread: Tolerance) -> None:
        found = json.loads(tolerance_files(spread, "Gauge driver")["tolerance.json"])
        assert found["samples"] == 20 and found["yield"] == pytest.approx(spread.yield_share)
        assert [c["name"] for c in found["contributors"]] == [c.name for c in spread.contributors]
        assert len(found["corners"]) == 16
        assert found["corners"][0]["signs"] == dict(spread.corners[0].signs)

    def test_csv_ranges_hold_the_nominal_board(self, spread: Tolerance) -> None:
        """Columns in another order than their headings."""
        rows = list(csv.DictReader(io.StringIO(tolerance_files(spread, "x")["tolerance.csv"].decode())))
        assert len(rows) == 5
        names = {key.rsplit(" ", 2)[0] for key in rows[0] if key != "frequency_hz"}
        assert "rf_in" in names and "rf_in to Q1.gate" in names
        for row in rows:
            for name in names:
                least, most = (float(row[f"{name} {kind} (dB)"]) for kind in ("least", "most"))
                assert least <= most
        nominal = float(rows[2]["rf_in nominal (dB)"])
        assert nominal == pytest.approx(20.0 * np.log10(spread.nominal[2, 0, 0]), abs=1e-4)

    def test_the_png_is_the_same_each_time(self, spread: Tolerance) -> None:
        files = tolerance_files(spread, "Gauge driver")
        assert files["tolerance.png"].startswith(b"\x89PNG")
        assert files == tolerance_files(spread, "Gauge driver")


def test_what_only_rounding_leaves_reads_none(driver: Result) -> None:
    """The level and angle of a wave that is not there are noise, and so is their change."""
    assert driver.response is not None
    silent = np.where(np.eye(len(driver.response.ports)), 1e-8, driver.response.wanted_at_spots)
    rows = trace_values(replace(driver.response, wanted_at_spots=silent))
    reflections = [row for row in rows if " to " not in row[0]]
    assert reflections
    for row in reflections:
        assert (row[2], row[4], row[5], row[7]) == ("none",) * 4
        assert "none" not in (row[3], row[6])
    assert not any("none" in row for row in trace_values(driver.response))
