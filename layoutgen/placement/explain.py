"""Why a loop cannot be drawn, and what would do."""

from __future__ import annotations

import math
from collections.abc import Callable

from layoutgen.errors import InfeasibleError
from layoutgen.placement.cluster import ClusterSolver
from layoutgen.placement.remedies import Tried
from layoutgen.placement.requests import as_drawn_might_be, with_angles, with_free_line
from layoutgen.sizing import SizedCircuit

__all__ = ["OpenLoop", "explain_loop"]

_MM = 1e6
_NOTHING = 1.0  # changes below this do not count [nm]
_ROUNDS = 4  # a change of lengths changes what the ends add; so often it is looked again
_AS_GOOD = 0.3  # angles that differ by less [deg] are made equal
_MOST_FREED = 4  # lines tried with a free length

OpenLoop = Callable[[SizedCircuit], ClusterSolver | None]
"""Returns the first loop of a circuit that no drawing closes, None where there is none."""


def explain_loop(solver: ClusterSolver, open_loop: OpenLoop, tried: Tried) -> InfeasibleError:
    """Return the error for a loop that no drawing closes: its elements, what binds, what would do.

    Args:
        solver: The loop.
        open_loop: Looks for such a loop in a circuit with other lengths.
        tried: Returns the placement of a changed circuit, or None.
    """
    names = [piece.name for piece in solver.scheme.pieces]
    loop, changes = ", ".join(names), _changes(solver)
    if not changes:
        reason = f"no drawing of the loop {loop} is known that closes"
        return InfeasibleError(names[0], reason, _freed(solver, tried))
    worst = max(changes, key=lambda name: abs(changes[name]))
    asked = [
        f"{name} {abs(change) / _MM:.3f} mm {'longer' if change > 0 else 'shorter'}"
        for name, change in changes.items()
    ]
    reason = f"the loop {loop} does not close: in the nearest drawing it would take {', '.join(asked)}"
    remedy = _other_angles(solver, open_loop, tried) or _freed(solver, tried)
    return InfeasibleError(worst, reason, remedy)


def _changes(solver: ClusterSolver) -> dict[str, float]:
    """Return by how much pieces would have to be longer [nm] in the nearest drawing, as far as it counts."""
    found = solver.strained()
    if found is None:
        return {}
    both = zip(solver.scheme.pieces, found.changes, strict=True)
    return {piece.name: change for piece, change in both if abs(change) > _NOTHING}


def _other_angles(solver: ClusterSolver, open_loop: OpenLoop, tried: Tried) -> str | None:
    """Return angles of lines with which the loop closes and the circuit has a place; None where none do.

    They must do for a drawing, too, in which the pour has made lines a little unlike.
    """
    degrees: dict[str, float] = {}
    sized, here = solver.kit.model.sized, solver
    for _ in range(_ROUNDS):
        for name, change in _changes(here).items():
            line = here.kit.model.sized.lines.get(name)
            if line is None or line.angle is None or line.length is not None:
                return None
            degrees[name] = _tidy(solver, name, math.degrees(line.angle + line.beta * change * 1e-9))
        changed = with_angles(sized, degrees)
        still = open_loop(changed)
        if still is None:
            texts = [f'angle = "{angle:.4f} deg" for {name}' for name, angle in degrees.items()]
            return f"{', '.join(texts)} would do" if tried(as_drawn_might_be(changed)) is not None else None
        here = still
    return None


def _tidy(solver: ClusterSolver, name: str, angle: float) -> float:
    """Return an angle [deg], or that of another line of the loop if it is as good as equal.

    Lines of which the same is asked are drawn alike, so they stay equal whatever the pour does.
    """
    sized = solver.kit.model.sized
    names = [piece.name for piece in solver.scheme.pieces if piece.name in sized.lines and piece.name != name]
    others = [math.degrees(other) for n in names if (other := sized.lines[n].angle) is not None]
    near = min(others, key=lambda other: abs(other - angle), default=math.inf)
    return round(near if abs(near - angle) < _AS_GOOD else angle, 4)


def _freed(solver: ClusterSolver, tried: Tried) -> str:
    """Return which line of a loop would let it close if its length were free."""
    sized = solver.kit.model.sized
    lines = [piece.name for piece in solver.scheme.pieces if piece.name in sized.lines]
    for name in lines[:_MOST_FREED]:
        if tried(with_free_line(sized, name)) is not None:
            return f'length = "free" for {name} would do'
    return "other lengths for the loop's lines, or other cases for its parts"
