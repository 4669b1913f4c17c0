"""The numbers and texts that the page's canvas and plots are made of, and the look they get."""

from __future__ import annotations

import itertools
import json
import math
import re
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import shapely

from layoutgen.geometry import Ring
from layoutgen.writers import Job, Result
from layoutgen.writers.charts import match_traces
from layoutgen.writers.page_board import STYLES, board_data, inline_json
from layoutgen.writers.page_plots import level_plot, phase_plot, plot_data, smith_plot
from layoutgen.writers.page_script import SCRIPTS, script
from layoutgen.writers.page_style import STYLE
from layoutgen.writers.report_html import empty_page, report_page, write_report_html

ROOT = Path(__file__).parents[2]


def polygons(layer: dict[str, Any]) -> Iterator[tuple[int, shapely.Polygon]]:
    """Read a layer's flat lists again, by the words of the module's docstring."""
    numbers = iter(layer["shapes"])
    for item in numbers:
        _style, count = next(numbers), next(numbers)
        rings = []
        for _ in range(count):
            steps = np.array([(next(numbers), next(numbers)) for _ in range(next(numbers))])
            rings.append(steps.cumsum(axis=0))
        yield item, shapely.Polygon(rings[0], rings[1:])
    x = y = 0
    for item, _, dx, dy, radius in zip(*[iter(layer["circles"])] * 5, strict=True):
        x, y = x + dx, y + dy
        yield item, Ring.circle(x, y, radius).polygon()


@pytest.fixture(scope="module")
def data(driver: Result) -> dict[str, Any]:
    return dict(board_data(driver))


@pytest.mark.parametrize("name", ["copper_top", "copper_bottom", "soldermask_top", "legend_top", "paste_top"])
def test_every_layer_is_all_there(driver: Result, data: dict[str, Any], name: str) -> None:
    """A shape left out, a hole filled or a step summed wrongly would be believed on the screen."""
    layer = next(layer for layer in data["layers"] if layer["name"] == name)
    shown = shapely.union_all([polygon for _, polygon in polygons(layer)])
    model = shapely.union_all(
        [
            s.outline.polygon().difference(shapely.union_all([h.polygon() for h in s.holes]))
            for s in driver.artwork.on(name)
        ]
    )
    assert shown.symmetric_difference(model).area < 1e-9 * model.area


def test_every_hole_is_all_there(driver: Result, data: dict[str, Any]) -> None:
    """Vias are told as steps from one to the next: one wrong step moves all that follow."""
    artwork = driver.artwork
    shown = [
        (*(round(v) for v in polygon.centroid.coords[0]), round(polygon.bounds[2] - polygon.bounds[0]))
        for layer in data["layers"]
        if layer["name"].startswith("drill")
        for _, polygon in polygons(layer)
    ]
    model = [(v.x, v.y, v.drill) for v in artwork.vias] + [(h.x, h.y, h.diameter) for h in artwork.holes]
    assert sorted(shown) == sorted(model)


def test_every_line_part_and_port_can_be_pointed_at(driver: Result, data: dict[str, Any]) -> None:
    """An element without a shape of its own cannot be found on the canvas."""
    items = data["items"]
    pointed = {
        key
        for layer in data["layers"]
        if layer["rank"]
        for item, _ in polygons(layer)
        for key in (items[item]["key"], items[item]["parent"])
    }
    placement = driver.placement
    wanted = {f"line:{n}" for n in placement.lines} | {f"part:{n}" for n in placement.parts}
    wanted |= {f"port:{n}" for n in placement.ports}
    wanted |= {f"strip:{s.origin.element}:{s.net}" for s in placement.strips}
    assert wanted <= pointed


def test_every_shape_has_an_item_with_its_net(driver: Result, data: dict[str, Any]) -> None:
    """Pointing at copper of one net and reading another would hide a short."""
    facts = {item["key"]: dict(item["facts"]) for item in data["items"]}
    layer = next(layer for layer in data["layers"] if layer["name"] == "copper_top")
    nets = {
        facts[key]["Net"]
        for item, _ in polygons(layer)
        if (key := data["items"][item]["key"]).startswith(("pad:", "copper_top:", "strip:"))
    }
    assert nets <= {s.net for s in driver.artwork.on("copper_top")}
    for part in driver.placement.parts.values():
        for pad in part.pads:
            if f"pad:{part.name}.{pad.pin}" in facts:
                assert facts[f"pad:{part.name}.{pad.pin}"]["Net"] == pad.net


