"""A strict reading of Gerber by the open specification's grammar, written apart from the writer.

Whatever the grammar does not know is refused: a command of the deprecated set fails here by being unknown.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field

WORD = re.compile(r"%((?:[^%*]+\*\n?)+)%|([^%*\n]+)\*")
NUMBER = r"[+-]?[0-9]+"
OPERATION = re.compile(rf"(?:X({NUMBER}))?(?:Y({NUMBER}))?(?:I({NUMBER}))?(?:J({NUMBER}))?(D0[123])")
EXTENDED = re.compile(r"(FS|MO|AD|AM|LP|TF|TA|TO|TD)(.*)", re.DOTALL)
MODES = ("G01", "G02", "G03", "G36", "G37", "G75")


@dataclass
class Operation:
    """One D01, D02 or D03 with what was in force; ``attributes`` are those of the object that it makes."""

    code: str
    x: int
    y: int
    i: int | None
    j: int | None
    mode: str
    aperture: int | None
    region: int | None
    attributes: dict[str, str]


@dataclass
class Aperture:
    template: str
    attributes: dict[str, str]


@dataclass
class Reading:
    """A file, word by word; ``order`` are all commands as they stand."""

    order: list[str] = field(default_factory=list)
    file_attributes: list[tuple[str, str]] = field(default_factory=list)
    apertures: dict[int, Aperture] = field(default_factory=dict)
    macros: dict[str, list[str]] = field(default_factory=dict)
    operations: list[Operation] = field(default_factory=list)
    region_attributes: list[dict[str, str]] = field(default_factory=list)
    comments: list[str] = field(default_factory=list)
    left_over: dict[str, str] = field(default_factory=dict)

    def contours(self) -> list[list[Operation]]:
        """Return the operations of each region."""
        return [[o for o in self.operations if o.region == k] for k in range(len(self.region_attributes))]


def words(text: str) -> list[tuple[bool, str]]:
    """Return (extended, content) of every word; anything between words but line ends is refused."""
    found, at = [], 0
    for match in WORD.finditer(text):
        assert text[at : match.start()].strip("\n") == "", text[at : match.start()]
        at = match.end()
        found.append((match.group(1) is not None, (match.group(1) or match.group(2)).rstrip("\n")))
    assert text[at:].strip("\n") == "", text[at:]
    return found


def read(data: bytes) -> Reading:
    """Return a file's contents; anything that is no command of the current specification fails."""
    reading, state = Reading(), _State()
    for extended, content in words(data.decode("ascii")):
        assert not state.ended, "something after M02"
        if extended:
            _extended(content, reading, state)
        else:
            _plain(content, reading, state)
    assert state.ended, "no M02"
    assert state.region is None, "a region without end"
    reading.left_over = {**state.aperture_attributes, **state.object_attributes}
    return reading


@dataclass
class _State:
    mode: str | None = None
    multi: bool = False
    aperture: int | None = None
    region: int | None = None
    point: tuple[int, int] | None = None
    aperture_attributes: dict[str, str] = field(default_factory=dict)
    object_attributes: dict[str, str] = field(default_factory=dict)
    ended: bool = False


def _extended(content: str, reading: Reading, state: _State) -> None:
    match = EXTENDED.fullmatch(content)
    assert match, f"unknown extended command {content}"
    code, rest = match.groups()
    reading.order.append(content.rstrip("*") if code != "AM" else "AM")
    if code == "AM":
        name, *blocks = [block.strip("\n") for block in rest.rstrip("*").split("*")]
        assert name not in reading.macros
        reading.macros[name] = blocks
        return
    assert rest.endswith("*"), content
    assert rest.count("*") == 1, content
    rest = rest[:-1]
    if code == "AD":
        aperture = re.fullmatch(r"D(\d+)([A-Za-z_.$][A-Za-z_.$0-9]*(?:,.*)?)", rest)
        assert aperture, rest
        number = int(aperture[1])
        assert number not in reading.apertures, f"D{number} defined twice"
        reading.apertures[number] = Aperture(aperture[2], dict(state.aperture_attributes))
    elif code in ("TF", "TA", "TO", "TD"):
        _attribute(code, rest, reading, state)


def _attribute(code: str, rest: str, reading: Reading, state: _State) -> None:
    name, _, value = rest.partition(",")
    if code == "TF":
        assert name not in dict(reading.file_attributes), f"{name} said twice"
        reading.file_attributes.append((name, value))
    elif code == "TD":
        held = {**state.aperture_attributes, **state.object_attributes}
        assert name in held, f"{name} deleted but not there"
        state.aperture_attributes.pop(name, None)
        state.object_attributes.pop(name, None)
    else:
        (state.aperture_attributes if code == "TA" else state.object_attributes)[name] = value


def _plain(content: str, reading: Reading, state: _State) -> None:
    reading.order.append(content)
    if content.startswith("G04"):
        reading.comments.append(content[3:])
    elif content in MODES:
        _mode(content, reading, state)
    elif content == "M02":
        state.ended = True
    elif re.fullmatch(r"D[1-9]\d+", content):
        assert state.region is None, "an aperture chosen inside a region"
        assert int(content[1:]) in reading.apertures, f"{content} is not defined yet"
        state.aperture = int(content[1:])
    else:
        _operation(content, reading, state)


def _mode(content: str, reading: Reading, state: _State) -> None:
    if content == "G36":
        assert state.region is None, "a region inside a region"
        state.region = len(reading.region_attributes)
        reading.region_attributes.append({**state.aperture_attributes, **state.object_attributes})
    elif content == "G37":
        assert state.region is not None, "the end of no region"
        state.region = None
    elif content == "G75":
        state.multi = True
    else:
        state.mode = content


def _operation(content: str, reading: Reading, state: _State) -> None:
    match = OPERATION.fullmatch(content)
    assert match, f"unknown command {content}"
    x, y, i, j, code = match.groups()
    assert x is not None, "a coordinate left out"
    assert y is not None, "a coordinate left out"
    assert state.mode is not None, "no G01 before the first operation"
    if code == "D03":
        assert state.region is None, "a flash inside a region"
    if code != "D02" and state.region is None:
        assert state.aperture is not None, "no aperture chosen"
    arc = code == "D01" and state.mode != "G01"
    assert (i is not None and j is not None) == arc, f"{content} in {state.mode}"
    assert state.multi or not arc, "an arc before G75"
    if code == "D01":
        assert state.point is not None, "a draw from nowhere"
        assert state.point != (int(x), int(y)), "a draw of no length"
    attributes = dict(state.object_attributes)
    if code == "D03":
        assert state.aperture is not None
        attributes |= reading.apertures[state.aperture].attributes
    reading.operations.append(
        Operation(
            code,
            int(x),
            int(y),
            None if i is None else int(i),
            None if j is None else int(j),
            state.mode,
            state.aperture,
            state.region,
            attributes,
        )
    )
    state.point = (int(x), int(y))
