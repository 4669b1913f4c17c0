"""The report page of a board with 1e5 vias: time to write, size, time until a browser has painted it.

Run: python benchmarks/bench_page.py [VIAS]
Needs playwright and a Chromium that is installed already; nothing is downloaded.
"""

from __future__ import annotations

import math
import shutil
import sys
import tempfile
import time
from dataclasses import replace
from pathlib import Path

from layoutgen.artwork import Shape, Via
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.pipeline import run
from layoutgen.writers import Job, Result
from layoutgen.writers.report_html import write_report_html

ROOT = Path(__file__).parents[1]
LIMIT = 2.0
ARGUMENTS = [
    "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking",
    "--disable-component-update", "--disable-sync",
]  # fmt: skip
PAINTED = """() => new Promise(done => requestAnimationFrame(() => requestAnimationFrame(
    () => done([performance.getEntriesByName("layoutgen-ready")[0].startTime, performance.now()]))))"""
SECONDS_PER_FRAME = """async () => {
    const canvas = document.getElementById("canvas");
    const box = canvas.getBoundingClientRect();
    const start = performance.now();
    for (let k = 0; k < 10; k++) {
        canvas.dispatchEvent(new WheelEvent("wheel", {deltaY: k % 2 ? 40 : -40, cancelable: true,
            clientX: box.left + box.width / 2, clientY: box.top + box.height / 2}));
        await new Promise(done => requestAnimationFrame(() => setTimeout(done)));
    }
    return (performance.now() - start) / 10;
}"""


def with_vias(result: Result, count: int) -> Result:
    """Return the result with so many vias, each with its land, on a square grid over the board."""
    width, height = result.placement.width, result.placement.height
    pitch = math.sqrt(width * height / count)
    across = int(width / pitch)
    places = [(int((k % across + 0.5) * pitch), int((k // across + 0.5) * pitch)) for k in range(count)]
    size = int(pitch * 0.25)
    vias = tuple(
        Via(x=x, y=y, drill=2 * size, land=3 * size, net="gnd", purpose="pour", origin=Origin("pour"))
        for x, y in places
    )
    lands = tuple(
        Shape(
            layer="copper_top",
            outline=Ring.circle(via.x, via.y, via.land // 2),
            net="gnd",
            role="land",
            origin=via.origin,
        )
        for via in vias
    )
    artwork = replace(result.artwork, vias=vias, shapes=result.artwork.shapes + lands)
    return replace(result, artwork=artwork)


def main() -> int:
    """Print the figures; the exit status says whether the limit is kept."""
    from playwright.sync_api import sync_playwright

    count = int(sys.argv[1]) if len(sys.argv) > 1 else 100_000
    result = with_vias(run(ROOT / "examples" / "telemetry_driver.toml"), count)
    start = time.perf_counter()
    page = write_report_html(result, Job(stem="board"))
    written = time.perf_counter() - start
    print(f"{count} vias with lands: written in {written:.2f} s, {len(page) / 1e6:.1f} MB")
    with tempfile.TemporaryDirectory() as folder, sync_playwright() as playwright:
        file = Path(folder, "report.html")
        file.write_bytes(page)
        browser = playwright.chromium.launch(executable_path=shutil.which("chromium"), args=ARGUMENTS)
        loads = []
        for _ in range(3):
            tab = browser.new_page()
            tab.goto(file.as_uri())
            ready, painted = tab.evaluate(PAINTED)
            loads.append(painted / 1e3)
            print(f"  ready after {ready / 1e3:.2f} s, painted after {painted / 1e3:.2f} s")
            print(f"  {tab.evaluate(SECONDS_PER_FRAME):.0f} ms for each step of the wheel")
            tab.close()
        browser.close()
    kept = min(loads) <= LIMIT
    print(f"loads in {min(loads):.2f} s, limit {LIMIT:.1f} s: {'kept' if kept else 'MISSED'}")
    return 0 if kept else 1


if __name__ == "__main__":
    sys.exit(main())
