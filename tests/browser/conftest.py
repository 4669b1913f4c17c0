"""A headless Chromium that is installed already, the example's page, and a tab that tells on itself."""

from __future__ import annotations

import json
import shutil
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

import pytest

from layoutgen.checks import Finding
from layoutgen.writers import Job, Result
from layoutgen.writers.report_html import write_report_html

ROOT = Path(__file__).parents[2]
ARGUMENTS = [
    "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking",
    "--disable-component-update", "--disable-sync",
]  # fmt: skip
WATCH = """
import sys
from layoutgen.watch import watch
watch(sys.argv[1], sys.argv[2], tell=lambda text: print(text, file=sys.stderr, flush=True),
      ready=lambda address: print(address, flush=True))
"""


def chromium() -> str | None:
    """Return the browser's path."""
    names = ("chromium", "chromium-browser", "google-chrome-stable", "google-chrome")
    return next((path for name in names if (path := shutil.which(name))), None)


@pytest.fixture(scope="session")
def browser() -> Iterator[Any]:
    """The browser with an empty profile; nothing is downloaded."""
    api = pytest.importorskip("playwright.sync_api", reason="playwright is not installed")
    path = chromium()
    if path is None:
        pytest.skip("no Chromium is installed")
    with api.sync_playwright() as playwright:
        program = playwright.chromium.launch(executable_path=path, headless=True, args=ARGUMENTS)
        yield program
        program.close()


@dataclass
class Tab:
    """A page in the browser, and what a reader can do with it.

    ``complaints`` are errors of scripts and warnings on the console; ``requests`` the addresses asked for.
    """

    page: Any
    complaints: list[str] = field(default_factory=list)
    requests: list[str] = field(default_factory=list)

    @property
    def panel(self) -> str:
        """What the panel says."""
        return str(self.page.locator("#panel").inner_text())

    def box(self) -> tuple[float, float, float, float]:
        """Left, top, width and height of the canvas in the window."""
        box = self.page.locator("#canvas").bounding_box()
        return box["x"], box["y"], box["width"], box["height"]

    def middle(self) -> tuple[float, float]:
        """The middle of the canvas in the window."""
        x, y, width, height = self.box()
        return x + width / 2, y + height / 2

    def frame(self) -> None:
        """Wait until what was asked for is painted."""
        wait = "() => new Promise(done => requestAnimationFrame(() => requestAnimationFrame(() => done(0))))"
        self.page.evaluate(wait)

    def zoom_to(self, key: str) -> None:
        """Click on the link of a table that leads to an item."""
        self.page.locator(f'a[data-zoom="{key}"]').first.click()
        self.frame()

    def point(self, dx: float = 0.0, dy: float = 0.0) -> None:
        """Let the pointer rest beside the middle of the canvas."""
        x, y = self.middle()
        self.page.mouse.move(x + dx, y + dy)
        self.frame()

    def colours(self, dx: int = 0) -> list[str]:
        """The colours of the canvas's pixels from top to bottom, in a column beside its middle."""
        self.frame()
        code = """dx => { const c = document.getElementById("canvas"), r = c.width / c.clientWidth;
            const copy = Object.assign(document.createElement("canvas"), {width: 1, height: c.height});
            const into = copy.getContext("2d", {willReadFrequently: true});
            into.drawImage(c, -Math.round(c.width / 2 + dx * r), 0);
            const d = into.getImageData(0, 0, 1, c.height).data;
            return Array.from({length: c.height}, (_, k) =>
                "#" + [0, 1, 2].map(i => d[4 * k + i].toString(16).padStart(2, "0")).join("")) }"""
        return list(self.page.evaluate(code, dx))

    def hear(self, message: Any) -> None:
        """Note what the console says, but for a news stream cut in a reload: the page asks for a new one."""
        cut = "ERR_INCOMPLETE_CHUNKED_ENCODING" in message.text
        if not (cut and str(message.location.get("url", "")).endswith("/events")):
            self.complaints.append(f"{message.type}: {message.text}")

    def theme(self, name: str) -> str:
        """The colour of a style of the board in the theme in force."""
        code = "n => getComputedStyle(document.documentElement).getPropertyValue('--b-' + n).trim()"
        return str(self.page.evaluate(code, name))

    def span(self, style: str, dx: int = 0) -> tuple[int, int]:
        """First and last pixel of a style's colour in a column beside the middle."""
        wanted = self.theme(style)
        found = [k for k, colour in enumerate(self.colours(dx)) if colour == wanted]
        assert found, f"no pixel of {style}"
        return found[0], found[-1]


