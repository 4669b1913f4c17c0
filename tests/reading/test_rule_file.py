"""The rule file: what is read, what is optional, and what one slip brings."""

from __future__ import annotations

import datetime
import math
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.reading import KEYLESS_RULES, RULE_NAMES, read_rules, rules_from_data, shipped_rules
from layoutgen.units import to_nm

if TYPE_CHECKING:
    from conftest import Files

SHORTEST = {
    "format": 1,
    "name": "shortest",
    "holes": {"drills": ["0.3 mm"]},
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm"},
}


class TestValues:
    def test_every_key(self, files: Files) -> None:
        """Every key of the contract's example arrives, in SI."""
        rules = files.read().rules
        assert (rules.name, rules.source) == ("Two layers, invented class", "invented example")
        copper = rules.copper
        assert (copper.min_width, copper.min_gap, copper.min_edge_distance) == (0.125e-3, 0.125e-3, 0.3e-3)
        assert (copper.min_corner_angle, copper.min_island_area) == (math.radians(85.0), 0.5e-6)
        assert copper.undercut == 0.0
        holes = rules.holes
        assert holes.drills == (0.3e-3, 0.4e-3, 2.7e-3)
        assert (holes.min_diameter, holes.max_aspect_ratio, holes.min_annular_ring) == (
            0.25e-3,
            8.0,
            0.125e-3,
        )
        assert (holes.min_web, holes.min_copper_distance, holes.min_edge_distance) == (
            0.25e-3,
            0.2e-3,
            0.5e-3,
        )
        vias = rules.vias
        assert (vias.diameter, vias.drill, vias.min_pitch) == (0.6e-3, 0.3e-3, 0.8e-3)
        assert (vias.max_current, vias.plating, vias.per_ground_pad) == (1.0, 20e-6, 2)
        assert rules.fence is not None and rules.mask is not None and rules.legend is not None
        fence = rules.fence
        assert (fence.max_pitch, fence.max_pitch_wavelengths, fence.max_edge_distance) == (2e-3, 0.05, 0.8e-3)
        assert (rules.mask.expansion, rules.mask.min_web) == (0.05e-3, 0.1e-3)
        assert (rules.legend.min_line, rules.legend.min_distance) == (0.12e-3, 0.15e-3)
        assert rules.current is not None and rules.voltage is not None and rules.spacing is not None
        assert (rules.current.temperature_rise, rules.current.max_density) == (20.0, 120e6)
        assert (rules.voltage.condition, rules.voltage.table) == ("B2", None)
        assert (rules.spacing.min_line_heights, rules.spacing.max_coupling) == (3.0, -30.0)
        assert rules.bank is not None and rules.land_pattern is not None
        assert (rules.bank.max_distance, rules.land_pattern.density) == (1e-3, "nominal")
        assert rules.severity == {"fence.max_pitch": "error"}
        waiver = rules.waive["first-article"]
        assert (waiver.rule, waiver.items) == ("copper.min_gap", ("C1", "series_in"))
        assert (waiver.reason, waiver.until) == ("approved at first article", datetime.date(2027, 6, 30))

    def test_shortest(self) -> None:
        """Only the required keys: every other rule is None, that is, not checked."""
        rules = rules_from_data(SHORTEST)
        for table in ("fence", "mask", "legend", "current", "voltage", "spacing", "bank", "land_pattern"):
            assert getattr(rules, table) is None
        unchecked = set(type(rules.copper).model_fields) - {"undercut"}
        assert all(getattr(rules.copper, key) is None for key in unchecked)
        assert rules.copper.undercut == 0.0
        assert (rules.severity, rules.waive, rules.source) == ({}, {}, None)

    def test_voltage_table(self, files: Files) -> None:
        """A clearance table of one's own stands for the column."""
        files.change('condition = "B2"', 'table = [["30 V", "0.1 mm"], ["100 V", "0.6 mm"]]', rules=True)
        voltage = files.read().rules.voltage
        assert voltage is not None
        assert voltage.table == ((30.0, 0.1e-3), (100.0, 0.6e-3))

    def test_until_is_optional_and_may_be_a_date(self, files: Files) -> None:
        """TOML's own date is read like the text; without it a waiver never expires."""
        files.change('"2027-06-30"', "2027-06-30", rules=True)
        assert files.read().rules.waive["first-article"].until == datetime.date(2027, 6, 30)
        files.change("until = 2027-06-30\n", "", rules=True)
        assert files.read().rules.waive["first-article"].until is None

    def test_locations(self, files: Files) -> None:
        """A finding can name the line of the limit, or of the table when the key is not there."""
        rules = files.read().rules
        assert rules.location("copper.min_gap").line == files.line("min_gap", rules=True)
        assert rules.location("holes.drills").file == str(files.rules)
        assert rules.location('severity."fence.max_pitch"').line == files.line('"fence.max', rules=True)
        assert rules.location("fence.nothing").line == files.line("[fence]", rules=True)


