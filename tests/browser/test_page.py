"""The report page in a browser, opened from disk: what a reader does with it, and what it must not do."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from layoutgen.writers import Result

from .conftest import Tab


def test_the_board_is_painted_at_once(tab: Tab) -> None:
    """A script that fails leaves an empty canvas above tables that look right."""
    ready = tab.page.evaluate("performance.getEntriesByName('layoutgen-ready').length")
    assert ready == 1
    seen = set(tab.colours(100)) | set(tab.colours(-100))
    assert {tab.theme(name) for name in ("paper", "pour", "board")} <= seen


def test_hover_tells_what_a_line_is(tab: Tab, driver: Result) -> None:
    """What the panel says must be the line's own figures, and its length budget."""
    tab.zoom_to("line:stub_in")
    tab.page.keyboard.press("Escape")
    tab.point(0, 300)
    tab.point()
    line = driver.placement.lines["stub_in"]
    for text in (
        "line stub_in",
        f"{line.width / 1e6:.3f} mm",
        f"{line.centre_line / 1e6:.3f} mm",
        f"{driver.sized.lines['stub_in'].impedance:.2f} ohm",
        "Current",
        "Length budget",
        "sum",
        f"{math.degrees(line.angle):.3f} deg",
    ):
        assert text in tab.panel


def test_hover_tells_what_a_pad_is_and_of_which_part(tab: Tab) -> None:
    """A pad without its part, or a part without its value, sends the reader back to the tables."""
    tab.zoom_to("part:C1")
    tab.page.keyboard.press("Escape")
    tab.point()
    assert "part C1" in tab.panel
    left, top, _, height = tab.box()
    for dx in range(-400, 0, 10):
        tab.page.mouse.move(left + tab.box()[2] / 2 + dx, top + height / 2)
        tab.frame()
        if "pad 1 of C1" in tab.panel:
            break
    assert "pad 1 of C1" in tab.panel
    assert "22 pF" in tab.panel


def test_a_layer_switched_off_is_neither_seen_nor_pointed_at(tab: Tab) -> None:
    """A switch that only changes its own tick."""
    tab.zoom_to("line:stub_in")
    tab.page.keyboard.press("Escape")
    tab.point(0, 40)
    assert "line stub_in" in tab.panel
    assert tab.theme("line") in tab.colours(60)
    tab.page.get_by_label("Copper", exact=True).uncheck()
    assert tab.theme("line") not in tab.colours(60)
    tab.point(0, 41)
    assert "line stub_in" not in tab.panel
    tab.page.get_by_label("Copper below").check()
    assert tab.theme("bottom") in tab.colours(60)


def test_a_finding_leads_to_its_place(tab: Tab) -> None:
    """The row must bring the mark into the middle, and say what the rule wanted."""
    tab.page.locator("#finding-1 td").nth(1).click()
    tab.frame()
    for text in ("finding 1: error", "copper.min_gap", "0.125 mm", "made for the test <b>"):
        assert text in tab.panel
    first, last = tab.span("error", 6)
    _, _, _, height = tab.box()
    assert abs((first + last) / 2 - height / 2) < 3
    assert tab.page.locator("#finding-1").evaluate("row => row.classList.contains('chosen')")
    assert tab.page.evaluate("document.activeElement.id") == "canvas"


def test_a_finding_without_a_place_leads_to_its_items(tab: Tab) -> None:
    """A note about C1 has no place of its own; one about nothing has no link."""
    tab.zoom_to("finding:4")
    tab.point(0, 2)
    assert "part C1" in tab.panel
    assert tab.page.locator("#finding-5 a").count() == 0


def test_a_mark_is_chosen_by_a_click(tab: Tab) -> None:
    """The way back: from the picture to the row of the table."""
    tab.zoom_to("finding:1")
    tab.page.keyboard.press("Escape")
    assert "finding" not in tab.panel
    tab.page.mouse.click(*tab.middle())
    assert "finding 1: error" in tab.panel
    assert tab.page.locator("#finding-1 a").get_attribute("aria-current") == "true"


def test_wheel_zooms_about_the_pointer_and_dragging_moves(tab: Tab) -> None:
    """Zooming about another point loses what one looks at; dragging the wrong way is felt at once."""
    tab.zoom_to("line:drain_mid")
    tab.page.keyboard.press("Escape")
    first, last = tab.span("line", -70)
    x, y = tab.middle()
    tab.page.mouse.move(x, y)
    tab.page.mouse.wheel(0, 200)
    further = tab.span("line", -50)
    assert further[1] - further[0] < 0.85 * (last - first)
    assert abs(sum(further) - (first + last)) <= 4
    tab.page.mouse.down()
    tab.page.mouse.move(x + 30, y - 50)
    tab.page.mouse.up()
    moved = tab.span("line", -20)
    assert [moved[0] - further[0], moved[1] - further[1]] == pytest.approx([-50, -50], abs=3)


