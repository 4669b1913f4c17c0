"""Write docs/rules/*.svg, a passing and a failing board for each rule: ``python docs/make_rule_pictures.py``.

The boards are those of tests/checks/scenes.py, which the tests judge. Run from the project's folder.
"""

from __future__ import annotations

import sys
from pathlib import Path

ROOT = Path(__file__).parents[1]
sys.path.insert(0, str(ROOT))

from layoutgen.artwork import Artwork, Shape  # noqa: E402
from layoutgen.checks import check  # noqa: E402
from layoutgen.checks.rules import RULES  # noqa: E402
from tests.checks.scenes import SCENES  # noqa: E402

FOLDER = ROOT / "docs" / "rules"
FILLS = {
    "copper_bottom": ("#cfd8dc", 1.0),
    "copper_top": ("#d9a05b", 1.0),
    "soldermask_top": ("#2e7d32", 0.25),
    "legend_top": ("#37474f", 1.0),
}
RED, RIM, HOLE = "#d1242f", "#57606a", "#ffffff"
WIDTH = 240


def names(rule: str) -> tuple[str, str]:
    """Return the file names of a rule's two pictures: passing, failing."""
    stem = rule.replace(".", "_")
    return f"{stem}_pass.svg", f"{stem}_fail.svg"


def picture(rule: str, good: bool) -> str:
    """Return one picture as SVG: copper, holes, mask, legend; the rule's findings ringed in red."""
    artwork = SCENES[rule](good).artwork()
    own = next(entry.names for entry in RULES if rule in entry.names)
    places = [f.at for f in check(artwork).findings if f.rule in own and f.severity != "note" and f.at]
    width, height = artwork.placement.width, artwork.placement.height
    scale = WIDTH / width
    rows = [
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{WIDTH}" height="{round(height * scale)}" '
        f'viewBox="0 0 {width // 1000} {height // 1000}">',
        f'<g transform="matrix(1 0 0 -1 0 {height // 1000})">',
        *(_shape(shape, *FILLS[layer]) for layer in FILLS for shape in artwork.on(layer)),
        *(_rim(shape) for shape in artwork.on("profile")),
        *_holes(artwork),
        *(_ring(x // 1000, y // 1000, width // 1000) for x, y in places),
        "</g>",
        "</svg>",
    ]
    return "\n".join(rows) + "\n"


def _path(shape: Shape) -> str:
    """Return a shape's outline and holes as a path in micrometres."""
    rings = [shape.outline.chords(2_000), *(hole.chords(2_000) for hole in shape.holes)]
    return "".join(
        "M" + "L".join(f"{round(x / 1e3)} {round(y / 1e3)}" for x, y in ring) + "Z" for ring in rings
    )


def _shape(shape: Shape, colour: str, opacity: float) -> str:
    faint = f' fill-opacity="{opacity}"' if opacity < 1.0 else ""
    return f'<path d="{_path(shape)}" fill="{colour}"{faint} fill-rule="evenodd"/>'


def _rim(shape: Shape) -> str:
    return f'<path d="{_path(shape)}" fill="none" stroke="{RIM}" stroke-width="60"/>'


def _holes(artwork: Artwork) -> list[str]:
    vias = [(via.x, via.y, via.drill) for via in artwork.vias]
    holes = [(hole.x, hole.y, hole.diameter) for hole in artwork.holes]
    return [
        f'<circle cx="{x // 1000}" cy="{y // 1000}" r="{d // 2000}" fill="{HOLE}" stroke="{RIM}" '
        'stroke-width="40"/>'
        for x, y, d in (*vias, *holes)
    ]


def _ring(x: int, y: int, width: int) -> str:
    place = f'cx="{x}" cy="{y}" r="{width // 20}"'
    return f'<circle {place} fill="none" stroke="{RED}" stroke-width="{width // 120}"/>'


def main() -> None:
    """Write every picture; take away those of rules that are gone."""
    FOLDER.mkdir(exist_ok=True)
    files = {name: picture(rule, k == 0) for rule in SCENES for k, name in enumerate(names(rule))}
    for old in FOLDER.glob("*.svg"):
        if old.name not in files:
            old.unlink()
    for name, text in files.items():
        (FOLDER / name).write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main()