def test_facts_of_a_line_are_its_figures(driver: Result, data: dict[str, Any]) -> None:
    """The issue's list: width, length, impedance, current, budget; and the budget adds up."""
    for line in driver.placement.lines.values():
        facts = next(i["facts"] for i in data["items"] if i["key"] == f"line:{line.name}")
        said = dict(facts)
        sized = driver.sized.lines[line.name]
        assert said["Width"] == f"{line.width / 1e6:.3f} mm"
        assert said["Length"] == f"{line.centre_line / 1e6:.3f} mm"
        assert said["Impedance"].startswith(f"{sized.impedance:.2f} ohm")
        assert said["Current"] == f"{abs(sized.current):.3f} A"
        names = [name for name, _ in facts]
        budget = facts[names.index("Length budget") + 1 :]
        angles = [float(text.removesuffix(" deg").replace("\u2212", "-")) for _, text in budget]
        assert sum(angles[:-1]) == pytest.approx(angles[-1], abs=0.001 * len(angles))
        assert angles[-1] == pytest.approx(math.degrees(line.angle), abs=0.001)


def test_the_handmade_board_has_all_kinds(handmade: Result) -> None:
    """Radial stubs, strips, cut-outs, holes and findings of every kind each need their item."""
    data: dict[str, Any] = dict(board_data(handmade))
    keys = {item["key"] for item in data["items"]}
    assert {"radial:fan", "strip:b:b", "pad:C1.1", "hole:board:unplated:2700000", "finding:5"} <= keys
    assert [mark[:2] for mark in data["marks"]] == [[1, "error"], [2, "warning"], [3, "waived"]]
    assert data["targets"] == {"finding:4": ["part:C1", "line:first"], "finding:5": ["part:C1"]}
    assert set(data["styles"]) == set(STYLES)


def test_inlined_numbers_cannot_end_the_script(handmade: Result) -> None:
    """A title or a finding with markup in it must stay text."""
    nasty = "</script><script>alert(1)</script><!--\u2028"
    text = inline_json({"a": nasty})
    assert "<" not in text
    assert json.loads(text) == {"a": nasty}
    file = handmade.circuit.file
    assert "<link>" not in write_report_html(handmade, Job(stem="b")).decode()
    assert "<link>" in file.design.title


def test_no_place_in_the_page_names_a_folder(driver: Result) -> None:
    """A path of the machine that drew makes two machines' pages differ."""
    assert str(ROOT) not in write_report_html(driver, Job(stem="b")).decode()


def test_every_script_is_in_the_page_once_and_in_the_package() -> None:
    """A file that is not listed is dead; one that is not packaged breaks the installed program."""
    there = {path.name for path in (ROOT / "layoutgen" / "writers").glob("*.js")}
    assert there == set(SCRIPTS)
    assert script().count("function readBoard") == 1
    assert "</script" not in script()


def test_the_wheel_contains_the_scripts(tmp_path: Path) -> None:
    """Installed from a wheel the page would have no script, and no test from the source tree would see it."""
    wheel = pytest.importorskip("hatchling.builders.wheel", reason="hatchling is not installed")
    import zipfile

    path = next(iter(wheel.WheelBuilder(str(ROOT)).build(directory=str(tmp_path), versions=["standard"])))
    names = zipfile.ZipFile(path).namelist()
    assert {f"layoutgen/writers/{name}" for name in SCRIPTS} <= set(names)


def test_only_a_served_page_asks_for_news(handmade: Result) -> None:
    """A page on disk that asks a server, or a served one that never does."""
    still, served = (report_page(handmade, Job(stem="b"), version).decode() for version in ("", "v1"))
    assert '<meta name="layoutgen-watch"' not in still
    assert 'name="layoutgen-watch" content="v1"' in served
    assert "connect-src 'self'" in served
    empty = empty_page("<b>.toml").decode()
    assert "&lt;b&gt;.toml" in empty
    assert 'name="layoutgen-watch" content=""' in empty


