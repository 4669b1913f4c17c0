"""Fabrication, assembly and review drawings: true to scale, nothing left out, the same from run to run."""

from __future__ import annotations

import itertools
import re
import zlib
from collections.abc import Callable
from dataclasses import replace

import matplotlib as mpl
import numpy as np
import pytest

from layoutgen.checks import CheckResult, NotChecked
from layoutgen.geometry import Ring
from layoutgen.writers import Job, Result
from layoutgen.writers.assembly_drawing import write_assembly_drawing
from layoutgen.writers.board_view import suitable_scale
from layoutgen.writers.dimensions import spread
from layoutgen.writers.fabrication_drawing import write_fabrication_drawing
from layoutgen.writers.fabrication_facts import criticals, drill_rows, notes, open_points
from layoutgen.writers.flow import Flow, wrapped
from layoutgen.writers.readback.drawings import pdf_texts
from layoutgen.writers.review_sheet import verdict, write_review_sheet
from layoutgen.writers.sheet import A4, Book, Sheet, paper_for, text_width
from tests.writers.coupled_board import coupled_board

JOB = Job(stem="board")
WRITERS = (write_fabrication_drawing, write_assembly_drawing, write_review_sheet)
LIGATURE = re.compile("ffi|ffl|ff|fi|fl|[\0-\x1f]")


def texts(data: bytes) -> list[str]:
    """Return the texts of a document, a mark for each ligature."""
    return [plain(text) for text in pdf_texts(data)]


def plain(text: str) -> str:
    return LIGATURE.sub("\0", text)


def streams(data: bytes) -> list[str]:
    """Return the content of each page, in order."""
    found = []
    for match in re.finditer(rb"stream\r?\n", data):
        try:
            content = zlib.decompressobj().decompress(data[match.end() :])
        except zlib.error:
            continue
        if content.startswith(b"1 0 0 1 0 0 cm"):
            found.append(content.decode("latin-1"))
    return found


def boxes(content: str) -> list[tuple[float, float, float, float]]:
    """Return the bounds [mm] of every path of a page."""
    found = []
    for path in re.findall(r"((?:[-0-9.]+ [-0-9.]+ [ml]\n?\s?)+)", content):
        points = np.array([[float(v) for v in p] for p in re.findall(r"([-0-9.]+) ([-0-9.]+) [ml]", path)])
        found.append(tuple(float(v) for v in (*points.min(axis=0), *points.max(axis=0))))
    return found  # type: ignore[return-value]


@pytest.fixture(scope="module")
def fabrication(driver: Result) -> bytes:
    return write_fabrication_drawing(driver, JOB)


@pytest.fixture(scope="module")
def assembly(driver: Result) -> bytes:
    return write_assembly_drawing(driver, JOB)


@pytest.fixture(scope="module")
def review(driver: Result) -> bytes:
    return write_review_sheet(driver, JOB)


class TestFabrication:
    def test_dimensions_are_the_boards(self, driver: Result, fabrication: bytes) -> None:
        """Overall size, and where cut-out and screw holes are, to the micrometre."""
        found = texts(fabrication)
        width, height = driver.placement.width, driver.placement.height
        assert f"{width / 1e6:.3f} mm" in found
        assert f"{height / 1e6:.3f} mm" in found
        (cutout,) = (s for s in driver.artwork.on("profile") if s.role == "cutout")
        values = {v for point in cutout.outline.points for v in point}
        values |= {v for hole in driver.artwork.holes for v in (hole.x, hole.y)} | {0, width, height}
        assert {f"{v / 1e6:.3f}" for v in values} <= set(found)

    def test_drill_table_counts_all_holes(self, driver: Result) -> None:
        """A count that is off makes the board house stop and ask."""
        rows = drill_rows(driver)
        assert [row[1:4] for row in rows] == [
            ("0.3", str(len(driver.artwork.vias)), "yes"),
            ("2.7", str(len(driver.artwork.holes)), "no"),
        ]

    def test_every_line_has_its_width_and_rule(self, driver: Result, fabrication: bytes) -> None:
        """A line left out of the table is one that may be etched as it comes."""
        rows = [row.cells for row in criticals(driver)]
        assert [row[1] for row in rows] == list(driver.placement.lines)
        for row, line in zip(rows, driver.placement.lines.values(), strict=True):
            assert row[2] == f"{line.width / 1e6:.4f}"
            held = "do not change" in row[6]
            assert held == driver.sized.lines[line.name].rf
        found = texts(fabrication)
        assert all(plain(cell) in found for row in rows for cell in row if cell)

    def test_says_where_widths_are_measured(self, fabrication: bytes) -> None:
        """A width measured at the top of sloping copper is another width."""
        assert "width, measured at the foot" in texts(fabrication)

    def test_pairs_have_widths_and_gaps_with_tolerance(self) -> None:
        """A pair's gap is as critical as its widths; a tolerance given in the file must be told."""
        result = coupled_board()
        rows = {row.cells[1]: row.cells for row in criticals(result)}
        pair = result.placement.pairs["pair"]
        assert rows["pair"][2:5] == (f"{pair.width / 1e6:.4f}", "+/-0.0200", f"{pair.gap / 1e6:.4f}")
        assert not any("Width tolerance" in text for text in open_points(result))

    def test_open_points_are_named(self, handmade: Result) -> None:
        """What the circuit file does not say must not look as if it were settled."""
        told = " ".join(open_points(handmade))
        assert "Finish: not stated" in told
        assert "Width tolerance: not stated" in told

    def test_undercut_is_told_when_it_is_drawn(self, driver: Result) -> None:
        """Compensated twice, every line comes out too wide."""
        rules = driver.circuit.rules
        copper = rules.copper.model_copy(update={"undercut": 35e-6})
        thick = with_rules(driver, rules.model_copy(update={"copper": copper}))
        assert any("0.035 mm on each edge" in text for text in notes(thick))
        assert not any("on each edge" in text for text in notes(driver))

    def test_a_board_with_errors_says_so(self, handmade: Result, driver: Result) -> None:
        """A drawing sent on in spite of errors must carry the warning itself."""
        assert next(notes(handmade)).startswith("NOT TO BE MADE: 1 finding")
        assert "NOT TO BE MADE" not in " ".join(notes(driver))


