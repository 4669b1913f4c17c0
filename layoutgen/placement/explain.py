"""Why a loop cannot be drawn, and what would do."""

from __future__ import annotations

import math

from layoutgen.errors import InfeasibleError
from layoutgen.placement.cluster import ClusterSolver

__all__ = ["explain_loop"]

_MM = 1e6
_NOTHING = 1.0  # changes below this do not count [nm]


def explain_loop(solver: ClusterSolver) -> InfeasibleError:
    """Return the error for a loop that no drawing closes: its elements, what binds, the nearest change."""
    names = [piece.name for piece in solver.scheme.pieces]
    loop, found = ", ".join(names), solver.strained()
    changes = {} if found is None else dict(zip(names, found.changes, strict=True))
    changes = {name: change for name, change in changes.items() if abs(change) > _NOTHING}
    free = 'length = "free" for a line of the loop'
    if not changes:
        return InfeasibleError(names[0], f"no drawing of the loop {loop} is known that closes", free)
    worst = max(changes, key=lambda name: abs(changes[name]))
    asked = [
        f"{name} {abs(change) / _MM:.3f} mm {'longer' if change > 0 else 'shorter'}"
        for name, change in changes.items()
    ]
    reason = f"the loop {loop} does not close: in the nearest drawing it would take {', '.join(asked)}"
    remedies = [_remedy(solver, name, change) for name, change in changes.items()]
    return InfeasibleError(worst, reason, f"{', '.join(remedies)}; or {free}")


def _remedy(solver: ClusterSolver, name: str, change: float) -> str:
    """Return the change of one element's request that makes it as long as its loop needs."""
    line = solver.kit.model.sized.lines.get(name)
    if line is None:
        return f"another case for {name}"
    if line.angle is None or line.length is not None:
        return f'length = "{(line.length or 0.0) * 1e3 + change / _MM:.4f} mm" for {name}'
    return f'angle = "{math.degrees(line.angle + line.beta * change * 1e-9):.4f} deg" for {name}'
