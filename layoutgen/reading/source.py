"""From bytes to plain data: TOML 1.0 within the limits of the contract, and the line of each key.

What goes in is a path; what comes out is the file's data and its :class:`SourceMap`. Limits: regular files,
16 MB, UTF-8 (a byte-order mark is skipped), 64 levels of tables and lists.
"""

from __future__ import annotations

import os
import re
import stat
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path as FilePath
from typing import Any

from layoutgen.origin import Fault, Location
from layoutgen.reading.wording import QUOTE, Path, key_text, printable, split_key

__all__ = ["LEVELS", "MAX_BYTES", "MAX_LEVELS", "Loaded", "SourceMap", "load", "too_deep"]

MAX_BYTES = 16 * 1024 * 1024
"""Largest file read [byte]."""
MAX_LEVELS = 64
"""Deepest nesting of tables and lists [-]."""
_A_FILE = "a regular TOML file of up to 16 MB"
_TOML = "TOML 1.0"
LEVELS = f"at most {MAX_LEVELS} levels of tables and lists"

_TOKEN = re.compile(
    r'"""(?:[^"\\]++|\\.|"(?!""))*+(?:""")?'
    r"|'''(?:[^']++|'(?!''))*+(?:''')?"
    r'|"(?:[^"\\\n]++|\\.)*+"?'
    r"|'[^'\n]*+'?"
    r"|#[^\n]*+"
    r"|[\[\]{}\n=.,]",
    re.DOTALL,
)
_CLOSED = re.compile(r'(""").*\1|(\'\'\').*\2|(["\']).*\3', re.DOTALL)
_AT_LINE = re.compile(r"\(at line (\d+), column \d+\)")
_LONG_INTEGER = re.compile(r"[0-9_]{4300}")
_REPEATED = ("Cannot declare", "Cannot overwrite", "Duplicate inline table key")


@dataclass(frozen=True)
class SourceMap:
    """The text of a file and, when first asked for, the line of each of its keys.

    Args:
        file: The file's name for people.
        text: The file's text; None for a circuit built in code, all of whose locations are line 0.
    """

    file: str = "circuit"
    text: str | None = field(default=None, repr=False)

    @cached_property
    def lines(self) -> dict[Path, int]:
        """Key path -> 1-based line; the empty path is line 1."""
        if self.text is None:
            return {}
        from layoutgen.reading.keylines import key_lines

        return key_lines(self.text)

    def location(self, key: str | Path) -> Location:
        """Return where a key was written; a missing one is at the heading of the table that lacks it."""
        path = split_key(key) if isinstance(key, str) else key
        while path and path not in self.lines:
            path = path[:-1]
        return Location(self.file, self.lines.get(path, 0))


@dataclass(frozen=True)
class Loaded:
    """What a file holds.

    Args:
        source: Its text and lines.
        data: Its data; None when it is not TOML.
        faults: What is wrong with the text itself.
        complete: False when keys written twice were left out of the data.
    """

    source: SourceMap
    data: dict[str, Any] | None
    faults: tuple[Fault, ...] = ()
    complete: bool = True


class _UnreadableError(Exception):
    """A file that gives no data: line, found, allowed."""

    def __init__(self, line: int, found: str, allowed: str) -> None:
        """Keep the parts of the fault."""
        self.line, self.found, self.allowed = line, found, allowed
        super().__init__(found)


def load(path: FilePath, name: str | None = None) -> Loaded:
    """Read one TOML file.

    Args:
        path: The file.
        name: Its name in messages; the path as given when None.
    """
    shown = printable(str(path) if name is None else name)
    text: str | None = None
    try:
        text = _decoded(_read_bytes(path))
        _check_levels(text)
        return _parsed(SourceMap(shown, text))
    except _UnreadableError as fault:
        place = Location(shown, fault.line)
        return Loaded(SourceMap(shown, text), None, (Fault(place, "", fault.found, fault.allowed),))


def _read_bytes(path: FilePath) -> bytes:
    """Return a regular file's bytes; a pipe or device is never waited for."""
    try:
        handle = os.open(path, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0))
    except (OSError, ValueError) as error:
        raise _UnreadableError(0, _why_unreadable(error), _A_FILE) from None
    try:
        mode = os.fstat(handle).st_mode
        if not stat.S_ISREG(mode):
            raise _UnreadableError(0, "a directory" if stat.S_ISDIR(mode) else "no regular file", _A_FILE)
        with open(handle, "rb", closefd=False) as file:
            content = file.read(MAX_BYTES + 1)
    except OSError as error:
        raise _UnreadableError(0, _why_unreadable(error), _A_FILE) from None
    finally:
        os.close(handle)
    if len(content) > MAX_BYTES:
        raise _UnreadableError(0, "a file larger than 16 MB", _A_FILE)
    return content


def _why_unreadable(error: OSError | ValueError) -> str:
    """Return a phrase for a file that cannot be opened."""
    if isinstance(error, IsADirectoryError):
        return "a directory"
    if isinstance(error, FileNotFoundError | NotADirectoryError):
        return "no such file"
    if isinstance(error, PermissionError):
        return "a file that may not be read (permission denied)"
    if isinstance(error, OSError) and error.strerror:
        return f"a file that cannot be read ({error.strerror.lower()})"
    return "a name that no file can have"


