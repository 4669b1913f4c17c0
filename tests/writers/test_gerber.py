"""Gerber by the rules of the open specification, one class a rule; then as pictures, in an outside reader."""

from __future__ import annotations

import hashlib
import itertools
import math
import re
from collections import Counter
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import shapely

from layoutgen.artwork import Shape
from layoutgen.errors import WrongInputError
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.writers import Job, Result
from layoutgen.writers.copper_nets import copper_nets
from layoutgen.writers.gerber import GERBER_FUNCTIONS, GERBER_WRITERS, is_drawn, write_gerber
from layoutgen.writers.scene import layers_of
from tests.writers.gerber_grammar import Operation, Reading, read

JOB = Job(stem="gauge, 2nd*try%")
LAYERS = tuple(GERBER_FUNCTIONS)
Files = dict[str, bytes]


@pytest.fixture(scope="module", params=["handmade", "driver"])
def board(request: pytest.FixtureRequest) -> Result:
    """A board told by hand and a real one."""
    result: Result = request.getfixturevalue(request.param)
    return result


@pytest.fixture(scope="module")
def files(board: Result) -> Files:
    return {layer: write_gerber(board, JOB, layer) for layer in LAYERS}


@pytest.fixture(scope="module", params=LAYERS)
def layer(request: pytest.FixtureRequest) -> str:
    name: str = request.param
    return name


@pytest.fixture(scope="module")
def reading(files: Files, layer: str) -> Reading:
    """A file read by the grammar, which alone refuses unknown commands and broken order."""
    return read(files[layer])


def first_operation(reading: Reading) -> int:
    return next((k for k, word in enumerate(reading.order) if word.endswith(("D01", "D02", "D03"))), 10**9)


class TestFormatSpecification:
    def test_is_there_once_before_any_coordinate(self, reading: Reading) -> None:
        """Without it, or behind a coordinate, a reader guesses the scale."""
        places = [k for k, word in enumerate(reading.order) if word.startswith("FS")]
        assert len(places) == 1
        assert places[0] < first_operation(reading)

    def test_has_equal_legal_digits(self, reading: Reading) -> None:
        """Other than 1-6 digits before and 5 or 6 behind the point, or X unlike Y, is refused."""
        (word,) = (word for word in reading.order if word.startswith("FS"))
        match = re.fullmatch(r"FSLAX([1-6])([56])Y([1-6])([56])", word)
        assert match
        assert match.groups()[:2] == match.groups()[2:]


class TestUnit:
    def test_is_the_millimetre_said_once_before_any_coordinate(self, reading: Reading) -> None:
        """A second unit, or inches, scales what follows by 25.4."""
        places = [k for k, word in enumerate(reading.order) if word.startswith("MO")]
        assert [reading.order[k] for k in places] == ["MOMM"]
        assert places[0] < first_operation(reading)


class TestEnd:
    def test_is_said_once_and_last(self, reading: Reading, files: Files, layer: str) -> None:
        """A file without M02 was cut short; what comes after it is ignored."""
        assert reading.order.count("M02") == 1
        assert reading.order[-1] == "M02"
        assert files[layer].endswith(b"M02*\n")


class TestModes:
    @pytest.mark.parametrize("word", ["LPD", "G75", "G01"])
    def test_are_set_before_they_matter(self, reading: Reading, word: str) -> None:
        """A reader's default may be another polarity, arc mode or interpolation."""
        assert reading.order.index(word) < first_operation(reading)

    def test_nothing_is_taken_away(self, reading: Reading) -> None:
        """The files are free of negatives: a clear object hides what a checker should see."""
        assert {word for word in reading.order if word.startswith("LP")} == {"LPD"}

    def test_contours_begin_with_straight_edges(self, reading: Reading) -> None:
        """A contour that relies on the mode of the one before it changes when a file is edited."""
        for contour in reading.contours():
            assert contour[0].mode == "G01"


