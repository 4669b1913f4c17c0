"""JUnit XML: the findings for build servers, one test case a rule, and one for each of its findings.

Errors that nobody has waived are failures; rules that were not evaluated are skipped, with the reason;
warnings, notes and waived findings are passed cases that carry their text. Rules that looked and found
nothing are passed cases of their own, so that "not run" never reads as "passed".
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from xml.sax.saxutils import escape, quoteattr

from layoutgen.checks import CheckResult, Finding, NotChecked
from layoutgen.checks.rules import RULES
from layoutgen.numbers import mm

__all__ = ["junit"]


def junit(checks: CheckResult, suite: str = "layoutgen") -> bytes:
    """Return the file; equal results give equal bytes.

    Args:
        checks: Findings, and what was not checked.
        suite: The suite's name, for example the circuit's.
    """
    failures = sum(finding.counts for finding in checks.findings)
    cases = [*_findings(checks.findings), *_passed(checks), *_skipped(checks.not_checked)]
    counts = f'tests="{len(cases)}" failures="{failures}" errors="0" skipped="{len(checks.not_checked)}"'
    lines = [
        '<?xml version="1.0" encoding="UTF-8"?>',
        f"<testsuites {counts}>",
        f"<testsuite name={_attribute(suite)} {counts}>",
        *cases,
        "</testsuite>",
        "</testsuites>",
    ]
    return ("\n".join(lines) + "\n").encode("utf-8")


def _findings(findings: Sequence[Finding]) -> Iterator[str]:
    """Yield a case for each finding, numbered as in the report."""
    for number, finding in enumerate(findings, start=1):
        name = " ".join([str(number), *finding.items])
        head = f"<testcase classname={_attribute(finding.rule)} name={_attribute(name)}>"
        if finding.counts:
            body = f"<failure type={_attribute(finding.rule)} message={_attribute(finding.text)}>"
            yield f"{head}{body}{_text(_details(finding))}</failure></testcase>"
        else:
            yield f"{head}<system-out>{_text(_details(finding))}</system-out></testcase>"


def _details(finding: Finding) -> str:
    """Return all that is known of a finding, line by line."""
    state = finding.severity if finding.waived is None else f"waived: {finding.waived}"
    place = "" if finding.at is None else f"at {mm(finding.at[0])}, {mm(finding.at[1])} mm"
    where = " ".join(word for word in (finding.layer, place) if word)
    sources = [str(source) for source in (finding.limit_from, *finding.sources) if source is not None]
    return "\n".join(line for line in (f"{state}: {finding.text}", where, *sources) if line)


def _passed(checks: CheckResult) -> Iterator[str]:
    """Yield a case for each rule that was evaluated and has no finding."""
    silent = {entry.rule.partition(" ")[0] for entry in checks.not_checked}
    silent |= {finding.rule for finding in checks.findings}
    for rule in RULES:
        for name in rule.names:
            if name not in silent:
                yield f'<testcase classname={_attribute(name)} name="nothing found"/>'


def _skipped(entries: Sequence[NotChecked]) -> Iterator[str]:
    """Yield a case for each thing that was not checked."""
    for entry in entries:
        body = f"<skipped message={_attribute(entry.reason)}/>"
        yield f'<testcase classname={_attribute(entry.rule)} name="not checked">{body}</testcase>'


def _attribute(text: str) -> str:
    """Return text as a quoted attribute."""
    return quoteattr(_printable(text))


def _text(text: str) -> str:
    """Return text as it may stand between tags."""
    return escape(_printable(text))


def _printable(text: str) -> str:
    """Return text without the characters that XML forbids."""
    return "".join(
        c if c in "\t\n" or (c >= " " and not "\ud800" <= c <= "\udfff" and c not in "\ufffe\uffff") else "?"
        for c in text
    )
