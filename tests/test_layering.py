"""Imports point backwards: the order of the stages is the list below, and nothing else."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "layoutgen"

ORDER: tuple[tuple[str, ...], ...] = (
    ("origin",),
    ("errors",),
    ("units",),
    ("numbers",),
    ("formulas",),
    ("geometry",),
    ("reading",),
    ("circuit",),
    ("sizing",),
    ("placement",),
    ("artwork",),
    ("checks", "response"),
    ("foreign",),
    ("compare",),
    ("writers",),
    ("aside", "pins"),
    ("delivery", "size_report", "pipeline", "terminal", "wording"),
    ("watch",),
    ("cli",),
)
"""Modules and folders of the package; each may import those of earlier rows and, within a folder, itself."""

EXCEPTIONS = {
    ("artwork/records.py", "writers"): "an artwork shows itself in a notebook; imported inside the method",
}
"""Imports that point forwards, each with its reason."""

HEAVY = ("scipy", "shapely", "gdstk", "ezdxf", "matplotlib", "skrf", "rich", "PIL")
LIGHT_STAGES = (
    "origin", "errors", "units", "numbers", "formulas", "reading", "circuit", "sizing", "size_report",
    "terminal", "wording", "delivery", "aside", "cli",
)  # fmt: skip
"""What `--help` and `size` go through: no library of :data:`HEAVY` may be imported at module level."""

RANK = {name: rank for rank, row in enumerate(ORDER) for name in row}
FILES = sorted(path for path in PACKAGE.rglob("*.py") if path != PACKAGE / "__init__.py")


def stage_of(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def imports(path: Path, *, module_level: bool = False) -> list[str]:
    """Return the dotted names a file imports; those for type checking only count as imports too."""
    tree = ast.parse(path.read_text("utf-8"))
    nodes = ast.walk(tree) if not module_level else tree.body
    found = []
    for node in nodes:
        if isinstance(node, ast.Import):
            found += [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative imports hide where they point"
            found.append(node.module or "")
    return found


def test_every_module_and_folder_has_its_place() -> None:
    """A new folder fails until it is listed; a name that is gone must leave the list."""
    there = {stage_of(path) for path in FILES}
    assert there == set(RANK)


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(PACKAGE)))
def test_imports_point_backwards(path: Path) -> None:
    """A stage that knows a later one, or its sibling, cannot be used or replaced alone."""
    own = stage_of(path)
    for name in imports(path):
        if not name.startswith("layoutgen."):
            assert name != "layoutgen", f"{path} goes through the package's front door"
            continue
        other = name.split(".")[1]
        allowed = other == own or RANK[other] < RANK[own]
        if (str(path.relative_to(PACKAGE)), other) not in EXCEPTIONS:
            assert allowed, f"{path.relative_to(PACKAGE)} imports {name}"


def test_exceptions_are_still_needed() -> None:
    """An exception without a use hides the next one."""
    for (file, other), reason in EXCEPTIONS.items():
        assert any(name.startswith(f"layoutgen.{other}") for name in imports(PACKAGE / file))
        assert len(reason) > 20


@pytest.mark.parametrize(
    "path",
    [path for path in FILES if stage_of(path) in LIGHT_STAGES],
    ids=lambda path: str(path.relative_to(PACKAGE)),
)
def test_what_starts_first_imports_nothing_heavy(path: Path) -> None:
    """One import of a plotting or geometry library at the top makes `--help` wait for it."""
    heavy = [name for name in imports(path, module_level=True) if name.split(".")[0] in HEAVY]
    assert heavy == []


def test_formulas_know_only_numbers() -> None:
    """A formula that knows a record cannot be checked against its paper alone."""
    for path in FILES:
        if stage_of(path) == "formulas":
            own = {name.split(".")[1] for name in imports(path) if name.startswith("layoutgen.")}
            assert own <= {"formulas", "units"}, path


def test_public_names_are_where_the_package_says() -> None:
    """A name renamed in its stage would fail only when somebody asks for it."""
    import layoutgen

    assert sorted(layoutgen.__all__) == sorted(layoutgen._HOMES)
    for name in layoutgen.__all__:
        assert getattr(layoutgen, name).__name__ == name
    with pytest.raises(AttributeError, match="no attribute 'nonsense'"):
        _ = layoutgen.nonsense