def test_measuring_finds_edges_exactly(tab: Tab, driver: Result) -> None:
    """Snapping to a pixel instead of the copper would be some micrometres off."""
    shape = next(
        s for s in driver.artwork.on("copper_top") if s.role == "line" and s.origin.element == "drain_mid"
    )
    ys = [y for _, y in shape.outline.points]
    tab.zoom_to("line:drain_mid")
    tab.page.keyboard.press("Escape")
    x, _ = tab.middle()
    first, last = tab.span("line", -70)
    top = tab.box()[1]
    tab.page.get_by_role("button", name="Measure").click()
    assert "first point" in tab.page.locator("#measured").inner_text()
    tab.page.mouse.click(x - 70, top + last - 2)
    assert "second point" in tab.page.locator("#measured").inner_text()
    tab.page.mouse.click(x - 70, top + first + 2)
    text = tab.page.locator("#measured").inner_text()
    assert f"up {(max(ys) - min(ys)) / 1e6:.3f}" in text
    assert "across 0.000" in text
    assert "edge to edge" in text
    assert tab.theme("ruler") in tab.colours(-70)


def test_everything_works_from_the_keyboard(tab: Tab) -> None:
    """A reader without a mouse must get to the board, move, choose, measure, and back to the table."""
    link = tab.page.locator('a[data-zoom="line:drain_mid"]').first
    link.focus()
    tab.page.keyboard.press("Enter")
    tab.frame()
    assert "line drain_mid" in tab.panel
    assert tab.page.locator("#said").inner_text().startswith("line drain_mid, Width")
    tab.page.keyboard.press("Escape")
    assert tab.page.locator("tr.chosen").count() == 0
    tab.page.keyboard.press("Enter")
    assert "line drain_mid" in tab.panel
    assert tab.page.locator("tr.chosen").count() >= 2
    before = tab.span("line", -70)
    tab.page.keyboard.press("+")
    after = tab.span("line", -70)
    assert after[1] - after[0] > 1.1 * (before[1] - before[0])
    tab.page.keyboard.press("ArrowDown")
    assert tab.span("line", -70)[0] < after[0]
    tab.page.keyboard.press("m")
    tab.page.keyboard.press("Enter")
    for _ in range(3):
        tab.page.keyboard.press("ArrowDown")
    tab.page.keyboard.press("Enter")
    assert "mm (" in tab.page.locator("#measured").inner_text()
    tab.page.keyboard.press("n")
    assert "finding 1" in tab.page.locator("#said").inner_text()
    tab.page.keyboard.press("n")
    assert "finding 2" in tab.page.locator("#said").inner_text()
    for _ in range(3):
        tab.page.keyboard.press("Escape")
    assert tab.page.evaluate("document.activeElement.dataset.zoom") == "line:drain_mid"


def test_what_can_be_used_has_a_name(tab: Tab) -> None:
    """A control without a name is read out as `button`."""
    code = """() => [...document.querySelectorAll("button, input, canvas, [role=button], [tabindex='0']")]
        .filter(e => !(e.innerText || e.textContent).trim() && !e.getAttribute("aria-label")
            && !(e.labels && e.labels.length)).map(e => e.outerHTML)"""
    assert tab.page.evaluate(code) == []
    snapshot = tab.page.locator("body").aria_snapshot()
    for words in (
        'application "Board seen from the top"',
        'checkbox "Part bodies" [checked]',
        'slider "Frequency"',
    ):
        assert words in snapshot


def test_two_fingers_zoom_and_a_tap_chooses(open_tab: Callable[..., Tab], address: str) -> None:
    """On a phone there is no wheel and no pointer to rest."""
    tab = open_tab(address, viewport={"width": 390, "height": 844}, has_touch=True, is_mobile=True)
    tab.zoom_to("line:drain_mid")
    tab.page.keyboard.press("Escape")
    x, y = tab.middle()
    tab.page.touchscreen.tap(x, y)
    tab.frame()
    assert "line drain_mid" in tab.panel
    before = tab.span("line", -40)
    screen = tab.page.context.new_cdp_session(tab.page)
    for kind, spread in (("Start", 20), ("Move", 25), ("Move", 30), ("Move", 34), ("End", 0)):
        fingers = [{"x": x - spread, "y": y, "id": 0}, {"x": x + spread, "y": y, "id": 1}]
        screen.send(
            "Input.dispatchTouchEvent", {"type": f"touch{kind}", "touchPoints": fingers if spread else []}
        )
    after = tab.span("line", -40)
    assert 1.4 < (after[1] - after[0]) / (before[1] - before[0]) < 1.9


