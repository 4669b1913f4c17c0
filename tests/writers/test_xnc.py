"""XNC drill files by the rules of the open specification, one class a rule; hits against the model."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from layoutgen.artwork import Hole
from layoutgen.origin import Origin
from layoutgen.writers import Job, Result
from layoutgen.writers.xnc import XNC_WRITERS, has_hits, write_xnc

JOB = Job(stem="gauge")
HEADER = re.compile(r"M48|METRIC|%|;.*|T\d+C\d+\.\d{6}")
BODY = re.compile(r"G05|T\d+|X-?\d+\.\d{6}Y-?\d+\.\d{6}|M30")


@pytest.fixture(scope="module", params=["handmade", "driver"])
def board(request: pytest.FixtureRequest) -> Result:
    """Boards with vias and holes, one of them with plated holes of two kinds added."""
    result: Result = request.getfixturevalue(request.param)
    extra = tuple(
        Hole(x=x, y=5_000_003, diameter=1_000_000, plated=True, net=net, origin=Origin("board"))
        for x, net in ((-2_000_000, None), (6_000_001, "gnd"), (7_000_000, None))
    )
    return replace(result, artwork=replace(result.artwork, holes=(*result.artwork.holes, *extra)))


@pytest.fixture(scope="module", params=[True, False], ids=["plated", "nonplated"])
def plated(request: pytest.FixtureRequest) -> bool:
    told: bool = request.param
    return told


@pytest.fixture(scope="module")
def data(board: Result, plated: bool) -> bytes:
    return write_xnc(board, JOB, plated)


@pytest.fixture(scope="module")
def lines(data: bytes) -> list[str]:
    return data.decode("ascii").splitlines()


def model(board: Result, plated: bool) -> Counter[tuple[int, int, int]]:
    """Return the model's holes: middle and diameter [nm]."""
    vias = [(v.x, v.y, v.drill) for v in board.artwork.vias] if plated else []
    return Counter([*vias, *((h.x, h.y, h.diameter) for h in board.artwork.holes if h.plated is plated)])


def hits(lines: list[str]) -> Counter[tuple[int, int, int]]:
    """Return hits by a reader of this test's own, digits turned into whole nanometres."""
    tools = {int(m[1]): nm(m[2]) for line in lines if (m := re.fullmatch(r"T(\d+)C([0-9.]+)", line))}
    found: Counter[tuple[int, int, int]] = Counter()
    tool = 0
    for line in lines[lines.index("%") :]:
        if m := re.fullmatch(r"T(\d+)", line):
            tool = int(m[1])
        elif m := re.fullmatch(r"X([-0-9.]+)Y([-0-9.]+)", line):
            found[nm(m[1]), nm(m[2]), tools[tool]] += 1
    return found


def nm(text: str) -> int:
    whole, _, part = text.lstrip("-").partition(".")
    value = int(whole) * 1_000_000 + int(part)
    return -value if text.startswith("-") else value


class TestHeader:
    def test_begins_and_ends_as_it_must(self, lines: list[str]) -> None:
        """A file that does not begin with M48 and end its header with % is not taken for a drill file."""
        assert lines[0] == "M48"
        assert lines.count("%") == 1

    def test_holds_only_what_belongs_there(self, lines: list[str]) -> None:
        """The strict subset knows no format statement and no suppressed zeros."""
        for line in lines[: lines.index("%") + 1]:
            assert HEADER.fullmatch(line), line

    def test_unit_is_plain_metric(self, lines: list[str]) -> None:
        """METRIC with LZ or TZ would make the decimals doubtful."""
        assert lines.count("METRIC") == 1
        assert lines.index("METRIC") < next(k for k, line in enumerate(lines) if line.startswith("T"))

    def test_tools_are_defined_once_and_in_order(self, lines: list[str]) -> None:
        """A tool defined twice drills half its holes too large."""
        numbers = [int(m[1]) for line in lines if (m := re.fullmatch(r"T(\d+)C.*", line))]
        assert numbers == list(range(1, len(numbers) + 1))

    def test_says_what_the_file_is(self, lines: list[str], plated: bool) -> None:
        """Plated and other holes are told apart by this alone when names are changed."""
        kind = "Plated,1,2,PTH" if plated else "NonPlated,1,2,NPTH"
        assert f"; #@! TF.FileFunction,{kind}" in lines

    def test_every_tool_says_what_it_drills(self, lines: list[str]) -> None:
        """Vias may be drilled smaller and filled; component holes may not."""
        for k, line in enumerate(lines):
            if re.fullmatch(r"T\d+C.*", line):
                assert re.fullmatch(r"; #@! TA\.AperFunction,(Via|Component|Mechanical)Drill", lines[k - 1])


class TestBody:
    def test_holds_only_drilling(self, lines: list[str]) -> None:
        """Commands beyond the subset, or coordinates without a point, are read differently by machines."""
        body = lines[lines.index("%") + 1 :]
        assert body[0] == "G05"
        for line in body:
            assert BODY.fullmatch(line), line

    def test_every_tool_is_used(self, lines: list[str]) -> None:
        """A tool without hits is one whose holes were lost."""
        body = lines[lines.index("%") + 1 :]
        chosen = [line for line in body if re.fullmatch(r"T\d+", line)]
        defined = [line.partition("C")[0] for line in lines if re.fullmatch(r"T\d+C.*", line)]
        assert chosen == defined
        for tool in chosen:
            assert body[body.index(tool) + 1].startswith("X")


class TestEnd:
    def test_is_said_once_and_last(self, lines: list[str]) -> None:
        """A file without M30 was cut short."""
        assert lines.count("M30") == 1
        assert lines[-1] == "M30"


class TestHits:
    def test_are_the_models(self, board: Result, lines: list[str], plated: bool) -> None:
        """Every hole once, to the nanometre, with its finished diameter, in the file of its kind."""
        assert hits(lines) == model(board, plated)

    def test_are_the_same_in_an_outside_reader(self, board: Result, data: bytes, plated: bool) -> None:
        """What gerbonara sees, in millimetres."""
        gerbonara = pytest.importorskip("gerbonara")
        read = gerbonara.ExcellonFile.from_string(data.decode(), filename=Path("x.xnc"))
        found = Counter(
            (round(o.x * 1e6), round(o.y * 1e6), round(o.aperture.diameter * 1e6)) for o in read.drills()
        )
        assert found == model(board, plated)


def test_a_board_without_holes_has_no_files(handmade: Result) -> None:
    """An empty drill file makes the board house ask."""
    bare = replace(handmade, artwork=replace(handmade.artwork, vias=(), holes=()))
    assert not has_hits(bare, True)
    assert not has_hits(bare, False)
    assert has_hits(handmade, True)
    assert has_hits(handmade, False)


def test_equal_results_give_equal_bytes(remake: Callable[[], Result], handmade: Result) -> None:
    """The order of tools must not come from a hash."""
    for writer in XNC_WRITERS.values():
        assert writer(remake(), JOB) == writer(handmade, JOB)