class TestApertures:
    def test_codes_are_legal(self, reading: Reading) -> None:
        """Codes below 10 are operations."""
        assert all(10 <= code <= 2**31 - 1 for code in reading.apertures)

    def test_all_are_used_and_have_a_size(self, reading: Reading) -> None:
        """A zero size draws nothing; an unused one is left over from something lost."""
        used = {o.aperture for o in reading.operations if o.aperture is not None}
        assert used == set(reading.apertures)
        for aperture in reading.apertures.values():
            sizes = re.findall(r"[0-9.]+", aperture.template.partition(",")[2])
            assert all(float(size) > 0 for size in sizes)

    def test_definitions_come_before_drawing(self, reading: Reading) -> None:
        """The grammar refuses use before definition; some readers want all of them in the header."""
        last = max((k for k, word in enumerate(reading.order) if word.startswith("AD")), default=-1)
        assert last < first_operation(reading)

    def test_macros_are_closed_outlines(self, board: Result) -> None:
        """A pad that is no box on the grid is flashed too, by a macro whose outline ends where it begins."""
        odd = turned_pad(board, ((0, 0), (500_001, 100_000), (400_001, 600_000), (-100_000, 500_000)))
        reading = read(write_gerber(odd, JOB, "copper_top"))
        (blocks,) = reading.macros.values()
        primitive, on, count, *rest = blocks[0].replace("\n", "").split(",")
        assert (primitive, on, count) == ("4", "1", "4")
        assert rest[:2] == rest[-3:-1]
        assert rest[-1] == "0"


class TestRegions:
    def test_contours_are_closed(self, reading: Reading) -> None:
        """A contour whose last point is not its first is closed by guess, or not at all."""
        for contour in reading.contours():
            assert contour[0].code == "D02"
            assert {o.code for o in contour[1:]} == {"D01"}
            assert (contour[0].x, contour[0].y) == (contour[-1].x, contour[-1].y)

    def test_contours_do_not_cross_themselves(self, reading: Reading) -> None:
        """Cut-ins touch; where an outline crosses itself, readers disagree on what is inside."""
        for contour in reading.contours():
            points = flattened(contour)
            x, y = points.T
            signed = abs(float(np.dot(x[:-1], y[1:]) - np.dot(x[1:], y[:-1]))) / 2.0
            even_odd = shapely.make_valid(shapely.Polygon(points)).area
            assert even_odd == pytest.approx(signed, rel=1e-9)

    def test_cuts_are_horizontal_and_lie_on_each_other(self, reading: Reading) -> None:
        """A cut whose two runs differ by a nanometre is a sliver; the specification wants them coincident."""
        for contour in reading.contours():
            edges = Counter(
                frozenset(((a.x, a.y), (b.x, b.y))) for a, b in itertools.pairwise(contour) if b.mode == "G01"
            )
            for edge, count in edges.items():
                assert count <= 2
                if count == 2:
                    (_, y0), (_, y1) = edge
                    assert y0 == y1

    def test_arcs_have_one_radius(self, reading: Reading) -> None:
        """Start and end must lie on one circle within rounding, or a reader refuses the arc."""
        before = None
        for operation in reading.operations:
            if operation.i is not None and operation.j is not None and before is not None:
                centre = before.x + operation.i, before.y + operation.j
                ends = math.hypot(operation.i, operation.j), math.dist((operation.x, operation.y), centre)
                assert abs(ends[0] - ends[1]) < 2.0
            before = operation


