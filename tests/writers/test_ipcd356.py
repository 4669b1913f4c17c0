"""The netlist: columns, every net with its points, conductors as the copper is."""

from __future__ import annotations

import re
from collections import Counter, defaultdict
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest
import shapely

from layoutgen.errors import WrongInputError
from layoutgen.writers import Job, Result
from layoutgen.writers.copper_nets import copper_nets
from layoutgen.writers.ipcd356 import short_names, test_points, write_ipcd356
from tests.writers.coupled_board import FIRST, SECOND, coupled_board

JOB = Job(stem="gauge")
RECORD = re.compile(
    r"3(17|27|67)(.{14})   (.{6})-(.{4})([M ])(D\d{4}|     )([PU ])A0([012])"
    r"X([+-]\d{6})Y([+-]\d{6})X(\d{4})Y(\d{4})R(\d{3}) S([0-3])"
)


@pytest.fixture(scope="module", params=["handmade", "driver"])
def board(request: pytest.FixtureRequest) -> Result:
    result: Result = request.getfixturevalue(request.param)
    return result


@pytest.fixture(scope="module")
def lines(board: Result) -> list[str]:
    return write_ipcd356(board, JOB).decode("ascii").splitlines()


@pytest.fixture(scope="module")
def records(lines: list[str]) -> list[tuple[str, ...]]:
    """Return the fields of all records; one in wrong columns fails here."""
    found = []
    for line in lines:
        if line[:1] == "3" and not line.startswith("389"):
            match = RECORD.fullmatch(line)
            assert match, line
            found.append(match.groups())
    return found


def test_lines_are_of_known_kinds_and_fit_80_columns(lines: list[str]) -> None:
    """Readers of fixed columns cut longer lines; unknown kinds are dropped."""
    for line in lines:
        assert len(line) <= 80
        assert re.match(r"C  |P  |317|327|367|389|089 |999$", line), line
    assert lines[-1] == "999"
    assert lines.count("999") == 1


def test_units_come_before_the_first_record(lines: list[str]) -> None:
    """CUST 1 is the thousandth of a millimetre; without it coordinates are tenths of mils."""
    first = next(k for k, line in enumerate(lines) if line.startswith("3"))
    assert lines.index("P  UNITS CUST 1") < first


def test_every_net_has_its_points(board: Result, records: list[tuple[str, ...]], lines: list[str]) -> None:
    """A net without a point is not tested; each is found under the conductor that a comment names."""
    held = {}
    for line in lines:
        if match := re.fullmatch(r"C  CONDUCTOR (\S+) HOLDS (.*)", line):
            held.update(dict.fromkeys(match[2].split(), match[1]))
    assert set(held) == set(board.circuit.nets)
    told = {fields[1].strip() for fields in records}
    assert set(held.values()) <= told
    own = {point.net for point in test_points(board)}
    assert set(board.circuit.nets) <= own


def test_all_pads_vias_and_holes_are_there(board: Result, records: list[tuple[str, ...]]) -> None:
    """Each lost one is an open that the test does not see."""
    kinds = Counter(fields[0] for fields in records if fields[4] == " ")
    pads = sum(pad.outline.polygon().area > 0 for p in board.placement.parts.values() for pad in p.pads)
    assert kinds["27"] == pads + len(board.placement.ports)
    plated = sum(hole.plated for hole in board.artwork.holes)
    assert kinds["17"] == len(board.artwork.vias) + plated
    assert kinds["67"] == len(board.artwork.holes) - plated


def test_points_lie_on_copper_of_their_conductor(board: Result, records: list[tuple[str, ...]]) -> None:
    """A point beside its copper is an open; on another conductor's, a short."""
    nets = copper_nets(board.circuit.file, tuple(board.circuit.nets))
    pieces: dict[str, list[shapely.Geometry]] = defaultdict(list)
    for shape in board.artwork.on("copper_top"):
        polygon = shapely.Polygon(shape.outline.chords(), [hole.chords() for hole in shape.holes])
        pieces[nets[shape.net or ""]].append(polygon)
    copper = {net: shapely.union_all(shapes) for net, shapes in pieces.items()}
    for fields in records:
        net = fields[1].strip()
        if fields[0] == "27":
            point = shapely.Point(int(fields[8]) * 1000, int(fields[9]) * 1000)
            assert copper[net].distance(point) < 1000, fields
            assert all(copper[other].distance(point) > 1000 for other in copper if other != net), fields


