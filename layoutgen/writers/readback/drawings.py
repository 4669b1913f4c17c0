"""PDF read back as far as its text: that it is whole, and says what it must say.

A plain reading of the content streams, enough for the files of this package; lines and areas are not judged.
"""

from __future__ import annotations

import re
import zlib
from collections.abc import Iterator

from layoutgen.numbers import fixed
from layoutgen.writers.fabrication_facts import criticals, drill_rows
from layoutgen.writers.readback.areas import count_check
from layoutgen.writers.readback.records import Evidence, NotProved
from layoutgen.writers.records import Result

__all__ = ["pdf_texts", "read_pdf"]

_READER = "text of the content streams"
_TEXT = re.compile(rb"\bBT\b(.*?)\bET\b", re.DOTALL)
_STRING = re.compile(rb"\(((?:[^()\\]|\\.)*)\)", re.DOTALL)
_LIGATURE = re.compile("ffi|ffl|ff|fi|fl|[\0-\x1f]")
_ESCAPE = re.compile(rb"\\([0-7]{1,3}|.)", re.DOTALL)


def read_pdf(file: str, data: bytes, result: Result) -> Evidence:
    """Yield whether a PDF is whole and holds the numbers and names that it must."""
    yield count_check(file, "bytes", "files without a sound beginning and end", int(not _whole(data)), 0)
    texts = {_plain(text) for text in pdf_texts(data)}
    wanted = next((list(words(result)) for end, words in _WORDS.items() if file.endswith(end)), None)
    if wanted is None:
        yield NotProved(file, "what the drawing says: a document that nothing is known of")
    else:
        missing = sum(_plain(word) not in texts for word in wanted)
        yield count_check(file, _READER, f"texts missing of {len(wanted)}", missing, 0)
    yield NotProved(file, "lines and areas of the drawing: only that it is whole and what it says")


def pdf_texts(data: bytes) -> Iterator[str]:
    """Yield the texts of a PDF in the order of drawing, those outside Latin-1 left out."""
    for match in re.finditer(rb"stream\r?\n", data):
        try:
            content = zlib.decompressobj().decompress(data[match.end() :])
        except zlib.error:
            continue
        for block in _TEXT.findall(content):
            yield "".join(_unescaped(part) for part in _STRING.findall(block))


def _unescaped(part: bytes) -> str:
    def plain(match: re.Match[bytes]) -> bytes:
        code = match.group(1)
        return bytes([int(code, 8)]) if code[:1].isdigit() else code

    return _ESCAPE.sub(plain, part).decode("latin-1")


def _plain(text: str) -> str:
    """Return text with one mark for each ligature, which a font may have as a character of its own."""
    return _LIGATURE.sub("\0", text)


def _whole(data: bytes) -> bool:
    """Tell whether a PDF begins, ends and points to its table of objects as it must."""
    found = re.search(rb"startxref\s+(\d+)\s+%%EOF\s*\Z", data)
    if found is None or not data.startswith(b"%PDF-"):
        return False
    start = int(found.group(1))
    return data[start : start + 4] == b"xref" or b" obj" in data[start : start + 24]


def _fabrication(result: Result) -> Iterator[str]:
    """Yield the board's size, the drill table, the critical widths."""
    yield f"{fixed(result.placement.width / 1e6, 3)} mm"
    yield f"{fixed(result.placement.height / 1e6, 3)} mm"
    for _, diameter, count, plated, _ in drill_rows(result):
        yield from (diameter, count, plated)
    for row in criticals(result):
        yield from (row.cells[0], row.cells[1])
    for line in result.placement.lines.values():
        yield fixed(line.width / 1e6, 4)


def _assembly(result: Result) -> Iterator[str]:
    """Yield all references and ports."""
    yield from result.placement.parts
    yield from result.placement.ports


def _review(result: Result) -> Iterator[str]:
    """Yield the names of all lines and of all rules that were not checked."""
    yield from result.placement.lines
    yield from (item.rule for item in result.checks.not_checked)


_WORDS = {"_fabrication.pdf": _fabrication, "_assembly.pdf": _assembly, "_review.pdf": _review}
