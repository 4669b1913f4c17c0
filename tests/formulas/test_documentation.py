"""The docstrings are the documentation: units, names, sources, and the page made from them."""

from __future__ import annotations

import inspect
import re
import runpy
from pathlib import Path

import pytest

DOCS = Path(__file__).parents[2] / "docs"
MAKE = runpy.run_path(str(DOCS / "make_formulas.py"))
FORMULAS = [
    pytest.param(value, id=f"{module}.{name}")
    for module in MAKE["MODULES"]
    for name, value in MAKE["public_names"](module)
    if inspect.isfunction(value)
]
RESULTS = [
    pytest.param(value, id=f"{module}.{name}")
    for module in MAKE["MODULES"]
    for name, value in MAKE["public_names"](module)
    if inspect.isclass(value)
]
UNITS = {
    "-", "%", "1/K", "1/m", "A", "deg", "degC", "F", "H", "Hz", "Hz m", "K", "K/W", "m", "m^2", "Np/m", "ohm",
    "rad", "rad/m", "S", "S/m", "V", "W", "W/(m K)",
}  # fmt: skip
WITHOUT_MODEL = {"Source", "Range", "Accuracy"}


def test_every_module_is_on_the_page():
    """A new module must be added to the page's list."""
    folder = DOCS.parent / "layoutgen" / "formulas"
    modules = {path.stem for path in folder.glob("*.py")} - {"__init__", "numeric", "discontinuities"}
    assert modules == set(MAKE["MODULES"])


@pytest.mark.parametrize("formula", FORMULAS)
def test_arguments_are_named_as_in_the_signature_and_have_a_unit(formula):
    """Catches an argument that was renamed, added or reordered without its unit."""
    entry = MAKE["take_apart"](inspect.getdoc(formula))
    assert list(entry.items) == list(inspect.signature(formula).parameters)
    for text in entry.items.values():
        assert MAKE["unit_of"](text) in UNITS, text


@pytest.mark.parametrize("formula", FORMULAS)
def test_results_have_units_and_a_provenance(formula):
    """Catches a formula without source, range or accuracy, or a result without unit."""
    entry = MAKE["take_apart"](inspect.getdoc(formula))
    assert entry.sections.keys() >= WITHOUT_MODEL
    found = re.findall(r"\[([^\[\]]+)\]", entry.sections["Returns"])
    assert found
    assert set(found) <= UNITS


@pytest.mark.parametrize("result", RESULTS)
def test_fields_are_named_and_have_a_unit(result):
    """Catches a field of a result that is not documented."""
    entry = MAKE["take_apart"](inspect.getdoc(result))
    assert tuple(entry.items) == result._fields
    for text in entry.items.values():
        assert MAKE["unit_of"](text) in UNITS, text


def test_the_page_is_up_to_date():
    """Catches a docstring changed without running ``python docs/make_formulas.py``."""
    assert MAKE["TARGET"].read_text(encoding="utf-8") == MAKE["page"]()


def test_the_glossary_knows_every_symbol_with_its_unit():
    """Catches a symbol that the glossary lacks, or gives in another unit."""
    glossary = (DOCS / "glossary.md").read_text(encoding="utf-8")
    known = set()
    for symbols, unit in re.findall(r"^\| (`[^|]+`) \| ([^|]+) \|", glossary, re.M):
        known |= {(symbol, unit.strip()) for symbol in re.findall(r"`([^`]+)`", symbols)}
    for parameter in FORMULAS:
        entry = MAKE["take_apart"](inspect.getdoc(parameter.values[0]))
        for name, text in entry.items.items():
            assert (name, MAKE["unit_of"](text)) in known, (name, parameter.id)