class TestCoordinates:
    def test_are_the_models_whole_nanometres(self, board: Result, reading: Reading, layer: str) -> None:
        """Every vertex of the model without holes must be there to the digit."""
        drawn = {(o.x, o.y) for o in reading.operations if o.code != "D03"}
        flashed = {(o.x, o.y) for o in reading.operations if o.code == "D03"}
        for shape in layers_of(board)[layer]:
            points = set(shape.outline.points)
            xs, ys = [x for x, _ in points], [y for _, y in points]
            middle = ((min(xs) + max(xs)) // 2, (min(ys) + max(ys)) // 2)
            assert points <= drawn or middle in flashed

    def test_a_board_beyond_the_digits_is_refused(self, handmade: Result) -> None:
        """Such coordinates need a fifth digit before the point, which the format statement has not."""
        far = Ring.box(0, 0, 12_000_000_000, 1_000_000)
        artwork = replace(handmade.artwork, shapes=(replace(handmade.artwork.shapes[0], outline=far),))
        with pytest.raises(WrongInputError, match=r"12\.000 m"):
            write_gerber(replace(handmade, artwork=artwork), JOB, "copper_top")


class TestDeprecatedCommands:
    @pytest.mark.parametrize(
        "word", ["G54D10", "G55", "G70", "G71", "G90", "G91", "G74", "M00", "M01", "%IPPOS*%", "%INx*%",
                 "%LNx*%", "%SFA1B1*%", "%OFA0B0*%", "%ASAXBY*%", "%MIA0B0*%", "%IR0*%"],
    )  # fmt: skip
    def test_would_be_refused_by_the_grammar(self, files: Files, word: str) -> None:
        """The grammar of these tests knows none of them, so none can be in a file that it reads."""
        text = (
            files["copper_top"].decode().replace("G75*\n", f"G75*\n{word if '%' in word else word + '*'}\n")
        )
        with pytest.raises(AssertionError, match="unknown"):
            read(text.encode())


class TestFileAttributes:
    def test_name_function_and_polarity(self, reading: Reading, layer: str) -> None:
        """The board house sorts files by these; a mask with positive polarity is inverted."""
        told = dict(reading.file_attributes)
        assert told[".FileFunction"] == GERBER_FUNCTIONS[layer]
        wanted = "Negative" if layer.startswith("soldermask") else "Positive"
        assert told[".FilePolarity"] == wanted
        assert told[".Part"] == "Single"

    def test_come_before_the_drawing(self, reading: Reading) -> None:
        """All but the digest belong to the header."""
        places = [k for k, word in enumerate(reading.order) if word.startswith("TF.") and "MD5" not in word]
        assert max(places) < first_operation(reading)

    def test_hold_no_reserved_characters(self, reading: Reading) -> None:
        """A star, per cent sign or comma of the file's name would end the command or split the field."""
        name, guid, revision = dict(reading.file_attributes)[".ProjectId"].split(",")
        assert name == r"gauge\u002C 2nd\u002Atry\u0025"
        assert re.fullmatch(r"[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}", guid)
        assert revision in ("A", "B")

    def test_coordinates_are_the_same_in_all_files(self, files: Files) -> None:
        """Layers that do not say that they align may be aligned by their extents."""
        told = {dict(read(data).file_attributes)[".SameCoordinates"] for data in files.values()}
        assert len(told) == 1

    def test_digest_is_that_of_what_comes_before(self, files: Files, layer: str) -> None:
        """A wrong digest makes a receiver think the file broken."""
        before, _, after = files[layer].partition(b"%TF.MD5,")
        plain = before.replace(b"\n", b"").replace(b"\r", b"")
        assert after == hashlib.md5(plain, usedforsecurity=False).hexdigest().encode() + b"*%\nM02*\n"

    def test_no_date_is_said(self, reading: Reading) -> None:
        """A clock would change the bytes of every run."""
        assert ".CreationDate" not in dict(reading.file_attributes)


class TestObjectAttributes:
    def test_every_piece_of_copper_has_its_net(self, board: Result, files: Files) -> None:
        """A netlist compared with copper that has no or other names reports shorts and opens."""
        nets = copper_nets(board.circuit.file, tuple(board.circuit.nets))
        for layer in ("copper_top", "copper_bottom"):
            wanted = Counter(nets[shape.net or ""] for shape in layers_of(board)[layer])
            assert Counter(copper_marks(read(files[layer]), ".N")) == wanted

    def test_every_pad_has_part_and_pin(self, board: Result, files: Files) -> None:
        """Assembly data are aligned by these."""
        found = Counter(mark for mark in copper_marks(read(files["copper_top"]), ".P") if mark)
        wanted = Counter(
            f"{part.name},{pad.pin}"
            for part in board.placement.parts.values()
            for pad in part.pads
            if pad.outline.polygon().area > 0
        )
        assert found == wanted

    def test_pins_lie_on_their_own_pads(self, board: Result, files: Files) -> None:
        """Pins swapped between the pads of one part would pass a count."""
        pads = {f"{part.name},{pad.pin}": pad for part in board.placement.parts.values() for pad in part.pads}
        for operation in read(files["copper_top"]).operations:
            if operation.code == "D03" and ".P" in operation.attributes:
                pad = pads[operation.attributes[".P"]]
                assert math.dist((operation.x, operation.y), (pad.x, pad.y)) < 2.0

    def test_legend_names_its_parts(self, driver: Result) -> None:
        """References on the legend belong to their parts."""
        reading = read(write_gerber(driver, JOB, "legend_top"))
        named = {marks.get(".C") for marks in reading.region_attributes} - {None}
        assert named == {s.origin.element for s in driver.artwork.on("legend_top")} & set(
            driver.placement.parts
        )

    def test_none_is_left_behind(self, reading: Reading) -> None:
        """What is not deleted is attached to whatever a reader appends."""
        assert reading.left_over == {}


class TestApertureAttributes:
    def test_functions_are_legal(self, reading: Reading, layer: str) -> None:
        """A function that the specification does not know is ignored."""
        found = {aperture.attributes[".AperFunction"] for aperture in reading.apertures.values()}
        found |= {marks[".AperFunction"] for marks in reading.region_attributes}
        legal = {
            "copper": {"Conductor", "SMDPad,CuDef", "ViaPad", "HeatsinkPad"},
            "profile": {"Profile"},
        }.get(layer.partition("_")[0], {"Material"})
        assert found <= legal

    def test_pads_and_lands_are_flashed(self, board: Result, files: Files) -> None:
        """Pads drawn as regions are not recognised as pads by test and inspection."""
        flashes = [o for o in read(files["copper_top"]).operations if o.code == "D03"]
        functions = Counter(o.attributes[".AperFunction"] for o in flashes)
        shapes = board.artwork.on("copper_top")
        assert functions["ViaPad"] == sum(s.role == "land" for s in shapes)
        assert functions["SMDPad,CuDef"] == sum(s.role == "pad" for s in shapes)


class TestProfile:
    def test_is_drawn_once_round_each_outline(self, board: Result, files: Files) -> None:
        """A gap or a second pass in the profile makes the router stop or cut twice."""
        reading = read(files["profile"])
        starts = [k for k, o in enumerate(reading.operations) if o.code == "D02"]
        assert len(starts) == len(board.artwork.on("profile"))
        for begin, end in zip(starts, [*starts[1:], len(reading.operations)], strict=True):
            first, last = reading.operations[begin], reading.operations[end - 1]
            assert (first.x, first.y) == (last.x, last.y)

    def test_has_one_thin_round_pen(self, files: Files) -> None:
        """A pen that is not round has no middle line at corners."""
        (aperture,) = read(files["profile"]).apertures.values()
        assert aperture.template == "C,0.100000"


class TestOutsideReader:
    """Areas as gerbonara sees them, by its own outlines and arcs."""

    @pytest.mark.parametrize("layer", [name for name in LAYERS if name != "profile"])
    def test_layers_have_the_models_area(self, board: Result, files: Files, layer: str) -> None:
        """Lost holes, arcs that bulge the wrong way, pads of another size: all change the area [mm^2]."""
        gerbonara = pytest.importorskip("gerbonara")
        found = gerbonara.GerberFile.from_string(files[layer].decode(), filename=Path("x.gbr"))
        region = shapely.union_all([outline(p) for item in found.objects for p in item.to_primitives("mm")])
        wanted = shapely.union_all(
            [
                shapely.Polygon(mm(s.outline.chords(10)), [mm(hole.chords(10)) for hole in s.holes])
                for s in layers_of(board)[layer]
            ]
        )
        assert region.symmetric_difference(wanted).area < 1e-3
        assert region.is_empty == wanted.is_empty


def test_empty_layers_but_masks_are_no_files(handmade: Result) -> None:
    """An empty paste file asks for a stencil; an empty mask file says that all is covered."""
    none = replace(handmade, artwork=replace(handmade.artwork, shapes=()))
    drawn = [layer for layer in LAYERS if is_drawn(none, layer)]
    assert drawn == ["soldermask_top", "soldermask_bottom"]
    assert read(write_gerber(none, JOB, "soldermask_bottom")).operations == []


def test_equal_results_give_equal_bytes(remake: Callable[[], Result], handmade: Result) -> None:
    """A clock, a random project number or the order of a set would differ."""
    for writer in GERBER_WRITERS.values():
        assert writer(remake(), JOB) == writer(handmade, JOB)


def turned_pad(result: Result, points: tuple[tuple[int, int], ...]) -> Result:
    """Return the board with nothing on its top copper but one pad of C1 of any outline."""
    place = result.placement.parts["C1"].pads[0]
    ring = Ring(tuple((x + place.x, y + place.y) for x, y in points))
    pad = Shape(layer="copper_top", outline=ring, net=place.net, role="pad", origin=Origin("C1"))
    return replace(result, artwork=replace(result.artwork, shapes=(pad,)))


def copper_marks(reading: Reading, name: str) -> list[str | None]:
    """Return an attribute of every object, flashes then regions."""
    flashes = [o.attributes.get(name) for o in reading.operations if o.code == "D03"]
    return flashes + [marks.get(name) for marks in reading.region_attributes]


def flattened(contour: list[Operation]) -> np.ndarray:
    """Return a contour's points [nm], arcs as many chords."""
    points = [(float(contour[0].x), float(contour[0].y))]
    for operation in contour[1:]:
        start, end = points[-1], (float(operation.x), float(operation.y))
        if operation.i is not None and operation.j is not None:
            points += arc(
                start, end, (start[0] + operation.i, start[1] + operation.j), operation.mode == "G02"
            )
        points.append(end)
    return np.array(points)


def arc(
    start: tuple[float, float], end: tuple[float, float], centre: tuple[float, float], clockwise: bool
) -> list[tuple[float, float]]:
    """Return points inside an arc, 200 chords to the quarter turn and more."""
    first = math.atan2(start[1] - centre[1], start[0] - centre[0])
    sweep = (math.atan2(end[1] - centre[1], end[0] - centre[0]) - first) % (2 * math.pi)
    sweep -= 2 * math.pi if clockwise else 0.0
    radius, count = math.dist(start, centre), max(2, math.ceil(abs(sweep) * 128))
    angles = (first + sweep * k / count for k in range(1, count))
    return [(centre[0] + radius * math.cos(a), centre[1] + radius * math.sin(a)) for a in angles]


def outline(primitive: object) -> shapely.Geometry:
    """Return one of the reader's primitives [mm] as an area."""
    found = primitive if hasattr(primitive, "arc_centers") else primitive.to_arc_poly()  # type: ignore[attr-defined]
    points: list[tuple[float, float]] = []
    for start, end, (clockwise, centre) in found.segments:
        points.append(start)
        if clockwise is not None:
            points += arc(start, end, centre, clockwise)
    return shapely.make_valid(shapely.Polygon(points))


def mm(points: tuple[tuple[int, int], ...]) -> list[tuple[float, float]]:
    return [(x / 1e6, y / 1e6) for x, y in points]