SLIPS = [
    ('min_width = "0.125 mm"', 'min_width = "0 mm"', "copper.min_width", "> 0"),
    ('min_width = "0.125 mm"', "min_width = 0.125", "copper.min_width", "without a unit"),
    ('min_width = "0.125 mm"', 'minwidth = "0.125 mm"', "copper.minwidth", '"min_width"'),
    ('undercut = "0 um"', 'undercut = "-1 um"', "copper.undercut", ">= 0"),
    (
        'min_corner_angle = "85 deg"',
        'min_corner_angle = "85\u00b0"',
        "copper.min_corner_angle",
        "unknown unit",
    ),
    ('min_corner_angle = "85 deg"', 'min_corner_angle = "180 deg"', "copper.min_corner_angle", "< 180 deg"),
    ('min_island_area = "0.5 mm^2"', 'min_island_area = "0.5 mm"', "copper.min_island_area", "a length"),
    ('drills = ["0.3 mm", "0.4 mm", "2.7 mm"]', "drills = []", "holes.drills", "at least 1"),
    ('drills = ["0.3 mm", "0.4 mm", "2.7 mm"]\n', "", "holes.drills", "found nothing"),
    ('drills = ["0.3 mm", "0.4 mm", "2.7 mm"]', 'drills = "0.3 mm"', "holes.drills", "a list"),
    ('"0.4 mm", "2.7 mm"]', '0.4, "2.7 mm"]', "holes.drills[1]", "without a unit"),
    ("max_aspect_ratio = 8", "max_aspect_ratio = 0", "holes.max_aspect_ratio", "> 0"),
    ("max_aspect_ratio = 8", 'max_aspect_ratio = "8:1"', "holes.max_aspect_ratio", "a number"),
    ('diameter = "0.6 mm"\n', "", "vias.diameter", "found nothing"),
    ('drill = "0.3 mm"\n', "", "vias.drill", "found nothing"),
    ('diameter = "0.6 mm"', 'diameter = "0.3 mm"', "vias.drill", "contradicts vias.diameter"),
    (
        'min_pitch = "0.8 mm"',
        'min_pitch = "0.54 mm"',
        "vias.min_pitch",
        "vias.drill + holes.min_web = 0.55 mm",
    ),
    (
        'max_edge_distance = "0.8 mm"',
        'max_edge_distance = "0.27 mm"',
        "fence.max_edge_distance",
        "vias.drill / 2 + holes.min_annular_ring = 0.275 mm",
    ),
    ("per_ground_pad = 2", "per_ground_pad = 0", "vias.per_ground_pad", "from 1"),
    ("per_ground_pad = 2", "per_ground_pad = 2.5", "vias.per_ground_pad", "whole number"),
    (
        "max_pitch_wavelengths = 0.05",
        'max_pitch_wavelengths = "0.05"',
        "fence.max_pitch_wavelengths",
        "a number",
    ),
    ('expansion = "0.05 mm"', 'expansion = "-0.05 mm"', "mask.expansion", ">= 0"),
    ('temperature_rise = "20 K"', 'temperature_rise = "20 degC"', "current.temperature_rise", "unknown unit"),
    ('"120 A/mm^2"', '"120 A/mm2"', "current.max_density", "unknown unit"),
    ('condition = "B2"', 'condition = "B5"', "voltage.condition", '"B1", "B2"'),
    ('condition = "B2"', 'condition = "B2"\ntable = [["30 V", "0.1 mm"]]', "voltage.table", "not both"),
    ('condition = "B2"', 'table = [["30 V", "0.1 mm"], ["20 V", "0.2 mm"]]', "voltage.table[1]", "rising"),
    ('condition = "B2"', 'table = [["30 V", "0.2 mm"], ["40 V", "0.1 mm"]]', "voltage.table[1]", "rising"),
    ('condition = "B2"', 'table = [["30 V"]]', "voltage.table[0]", "a list of 2"),
    ('condition = "B2"', 'table = [["30 V", "1 V"]]', "voltage.table[0][1]", "a voltage"),
    ('condition = "B2"', "table = []", "voltage.table", "at least 1"),
    ('max_coupling = "-30 dB"', 'max_coupling = "30 dB"', "spacing.max_coupling", "<= 0"),
    ("min_line_heights = 3.0", 'min_line_heights = "3 mm"', "spacing.min_line_heights", "a number"),
    ('density = "nominal"', 'density = "normal"', "land_pattern.density", '"nominal"'),
    (
        '"fence.max_pitch" = "error"',
        '"fence.max_pitch" = "fatal"',
        'severity."fence.max_pitch"',
        '"error", "warning" or "note"',
    ),
    (
        '"fence.max_pitch" = "error"',
        '"fence.maxpitch" = "error"',
        'severity."fence.maxpitch"',
        '"fence.max_pitch"',
    ),
    ('"fence.max_pitch" = "error"', 'fence.max_pitch = "error"', "severity.fence", "quotes around it"),
    ('"fence.max_pitch" = "error"', '"zz" = "error"', "severity.zz", "a rule's name"),
    ('rule = "copper.min_gap"', 'rule = "copper.gap"', "waive.first-article.rule", '"copper.min_gap"'),
    ('rule = "copper.min_gap"\n', "", "waive.first-article.rule", "found nothing"),
    ('items = ["C1", "series_in"]', "items = []", "waive.first-article.items", "at least 1"),
    ('items = ["C1", "series_in"]', 'items = "C1"', "waive.first-article.items", "a list"),
    ('reason = "approved at first article"', 'reason = ""', "waive.first-article.reason", '""'),
    ('reason = "approved at first article"\n', "", "waive.first-article.reason", "found nothing"),
    ('"2027-06-30"', '"2027-06-31"', "waive.first-article.until", "no day of the calendar"),
    ('"2027-06-30"', '"30.6.2027"', "waive.first-article.until", '"2027-06-30"'),
    ('"2027-06-30"', "2027-06-30T12:00:00", "waive.first-article.until", "date or time"),
    ("[waive.first-article]", "[waive.'first article']", 'waive."first article"', "A-Z a-z 0-9 _ -"),
    ("[vias]", "[via]", "via", '"vias"'),
    ('name = "Two layers, invented class"\n', "", "name", "found nothing"),
    ("format = 1", "format = 2", "format", "the whole number 1"),
    ("format = 1", "format = 1.0", "format", "the whole number 1"),
    ("format = 1", "format = true", "format", "the whole number 1"),
    ("format = 1\n", "", "format", "found nothing"),
]