@pytest.mark.parametrize("width", [320, 390, 768])
def test_no_page_is_wider_than_the_screen(open_tab: Callable[..., Tab], address: str, width: int) -> None:
    """A table or a plot that pushes the page sideways makes it unreadable on a phone."""
    tab = open_tab(address, viewport={"width": width, "height": 800})
    assert tab.page.evaluate("document.documentElement.scrollWidth") <= width


def test_the_theme_follows_the_system_until_it_is_chosen(open_tab: Callable[..., Tab], address: str) -> None:
    """A switch that forgets, or a canvas that stays light on a dark page."""
    tab = open_tab(address, color_scheme="dark")
    button = tab.page.get_by_role("button", name="Dark")
    dark = tab.theme("paper")
    assert button.get_attribute("aria-pressed") == "true"
    assert dark in tab.colours(-300)
    button.click()
    assert tab.theme("paper") != dark
    assert tab.theme("paper") in tab.colours(-300)
    assert dark not in tab.colours(-300)
    tab.page.reload()
    assert tab.page.get_by_role("button", name="Dark").get_attribute("aria-pressed") == "false"


def test_paper_shows_the_picture(tab: Tab) -> None:
    """A canvas prints what the screen showed, in its colours and dots; paper gets the whole board."""
    assert tab.page.locator("#still svg").count() == 0, "a picture nobody sees must not cost time"
    data = tab.page.pdf(format="A4")
    assert data.startswith(b"%PDF")
    tab.page.emulate_media(media="print")
    assert tab.page.locator("#still svg").is_visible()
    for hidden in ("#canvas", "#theme", "#layers", "#frequency"):
        assert not tab.page.locator(hidden).is_visible()
    assert tab.page.evaluate("getComputedStyle(document.body).backgroundColor") == "rgb(255, 255, 255)"


def test_without_scripts_the_page_is_whole(open_tab: Callable[..., Tab], address: str) -> None:
    """Mail programs and careful readers switch scripts off."""
    tab = open_tab(address, java_script_enabled=False)
    assert tab.page.locator("#still svg").is_visible()
    for hidden in ("#canvas", "#theme", "#panel"):
        assert not tab.page.locator(hidden).is_visible()
    assert tab.page.locator("svg.chart").first.is_visible()


def test_the_cursor_reads_the_response(tab: Tab, driver: Result) -> None:
    """A cursor one sample off, or wanted and drawn mixed up, would be believed."""
    response = driver.response
    assert response is not None
    slider = tab.page.get_by_role("slider", name="Frequency")
    nearest = int(np.argmin(np.abs(response.frequencies - driver.circuit.file.design.frequency)))
    assert int(slider.input_value()) == nearest
    slider.focus()
    tab.page.keyboard.press("ArrowRight")
    cells = tab.page.locator("#readings tbody tr").first.locator("td").all_inner_texts()
    wanted, drawn = response.wanted[nearest + 1, 0, 0], response.as_drawn[nearest + 1, 0, 0]
    expected = [*(20 * math.log10(abs(s)) for s in (wanted, drawn)), *np.degrees(np.angle([wanted, drawn]))]
    found = [float(cell.replace("\u2212", "-")) for cell in cells]
    assert found == pytest.approx(expected, abs=0.06)
    assert f"{response.frequencies[nearest + 1] / 1e9:.4f} GHz" in tab.page.locator("#readings").inner_text()


def test_a_trace_can_be_hidden(tab: Tab) -> None:
    """With a dozen ports the plots are legible only when traces can be switched off."""
    block = tab.page.locator(".plots").first
    curves = block.locator('[data-trace="0"]')
    assert curves.count() >= 6
    tab.page.get_by_role("button", name="show rf_in", exact=True).first.press("Enter")
    assert not any(curve.is_visible() for curve in curves.all())
    assert block.locator('[data-trace="1"]').first.is_visible()


def test_pointing_at_a_plot_moves_the_cursor_in_all(tab: Tab, driver: Result) -> None:
    """Plots that each have a cursor of their own cannot be compared."""
    assert driver.response is not None
    plot = tab.page.locator(".plots svg").first
    plot.scroll_into_view_if_needed()
    box = plot.bounding_box()
    left, right = (float(plot.get_attribute(f"data-{side}") or 0) for side in ("left", "right"))
    tab.page.mouse.move(box["x"] + box["width"] * (left + 0.25 * (right - left)) / 760, box["y"] + 40)
    first, last = driver.response.frequencies[[0, -1]]
    wanted = first + 0.25 * (last - first)
    at = int(tab.page.get_by_role("slider", name="Frequency").input_value())
    assert abs(driver.response.frequencies[at] - wanted) <= 1.5 * (last - first) / len(
        driver.response.frequencies
    )
    lines = tab.page.locator(".cursor").all()
    assert len({line.get_attribute("x1") for line in lines}) == 1
    assert len(lines) == 4
