"""Bill of materials and centroid: every part once, places and rotations as placed."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Callable
from dataclasses import replace

import pytest

from layoutgen.writers import Job, Result
from layoutgen.writers.bill_of_materials import BILL_HEADS, write_bill_of_materials
from layoutgen.writers.centroid import CENTROID_HEADS, write_centroid
from layoutgen.writers.plain import columns, comma_separated, natural

JOB = Job(stem="board")


def rows(data: bytes) -> list[dict[str, str]]:
    """Return a table as a spreadsheet reads it; rows of another length fail."""
    found = list(csv.DictReader(io.StringIO(data.decode("utf-8"))))
    assert all(None not in row and None not in row.values() for row in found)
    return found


@pytest.fixture(scope="module")
def bill(driver: Result) -> list[dict[str, str]]:
    return rows(write_bill_of_materials(driver, JOB))


@pytest.fixture(scope="module")
def centroid(driver: Result) -> list[dict[str, str]]:
    return rows(write_centroid(driver, JOB))


def test_bill_has_every_part_once(driver: Result, bill: list[dict[str, str]]) -> None:
    """A part missing is not bought; one on two rows is bought twice."""
    named = [name for row in bill for name in row["References"].split()]
    assert sorted(named) == sorted(driver.placement.parts)
    assert [int(row["Quantity"]) for row in bill] == [len(row["References"].split()) for row in bill]
    assert [row["Item"] for row in bill] == [str(k) for k in range(1, len(bill) + 1)]


def test_equal_parts_share_a_row_and_others_do_not(driver: Result, bill: list[dict[str, str]]) -> None:
    """Same value, another rating: one of them would be bought too weak."""
    given = driver.circuit.file.parts
    for row in bill:
        features = {
            (given[n].kind, given[n].value, given[n].case, given[n].rating, given[n].series_inductance)
            for n in row["References"].split()
        }
        assert len(features) == 1
    assert len({tuple(row.values())[3:] for row in bill}) == len(bill)
    values = {row["References"]: (row["Value"], row["Package"], row["Needed rating"]) for row in bill}
    assert values["C3 C7"] == ("22 pF", "0603", "100 V")
    assert values["C4"] == ("1 nF", "0603", "50 V")
    assert values["C8"] == ("1 nF", "0603", "100 V")


def test_a_flange_is_told_from_a_chip(bill: list[dict[str, str]]) -> None:
    """A flanged part left to the oven is not screwed down."""
    mounting = {row["References"]: row["Mounting"] for row in bill}
    assert mounting["Q1"] == "flange on the carrier"
    assert mounting["R1"] == "surface"


def test_centroid_places_are_the_placements(driver: Result, centroid: list[dict[str, str]]) -> None:
    """To the nanometre, every part once, in the order C2 before C10."""
    assert [row["Reference"] for row in centroid] == sorted(driver.placement.parts, key=natural)
    for row in centroid:
        part = driver.placement.parts[row["Reference"]]
        assert row["x (mm)"] == f"{part.x // 10**6}.{part.x % 10**6:06d}"
        assert row["y (mm)"] == f"{part.y // 10**6}.{part.y % 10**6:06d}"
        assert row["Side"] == "top"


def test_rotation_points_from_the_first_pad_to_the_second(
    driver: Result, centroid: list[dict[str, str]]
) -> None:
    """The convention that the heading states: at zero the first pad is to the west."""
    (head,) = (name for name in CENTROID_HEADS if name.startswith("Rotation"))
    assert "counter-clockwise" in head
    assert "first pad west" in head
    for row in centroid:
        part = driver.placement.parts[row["Reference"]]
        if driver.circuit.file.parts[part.name].case is None:
            continue
        first, second = part.pads
        turn = math.degrees(math.atan2(second.y - first.y, second.x - first.x)) % 360.0
        assert float(row[head]) == pytest.approx(turn, abs=1e-3)
        assert 0.0 <= float(row[head]) < 360.0


def test_a_rotation_that_rounds_to_a_full_turn_is_zero(handmade: Result) -> None:
    """360.000 is refused by machines that want less than a turn."""
    placement = handmade.placement
    turned = replace(placement.parts["C1"], heading=-1e-9)
    parts = {**placement.parts, "C1": turned}
    artwork = replace(handmade.artwork, placement=replace(placement, parts=parts))
    found = rows(write_centroid(replace(handmade, artwork=artwork), JOB))
    assert found[0][CENTROID_HEADS[5]] == "0.000"


def test_a_board_without_parts_has_headings_alone(handmade: Result) -> None:
    """An empty file is taken for a failed transfer."""
    artwork = replace(handmade.artwork, placement=replace(handmade.placement, parts={}))
    bare = replace(handmade, artwork=artwork)
    assert write_bill_of_materials(bare, JOB).decode() == ",".join(BILL_HEADS) + "\n"
    assert len(write_centroid(bare, JOB).splitlines()) == 1


def test_equal_results_give_equal_bytes(remake: Callable[[], Result], handmade: Result) -> None:
    """Groups ordered by a hash would shuffle the rows."""
    for write in (write_bill_of_materials, write_centroid):
        assert write(remake(), JOB) == write(handmade, JOB)


def test_cells_that_look_like_formulas_are_defused() -> None:
    """A name that begins with a sign would be computed by a spreadsheet; numbers must stay numbers."""
    data = comma_separated(("a",), [("-R1",), ("=1+1",), ("-2.8000",), ('say "x", y',)])
    assert data.decode() == 'a\n -R1\n =1+1\n-2.8000\n"say ""x"", y"\n'


def test_columns_line_up() -> None:
    """A cell wider than its heading must push the others along."""
    text = columns(("a", "b"), [("long cell", "1"), ("x", "22")])
    assert text == "a          b\n---------  --\nlong cell  1\nx          22\n"


def test_numbers_in_names_are_counted() -> None:
    """C10 before C2 makes lists hard to tick off."""
    assert sorted(["C10", "C2", "R1", "C2a"], key=natural) == ["C2", "C2a", "C10", "R1"]