def luminance(colour: str) -> float:
    """Relative luminance of #rrggbb by WCAG 2.1."""
    parts = [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(a: str, b: str) -> float:
    light, dark = sorted((luminance(a), luminance(b)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def themes() -> dict[str, dict[str, str]]:
    """Return the colours of the two themes by name."""
    blocks = re.findall(r"color-scheme:(light|dark);([^}]*)}", STYLE)
    return {name: dict(re.findall(r"--([\w-]+):(#[0-9a-f]{6})", block)) for name, block in blocks}


@pytest.mark.parametrize("theme", ["light", "dark"])
def test_text_can_be_read_in_both_themes(theme: str) -> None:
    """WCAG 2.1 asks 4.5 for text, 3 for what a picture needs to be understood."""
    c = themes()[theme]
    for ground in ("paper", "card", "head"):
        for text in ("ink", "soft", "copper", "good", "warn", "bad"):
            assert contrast(c[text], c[ground]) >= 4.5, (text, ground)
    for mark in ("b-error", "b-warning"):
        assert contrast(c[mark], c["b-halo"]) >= 3.0, mark
    assert contrast(c["b-chosen"], c["b-halo"]) >= 4.5
    assert contrast(c["b-ruler"], c["b-halo"]) >= 4.5
    assert contrast(c["b-ink"], c["b-paper"]) >= 4.5
    assert contrast(c["b-line"], c["b-board"]) >= 3.0


def test_both_themes_name_the_same_colours() -> None:
    """A colour forgotten in one theme is black there."""
    both = themes()
    assert set(both["light"]) == set(both["dark"])
    named = {style for style in STYLES if f"b-{style}" in both["light"] or f"b-{style}-pen" in both["light"]}
    assert named == set(STYLES)


def points(svg: str, trace: int, style: str) -> list[tuple[float, float]]:
    """The points of one curve."""
    found = re.search(rf'class="{style} t{trace}" data-trace="{trace}" (?:d|points)="([^"]*)"', svg)
    assert found
    numbers = [float(n) for n in re.findall(r"-?\d+\.\d", found[1])]
    return list(zip(numbers[::2], numbers[1::2], strict=True))


def test_plots_show_the_numbers(handmade: Result) -> None:
    """A scale upside down, or wanted drawn as drawn, still looks like a plot."""
    response = handmade.response
    assert response is not None
    traces, band = match_traces(response), handmade.circuit.file.design.band
    level = level_plot("Level", response, traces, band)
    top, bottom, low, high = 14.0, 260.0, -10.0, 0.0
    drawn = 20 * np.log10(np.abs(response.as_drawn[:, 1, 1]))
    ys = [y for _, y in points(level, 1, "d")]
    assert ys == pytest.approx(list(bottom - (drawn - low) / (high - low) * (bottom - top)), abs=0.06)
    smith = smith_plot("Smith", response, traces)
    s = response.wanted[:, 0, 0]
    found = np.array(points(smith, 0, "w"))
    assert found[:, 0] == pytest.approx(180 + 160 * s.real, abs=0.06)
    assert found[:, 1] == pytest.approx(180 - 160 * s.imag, abs=0.06)


def test_phase_lifts_its_pen_at_a_jump(handmade: Result, with_ports: Callable[[int], Result]) -> None:
    """A stroke from -180 to 180 degrees is not a phase that was anywhere."""
    response = handmade.response
    assert response is not None
    turning = np.exp(-1j * np.linspace(0, 12 * np.pi, len(response.frequencies)))
    spun = replace(response, wanted=response.wanted * turning[:, None, None])
    svg = phase_plot("Phase", spun, match_traces(spun), handmade.circuit.file.design.band)
    path = re.search(r'class="w t0" data-trace="0" d="([^"]*)"', svg)
    assert path
    assert path[1].count("M") >= 6
    for stroke in path[1].split("M")[1:]:
        ys = [float(pair.split()[1]) for pair in stroke.split("L")]
        assert all(abs(b - a) <= 123.0 for a, b in itertools.pairwise(ys))


def test_the_cursor_begins_at_the_design_frequency(handmade: Result) -> None:
    """And its numbers are those of the response, in millionths."""
    response = handmade.response
    assert response is not None
    data: dict[str, Any] = plot_data(response, [("Reflection", match_traces(response))], 2.245e9)
    assert abs(data["frequencies"][data["first"]] - 2.245e9) <= 5.1e6
    values = np.array(data["groups"][0]["traces"][1]["drawn"]).reshape(-1, 2) / 1e6
    assert values[:, 0] + 1j * values[:, 1] == pytest.approx(response.as_drawn[:, 1, 1], abs=1e-6)


def test_device_and_correction_are_told(driver: Result) -> None:
    """What the transistor sees decides whether the board is any good."""
    html = write_report_html(driver, Job(stem="b")).decode()
    assert driver.response is not None
    assert driver.response.correction is not None
    assert f"{driver.response.correction.after:.4f} as drawn" in html
    assert "What the transistor sees" in html
    assert "Q1.gate" in html
