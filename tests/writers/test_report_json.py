"""report.json holds exactly the contract's keys, with numbers in fixed decimals."""

from __future__ import annotations

import hashlib
import json
import math
import re
from dataclasses import replace
from typing import Any

import pytest

from layoutgen.writers import Job, Result, encode
from layoutgen.writers.report_json import write_report_json

TOP = [
    "format", "design", "board", "layers", "lines", "coupled", "strips", "parts", "ports", "vias", "holes",
    "findings", "not_checked", "response_ports", "response", "files", "seconds",
]  # fmt: skip
LINE = [
    "name", "nets", "impedance_ohm", "angle_deg", "width_mm", "pour_gap_mm", "effective_permittivity",
    "centre_line_mm", "path_mm", "bends", "current_a", "loss_db", "budget",
]  # fmt: skip
KEYS: dict[str, list[str]] = {
    "board": ["width_mm", "height_mm"],
    "layers": ["name", "gds"],
    "strips": ["net", "width_mm", "path_mm", "current_a"],
    "ports": ["name", "net", "x_mm", "y_mm", "heading_deg"],
    "vias": ["x_mm", "y_mm", "drill_mm", "pad_mm", "net", "for"],
    "holes": ["x_mm", "y_mm", "diameter_mm", "plated", "net"],
    "findings": [
        "rule", "severity", "measured", "limit", "unit", "at_mm", "layer", "items", "nets", "text", "waived",
    ],
    "not_checked": ["rule", "reason"],
    "response": ["frequency_hz", "wanted", "as_drawn"],
    "files": ["path", "sha256"],
}  # fmt: skip
RADIAL = [*LINE, "sector_deg", "inner_radius_mm", "outer_radius_mm"]
PAD = ["pin", "net", "x_mm", "y_mm", "polygon_mm"]
BUDGET = ["cause", "angle_deg", "at"]
CAUSES = {
    "line", "bend", "step", "tee", "cross", "open_end", "pad", "via", "port", "response_correction",
}  # fmt: skip
LAYERS = [
    "copper_top", "copper_bottom", "soldermask_top", "soldermask_bottom", "paste_top", "legend_top",
    "profile", "drill_plated", "drill_nonplated", "reference", "findings",
]  # fmt: skip


@pytest.fixture(scope="module")
def files(handmade: Result) -> dict[str, bytes]:
    return encode(handmade, Job(stem="board"))


@pytest.fixture(scope="module")
def report(files: dict[str, bytes]) -> dict[str, Any]:
    loaded: dict[str, Any] = json.loads(files["report.json"])
    return loaded


def test_top_level_keys(report: dict[str, Any]) -> None:
    """A key missing or new breaks whoever reads the report by the contract."""
    assert list(report) == TOP
    assert report["format"] == 1


def test_nested_keys(report: dict[str, Any]) -> None:
    """The same one level down, in every entry."""
    for name, keys in KEYS.items():
        entries = report[name] if isinstance(report[name], list) else [report[name]]
        assert entries, name
        assert all(list(entry) == keys for entry in entries), name


def test_line_keys(report: dict[str, Any]) -> None:
    """A radial stub has three keys more, no impedance, no angle; the order is the circuit's."""
    assert [entry["name"] for entry in report["lines"]] == ["first", "second", "fan"]
    assert [list(entry) for entry in report["lines"]] == [LINE, LINE, RADIAL]
    assert report["lines"][2]["impedance_ohm"] is None
    assert report["lines"][2]["angle_deg"] is None
    assert report["lines"][2]["path_mm"] == [[6.0, 4.0], [6.0, 7.0]]
    assert report["lines"][0]["pour_gap_mm"] == [1.1232, None]


def test_part_keys(report: dict[str, Any]) -> None:
    """A part of two pads has a list of nets, one with a footprint its pin map, under both names."""
    chip, can = report["parts"]
    assert list(chip) == ["name", "x_mm", "y_mm", "heading_deg", "nets", "pads"]
    assert list(can) == ["name", "x_mm", "y_mm", "heading_deg", "nets", "pins", "pads"]
    assert can["nets"] == can["pins"] == {"top": "b", "base": "gnd"}
    assert all(list(pad) == PAD for part in report["parts"] for pad in part["pads"])
    assert chip["pads"][0]["polygon_mm"][0] == [7.8, 3.55]


