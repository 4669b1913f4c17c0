"""JUnit XML: counts that add up, failures for errors only, nothing unchecked read as passed."""

from __future__ import annotations

import xml.etree.ElementTree as ElementTree
from dataclasses import replace

from layoutgen.checks import CheckResult, Finding, NotChecked
from layoutgen.checks.rules import RULES
from layoutgen.writers.junit import junit

FINDING = Finding(
    rule="copper.min_gap",
    severity="error",
    measured=0.1,
    limit=0.2,
    unit="mm",
    at=(1_000_000, 2_000_000),
    layer="copper_top",
    items=("C1", "line <1>"),
    nets=(),
    text='gap "here" & there\x07',
)
RESULT = CheckResult(
    findings=(
        FINDING,
        replace(FINDING, severity="warning", rule="bank.order"),
        replace(FINDING, rule="copper.min_width", waived="known"),
    ),
    not_checked=(
        NotChecked("holes.min_web", "the rule file sets no limit"),
        NotChecked("thermal design", "none"),
    ),
)


def parsed() -> ElementTree.Element:
    return ElementTree.fromstring(junit(RESULT, "river & gauge"))


def cases(rule: str) -> list[ElementTree.Element]:
    return [case for case in parsed().iter("testcase") if case.get("classname") == rule]


def test_counts_add_up() -> None:
    """Catches counts that a build server would refuse."""
    root = parsed()
    suite = root[0]
    assert suite.get("name") == "river & gauge"
    assert int(suite.get("tests", "")) == len(list(root.iter("testcase")))
    assert int(suite.get("failures", "")) == len(list(root.iter("failure"))) == 1
    assert int(suite.get("skipped", "")) == len(list(root.iter("skipped"))) == 2


def test_only_errors_that_nobody_waived_fail() -> None:
    """Catches a warning or a waived finding that breaks a build, and an error that does not."""
    (failed,) = cases("copper.min_gap")
    failure = failed.find("failure")
    assert failure is not None and failure.get("message") == 'gap "here" & there?'
    assert "at 1.000000, 2.000000 mm" in (failure.text or "")
    assert failed.get("name") == "1 C1 line <1>"
    for rule in ("bank.order", "copper.min_width"):
        (case,) = cases(rule)
        assert case.find("failure") is None
    assert "waived: known" in (cases("copper.min_width")[0].findtext("system-out") or "")


def test_not_checked_is_skipped_and_the_rest_passes() -> None:
    """Catches a rule that was not run shown as passed, or one that ran and found nothing left out."""
    (skipped,) = cases("holes.min_web")
    assert skipped.find("skipped") is not None
    silent = [name for rule in RULES for name in rule.names if name not in {"holes.min_web"}]
    for name in silent:
        assert cases(name), name
    assert len(cases("holes.drills")) == 1 and len(cases("holes.drills")[0]) == 0


def test_same_bytes() -> None:
    """Catches a time or an order that differs from run to run."""
    assert junit(RESULT) == junit(RESULT)
