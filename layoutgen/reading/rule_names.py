"""Names of rules: the path of a rule's key, and the names of findings that have no key."""

from __future__ import annotations

from layoutgen.reading.rule_records import RuleFile
from layoutgen.reading.validate import known_keys, model_in

__all__ = ["KEYLESS_RULES", "RULE_NAMES"]

KEYLESS_RULES = (
    "connectivity.open",
    "connectivity.short",
    "connectivity.floating",
    "ground.gap",
    "ground.vias",
    "ground.under_line",
    "ground.flange",
    "bank.order",
    "part.rating",
    "waive.expired",
    "waive.unused",
)
"""Findings without a key in the rule file."""


def _key_paths() -> tuple[str, ...]:
    """Return ``table.key`` of every table that holds rules, in the file's order."""
    paths: list[str] = []
    for table, field in RuleFile.model_fields.items():
        inner = None if table in ("severity", "waive") else model_in(field.annotation)
        paths += [f"{table}.{key}" for key in known_keys(inner)] if inner else []
    return tuple(paths)


RULE_NAMES = _key_paths() + KEYLESS_RULES
"""Every name that ``[severity]`` and ``[waive]`` may use."""