@pytest.fixture
def open_tab(browser: Any) -> Iterator[Callable[..., Tab]]:
    """Return what opens an address in a new window; afterwards nothing may have been complained about."""
    contexts, tabs = [], []

    def open_it(address: str, **options: Any) -> Tab:
        context = browser.new_context(**{"viewport": {"width": 1280, "height": 900}, **options})
        contexts.append(context)
        tab = Tab(context.new_page())
        tabs.append(tab)
        context.on("request", lambda request: tab.requests.append(request.url))
        tab.page.on("console", tab.hear)
        tab.page.on("pageerror", lambda error: tab.complaints.append(str(error)))
        tab.page.goto(address)
        return tab

    yield open_it
    for context in contexts:
        context.close()
    for tab in tabs:
        assert tab.complaints == []
        assert [url for url in tab.requests if not url.startswith(("file:", "http://127.0.0.1:"))] == []


def _finding(
    severity: str, at: tuple[int, int] | None, items: tuple[str, ...], waived: str | None
) -> Finding:
    return Finding(
        rule="copper.min_gap",
        severity=severity,
        measured=0.1,
        limit=0.125,
        unit="mm",
        at=at,
        layer="copper_top",
        items=items,
        nets=(),
        text="made for the test <b>",
        waived=waived,
    )


@pytest.fixture(scope="session")
def driver() -> Result:
    """The example amplifier, its findings replaced by one of each kind."""
    from layoutgen.pipeline import run

    result = run(ROOT / "examples" / "telemetry_driver.toml")
    middle = (result.placement.width // 2, result.placement.height // 4)
    findings = (
        _finding("error", middle, ("stub_in",), None),
        _finding("warning", (5_000_000, 5_000_000), (), None),
        _finding("error", (60_000_000, 5_000_000), (), "seen on a first board"),
        _finding("note", None, ("C1",), None),
        _finding("note", None, (), None),
    )
    return replace(result, checks=replace(result.checks, findings=findings))


@pytest.fixture(scope="session")
def address(driver: Result, tmp_path_factory: pytest.TempPathFactory) -> str:
    """The page on disk."""
    file = tmp_path_factory.mktemp("page") / "report.html"
    file.write_bytes(write_report_html(driver, Job(stem="telemetry_driver")))
    return file.as_uri()


@pytest.fixture
def tab(open_tab: Callable[..., Tab], address: str) -> Tab:
    """The example's page, opened from disk."""
    return open_tab(address)


@dataclass
class Watched:
    """A circuit that is watched: its file, its folder, the page's address, the process."""

    circuit: Path
    folder: Path
    address: str
    process: subprocess.Popen[str]

    def change(self, old: str, new: str) -> None:
        """Save the circuit with one text replaced, as editors do: a new file in the old one's place."""
        text = self.circuit.read_text("utf-8")
        assert old in text
        beside = self.circuit.with_suffix(".new")
        beside.write_text(text.replace(old, new), "utf-8")
        beside.replace(self.circuit)


@pytest.fixture
def watched(tmp_path: Path) -> Iterator[Watched]:
    """A small example under `watch`, in a process of its own."""
    for library in ("starlette", "uvicorn", "watchfiles"):
        pytest.importorskip(library)
    circuit = tmp_path / "gauge.toml"
    shutil.copy(ROOT / "examples" / "quarter_wave_transformer.toml", circuit)
    command = [sys.executable, "-c", WATCH, str(circuit), str(tmp_path / "out")]
    process = subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.DEVNULL, text=True)
    assert process.stdout is not None
    yield Watched(circuit, tmp_path / "out", process.stdout.readline().strip(), process)
    process.terminate()
    process.communicate(timeout=20)


def until(true: Callable[[], object], seconds: float = 15.0) -> None:
    """Wait until something is true."""
    end = time.monotonic() + seconds
    while not true():
        assert time.monotonic() < end, "waited in vain"
        time.sleep(0.05)


def report_of(folder: Path) -> dict[str, Any]:
    """Return what report.json holds."""
    report: dict[str, Any] = json.loads((folder / "report.json").read_bytes())
    return report
