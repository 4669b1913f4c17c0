"""The contract's own examples: every key they show is read.

The circuit example shows every key and is not one complete circuit: its form must be faultless, and what is
missing to make it one must be told completely.
"""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.reading import CircuitFile, read_circuit, read_inputs, read_rules
from layoutgen.reading.faults import Faults
from layoutgen.reading.source import SourceMap
from layoutgen.reading.validate import validate

HERE = Path(__file__).parent
MISSING = """
[ports.rf_out]
net = "q"
[lines.one]
nets = ["e", "p"]
impedance = "50 ohm"
angle = "1 deg"
[lines.two]
nets = ["a1", "g"]
impedance = "50 ohm"
angle = "1 deg"
[lines.three]
nets = ["a2", "d"]
impedance = "50 ohm"
angle = "1 deg"
[lines.four]
nets = ["b1", "b"]
impedance = "50 ohm"
angle = "1 deg"
"""


def test_rule_file_reads() -> None:
    """The example of a rule file is a complete one."""
    rules = read_rules(HERE / "contract_rules.toml")
    assert rules.name == "Two layers, standard class"
    assert rules.waive["first-article"].items == ("C1", "series_in")


def test_shipped_standard_class_has_the_examples_limits() -> None:
    """The class of that name differs only in its stock of drills and has no waiver."""
    example = read_rules(HERE / "contract_rules.toml").model_dump()
    shipped = read_rules("two-layer-standard").model_dump()
    assert set(example["holes"]["drills"]) <= set(shipped["holes"]["drills"])
    for table in ("copper", "vias", "fence", "mask", "legend", "current", "voltage", "spacing", "bank"):
        assert shipped[table] == example[table]


def test_circuit_has_no_fault_of_form() -> None:
    """Every key and unit of the example passes table by table."""
    data = tomllib.loads((HERE / "contract_circuit.toml").read_text(encoding="utf-8"))
    faults = Faults(SourceMap("example"))
    circuit = validate(CircuitFile, data, faults)
    assert faults.items == []
    assert circuit is not None
    assert set(data) == {name for name in CircuitFile.model_fields if getattr(circuit, name)}


def test_what_it_lacks_is_told() -> None:
    """Nets of its separate pieces that end once, a port and a data file that are not there; nothing else."""
    with pytest.raises(WrongInputError) as caught:
        read_circuit(HERE / "contract_circuit.toml")
    kinds = {fault.key: fault.found for fault in caught.value.faults}
    assert kinds.pop("parts.C1.data") == '"c1.s2p", no such file'
    assert kinds.pop("layout.spine[2]") == 'the unknown name "rf_out"'
    assert kinds
    assert all("used once" in found for found in kinds.values())


def test_with_what_it_lacks_it_reads(tmp_path: Path) -> None:
    """Four lines, a port and a data file more make it a circuit."""
    text = (HERE / "contract_circuit.toml").read_text(encoding="utf-8")
    (tmp_path / "example.toml").write_text(text + MISSING, encoding="utf-8")
    (tmp_path / "c1.s2p").write_text("# GHz S MA R 50\n", encoding="utf-8")
    inputs = read_inputs(tmp_path / "example.toml")
    assert inputs.rules.name == "Two layers, standard class"
    assert inputs.circuit.coupled["pickup"].nets == ("a1", "a2", "b1", "open")


def test_commented_alternatives(tmp_path: Path) -> None:
    """The keys that the example shows as comments are read: a transistor's data, a pad over vias."""
    text = (HERE / "contract_circuit.toml").read_text(encoding="utf-8") + MISSING
    for comment in ('# data = "q1.s2p"', '# data_ports = ["gate", "drain"]'):
        assert comment in text
        text = text.replace(comment, comment.removeprefix("# "))
    start = text.index("terminations = {")
    text = text[:start] + text[text.index("\n", start) :]
    pad = (
        'pads.slug = { at = ["0 mm", "0 mm"], size = ["1 mm", "1 mm"], ground = "vias", thermal = "12 K/W" }'
    )
    text = text.replace("# pads.slug", f"{pad}\n# pads.slug").replace(
        'source = "gnd" }', 'source = "gnd", slug = "gnd" }'
    )
    (tmp_path / "example.toml").write_text(text, encoding="utf-8")
    for name in ("c1.s2p", "q1.s2p"):
        (tmp_path / name).write_text("# GHz S MA R 50\n", encoding="utf-8")
    circuit = read_inputs(tmp_path / "example.toml").circuit
    assert circuit.parts["Q1"].data_ports == ("gate", "drain")
    assert circuit.footprints["flange"].pads["slug"].thermal == 12.0
