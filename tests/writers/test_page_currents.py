"""The map of direct current on the report page."""

from __future__ import annotations

import base64
import io
import re
from typing import Any

import numpy as np
import pytest
from PIL import Image

from layoutgen.writers import Result
from layoutgen.writers.page_currents import current_map_section, density_dots, scale_top
from tests.checks.boards import Sheet

LIMIT = {"current": {"max_density": "120 A/mm^2"}}


def drawn(rules: dict[str, Any], width: float = 0.5) -> Result:
    """Return a board whose line lv carries 0.28 A from its port to a pad, 18 mm east."""
    sheet = Sheet(rules)
    sheet.line("lv", [(2, 5), (20, 5)], width)
    sheet.port("pv", 2, 5, 0.0, width)
    sheet.part("R1", {"1": ("w", 20.5, 5, 1, 1), "2": ("gnd", 24, 5, 1, 1)})
    artwork = sheet.artwork()
    return Result(artwork=artwork, checks=sheet.check())


def page(result: Result) -> str:
    """Return the section's text."""
    return "".join(current_map_section(result))


def test_dots_are_the_current_over_the_width() -> None:
    """Catches a map turned over or shifted, or a density in another unit: 0.28 A over 0.5 mm."""
    currents = drawn(LIMIT).checks.currents
    assert currents is not None
    dots = density_dots(currents.solved, (0.0, 0.0), 50e3, (600, 400))
    rows, columns = np.nonzero(dots >= 0.0)
    x, y = (columns + 0.5) * 0.05, (400 - rows - 0.5) * 0.05
    assert (x.min(), x.max()) == pytest.approx((2.025, 20.975))
    along = (x > 4.0) & (x < 18.0)
    assert (y[along].min(), y[along].max()) == pytest.approx((4.775, 5.225))
    assert along.sum() == 10 * 280
    assert dots[rows, columns][along] == pytest.approx(0.28 / 0.5e6, rel=0.02)


def test_the_scale_ends_above_nearly_all_copper() -> None:
    """Catches a scale stretched by the tip of an inner corner, or one that most of the copper is beyond."""
    for width, top in ((0.5, 1e-6), (0.2, 2e-6), (0.1, 5e-6)):
        currents = drawn(LIMIT, width).checks.currents
        assert currents is not None
        assert scale_top(currents.solved) == pytest.approx(top)


def test_the_page_shows_map_scale_and_figures() -> None:
    """Catches a map left out, drawn off its place, or without its unit, its limit or the net's figures."""
    text = page(drawn(LIMIT))
    assert "120 A/mm²: 4.20 A/mm in this copper" in text
    assert ">A/mm</text>" in text
    assert ">1 or more</text>" in text
    drop, heat = 0.28 * 36 / (58e6 * 35e-6) * 1e3, 0.28**2 * 36 / (58e6 * 35e-6) * 1e3
    figures = [float(x) for x in re.findall(r'<td class="n">([\d.]+)</td>', text)]
    assert figures == pytest.approx([280.0, drop, heat], rel=0.03)
    place = re.search(r'<image x="([\d.]+)" y="-([\d.]+)" width="([\d.]+)" height="([\d.]+)"', text)
    assert place is not None
    x, top, width, height = map(float, place.groups())
    assert (x, x + width) == pytest.approx((1.0, 22.0), abs=0.05)
    assert (top - height, top) == pytest.approx((3.5, 6.5), abs=0.05)


def test_the_picture_is_clear_off_the_copper() -> None:
    """Catches a map that hides the page's ground, so that it is a patch of white in the dark theme."""
    data = re.search(r"base64,([^\"]+)", page(drawn(LIMIT)))
    assert data is not None
    image = np.asarray(Image.open(io.BytesIO(base64.b64decode(data[1]))).convert("RGBA"))
    assert image[0, 0, 3] == 0
    assert image[image.shape[0] // 2, image.shape[1] // 2].tolist()[3] == 255
    share = (image[..., 3] > 0).mean()
    assert share == pytest.approx((18 * 0.5 + 1.0) / (21.0 * 3.0), rel=0.05)


def test_the_limit_is_marked_where_it_lies_on_the_scale() -> None:
    """Catches a mark at the wrong place, or drawn beyond the scale's end."""
    assert ">limit</text>" not in page(drawn(LIMIT))  # 4.2 A/mm on a scale to 1 A/mm
    text = page(drawn({"current": {"max_density": "20 A/mm^2"}}))
    mark = re.search(r'<text class="m" x="([\d.]+)" y="[\d.]+">limit</text>', text)
    assert mark is not None
    assert float(mark[1]) == pytest.approx(40.0 + 460.0 * 0.7, abs=0.5)


def test_no_map_without_current_or_without_the_rule() -> None:
    """Catches an empty map, or a solution made for the page alone."""
    assert page(drawn({})) == ""
    sheet = Sheet(LIMIT)
    sheet.line("la", [(4, 5), (14, 5)], 1.0)
    assert page(Result(artwork=sheet.artwork(), checks=sheet.check())) == ""


def test_nothing_that_the_pages_policy_forbids() -> None:
    """Catches styles inside elements and addresses elsewhere: the page's content policy blocks them."""
    text = page(drawn(LIMIT))
    assert "style=" not in text
    assert "<script" not in text
    assert re.findall(r'href="(?!data:image/png)[^"]*', text) == []


def test_the_same_map_comes_out_twice() -> None:
    """Catches a map that differs from run to run."""
    assert page(drawn(LIMIT)) == page(drawn(LIMIT))
