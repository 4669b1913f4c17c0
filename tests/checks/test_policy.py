"""Severities, waivers, notes, order, and the list of what was not checked."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import Any

import pytest

from docs.make_rules import rules_page
from layoutgen.checks import CheckResult, Finding
from layoutgen.checks.coverage import PARAMETERS, UNCOVERED
from layoutgen.checks.policy import default_severity
from layoutgen.checks.rules import RULE_MODULES, RULES
from layoutgen.reading import KEYLESS_RULES, RULE_NAMES
from tests.checks.boards import Sheet, box, only

DAY = datetime.date(2027, 6, 30)


def narrow(**rules: Any) -> Sheet:
    """Return a sheet with one gap too narrow between la and lb, and more rules."""
    sheet = Sheet({"copper": {"min_gap": "0.2 mm"}, **rules})
    sheet.copper(box(4, 4, 8, 6), "a", "line", "la")
    sheet.copper(box(8.1, 4, 10, 6), "b", "line", "lb")
    return sheet


def gap(result: CheckResult) -> Finding:
    """Return the finding of the narrow gap."""
    return only([f for f in result.findings if f.rule == "copper.min_gap"])


def rules_of(result: CheckResult) -> list[str]:
    """Return the rules of the findings, notes left out."""
    return [f.rule for f in result.findings if f.severity != "note"]


def waived(items: list[str], until: str | None = None, rule: str = "copper.min_gap") -> dict[str, Any]:
    """Return the table of one waiver."""
    waiver: dict[str, Any] = {"rule": rule, "items": items, "reason": "approved at first article"}
    return {"first-article": waiver | ({"until": until} if until else {})}


@pytest.mark.parametrize(
    ("rule", "severity"),
    [
        ("copper.min_gap", "error"),
        ("ground.gap", "error"),
        ("part.rating", "error"),
        ("connectivity.open", "error"),
        ("fence.max_pitch", "warning"),
        ("spacing.max_coupling", "warning"),
        ("legend.min_line", "warning"),
        ("bank.order", "warning"),
        ("waive.unused", "warning"),
    ],
)
def test_default_severity(rule: str, severity: str) -> None:
    """Catches a table's severity that is not the contract's."""
    assert default_severity(rule) == severity


@pytest.mark.parametrize("severity", ["error", "warning", "note"])
def test_severity_of_the_rule_file(severity: str) -> None:
    """Catches an override that is not obeyed, and one that counts as an error all the same."""
    finding = gap(narrow(severity={"copper.min_gap": severity}).check())
    assert finding.severity == severity
    assert finding.counts == (severity == "error")


def test_waived_finding_stays_and_does_not_count() -> None:
    """Catches a waived finding dropped from the list, or counted, or its waiver called unused."""
    result = narrow(waive=waived(["la"])).check()
    assert gap(result).waived == "approved at first article"
    assert not gap(result).counts
    assert "waive.unused" not in rules_of(result)


@pytest.mark.parametrize("items", [["la"], ["lb", "la"]])
def test_waiver_matches_findings_that_contain_its_items(items: list[str]) -> None:
    """Catches a waiver that must name every item, or in one order."""
    assert gap(narrow(waive=waived(items)).check()).waived is not None


@pytest.mark.parametrize("items", [["C1"], ["la", "lb", "C1"]])
def test_waiver_of_other_items_is_unused(items: list[str]) -> None:
    """Catches a waiver that forgives more than it names, and an unused one passed in silence."""
    result = narrow(waive=waived(items)).check()
    assert gap(result).counts
    unused = only([f for f in result.findings if f.rule == "waive.unused"])
    assert unused.severity == "warning"
    assert unused.items == tuple(items)


def test_waiver_of_another_rule() -> None:
    """Catches a waiver that forgives findings of other rules."""
    assert gap(narrow(waive=waived(["la"], rule="copper.min_width")).check()).counts


@pytest.mark.parametrize(("late", "expired"), [(0, False), (1, True)])
def test_expired_waiver(late: int, expired: bool) -> None:
    """Catches the last day taken as past, an expired waiver that still forgives, or no warning about it."""
    sheet = narrow(waive=waived(["la"], until=DAY.isoformat()))
    result = sheet.check(DAY + datetime.timedelta(days=late))
    assert gap(result).counts == expired
    assert ("waive.expired" in rules_of(result)) == expired
    assert "waive.unused" not in rules_of(result)


def test_without_a_date_no_waiver_expires() -> None:
    """Catches a clock read inside the stage: the result must not depend on the day it runs."""
    sheet = narrow(waive=waived(["la"], until="2001-01-01"))
    result = sheet.check()
    assert gap(result).waived is not None
    assert any(entry.rule == "waive.expired" for entry in result.not_checked)


def test_notes_of_earlier_stages() -> None:
    """Catches assumptions of placement and bias point lost on the way."""
    sheet = narrow()
    sheet.notes.append(("placement.spine", "la", "drawn straight"))
    notes = [f for f in sheet.check().findings if f.severity == "note"]
    assert any((f.rule, f.items, f.text) == ("placement.spine", ("la",), "drawn straight") for f in notes)
    assert any("no DC path" in f.text for f in notes)
    assert not any(f.counts for f in notes)


def test_same_board_same_findings() -> None:
    """Catches an order that depends on hashing or on memory: two runs, value by value."""

    def board() -> Sheet:
        sheet = narrow(holes={"min_web": "1 mm"})
        for k in range(12):
            sheet.via(12 + 0.7 * (k % 4), 8 + 0.7 * (k // 4))
        return sheet

    first, second = board().check(), board().check()
    assert first == second
    assert len([f for f in first.findings if f.rule == "holes.min_web"]) > 20
    places = [f.at for f in first.findings if f.rule == "holes.min_web"]
    assert places == sorted(places, key=lambda at: at or (0, 0))


def test_every_name_of_the_rule_file_has_a_rule() -> None:
    """Catches a key of the rule file that no rule looks at and no list owns up to."""
    covered = {name for rule in RULES for name in rule.names}
    assert set(RULE_NAMES) - covered - set(PARAMETERS) - {"waive.expired", "waive.unused"} == set()
    assert covered <= set(RULE_NAMES)
    assert {name for rule in RULES if rule.keyless for name in rule.names} == set(KEYLESS_RULES) - {
        "waive.expired",
        "waive.unused",
    }


def test_absent_rules_are_listed() -> None:
    """Catches an absent key read as passed, and a given one listed as absent."""
    unchecked = narrow().unchecked()
    assert unchecked["copper.min_width"] == "the rule file sets no limit"
    assert "copper.min_gap" not in unchecked
    absent = {name for rule in RULES for name in rule.names if not rule.keyless}
    given = {"copper.min_gap", "holes.drills", "vias.diameter", "vias.drill"}
    assert {name for name, reason in unchecked.items() if "no limit" in reason} == absent - given


def test_one_way_to_ask_for_clearance_is_enough() -> None:
    """Catches voltage.table listed as unchecked where voltage.condition is given."""
    unchecked = narrow(voltage={"condition": "B2"}).unchecked()
    assert "voltage.table" not in unchecked
    assert "voltage.condition" not in unchecked


def test_what_no_rule_covers_is_always_listed() -> None:
    """Catches an empty list: it never is."""
    result = narrow().check()
    assert set(UNCOVERED) <= set(result.not_checked)
    assert all(entry.reason for entry in result.not_checked)


def test_one_file_a_rule_with_its_paragraph() -> None:
    """Catches a rule without its paragraph on what, why, how and source, or two rules in one file."""
    assert len(set(RULE_MODULES)) == len(RULES)
    for module in RULE_MODULES:
        text = module.__doc__ or ""
        assert all(f"\n{label}:" in text for label in ("What", "Why", "How measured", "Source")), (
            module.__name__
        )


def test_docs_are_up_to_date() -> None:
    """Catches docs/rules.md that was not written anew: run python docs/make_rules.py."""
    page = Path(__file__).parents[2] / "docs" / "rules.md"
    assert page.read_text(encoding="utf-8") == rules_page()