class TestSlips:
    @pytest.mark.parametrize("slip", SLIPS, ids=lambda slip: f"{slip[2]}: {slip[3]}")
    def test_one_fault(self, files: Files, slip: tuple[str, str, str, str]) -> None:
        """Each slip gives one fault of the rule file, under its key, with what is allowed."""
        old, new, key, phrase = slip
        fault = files.change(old, new, rules=True).fault()
        assert fault.key == key
        assert fault.location.file == str(files.rules)
        assert phrase in str(fault), str(fault)

    def test_exact_limits_do_not_contradict(self, files: Files) -> None:
        """Equality is kept by both rules: no fault."""
        files.change('min_pitch = "0.8 mm"', 'min_pitch = "0.55 mm"', rules=True)
        files.change('max_edge_distance = "0.8 mm"', 'max_edge_distance = "0.275 mm"', rules=True).read()

    def test_tightened_rule_is_no_contradiction(self, files: Files) -> None:
        """A via that a rule forbids is a finding of the checks, not wrong input."""
        files.change('min_annular_ring = "0.125 mm"', 'min_annular_ring = "0.2 mm"', rules=True)
        files.change('min_diameter = "0.25 mm"', 'min_diameter = "0.5 mm"', rules=True).read()

    def test_wrong_format_is_the_only_fault_of_its_file(self, files: Files) -> None:
        """Nothing else is said of a file of another form; the circuit's own fault stays."""
        files.change("format = 1", "format = 2", rules=True)
        files.change('undercut = "0 um"', 'undercut = "0 V"', rules=True)
        files.change('"0.508 mm"', '"0.508 V"')
        assert [fault.key for fault in files.faults()] == ["substrate.height", "format"]


