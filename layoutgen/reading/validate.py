"""Plain data against the records of a file: pydantic finds the faults, this module words them.

Each fault gets the full key path, what was found and what is allowed; an unknown key gets the nearest known
one, and a key that is only misspelt is not reported as missing too.
"""

from __future__ import annotations

import types
import typing
from collections.abc import Mapping, Sequence
from itertools import islice
from typing import Any, TypeVar

from annotated_types import MaxLen, MinLen
from pydantic import BaseModel, ValidationError
from pydantic.fields import FieldInfo

from layoutgen.reading.faults import Faults
from layoutgen.reading.kinds import Kind
from layoutgen.reading.wording import Path, a_or_b, describe, nearest

__all__ = ["frozen", "known_keys", "misspelt", "model_in", "record_or_none", "table_keys", "validate"]

R = TypeVar("R", bound=BaseModel)

_GUESSED = 100
"""Most unknown keys whose meaning is guessed, of a table or of a file [-]."""


def frozen(value: Any) -> Any:
    """Return data with its lists as tuples, as the records hold them."""
    if isinstance(value, Mapping):
        return {key: frozen(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return tuple(frozen(item) for item in value)
    return value


def record_or_none(model: type[R], table: object) -> R | None:
    """Return a table's record, None when it has a fault (found and worded elsewhere)."""
    try:
        return model.model_validate(frozen(table))
    except ValidationError:
        return None


def validate(model: type[R], data: Mapping[str, object], faults: Faults) -> R | None:
    """Return the record of a whole file, or None after adding every fault of its form.

    Args:
        model: :class:`CircuitFile` or :class:`RuleFile`.
        data: The file's data.
        faults: Collects the faults.
    """
    try:
        return model.model_validate(frozen(data))
    except ValidationError as error:
        found = [_Finding(model, item) for item in error.errors(include_url=False)]
    unknown = [finding for finding in found if finding.kind == "extra_forbidden"]
    for finding in unknown[:_GUESSED]:
        finding.guess = nearest(str(finding.path[-1]), known_keys(finding.parent))
    guessed = {(*finding.path[:-1], finding.guess) for finding in unknown if finding.guess}
    above = {finding.path[:length] for finding in found for length in range(len(finding.path))}
    for finding in found:
        excused = finding.missing and (finding.path in guessed or not faults.complete)
        if not excused and finding.path not in above:
            faults.add(finding.path, *finding.phrases())
    return None


class _Finding:
    """One error of pydantic, with the field that it is about."""

    def __init__(self, model: type[BaseModel], error: Any) -> None:
        """Note path and kind of the error."""
        self.kind: str = error["type"]
        self.value: object = error["input"]
        self.context: dict[str, Any] = error.get("ctx") or {}
        path = tuple(token for token in error["loc"] if token != "[key]")
        item_missing = self.kind == "missing" and isinstance(path[-1], int)
        self.path: Path = path[:-1] if item_missing else path
        self.missing = self.kind == "missing" and not item_missing
        self.guess: str | None = None
        self.field, self.parent, self.inside = _field_at(model, self.path)

    def phrases(self) -> tuple[str, str]:
        """Return what was found and what is allowed."""
        if self.kind == "refused":
            return self.context["found"], self.context["allowed"]
        if self.kind == "extra_forbidden":
            return "an unknown key", self._keys_allowed()
        allowed = _allowed(self.field, self.inside)
        return ("nothing" if self.missing else describe(self.value)), allowed

    def _keys_allowed(self) -> str:
        """Return the nearest known key, or all of them."""
        return f'the nearest known key is "{self.guess}"' if self.guess else a_or_b(known_keys(self.parent))


def known_keys(model: type[BaseModel]) -> list[str]:
    """Return the keys of a table as written in the file."""
    return [field.alias or name for name, field in model.model_fields.items()]


def table_keys(model: type[BaseModel]) -> frozenset[str]:
    """Return the keys of a file's form, of all its tables."""
    keys: set[str] = set()
    for name, field in model.model_fields.items():
        keys.add(field.alias or name)
        inner = model_in(field.annotation)
        keys |= table_keys(inner) if inner else frozenset()
    return frozenset(keys)


def misspelt(table: Mapping[str, object], model: type[BaseModel]) -> set[str]:
    """Return the known keys that the unknown keys of a table most likely mean; of many, the first ones."""
    known = known_keys(model)
    unknown = islice((str(key) for key in table if key not in known), _GUESSED)
    return {guess for key in unknown if (guess := nearest(key, known))}


def _field_at(model: type[BaseModel], path: Path) -> tuple[FieldInfo | None, type[BaseModel], Path]:
    """Return the field that a path leads to, the model holding it, and the indices or names within it.

    The field is None for an unknown key.
    """
    here: type[BaseModel] = model
    inner: type[BaseModel] | None = model
    field: FieldInfo | None = None
    rest: list[str | int] = list(path)
    inside: list[str | int] = []
    while rest and inner is not None:
        here, field = inner, _field(inner, rest.pop(0))
        inner = None if field is None else model_in(field.annotation)
        levels = 0 if field is None else _levels(field.annotation)
        inside, rest = (rest, []) if inner is None else (rest[:levels], rest[levels:])
    return field, here, tuple(inside)


def _field(model: type[BaseModel], token: str | int) -> FieldInfo | None:
    """Return the field of a key as written in the file."""
    for name, field in model.model_fields.items():
        if token == (field.alias or name):
            return field
    return None


def _parts(annotation: Any) -> tuple[Any, tuple[Any, ...]]:
    """Return origin and arguments of an annotation, ``| None`` and ``Annotated`` taken off."""
    origin, arguments = typing.get_origin(annotation), typing.get_args(annotation)
    if origin is typing.Annotated:
        return _parts(arguments[0])
    if origin in (typing.Union, types.UnionType):
        inner = [argument for argument in arguments if argument is not type(None)]
        return _parts(inner[0]) if len(inner) == 1 else (annotation, ())
    return origin or annotation, arguments


def model_in(annotation: Any) -> type[BaseModel] | None:
    """Return the record class in an annotation, within a list or mapping too."""
    origin, arguments = _parts(annotation)
    if isinstance(origin, type) and issubclass(origin, BaseModel):
        return origin
    for argument in arguments if origin in (tuple, Mapping) else ():
        if found := model_in(argument):
            return found
    return None


def _levels(annotation: Any) -> int:
    """Return how many list indices or names stand between a key and the record below it [-]."""
    origin, arguments = _parts(annotation)
    return 1 if origin in (tuple, Mapping) and arguments else 0


def _allowed(field: FieldInfo | None, inside: Path) -> str:
    """Return what a field allows, or one item or value within it, as a phrase."""
    if field is None:
        return "a key of the file's form"
    if inside:
        return _allowed_by(_item_annotation(field.annotation, inside))
    for item in field.metadata:
        if isinstance(item, Kind):
            return item.allowed
    allowed = _allowed_by(field.annotation)
    least = next((item.min_length for item in field.metadata if isinstance(item, MinLen)), 0)
    most = next((item.max_length for item in field.metadata if isinstance(item, MaxLen)), None)
    count = "1 or 2" if most == 2 else f"at least {least}" if least else ""
    return allowed.replace("a list, each", f"a list of {count}, each") if count else allowed


def _item_annotation(annotation: Any, inside: Path) -> Any:
    """Return the annotation of an item of a list or of a value of a mapping, at any depth."""
    for token in inside:
        origin, arguments = _parts(annotation)
        if origin is Mapping:
            annotation = arguments[1]
        elif origin is tuple:
            fixed = isinstance(token, int) and arguments[-1] is not Ellipsis and token < len(arguments)
            annotation = arguments[int(token)] if fixed else arguments[0]
    return annotation


def _allowed_by(annotation: Any) -> str:
    """Return what an annotation allows, as a phrase."""
    for item in getattr(annotation, "__metadata__", ()):
        if isinstance(item, Kind):
            return item.allowed
    if typing.get_origin(annotation) in (typing.Union, types.UnionType):
        return " or ".join(
            _allowed_by(part) for part in typing.get_args(annotation) if part is not type(None)
        )
    origin, arguments = _parts(annotation)
    if origin is typing.Literal:
        return a_or_b(arguments) if isinstance(arguments[0], str) else f"the whole number {arguments[0]}"
    if origin is bool:
        return "true or false"
    if origin is tuple:
        return _allowed_list(arguments)
    if origin is Mapping:
        return (
            f"a table of {_allowed_by(arguments[1])}" if not model_in(arguments[1]) else "a table of tables"
        )
    if isinstance(origin, type) and issubclass(origin, BaseModel):
        return f"a table with the keys {', '.join(known_keys(origin))}"
    return "a value of the file's form"


def _allowed_list(arguments: Sequence[Any]) -> str:
    """Return what a list allows, as a phrase."""
    if arguments[-1] is Ellipsis:
        return f"a list, each item {_allowed_by(arguments[0])}"
    return f"a list of {len(arguments)}, each item {'; '.join(dict.fromkeys(map(_allowed_by, arguments)))}"
