"""The JSON Schema: valid itself, at one with the reader, units named at each quantity."""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from layoutgen.reading import CircuitFile, RuleFile, schema, shipped_rules
from layoutgen.reading.validate import table_keys
from layoutgen.units import DIMENSIONS

jsonschema = pytest.importorskip("jsonschema")
HERE = Path(__file__).parent


@pytest.fixture(scope="module")
def schemas() -> dict[str, Any]:
    return schema()


def complaints(schemas: dict[str, Any], which: str, text: str) -> list[str]:
    validator = jsonschema.Draft202012Validator(schemas[which])
    return [error.message for error in validator.iter_errors(tomllib.loads(text))]


def properties(node: Any) -> Iterator[tuple[str, dict[str, Any]]]:
    """Yield every property of a schema, by key."""
    if isinstance(node, dict):
        yield from node.get("properties", {}).items()
        for value in node.values():
            yield from properties(value)
    elif isinstance(node, list):
        for item in node:
            yield from properties(item)


def test_is_a_schema(schemas: dict[str, Any]) -> None:
    """Both parts are valid JSON Schema and plain JSON."""
    assert sorted(schemas) == ["circuit", "rules"]
    for part in schemas.values():
        jsonschema.Draft202012Validator.check_schema(part)
        assert part["$schema"].endswith("2020-12/schema")
    assert json.loads(json.dumps(schemas)) == schemas


def test_has_every_key(schemas: dict[str, Any]) -> None:
    """No key of the records is missing, none is made up."""
    for which, model in (("circuit", CircuitFile), ("rules", RuleFile)):
        assert {key for key, _ in properties(schemas[which])} == table_keys(model)


def test_every_property_is_described(schemas: dict[str, Any]) -> None:
    """Every key has a description, every quantity its dimension and, at its end, the unit it is held in."""
    for part in schemas.values():
        for key, node in properties(part):
            assert node.get("description"), key
            if "x-dimension" in node:
                assert re.search(r"\[[^\]]+\]$", node["description"]), key
                assert DIMENSIONS[node["x-dimension"]].si == node["x-held-in"]


def test_described_unit_is_the_one_held(schemas: dict[str, Any]) -> None:
    """The unit in the text is that of the dimension: a wrong docstring would mislead every later stage."""
    for part in schemas.values():
        for key, node in properties(part):
            if "x-dimension" in node:
                assert node["description"].endswith(f"[{node['x-held-in']}]"), (key, node["description"])


def test_defaults_are_text(schemas: dict[str, Any]) -> None:
    """A default is written as a user would write it."""
    defaults = {key: node["default"] for key, node in properties(schemas["circuit"]) if "default" in node}
    assert defaults["conductivity"] == "58 MS/m"
    assert defaults["max_impedance_shift"] == "1 %"
    assert defaults["points"] == 401
    assert "null" not in json.dumps(schemas)


@pytest.mark.parametrize("name", ["gauge.toml", "contract_circuit.toml"])
def test_accepts_circuits(schemas: dict[str, Any], name: str) -> None:
    """What the reader reads passes the schema."""
    assert complaints(schemas, "circuit", (HERE / name).read_text(encoding="utf-8")) == []


@pytest.mark.parametrize(
    "path", [HERE / "house.toml", HERE / "contract_rules.toml", *shipped_rules().values()]
)
def test_accepts_rules(schemas: dict[str, Any], path: Path) -> None:
    """The shipped rule files pass, too."""
    assert complaints(schemas, "rules", path.read_text(encoding="utf-8")) == []


@pytest.mark.parametrize(
    ("which", "old", "new"),
    [
        ("circuit", '"0.508 mm"', '"0.508 V"'),
        ("circuit", '"0.508 mm"', '"-0.508 mm"'),
        ("circuit", '"0.508 mm"', '"0.508  mm"'),
        ("circuit", '"0.508 mm"', "0.508"),
        ("circuit", '"2.245 GHz"', '"2.245 GHZ"'),
        ("circuit", "points = 201", "pionts = 201"),
        ("circuit", "points = 201", "points = 1"),
        ("circuit", '"9-6j ohm"', '"9-j6 ohm"'),
        ("circuit", 'case = "0402"', 'case = "402"'),
        ("circuit", "[lines.stub]", '[lines."a stub"]'),
        ("circuit", 'heading = "west"', 'heading = "left"'),
        ("circuit", 'net = "out"', 'net = "gnd"'),
        ("circuit", 'title = "River gauge driver"\n', ""),
        ("rules", 'condition = "B2"', 'condition = "B7"'),
        ("rules", '"fence.max_pitch" = "error"', '"fence.pitch" = "error"'),
        ("rules", 'rule = "copper.min_gap"', 'rule = "copper.gap"'),
        ("rules", "per_ground_pad = 2", "per_ground_pad = 2.5"),
    ],
)
def test_refuses(schemas: dict[str, Any], which: str, old: str, new: str) -> None:
    """A slip that an editor can show is in the schema."""
    text = (HERE / {"circuit": "gauge.toml", "rules": "house.toml"}[which]).read_text(encoding="utf-8")
    assert text.count(old) == 1
    assert complaints(schemas, which, text.replace(old, new))
