"""Numbers as text in fixed decimals: lengths from whole nanometres, all else by rounding once.

A coordinate never passes through a float on its way to a file, so no digit is lost or invented, and equal
results give equal bytes.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping, Sequence
from json.encoder import encode_basestring

from layoutgen.units import nm_to_mm_text

__all__ = ["Fixed", "fixed", "json_text", "mm", "mm_short"]


class Fixed(str):
    """A number that is already text; :func:`json_text` writes it as it stands."""

    __slots__ = ()


def mm(nm: int) -> Fixed:
    """Return whole nanometres as millimetres with six decimals."""
    return Fixed(nm_to_mm_text(nm))


def mm_short(nm: int) -> str:
    """Return whole nanometres as millimetres without trailing zeros (as exact as :func:`mm`)."""
    text = mm(nm).rstrip("0")
    return text[:-1] if text.endswith(".") else text


def fixed(value: float, places: int = 6) -> Fixed:
    """Return a number in fixed decimals, never as negative zero.

    Raises:
        ValueError: The value is not finite.
    """
    text = f"{value:.{places}f}"
    if "n" in text:  # nan, inf
        raise ValueError(f"{value} cannot be written")
    if text.startswith("-") and not text.strip("-0."):
        text = text[1:]
    return Fixed(text)


def json_text(value: object, indent: int = 0) -> str:
    """Return JSON text of dicts, sequences, text, booleans, whole numbers and :class:`Fixed` numbers.

    Containers that hold no other container stand on one line, so that a coordinate or a finding is one line.

    Raises:
        TypeError: Any other value; floats must be made :class:`Fixed` by the caller, who knows the decimals.
    """
    if isinstance(value, Fixed):
        return str(value)
    if isinstance(value, str):
        return encode_basestring(value)
    if value is None or isinstance(value, (bool, int)):
        return json.dumps(value)
    if isinstance(value, Mapping):
        return _joined("{}", _pairs(value, indent), _is_flat(value.values()), indent)
    if isinstance(value, Sequence):
        return _joined("[]", [json_text(item, indent + 1) for item in value], _is_flat(value), indent)
    raise TypeError(f"{type(value).__name__} has no fixed text")


def _pairs(value: Mapping[str, object], indent: int) -> list[str]:
    return [f"{encode_basestring(key)}: {json_text(item, indent + 1)}" for key, item in value.items()]


def _is_flat(items: Iterable[object]) -> bool:
    """Tell whether no item is a container, or only short runs of numbers (a point, a pair of them)."""
    return all(_depth(item) == 0 or (_depth(item) == 1 and _is_short(item)) for item in items)


def _is_short(item: object) -> bool:
    return isinstance(item, Sequence) and len(item) <= 4


def _depth(item: object) -> int:
    if isinstance(item, str) or not isinstance(item, (Mapping, Sequence)):
        return 0
    children = item.values() if isinstance(item, Mapping) else item
    return 1 + max(map(_depth, children), default=0)


def _joined(brackets: str, items: list[str], flat: bool, indent: int) -> str:
    if not items or flat:
        return brackets[0] + ", ".join(items) + brackets[1]
    pad = "\n" + " " * (indent + 1)
    return brackets[0] + pad + f",{pad}".join(items) + "\n" + " " * indent + brackets[1]
