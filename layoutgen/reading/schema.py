"""JSON Schema (draft 2020-12) of both files, for editors that check and complete as one types."""

from __future__ import annotations

from typing import Any

from pydantic import BaseModel

from layoutgen.reading.circuit_records import CircuitFile
from layoutgen.reading.rule_names import RULE_NAMES
from layoutgen.reading.rule_records import RuleFile
from layoutgen.units import quantity_text

__all__ = ["schema"]

_DIALECT = "https://json-schema.org/draft/2020-12/schema"


def schema() -> dict[str, Any]:
    """Return ``{"circuit": ..., "rules": ...}``: the schema of each file as written, quantities being text.

    A property's description ends with the unit that the record holds after reading; ``x-dimension`` says
    what the text measures. Rules across keys (one of impedance and width, ...) are beyond a schema: the
    reader checks them.
    """
    rules = _written(RuleFile)
    rules["properties"]["severity"]["propertyNames"] = {"enum": list(RULE_NAMES)}
    rules["$defs"]["Waiver"]["properties"]["rule"] = {
        "enum": list(RULE_NAMES),
        "description": "name of the rule",
    }
    return {"circuit": _written(CircuitFile), "rules": rules}


def _written(model: type[BaseModel]) -> dict[str, Any]:
    """Return the schema of one file, its defaults as they are written."""
    return {"$schema": _DIALECT, **_as_written(model.model_json_schema(by_alias=True, mode="validation"))}


def _as_written(node: Any) -> Any:
    """Return a schema without nulls, generated titles and SI defaults: TOML has no null."""
    if isinstance(node, list):
        return [_as_written(item) for item in node]
    if not isinstance(node, dict):
        return node
    kept = {key: _as_written(value) for key, value in node.items()}
    if isinstance(kept.get("title"), str):
        del kept["title"]
    choices = [choice for choice in kept.get("anyOf", []) if choice != {"type": "null"}]
    if len(choices) > 1:
        kept["anyOf"] = choices
    elif choices:
        kept = {**choices[0], **{key: value for key, value in kept.items() if key != "anyOf"}}
    if "default" in kept and (kept["default"] is None or isinstance(kept["default"], dict)):
        del kept["default"]
    if "patternProperties" in kept:
        kept["additionalProperties"] = False
    if isinstance(kept.get("default"), float) and "x-dimension" in kept:
        kept["default"] = quantity_text(kept["default"], kept["x-dimension"])
    return kept