def test_connected_copper_has_one_name(board: Result, records: list[tuple[str, ...]]) -> None:
    """Two names on one piece of copper is a short reported on every board."""
    nets = copper_nets(board.circuit.file, tuple(board.circuit.nets))
    for line in board.circuit.file.lines.values():
        assert len({nets[net] for net in line.nets}) == 1
    assert len(set(nets.values())) == len({fields[1].strip() for fields in records} - {"N/C"})


def test_mask_codes_tell_what_is_covered(driver: Result) -> None:
    """A probe on a covered via finds nothing: pads are open, vias covered on top, the bottom is bare."""
    text = write_ipcd356(driver, JOB).decode()
    found = [match for line in text.splitlines() if (match := RECORD.fullmatch(line))]
    assert {m[14] for m in found if m[1] == "27" and m[5] == " "} == {"0"}
    assert {m[14] for m in found if m[3].strip() == "VIA"} == {"1"}


def test_an_outside_reader_finds_the_same(board: Result, lines: list[str]) -> None:
    """What gerbonara sees: places, nets, holes."""
    ipc356: Any = pytest.importorskip("gerbonara.ipc356")
    read = ipc356.Netlist.from_string("\n".join(lines), filename="x.ipc")
    nets = copper_nets(board.circuit.file, tuple(board.circuit.nets))
    found = Counter((r.net_name, round(r.x * 1e3), round(r.y * 1e3)) for r in read.test_records)
    wanted = Counter(
        (nets.get(p.net or "") if p.net else None, (p.x + 500) // 1000, (p.y + 500) // 1000)
        for p in test_points(board)
    )
    assert found == wanted
    assert len(read.outlines) == len(board.artwork.on("profile"))


def test_long_nets_get_aliases_that_are_told() -> None:
    """Names cut to 14 columns may become the same name: two nets would be one."""
    lines = write_ipcd356(coupled_board(), JOB).decode().splitlines()
    assert f"P  NNAME1  {FIRST}" in lines
    assert f"P  NNAME2  {SECOND}" in lines
    found = {m[2].strip() for line in lines if (m := RECORD.fullmatch(line))}
    assert found == {"NNAME1", "NNAME2", "gnd"}
    ipc356: Any = pytest.importorskip("gerbonara.ipc356")
    read = ipc356.Netlist.from_string("\n".join(lines), filename="x.ipc")
    assert {record.net_name for record in read.test_records} == {FIRST, SECOND, "gnd"}


def test_both_strips_of_a_pair_are_conductors_of_their_own() -> None:
    """A pair couples, it does not conduct: joined strips would hide a short between them."""
    result = coupled_board()
    nets = copper_nets(result.circuit.file, tuple(result.circuit.nets))
    assert nets["m"] == FIRST
    assert nets["k"] == SECOND


def test_short_names_stay_apart() -> None:
    """A name that fits stays; those that do not must not become one of these, nor each other."""
    names = short_names(["rf_output_1", "rf_output_2", "rf_ou1", "C1"], 6)
    assert names["C1"] == "C1"
    assert names["rf_ou1"] == "rf_ou1"
    assert len(set(names.values())) == 4
    assert max(map(len, names.values())) <= 6


def test_shortened_references_are_told(driver: Result) -> None:
    """A shortened name that nobody explains cannot be traced back."""
    text = write_ipcd356(driver, JOB).decode()
    assert re.search(r"C  PIN \S{4} IS drain\n", text)


def test_a_board_beyond_the_columns_is_refused(handmade: Result) -> None:
    """Six digits of micrometres end at 999.999 mm."""
    with pytest.raises(WrongInputError, match=r"1000\.000 mm"):
        write_ipcd356(
            replace(
                handmade,
                artwork=replace(handmade.artwork, placement=replace(handmade.placement, width=1_000_000_000)),
            ),
            JOB,
        )


def test_equal_results_give_equal_bytes(remake: Callable[[], Result], handmade: Result) -> None:
    """Aliases numbered in the order of a set would change from run to run."""
    assert write_ipcd356(remake(), JOB) == write_ipcd356(handmade, JOB)
