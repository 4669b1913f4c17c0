"""Circuits and rules built in code: the same checks, without a file."""

from __future__ import annotations

import copy
import pickle
import tomllib
from pathlib import Path
from typing import Any

import pytest
from pydantic import ValidationError

from layoutgen.errors import WrongInputError
from layoutgen.origin import Location
from layoutgen.reading import (
    RuleFile,
    circuit_from_data,
    inputs_from_data,
    read_inputs,
    rules_from_data,
)

HERE = Path(__file__).parent


@pytest.fixture
def data(tmp_path: Path) -> dict[str, Any]:
    (tmp_path / "c1.s2p").write_text("# GHz S MA R 50\n", encoding="utf-8")
    (tmp_path / "house.toml").write_bytes((HERE / "house.toml").read_bytes())
    (tmp_path / "gauge.toml").write_bytes((HERE / "gauge.toml").read_bytes())
    return tomllib.loads((HERE / "gauge.toml").read_text(encoding="utf-8"))


class TestCircuitFromData:
    def test_equals_the_file(self, data: dict[str, Any], tmp_path: Path) -> None:
        """The same tables in code and in a file give the same records, place in the file apart."""
        built = circuit_from_data(data, folder=tmp_path)
        assert built.model_dump() == read_inputs(tmp_path / "gauge.toml").circuit.model_dump()
        assert built.location("lines.series_in") == Location("circuit", 0)

    def test_tuples_are_lists(self, data: dict[str, Any], tmp_path: Path) -> None:
        """Python's tuples do as well as TOML's lists."""
        data["design"]["band"] = tuple(data["design"]["band"])
        assert circuit_from_data(data, folder=tmp_path).design.band == (2.2e9, 2.29e9)

    def test_data_are_left_alone(self, data: dict[str, Any], tmp_path: Path) -> None:
        """Reading changes nothing in the caller's dicts."""
        before = copy.deepcopy(data)
        circuit_from_data(data, folder=tmp_path)
        assert data == before

    def test_faults_name_key_and_data(self, data: dict[str, Any], tmp_path: Path) -> None:
        """Without lines, messages name what was given for the file, and the key."""
        data["lines"]["gate_feed"]["width"] = "1 mm"
        data["substrate"]["height"] = 0.508e-3
        with pytest.raises(WrongInputError) as caught:
            circuit_from_data(data, folder=tmp_path, name="my driver")
        assert [fault.key for fault in caught.value.faults] == ["substrate.height", "lines.gate_feed.width"]
        assert str(caught.value).startswith(
            "my driver: substrate.height: found the number 0.000508, without a unit"
        )

    def test_rules_fill_in(self, data: dict[str, Any], tmp_path: Path) -> None:
        """A name of rules stands where the data have none; what the data have stays."""
        del data["board"]["rules"]
        assert (
            circuit_from_data(data, rules="two-layer-fine", folder=tmp_path).board.rules == "two-layer-fine"
        )
        with pytest.raises(WrongInputError):
            circuit_from_data(data, folder=tmp_path)

    @pytest.mark.parametrize(
        "wrong", [None, [], "text", 3, {"format": 1, "design": [{}]}, {1: 2}, {"a": object()}]
    )
    def test_anything_else(self, wrong: Any) -> None:
        """Whatever is given, the error is the package's own."""
        with pytest.raises(WrongInputError):
            circuit_from_data(wrong)

    def test_data_that_hold_themselves(self, data: dict[str, Any]) -> None:
        """A dict within itself is nested too deep, not an endless loop."""
        data["layout"]["again"] = data
        with pytest.raises(WrongInputError, match="nested too deep"):
            circuit_from_data(data)


class TestInputsFromData:
    def test_rules_as_record_data_name_or_path(self, data: dict[str, Any], tmp_path: Path) -> None:
        """Rules may come in every form; the result is the same pair."""
        table = tomllib.loads((HERE / "house.toml").read_text(encoding="utf-8"))
        record = rules_from_data(table)
        assert isinstance(record, RuleFile)
        for rules in (None, record, table):
            inputs = inputs_from_data(data, rules=rules, folder=tmp_path)
            assert inputs.rules.model_dump() == record.model_dump()
        del data["board"]["rules"]
        assert (
            inputs_from_data(data, rules="two-layer-fine", folder=tmp_path).rules.name
            == "Two layers, fine class"
        )
        assert inputs_from_data(data, rules="house.toml", folder=tmp_path).rules.name == record.name
        assert inputs_from_data(data, rules=record, folder=tmp_path).rules is record

    def test_faults_of_rules(self, data: dict[str, Any], tmp_path: Path) -> None:
        """Faults of rules given as data are told, too."""
        with pytest.raises(WrongInputError, match=r"vias: found nothing"):
            inputs_from_data(
                data, rules={"format": 1, "name": "x", "holes": {"drills": ["1 mm"]}}, folder=tmp_path
            )


class TestRecords:
    def test_frozen(self, data: dict[str, Any], tmp_path: Path) -> None:
        """A record's fields cannot be set, and lists are tuples."""
        circuit = circuit_from_data(data, folder=tmp_path)
        with pytest.raises(ValidationError):
            circuit.design.frequency = 1.0  # type: ignore[misc]
        assert isinstance(circuit.board.holes, tuple)

    def test_equal_and_picklable(self, tmp_path: Path, data: dict[str, Any]) -> None:
        """Two readings of a file are equal; records go to other processes and keep their lines."""
        first, second = (read_inputs(tmp_path / "gauge.toml") for _ in range(2))
        assert first == second
        sent = pickle.loads(pickle.dumps(first))
        assert sent == first
        assert sent.circuit.location("lines.stub") == first.circuit.location("lines.stub")
        assert first.circuit.source.location("lines.stub").line > 1
