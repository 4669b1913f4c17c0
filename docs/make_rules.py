"""Write docs/rules.md from the rules themselves: ``python docs/make_rules.py``."""

from __future__ import annotations

import re
import textwrap
from pathlib import Path
from types import ModuleType

from layoutgen.checks.coverage import PARAMETERS, UNCOVERED
from layoutgen.checks.policy import default_severity
from layoutgen.checks.rules import RULE_MODULES

PAGE = Path(__file__).with_name("rules.md")

INTRO = """\
# Rules

Written by `docs/make_rules.py` from the rules in `layoutgen/checks/rules/`; do not edit.

A finding names its rule (the path of the key in the rule file), its severity, the measured value and the
limit, the place (the middle of the shortest connection), and the items it lies between. There is one
finding for each rule and set of items: the worst place stands for all, and its text says of how many.
Severities may be changed under `[severity]`; a finding that matches a waiver keeps its place in the list
with the waiver's reason and does not count.

Rules look at *finished* copper: the artwork less `copper.undercut` on every edge. Distances are exact;
arcs are judged as chords within 5 nm, and a distance 10 nm short of its limit passes (rounding to whole
nanometres), so that a board at the limit passes and one a micrometre below it does not. Where a rule
allows more, it says so.

Beside each rule stand two boards, one that passes and one that does not (the finding ringed in red): copper
orange, the plane grey, mask openings green, legend dark. They are made by `docs/make_rule_pictures.py` from
boards that the tests judge.
"""

CLOSING = """\
## Keys that are not rules

{parameters}: sizes that the drawing and other rules use; there is nothing to check about them.

## Waivers

`waive.expired` (warning): the waiver's day has passed; the findings it spoke of count again. Without a
date no waiver is taken as expired, and the list of what was not checked says so. `waive.unused`
(warning): the waiver matches no finding.

## What no rule covers

{uncovered}
"""


def rules_page() -> str:
    """Return the page as text."""
    parameters = ", ".join(f"`{key}`" for key in PARAMETERS)
    uncovered = "\n".join(_wrapped(f"- {entry.rule}: {entry.reason}.") for entry in UNCOVERED)
    closing = CLOSING.format(parameters=parameters, uncovered=uncovered)
    return "\n".join([INTRO, *(_section(module) for module in RULE_MODULES), closing])


def _section(module: ModuleType) -> str:
    """Return one rule's section."""
    names = module.RULE.names
    head, _, body = (module.__doc__ or "").partition("\n\n")
    severity = default_severity(names[0])
    title = ", ".join(f"`{name}`" for name in names)
    chunks = re.split(r"\n(?=(?:Why|How measured|Source):)", body.strip().replace("``", "`"))
    wrapped = [_wrapped(f"- {' '.join(chunk.split())}") for chunk in chunks]
    stem = names[0].replace(".", "_")
    pictures = (
        f"![passes](rules/{stem}_pass.svg) ![fails](rules/{stem}_fail.svg)"  # docs/make_rule_pictures.py
    )
    return "\n".join([f"## {title}", "", f"{head.strip()} ({severity})", "", *wrapped, "", pictures, ""])


def _wrapped(row: str) -> str:
    """Return a list item, wrapped."""
    return textwrap.fill(row, 118, subsequent_indent="  ", break_on_hyphens=False)


if __name__ == "__main__":
    PAGE.write_text(rules_page(), encoding="utf-8")