class TestNames:
    def test_rule_names(self) -> None:
        """A rule's name is its key's path; findings without a key have the contract's names."""
        assert {"copper.min_width", "holes.drills", "fence.max_pitch", "land_pattern.density"} <= set(
            RULE_NAMES
        )
        assert set(KEYLESS_RULES) <= set(RULE_NAMES)
        assert len(KEYLESS_RULES) == 11
        assert len(RULE_NAMES) == len(set(RULE_NAMES)) == 45
        assert not any(name.startswith(("severity", "waive.first", "format", "name")) for name in RULE_NAMES)

    @pytest.mark.parametrize("rule", KEYLESS_RULES)
    def test_keyless_rules_have_a_severity(self, rule: str) -> None:
        """Severity may be changed of findings that have no key."""
        assert rules_from_data({**SHORTEST, "severity": {rule: "note"}}).severity == {rule: "note"}


class TestReadRules:
    def test_by_name_and_by_path(self, files: Files) -> None:
        """A shipped name, or a path ending in .toml, which starts at the folder given."""
        assert read_rules("two-layer-standard").name == "Two layers, standard class"
        assert read_rules("house.toml", files.folder).name == "Two layers, invented class"
        assert read_rules(files.rules).name == "Two layers, invented class"

    @pytest.mark.parametrize(
        ("name", "phrase"),
        [("two-layer-standart", 'nearest is "two-layer-standard"'), ("nowhere.toml", "no such file")],
    )
    def test_not_there(self, tmp_path: Path, name: str, phrase: str) -> None:
        """A name that is not shipped offers the nearest; a missing file is said to be missing."""
        with pytest.raises(WrongInputError) as caught:
            read_rules(name, tmp_path)
        assert len(caught.value.faults) == 1
        assert phrase in str(caught.value)


class TestShippedRules:
    def test_the_four(self) -> None:
        """The classes that come with the tool."""
        assert list(shipped_rules()) == [
            "thick-copper",
            "thin-film-ceramic",
            "two-layer-fine",
            "two-layer-standard",
        ]

    @pytest.mark.parametrize("name", sorted(shipped_rules()))
    def test_reads(self, name: str) -> None:
        """Each reads without a fault, and its own via is on its list of drills."""
        rules = read_rules(name)
        assert to_nm(rules.vias.drill) in {to_nm(drill) for drill in rules.holes.drills}
        assert rules.holes.min_annular_ring is not None
        assert (rules.vias.diameter - rules.vias.drill) / 2 >= rules.holes.min_annular_ring - 1e-12
        assert rules.source == "invented example"

    @pytest.mark.parametrize("name", sorted(shipped_rules()))
    def test_every_number_has_its_source(self, name: str) -> None:
        """Each line with a number says in a comment where it comes from."""
        for line in shipped_rules()[name].read_text(encoding="utf-8").splitlines():
            value, _, comment = line.partition("#")
            if "=" in value and any(character.isdigit() for character in value) and "format" not in value:
                sources = ("common practice", "from memory", "IPC-", "field-solved tables", "invented")
                assert any(source in comment for source in sources), line
