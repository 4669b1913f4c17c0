"""Checks across the keys of a rule file: rules that contradict each other, names of rules."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import pairwise
from typing import Any

from layoutgen.reading.draft import given
from layoutgen.reading.faults import Faults
from layoutgen.reading.rule_names import RULE_NAMES
from layoutgen.reading.rule_records import FenceRules, HoleRules, ViaRules, VoltageRules
from layoutgen.reading.validate import record_or_none
from layoutgen.reading.wording import Path, nearest
from layoutgen.units import quantity_text

__all__ = ["check_rule_names", "check_rules"]


def check_rules(data: Mapping[str, Any], faults: Faults) -> None:
    """Add the contradictions between the keys of a rule file.

    Args:
        data: The file's data.
        faults: Collects the faults.
    """
    _check_vias(data, faults)
    _check_voltage(data, faults)


def check_rule_names(data: Mapping[str, Any], faults: Faults) -> None:
    """Add a fault for each name in ``[severity]`` and ``[waive]`` that no rule bears.

    Called before the form is checked, so that a rule's name without quotes, which TOML takes for a table, is
    called what it is.

    Args:
        data: The file's data.
        faults: Collects the faults.
    """
    severity, waive = given(data, "severity"), given(data, "waive")
    for rule in severity if isinstance(severity, Mapping) else ():
        _check_rule_name(faults, ("severity", rule), str(rule))
    for name, waiver in waive.items() if isinstance(waive, Mapping) else ():
        rule = given(waiver, "rule")
        if isinstance(rule, str):
            _check_rule_name(faults, ("waive", name, "rule"), rule)


def _check_rule_name(faults: Faults, path: Path, rule: str) -> None:
    """Add a fault for a name that no rule bears."""
    if rule in RULE_NAMES:
        return
    tables = {name.partition(".")[0] for name in RULE_NAMES}
    if path[0] == "severity" and rule in tables:
        faults.add(
            path,
            "a rule's name without quotes",
            f'quotes around it, such as "{rule}.{_key_of(rule)}" = "error"',
        )
    else:
        guess = nearest(rule, RULE_NAMES)
        hint = f'; the nearest is "{guess}"' if guess else ', such as "copper.min_gap"'
        faults.add_value(path, rule, f"a rule's name{hint}")


def _key_of(table: str) -> str:
    """Return the first key of a table of rules."""
    return next(name.partition(".")[2] for name in RULE_NAMES if name.startswith(f"{table}."))


def _check_vias(data: Mapping[str, Any], faults: Faults) -> None:
    """Check that the via can be made, set at its pitch, and set as near to an edge as the fence asks."""
    vias = record_or_none(ViaRules, given(data, "vias"))
    if vias is None:
        return
    if vias.drill >= vias.diameter:
        _contradiction(faults, "vias.drill", vias.drill, "less than", "vias.diameter", vias.diameter)
    holes = record_or_none(HoleRules, given(data, "holes"))
    web = holes.min_web if holes and holes.min_web else 0.0
    ring = holes.min_annular_ring if holes and holes.min_annular_ring else 0.0
    least_pitch, least_edge = vias.drill + web, vias.drill / 2.0 + ring
    if vias.min_pitch is not None and _below(vias.min_pitch, least_pitch):
        _contradiction(
            faults, "vias.min_pitch", vias.min_pitch, "at least", "vias.drill + holes.min_web", least_pitch
        )
    fence = record_or_none(FenceRules, given(data, "fence"))
    edge = fence.max_edge_distance if fence else None
    if edge is not None and _below(edge, least_edge):
        other = "vias.drill / 2 + holes.min_annular_ring"
        _contradiction(faults, "fence.max_edge_distance", edge, "at least", other, least_edge)


def _below(value: float, least: float) -> bool:
    """Tell whether a length is below another by more than rounding [m]."""
    return value < least - 1e-12


def _contradiction(faults: Faults, key: str, value: float, relation: str, other: str, limit: float) -> None:
    """Add a fault of two rules that cannot both be kept."""
    path = tuple(key.split("."))
    line = faults.line_of(tuple(other.split(" ")[0].split(".")))
    allowed = f"{relation} {other} = {quantity_text(limit, 'length')} ({line})"
    faults.add(path, f"{quantity_text(value, 'length')}, which contradicts {other}", allowed)


def _check_voltage(data: Mapping[str, Any], faults: Faults) -> None:
    """Check that clearance has one table, and that it rises."""
    raw = given(data, "voltage")
    if not isinstance(raw, Mapping):
        return
    if "condition" in raw and "table" in raw:
        found = f"voltage.table beside voltage.condition ({faults.line_of(('voltage', 'condition'))})"
        faults.add(("voltage", "table"), found, "voltage.condition or voltage.table, not both")
    record = record_or_none(VoltageRules, raw)
    rows = record.table if record and record.table else ()
    for number, (before, row) in enumerate(pairwise(rows), start=1):
        if row[0] <= before[0] or row[1] < before[1]:
            faults.add(
                ("voltage", "table", number),
                "a row not above the one before",
                "rising voltages and distances",
            )
