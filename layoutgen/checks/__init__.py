"""The checks stage: can this be made, will it survive, does it connect what the circuit connects?

In: an :class:`~layoutgen.artwork.Artwork` (and, for waivers, the day). Out: a :class:`CheckResult`,
findings as values with place, items and measured value, and the list of what was not looked at, which is
never empty. One rule a file in ``rules/``; each looks at a :class:`~layoutgen.checks.board.Board` of
finished copper, so that drawings of other origin can be judged too. Does not: change the drawing, compute
RF behaviour, print, or exit.
"""

from layoutgen.checks.records import CheckResult, Finding, NotChecked
from layoutgen.checks.run import check, check_board, current_map
from layoutgen.checks.sheet import NetSheet, Sheets

__all__ = [
    "CheckResult",
    "Finding",
    "NetSheet",
    "NotChecked",
    "Sheets",
    "check",
    "check_board",
    "current_map",
]
