"""Draw every example and keep its picture: ``docs/pictures/NAME.png`` and the page ``docs/examples.md``.

Run it after geometry has changed, and look at every picture that is new.
"""

from __future__ import annotations

from pathlib import Path

from layoutgen.pipeline import run
from layoutgen.writers import Job, encode

DOCS = Path(__file__).parent
EXAMPLES = DOCS.parent / "examples"
HEAD = """# Examples

All of one invented scenario: the telemetry link of a river gauge near 2.2 GHz, and its relatives. Each file
is in `examples/`; the pictures are made by `docs/make_pictures.py`.
"""


def introduction(path: Path) -> str:
    """Return the comment at the head of an example, as one paragraph."""
    lines = []
    for line in path.read_text("utf-8").splitlines():
        if not line.startswith("#"):
            break
        lines.append(line.lstrip("# ").rstrip())
    return " ".join(lines)


def section(path: Path) -> str:
    """Draw one example, keep its picture, and return its part of the page."""
    result = run(path)
    picture = DOCS / "pictures" / f"{path.stem}.png"
    picture.parent.mkdir(exist_ok=True)
    files = encode(result, Job(stem=path.stem, dpi=100, repeatable=True), ["{stem}.png"])
    picture.write_bytes(files[f"{path.stem}.png"])
    title = result.placement.sized.circuit.file.design.title
    return f"\n## {title}\n\n{introduction(path)}\n\n![{title}](pictures/{picture.name})\n"


def main() -> None:
    """Write the page and its pictures."""
    parts = [section(path) for path in sorted(EXAMPLES.glob("*.toml"))]
    (DOCS / "examples.md").write_text(HEAD + "".join(parts), "utf-8")


if __name__ == "__main__":
    main()