class TestAssembly:
    def test_every_reference_and_port_is_there(self, driver: Result, assembly: bytes) -> None:
        """A part without its name on the drawing is not found."""
        found = texts(assembly)
        assert {*driver.placement.parts, *driver.placement.ports} <= set(found)

    def test_flange_notes_and_cautions(self, assembly: bytes) -> None:
        """Screws, carrier, the ceramic's dust: what is not written is not done."""
        told = " ".join(texts(assembly))
        assert "2 screws through the holes of 2.7 mm" in told
        assert "beryllium oxide" in told
        assert "9.80 W" in told

    def test_a_board_without_parts(self, handmade: Result) -> None:
        """No parts, no list, and no flange notes."""
        artwork = replace(handmade.artwork, placement=replace(handmade.placement, parts={}))
        told = texts(write_assembly_drawing(replace(handmade, artwork=artwork), JOB))
        assert "No parts." in told
        assert not any("beryllium" in text for text in told)


class TestReview:
    def test_board_is_at_true_scale(self, driver: Result, review: bytes) -> None:
        """A print at 1:1 is laid on the board: its outline must have the board's size."""
        size = driver.placement.width / 1e6, driver.placement.height / 1e6
        found = [(b[2] - b[0], b[3] - b[1]) for b in boxes(streams(review)[0])]
        assert any(np.allclose(box, size, atol=2e-3) for box in found)

    def test_bars_are_as_long_as_they_say(self, review: bytes) -> None:
        """The bars are what a print is judged by."""
        found = [(b[2] - b[0], b[3] - b[1]) for b in boxes(streams(review)[0])]
        assert any(np.allclose(box, (50.0, 2.0), atol=1e-3) for box in found)
        assert any(np.allclose(box, (2.0, 50.0), atol=1e-3) for box in found)

    def test_budgets_add_up(self, driver: Result, review: bytes) -> None:
        """Every entry of every budget, its sum and the angle asked for."""
        found = set(texts(review))
        for line in driver.placement.lines.values():
            assert f"{np.degrees(line.angle):.3f}" in found
            for entry in line.budget:
                if entry.cause == "line":
                    assert f"{np.degrees(entry.angle):.3f}" in found

    def test_findings_waivers_and_what_was_not_checked(self, handmade: Result) -> None:
        """Errors, the waived one with its reason, and the open rules must all be readable."""
        told = " ".join(texts(write_review_sheet(handmade, JOB)))
        assert "NOT CLEAN: 1 error" in told
        assert plain("seen at first article") in told
        assert "no table in the rules" in told

    def test_verdict_counts(self, handmade: Result, driver: Result) -> None:
        """A waived error does not count; an unwaived one does."""
        assert verdict(handmade).startswith("NOT CLEAN: 1 error; 1 warning, 2 notes, 1 waived; 1 rule not")
        assert verdict(driver).startswith("No errors")

    def test_long_lists_run_on_to_more_sheets(self, handmade: Result) -> None:
        """Rows below the edge of the paper are lost."""
        many = tuple(NotChecked(f"rule.{k}", "a reason that is told") for k in range(120))
        checks = CheckResult(findings=handmade.checks.findings, not_checked=many)
        data = write_review_sheet(replace(handmade, checks=checks), JOB)
        assert {f"rule.{k}" for k in range(120)} <= set(texts(data))
        for content in streams(data):
            places = re.findall(r"1 0 0 1 ([-0-9.]+) ([-0-9.]+) cm", content)[1:]
            assert len(places) > 5
            assert all(float(y) > 10 for _, y in places)


