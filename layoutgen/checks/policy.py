"""From hits to findings: severities, the rule file's overrides, waivers."""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from layoutgen.checks.limits import Limits
from layoutgen.checks.outcome import Hit
from layoutgen.checks.records import Finding
from layoutgen.origin import Location
from layoutgen.reading import Waiver

__all__ = ["default_severity", "judged", "severity_of"]

_ERRORS = frozenset(
    ("copper", "holes", "vias", "mask", "current", "voltage", "connectivity", "ground", "part")
)
EXPIRED = "waive.expired"
UNUSED = "waive.unused"


@dataclass(frozen=True, slots=True)
class _Named:
    """A waiver with its name."""

    name: str
    waiver: Waiver

    def matches(self, finding: Finding) -> bool:
        """Tell whether the waiver speaks of a finding."""
        same = finding.rule == self.waiver.rule and finding.severity != "note"
        return same and set(self.waiver.items) <= set(finding.items)

    def is_over(self, today: datetime.date | None) -> bool:
        """Tell whether the waiver has expired; never without a date."""
        return today is not None and self.waiver.until is not None and today > self.waiver.until


def default_severity(rule: str) -> str:
    """Return the severity of a rule's findings where the rule file does not say: by the rule's table."""
    return "error" if rule.partition(".")[0] in _ERRORS else "warning"


def severity_of(limits: Limits, rule: str) -> str:
    """Return the severity of a rule's findings: the rule file's own, else the one of its table."""
    return str(limits.rules.severity.get(rule, default_severity(rule)))


def judged(limits: Limits, hits: Sequence[Hit], today: datetime.date | None) -> list[Finding]:
    """Return the findings with severities, waived ones marked, and warnings for waivers that are of no use.

    Args:
        limits: The rule file.
        hits: What the rules found.
        today: Day on which waivers are judged; None takes none as expired.
    """
    waivers = [_Named(name, waiver) for name, waiver in limits.rules.waive.items()]
    findings = [_finding(limits, hit) for hit in hits]
    valid = [named for named in waivers if not named.is_over(today)]
    marked = [_waived(finding, valid) for finding in findings]
    return [*marked, *_idle(limits, waivers, findings, today)]


def _finding(limits: Limits, hit: Hit) -> Finding:
    """Return the finding of one hit."""
    return Finding(
        rule=hit.rule,
        severity="note" if hit.note else severity_of(limits, hit.rule),
        measured=hit.measured,
        limit=hit.limit,
        unit=hit.unit,
        at=hit.at,
        layer=hit.layer,
        items=hit.items,
        nets=hit.nets,
        text=hit.text,
        limit_from=None if hit.note else limits.location(hit.rule),
    )


def _waived(finding: Finding, valid: Sequence[_Named]) -> Finding:
    """Return the finding, with the reason of the first waiver that matches."""
    reason = next((named.waiver.reason for named in valid if named.matches(finding)), None)
    return finding if reason is None else replace(finding, waived=reason)


def _idle(
    limits: Limits, waivers: Sequence[_Named], findings: Sequence[Finding], today: datetime.date | None
) -> Iterator[Finding]:
    """Yield a warning for each waiver that has expired, or matches nothing."""
    for named in waivers:
        if named.is_over(today):
            yield _warning(limits, EXPIRED, named, f"waiver {named.name} expired on {named.waiver.until}")
        elif not any(named.matches(finding) for finding in findings):
            yield _warning(
                limits, UNUSED, named, f"waiver {named.name} for {named.waiver.rule} matches no finding"
            )


def _warning(limits: Limits, rule: str, named: _Named, text: str) -> Finding:
    """Return the finding about one waiver."""
    place: Location = limits.rules.location(f"waive.{named.name}")
    return Finding(
        rule=rule,
        severity=severity_of(limits, rule),
        measured=None,
        limit=None,
        unit="",
        at=None,
        layer="",
        items=named.waiver.items,
        nets=(),
        text=text,
        limit_from=place if place.line else None,
    )
