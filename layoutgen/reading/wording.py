"""How faults are worded: key paths, short escaped quotes, the kind of a value, the nearest known name.

No message quotes more than :data:`QUOTE` characters of a file, and control characters never reach a terminal.
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Iterable, Mapping, Sequence

__all__ = ["QUOTE", "Path", "a_or_b", "describe", "key_text", "nearest", "printable", "quote", "split_key"]

Path = tuple[str | int, ...]
"""Keys and list indices from the top of a file to a value."""

QUOTE = 40
"""Most characters quoted of a file [-]."""

_ESCAPED_IN_QUOTES = '"\\\\'
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_TOKEN = re.compile(r'\[(\d+)\]|"((?:[^"\\]|\\.)*)"|([^.\[\]"]+)')


def printable(text: str, also: str = "") -> str:
    """Return the text with every character that is not printable as an escape.

    Args:
        text: Any text.
        also: Further characters that get a backslash.
    """
    return "".join(_escaped(character, also) for character in text)


def _escaped(character: str, also: str) -> str:
    """Return one character, or its escape when a terminal would act on it."""
    if character in also:
        return f"\\{character}"
    if character.isprintable():
        return character
    code = ord(character)
    return f"\\x{code:02x}" if code < 0x100 else f"\\u{code:04x}" if code < 0x10000 else f"\\U{code:08x}"


def quote(text: str, limit: int = QUOTE) -> str:
    """Return the text in double quotes, escaped, at most ``limit`` characters of it, a cut marked by dots."""
    return f'"{printable(text[:limit], _ESCAPED_IN_QUOTES)}{"..." if len(text) > limit else ""}"'


def describe(value: object, limit: int = QUOTE) -> str:
    """Return what a value of a file is, as a phrase that follows "found"."""
    if isinstance(value, str):
        return quote(value, limit)
    if isinstance(value, bool):
        return "the truth value true" if value else "the truth value false"
    if isinstance(value, int | float):
        return f"the number {_number(value)}"
    if isinstance(value, datetime.date | datetime.time):
        return f"the date or time {value.isoformat()}"
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, Sequence):
        return f"a list of {len(value)}{_items(value, limit)}"
    return f"a Python object of type {type(value).__name__}"


def _items(value: Sequence[object], limit: int) -> str:
    """Return the items of a short list of texts and numbers, as one quote after a colon."""
    plain = [str(item) for item in value[:QUOTE] if isinstance(item, str | float)]
    return f": {quote(', '.join(plain), limit)}" if plain and len(plain) == len(value) else ""


def _number(value: float) -> str:
    """Return a number's text, also of integers too long to print."""
    if isinstance(value, int) and value.bit_length() > 64:
        return "outside 64 bits"
    return str(value)


def key_text(path: Path, limit: int = 64) -> str:
    """Return a key's full path as written in the file, for example ``board.holes[0].at``.

    Args:
        path: Keys and list indices from the top.
        limit: Most characters shown of one key [-].
    """
    text = ""
    for token in path:
        if isinstance(token, int):
            text += f"[{token}]"
        else:
            plain = _BARE_KEY.fullmatch(token) and len(token) <= limit
            text += ("." if text else "") + (token if plain else quote(token, limit))
    return text


def split_key(key: str) -> Path:
    """Return the keys and indices of a path's text; the inverse of :func:`key_text` for keys of a valid file.

    >>> split_key('severity."fence.max_pitch"'), split_key("board.holes[0].at")
    (('severity', 'fence.max_pitch'), ('board', 'holes', 0, 'at'))
    """
    return tuple(
        int(index) if index else quoted or plain
        for index, quoted, plain in (match.groups() for match in _TOKEN.finditer(key))
    )


def nearest(name: str, known: Iterable[str]) -> str | None:
    """Return the known name that a mistyped one most likely means, or None; case is forgiven first."""
    import difflib

    names = list(known)
    folded = name.casefold().replace("-", "_")
    for candidate in names:
        if candidate.casefold().replace("-", "_") == folded:
            return candidate
    if len(name) > 2 * QUOTE:
        return None
    found = difflib.get_close_matches(name, names, 1, 0.6)
    return found[0] if found else None


def a_or_b(names: Sequence[str]) -> str:
    """Return ``"a", "b" or "c"``."""
    quoted = [quote(name) for name in names]
    return quoted[0] if len(quoted) == 1 else f"{', '.join(quoted[:-1])} or {quoted[-1]}"