class TestPaper:
    def test_is_large_enough_for_the_board(self, driver: Result) -> None:
        """A board larger than A4 needs a larger sheet, and one beyond A0 its own."""
        assert paper_for(100, 100) == A4
        assert paper_for(300, 100) == (420.0, 297.0)
        assert paper_for(2000, 300) == (2000, 300)
        large = replace(driver.placement, width=380_000_000, height=200_000_000)
        data = write_review_sheet(replace(driver, artwork=replace(driver.artwork, placement=large)), JOB)
        assert re.search(rb"/MediaBox \[ 0 0 1683\.\d+ 1190\.\d+ \]", data)

    def test_scales_are_the_largest_that_fit(self, driver: Result) -> None:
        """A scale too large runs over the frame."""
        width, height = driver.placement.width / 1e6, driver.placement.height / 1e6
        scale = float(suitable_scale(driver, 250.0, 120.0))
        assert width * scale <= 250.0
        assert height * scale <= 120.0
        assert width * scale * 1.7 > 250.0 or height * scale * 1.7 > 120.0

    def test_text_is_no_formula(self) -> None:
        """Dollar signs in a title must not be set as mathematics, nor fail."""
        book = Book("Kind", r"a $x_1$ and \frac", ())
        book.sheet("one")
        data = book.pdf()
        assert r"a $x_1$ and \frac" in texts(data)

    def test_characters_that_the_font_lacks(self) -> None:
        """A title in another script must neither warn nor fail."""
        book = Book("Kind", "雨量計 Ω", ())
        book.sheet("one")
        assert book.pdf().startswith(b"%PDF")

    def test_the_users_plotting_habits_do_not_matter(self, handmade: Result) -> None:
        """A configured font, colour or size must not change the drawing, nor be changed by it."""
        plain_look = write_assembly_drawing(handmade, JOB)
        with mpl.rc_context({"font.size": 30, "axes.facecolor": "red", "path.simplify": False,
                             "figure.facecolor": "blue", "text.usetex": False}):  # fmt: skip
            assert write_assembly_drawing(handmade, JOB) == plain_look
            assert mpl.rcParams["font.size"] == 30


class TestLayout:
    @pytest.mark.parametrize("wanted", [[], [5.0], [0.0, 0.1, 0.2], [0.0, 1.0, 10.0, 10.5, 20.0], [3.0, 3.0]])
    def test_labels_are_spread_and_stay_in_order(self, wanted: list[float]) -> None:
        """Labels on top of each other cannot be read; swapped ones are wrong."""
        places = spread(wanted, 2.0)
        assert len(places) == len(wanted)
        assert all(b - a >= 2.0 - 1e-9 for a, b in itertools.pairwise(places))
        assert sum(places) == pytest.approx(sum(wanted))

    def test_labels_with_room_stay(self) -> None:
        """Only what collides is moved."""
        assert spread([0.0, 5.0, 10.0], 2.0) == [0.0, 5.0, 10.0]

    def test_lines_fit_their_width(self) -> None:
        """A line that runs into the next column covers it; no word may be lost."""
        text = "the board must lie flat on the carrier up to the edges of the cut-out " * 3
        lines = wrapped(text, 40.0)
        assert all(text_width(line, 2.6) <= 40.0 for line in lines)
        assert " ".join(lines).split() == text.split()

    def test_tables_fit_the_sheet(self) -> None:
        """Columns that need more than the sheet are narrowed, not cut."""
        written: list[tuple[float, float, str]] = []

        class Kept(Sheet):
            def text(self, x: float, y: float, text: str, *_: object, **__: object) -> None:
                written.append((x, y, text))

        sheets: list[Sheet] = []

        def new() -> Sheet:
            sheets.append(Kept("table", *A4))
            return sheets[-1]

        Flow(new).table(("a", "b"), [("word " * 60, "other " * 60)] * 25)
        left, low, right, _ = sheets[0].room
        for x, y, text in written:
            assert left <= x <= right
            assert low - 1 <= y
            assert x + text_width(text, 2.6) <= right + 1
        assert len(sheets) > 1
        assert len(written) > 50


@pytest.mark.parametrize("write", WRITERS)
def test_equal_results_give_equal_bytes(
    remake: Callable[[], Result], handmade: Result, write: Callable[[Result, Job], bytes]
) -> None:
    """A date in the file would change every run."""
    data = write(handmade, JOB)
    assert write(remake(), JOB) == data
    assert set(re.findall(rb"/(?:Creation|Mod)Date \((.*?)\)", data)) == {b"D:20000101000000+00'00'"}


def with_rules(result: Result, rules: object) -> Result:
    """Return a result drawn by other rules (the artwork stays)."""
    circuit = replace(result.circuit, rules=rules)  # type: ignore[arg-type]
    placement = replace(result.placement, sized=replace(result.sized, circuit=circuit))
    return replace(result, artwork=replace(result.artwork, placement=placement))


def test_a_long_outline_keeps_its_arcs_on_paper(handmade: Result) -> None:
    """Corners drawn straight would show another board."""
    outline = handmade.artwork.on("profile")[0].outline
    assert not outline.is_straight
    points = len(Ring(outline.points, outline.bulges).chords(20_000))  # a tenth of a thin pen
    content = streams(write_review_sheet(handmade, JOB))[0]
    paths = re.findall(r"((?:[-0-9.]+ [-0-9.]+ [ml]\n?\s?)+)", content)
    assert any(len(re.findall(r"[ml]\b", path)) >= points for path in paths)
