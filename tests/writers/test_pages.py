"""The report page and the pictures."""

from __future__ import annotations

import io
import re
import struct
import xml.etree.ElementTree as ET
from collections.abc import Callable
from dataclasses import replace
from html.parser import HTMLParser

import pytest

from layoutgen.writers import DEFAULT_DPI, Job, Result, artwork_svg, encode
from layoutgen.writers.png import write_png
from layoutgen.writers.report_html import write_report_html
from layoutgen.writers.svg import write_svg

JOB = Job(stem="board")
VOID = {"meta", "br", "link", "img", "hr", "input"}
SVG = "{http://www.w3.org/2000/svg}"


class Reader(HTMLParser):
    """Collects text, attributes and the nesting of a page."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.attributes: list[tuple[str, str, str]] = []
        self.text = ""

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.attributes += [(tag, name, value or "") for name, value in attrs]
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.attributes += [(tag, name, value or "") for name, value in attrs]

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.text += data


@pytest.fixture(scope="module")
def html(handmade: Result) -> str:
    return encode(handmade, JOB)["report.html"].decode()


@pytest.fixture(scope="module")
def page(html: str) -> Reader:
    reader = Reader()
    reader.feed(html)
    reader.close()
    return reader


def test_page_is_well_nested(page: Reader) -> None:
    """A tag left open swallows what follows it."""
    assert page.open == []


def test_page_fetches_nothing(html: str, page: Reader) -> None:
    """The page must open from disk without a network."""
    assert not [a for a in page.attributes if a[1] in ("src", "srcset", "data", "action")]
    assert all(value.startswith("#") for tag, name, value in page.attributes if name == "href")
    assert "@import" not in html
    assert "url(" not in html
    policy = next(value for _, name, value in page.attributes if name == "content" and "-src" in value)
    assert policy.startswith("default-src 'none'; script-src 'sha256-")
    assert "connect-src" not in policy
    assert "unsafe" not in policy


def test_every_link_has_its_target(page: Reader) -> None:
    """A section renamed leaves a dead link in the bar."""
    ids = [value for _, name, value in page.attributes if name == "id"]
    assert len(set(ids)) == len(ids)
    assert {value[1:] for _, name, value in page.attributes if name == "href"} <= set(ids)


def test_text_of_the_user_is_escaped(html: str, page: Reader) -> None:
    """A title with angle brackets would become markup."""
    assert "<link>" not in html
    assert "Gauge <link> & stub" in page.text
    assert "error & <text>" in page.text


@pytest.mark.parametrize(
    "words",
    [
        "1 error: do not have this board made as it is",
        "1 warning",
        "1 waived",
        "voltage.table",
        "no table in the rules",
        "first",
        "C1",
        "8.2 pF",
        "rf_out",
        "40-3j ohm",
        "Voltages to expect",
        "As drawn (dB)",
        "seen at first article",
    ],
)
def test_page_tells(page: Reader, words: str) -> None:
    """Each is something a reviewer decides by."""
    assert words in page.text


@pytest.mark.parametrize(
    "words",
    [
        "Radio-frequency power burns",
        "beryllia",
        "hot after the power is off",
        "flux fumes",
        "Local codes",
        "licen",
        "Set current limits",
    ],
)
def test_page_warns(page: Reader, words: str) -> None:
    """A safety caution dropped in an edit."""
    assert words in page.text


@pytest.mark.parametrize(
    ("dropped", "verdict"),
    [(("error",), "the warnings want a look"), (("error", "warning"), "No finding of severity error.")],
)
def test_verdict_follows_the_findings(handmade: Result, dropped: tuple[str, ...], verdict: str) -> None:
    """A clean verdict above errors, or an alarm above none, misleads whoever reads one line only."""
    kept = tuple(f for f in handmade.checks.findings if f.severity not in dropped)
    result = replace(handmade, checks=replace(handmade.checks, findings=kept))
    assert verdict in write_report_html(result, JOB).decode()


def test_light_dark_and_print_have_their_colours(html: str) -> None:
    """A theme dropped leaves black on black."""
    for words in ("prefers-color-scheme:dark", "[data-theme=dark]", "@media print"):
        assert words in html


def test_page_without_response_says_so(handmade: Result) -> None:
    """A circuit of supplies only has a page too."""
    assert "no RF ports" in write_report_html(replace(handmade, response=None), JOB).decode()


@pytest.fixture(scope="module")
def svg(handmade: Result) -> ET.Element:
    return ET.fromstring(write_svg(handmade, JOB))


def test_svg_is_true_to_size(svg: ET.Element) -> None:
    """Printed at 100 % a board must lie on its picture."""
    x, y, width, height = map(float, svg.attrib["viewBox"].split())
    assert float(svg.attrib["width"].removesuffix("mm")) == width
    assert float(svg.attrib["height"].removesuffix("mm")) == height
    assert x < 0 < 20 < x + width
    assert y < -12 < 0 < y + height


def test_svg_shows_legend_scale_references_and_title(svg: ET.Element) -> None:
    """What the issue asks of a preview."""
    texts = [element.text for element in svg.iter(f"{SVG}text")]
    for words in (
        "Gauge <link> & stub, revision B",
        "5 mm",
        "ground pour",
        "rf_in",
        "Q1",
        "via",
        "first",
        "1",
        "2",
    ):
        assert words in texts
    assert "3" not in texts, "a waived finding has no mark"
    assert "C1" not in texts, "its reference is printed on the legend already"
    tips = [title.text or "" for title in svg.iter(f"{SVG}title")]
    assert any("1.100 mm wide" in tip for tip in tips)


def test_svg_arcs_bulge_the_right_way(svg: ET.Element) -> None:
    """y is mirrored, so sweep flags are too: the wrong one turns rounded corners inside out."""
    paths = [p.attrib["d"] for p in svg.iter(f"{SVG}path")]
    board = next(p for p in paths if p.startswith("M1 0L19 0A1 1 0 0 0 20 -1"))
    assert board.count("A") == 4
    circle = next(p for p in paths if p.startswith("M1.65 -9"))
    assert circle == "M1.65 -9A1.35 1.35 0 0 0 4.35 -9A1.35 1.35 0 0 0 1.65 -9z"


def test_an_artwork_shows_itself_in_a_notebook(handmade: Result) -> None:
    """The notebook asks for _repr_svg_."""
    show = getattr(handmade.artwork, "_repr_svg_", None)
    assert show is not None
    assert show() == artwork_svg(handmade.artwork)


def test_png_has_the_size_and_resolution_asked_for(handmade: Result) -> None:
    """--dpi that only changes the header, or only the dots, prints at a wrong size."""
    for dpi in (DEFAULT_DPI, 72):
        data = write_png(handmade, Job(stem="b", dpi=dpi))
        width, height = struct.unpack(">II", data[16:24])
        assert width == 10 * dpi
        assert height > 0
        assert round(struct.unpack(">I", data[data.index(b"pHYs") + 4 :][:4])[0] * 0.0254) == dpi


def test_png_shows_copper_where_the_copper_is(handmade: Result) -> None:
    """A picture upside down, or without its lines, still is a PNG."""
    from PIL import Image

    from layoutgen.writers.picture import STYLES, picture_of

    picture = picture_of(handmade.artwork, handmade.findings)
    image = Image.open(io.BytesIO(write_png(handmade, JOB))).convert("RGB")
    scale = image.width / (picture.box[2] - picture.box[0])

    def colour(x: float, y: float) -> str:
        column, row = (x * 1e6 - picture.box[0]) * scale, (picture.box[3] - y * 1e6) * scale
        return "#{:02x}{:02x}{:02x}".format(*image.getpixel((int(column), int(row))))

    assert colour(2.0, 3.7) == STYLES["line"].fill
    assert colour(6.0, 6.0) == STYLES["line"].fill
    assert colour(8.2, 3.75) == STYLES["pad"].fill
    assert colour(1.0, 11.0) == STYLES["pour"].fill
    assert colour(1.0, 6.0) == STYLES["board"].fill
    assert colour(12.0, 1.0) == STYLES["hole"].fill
    assert colour(3.0, 9.0) == STYLES["hole"].fill


def test_pictures_and_page_are_the_same_twice(remake: Callable[[], Result], handmade: Result) -> None:
    """A time, an address or a hash order in the output."""
    again = remake()
    for writer in (write_svg, write_png, write_report_html):
        assert writer(handmade, JOB) == writer(again, JOB)


def test_no_number_in_the_svg_has_lost_digits(handmade: Result) -> None:
    """Nanometres are kept: 8.000001 mm must not become 8."""
    assert re.search(r"[ ,L]-?8\.550001(?!\d)", write_svg(handmade, JOB).decode())