def _decoded(content: bytes) -> str:
    """Return the text of UTF-8 bytes, without a byte-order mark."""
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        byte = f"byte 0x{content[error.start]:02X} at byte offset {error.start}"
        guess = " (UTF-16?)" if content[:2] in (b"\xff\xfe", b"\xfe\xff") else ""
        raise _UnreadableError(line, f"{byte}, which is not UTF-8{guess}", "UTF-8 text") from None
    return text.removeprefix("\ufeff")


def _check_levels(text: str) -> None:
    """Raise for brackets or dotted keys deeper than the limit, before any recursive reader sees them."""
    depth = dots = 0
    for match in _TOKEN.finditer(text):
        token = match[0]
        if token in ("[", "{"):
            depth, dots = depth + 1, 0
        elif token in ("]", "}"):
            depth, dots = max(0, depth - 1), 0
        elif token == ".":
            dots += 1
        elif token in ("\n", "=", ","):
            dots = 0
        if max(depth, dots + 1) > MAX_LEVELS:
            line = text.count("\n", 0, match.start()) + 1
            raise _UnreadableError(line, f"more than {MAX_LEVELS} levels", LEVELS)


def _parsed(source: SourceMap) -> Loaded:
    """Return the data of a text; keys written twice are faults, and the rest is read all the same."""
    text = source.text or ""
    try:
        data = tomllib.loads(text)
    except (ValueError, RecursionError) as error:
        if isinstance(error, tomllib.TOMLDecodeError) and str(error).startswith(_REPEATED):
            return _without_repeats(source, error)
        raise _syntax_fault(text, error) from None
    if too_deep(data):
        raise _UnreadableError(0, f"more than {MAX_LEVELS} levels", LEVELS)
    return Loaded(source, data)


def _without_repeats(source: SourceMap, error: tomllib.TOMLDecodeError) -> Loaded:
    """Return the data without what is written a second time, and a fault for each of those."""
    from layoutgen.reading.keylines import repeated_keys

    text = source.text or ""
    repeats = repeated_keys(text)
    if not repeats:
        raise _syntax_fault(text, error)
    content = bytearray(text.encode())
    for repeat in repeats:
        first, last = repeat.span
        content[first:last] = bytes(byte if byte in b"\r\n" else 0x20 for byte in content[first:last])
    try:
        data = tomllib.loads(content.decode())
    except (ValueError, RecursionError):
        data = None
    faults = tuple(
        Fault(
            Location(source.file, repeat.second),
            key_text(repeat.path, QUOTE // len(repeat.path)),
            f"the same key or table a second time; the first is at line {repeat.first}",
            "each once",
        )
        for repeat in repeats
    )
    return Loaded(source, None if data is None or too_deep(data) else data, faults, complete=False)


def _syntax_fault(text: str, error: Exception) -> _UnreadableError:
    """Return the fault of a text that is not TOML, with its line."""
    message = str(error)
    if isinstance(error, RecursionError):
        return _UnreadableError(0, f"more than {MAX_LEVELS} levels", LEVELS)
    if not isinstance(error, tomllib.TOMLDecodeError):
        long = _LONG_INTEGER.search(text)
        line = text.count("\n", 0, long.start()) + 1 if long else 0
        return _UnreadableError(line, "an integer of thousands of digits", "integers of 64 bits")
    place = _AT_LINE.search(message)
    line = int(place[1]) if place else _line_left_open(text)
    reason = message[: message.rfind(" (at ")]
    head = re.match(r"[^('\"]*", reason)
    kept = head.end() if head else 0
    return _UnreadableError(line, f"no valid TOML: {_short_reason(reason, kept)}", _TOML)


def _line_left_open(text: str) -> int:
    """Return the line of the string or bracket still open at the end of a text, else its last line."""
    opened: list[int] = []
    for match in _TOKEN.finditer(text):
        token = match[0]
        if token in ("[", "{"):
            opened.append(match.start())
        elif token in ("]", "}"):
            opened = opened[:-1]
        elif token[0] in "\"'" and not _CLOSED.fullmatch(token):
            opened.append(match.start())
            break
    return text.count("\n", 0, opened[-1] if opened else len(text.rstrip())) + 1


def _short_reason(reason: str, kept: int) -> str:
    """Return a reader's reason, of whose quotes (from ``kept`` on) at most 40 characters are shown."""
    rest = reason[kept:]
    return reason[:kept] + printable(rest[:QUOTE]) + ("..." if len(rest) > QUOTE else "")


def too_deep(data: Mapping[str, Any]) -> bool:
    """Tell whether tables and lists nest deeper than the limit; not recursive."""
    layer: list[Any] = [data]
    for _ in range(MAX_LEVELS + 1):
        layer = [
            child
            for item in layer
            for child in (item.values() if isinstance(item, Mapping) else item)
            if isinstance(child, Mapping | list | tuple)
        ]
        if not layer:
            return False
    return True
