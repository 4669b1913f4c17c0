"""Run as a program of its own: read a GDSII or OASIS file with the library, write its polygons as arrays.

A broken file can end the library's process, or make it ask for all memory; then only this one ends. Usage:
``python _gdstk_child.py FILE OUT``. The last line on standard error says what is wrong.
"""

from __future__ import annotations

import sys
from collections.abc import Iterable
from typing import Any

MEMORY = 4 * 1024**3
"""Most memory asked for [byte]."""
MOST_POLYGONS = 5_000_000
"""Most polygons, references resolved [-]."""
_NM = 1e-9
_CHORD_NM = 50.0


def main() -> int:
    """Read the file named first, write the arrays to the one named second."""
    _limit_memory()
    import gdstk
    import numpy as np

    source, target = sys.argv[1:3]
    try:
        reader = gdstk.read_oas if source.lower().endswith(".oas") else gdstk.read_gds
        library = reader(source, unit=_NM, tolerance=_CHORD_NM)
        tops: Any = library.top_level()
        _refuse_too_many(library.cells, tops)
        polygons = [polygon for cell in tops for polygon in cell.get_polygons()]
    except (OSError, RuntimeError, ValueError, MemoryError) as error:
        sys.stderr.write(f"{error or type(error).__name__}\n")
        return 1
    counts = np.array([len(polygon.points) for polygon in polygons], dtype=np.int64)
    points = np.concatenate([polygon.points for polygon in polygons]) if polygons else np.zeros((0, 2))
    layers = np.array([(polygon.layer, polygon.datatype) for polygon in polygons], dtype=np.int64)
    np.savez(target, counts=counts, points=points, layers=layers.reshape(-1, 2), tops=len(tops))
    return 0


def _limit_memory() -> None:
    """Keep this process from taking all memory, where the system can do that."""
    try:
        import resource
    except ImportError:
        return
    resource.setrlimit(resource.RLIMIT_AS, (MEMORY, MEMORY))


def _refuse_too_many(cells: Iterable[Any], tops: Iterable[Any]) -> None:
    """Refuse files whose references make too many polygons, lead in a circle, or to nowhere.

    Raises:
        ValueError: Why.
    """
    known = {cell.name: cell for cell in cells}
    counts: dict[str, int] = {}
    open_: set[str] = set()
    tops = list(tops)
    if known and not tops:
        raise ValueError("cells that refer to each other in a circle")
    if sum(_count(cell, known, counts, open_) for cell in tops) > MOST_POLYGONS:
        raise ValueError(f"more than {MOST_POLYGONS} polygons when all references are resolved")


def _count(cell: Any, known: dict[str, Any], counts: dict[str, int], open_: set[str]) -> int:
    """Return how many polygons a cell stands for."""
    if cell.name in counts:
        return counts[cell.name]
    if cell.name in open_:
        raise ValueError("cells that refer to each other in a circle")
    if len(open_) > 200:
        raise ValueError("cells nested more than 200 deep")
    open_.add(cell.name)
    total = sum(max(1, item.repetition.size or 1) for item in (*cell.polygons, *cell.paths))
    for reference in cell.references:
        child = known.get(reference.cell_name)
        if child is None:
            raise ValueError("a reference to a cell that is not there")
        total += max(1, reference.repetition.size or 1) * _count(child, known, counts, open_)
    open_.discard(cell.name)
    counts[cell.name] = total
    return total


if __name__ == "__main__":
    sys.exit(main())
