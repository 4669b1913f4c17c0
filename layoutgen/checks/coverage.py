"""What was not checked, and why: absent keys, rules that could not look, and what no rule covers."""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.outcome import Rule
from layoutgen.checks.records import NotChecked

__all__ = ["PARAMETERS", "UNCOVERED", "absent", "may_run"]

PARAMETERS = ("copper.undercut", "vias.plating", "land_pattern.density")
"""Keys of the rule file that other rules, or the drawing, use: there is nothing to check about them."""

UNCOVERED = (
    NotChecked(
        "current in the ground",
        "the sheet is solved for nets off gnd; the plane, the pour and the vias' unequal shares are not",
    ),
    NotChecked("RF voltage and current", "the circuit file gives no power; only the bias is judged"),
    NotChecked("3-D coupling", "coupling through tall parts, housing, lid and cavity modes has no rule"),
    NotChecked("thermal design", "heat of parts and lines into the carrier and the air has no rule"),
    NotChecked(
        "mechanics and assembly",
        "bodies, courtyards, soldering, tools, warping and edge connectors have no rule",
    ),
    NotChecked("bottom mask, paste and legend", "only the top's mask and legend are judged"),
    NotChecked("stability of the amplifier", "the checks look at copper, not at the transistor's behaviour"),
)
"""What no rule covers, whatever the rule file says."""

_ABSENT = "the rule file sets no limit"
_FOREIGN = "needs the circuit, not the drawing alone"


def absent(board: Board, rule: Rule) -> Iterator[NotChecked]:
    """Yield a line for each of a rule's names that lacks its limit, or the circuit."""
    if board.artwork is None and rule.needs_circuit:
        yield from (NotChecked(name, _FOREIGN) for name in rule.names)
        return
    missing = [] if rule.keyless else [name for name in rule.names if board.limits.get(name) is None]
    if not rule.either or len(missing) == len(rule.names):
        yield from (NotChecked(name, _ABSENT) for name in missing)


def may_run(board: Board, rule: Rule) -> bool:
    """Tell whether a rule has what it needs."""
    if board.artwork is None and rule.needs_circuit:
        return False
    return rule.keyless or any(board.limits.get(name) is not None for name in rule.names)