def test_layers_are_all_there_with_their_numbers(report: dict[str, Any]) -> None:
    """Empty layers too: a reader must not guess the numbers."""
    assert [entry["name"] for entry in report["layers"]] == LAYERS
    numbers = [tuple(entry["gds"]) for entry in report["layers"]]
    assert len(set(numbers)) == len(LAYERS)


def test_budgets_have_one_line_and_add_up(report: dict[str, Any]) -> None:
    """The sum is the angle asked for; a second entry called line, or a strange cause, cannot be read."""
    for entry in report["lines"][:2]:
        assert all(list(item) == BUDGET for item in entry["budget"])
        causes = [item["cause"] for item in entry["budget"]]
        assert causes.count("line") == 1
        assert set(causes) <= CAUSES
        assert math.isclose(sum(i["angle_deg"] for i in entry["budget"]), entry["angle_deg"], abs_tol=1e-5)


def test_millimetres_have_six_decimals(files: dict[str, bytes]) -> None:
    """Significant digits would round 12.3456 mm to 12.35; floats print 8.000001 as 8.00000100000001."""
    text = files["report.json"].decode()
    for key in ("x_mm", "y_mm", "width_mm", "height_mm", "drill_mm", "diameter_mm", "centre_line_mm"):
        found = re.findall(rf'"{key}": ([^,}}\]\s]+)', text)
        assert found, key
        assert all(re.fullmatch(r"-?\d+\.\d{6}|null", number) for number in found), key
    assert "8.000001" in text
    assert "-0.000000" not in text


def test_hashes_are_those_of_the_files(files: dict[str, bytes], report: dict[str, Any]) -> None:
    """All files but this one, in order, each with the hash of what was really written."""
    assert [entry["path"] for entry in report["files"]] == [name for name in files if name != "report.json"]
    for entry in report["files"]:
        assert entry["sha256"] == hashlib.sha256(files[entry["path"]]).hexdigest()


def test_repeatable_leaves_out_the_seconds(handmade: Result) -> None:
    """Times differ from run to run, so the folder would."""
    plain = json.loads(write_report_json(handmade, Job(stem="b")))
    still = json.loads(write_report_json(handmade, Job(stem="b", repeatable=True)))
    assert plain.pop("seconds") == {"reading": 0.123456, "placement": 0.5}
    assert plain == still


def test_findings_end_with_the_notes_of_the_response(report: dict[str, Any]) -> None:
    """An assumption that is dropped between the stages reads as if nothing had been assumed."""
    assert [f["severity"] for f in report["findings"]] == ["error", "warning", "error", "note", "note"]
    assert report["findings"][-1]["items"] == ["C1"]
    assert report["findings"][2]["waived"] == "seen at first article"
    assert report["findings"][0]["at_mm"] == [9.0, 3.0]
    assert report["findings"][3]["measured"] is None


def test_response_is_to_the_ports_own_impedances(handmade: Result, report: dict[str, Any]) -> None:
    """The Touchstone files are to 50 ohm; this is not."""
    assert report["response_ports"] == ["rf_in", "rf_out"]
    assert [entry["frequency_hz"] for entry in report["response"]] == [2.20e9, 2.245e9, 2.29e9]
    response = handmade.response
    assert response is not None
    for k, entry in enumerate(report["response"]):
        for key, matrix in (("wanted", response.wanted_at_spots), ("as_drawn", response.as_drawn_at_spots)):
            found = [[complex(*pair) for pair in row] for row in entry[key]]
            assert found == pytest.approx(matrix[k], abs=1e-9)


def test_a_circuit_without_rf_ports_has_an_empty_response(handmade: Result) -> None:
    """The keys stay, so that a reader need not ask for them."""
    names = encode(replace(handmade, response=None), Job(stem="b"))
    report = json.loads(names["report.json"])
    assert (report["response_ports"], report["response"]) == ([], [])
    assert not any(name.startswith("wanted") for name in names)
