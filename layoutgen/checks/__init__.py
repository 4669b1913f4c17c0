"""The checks stage."""

from layoutgen.checks.records import (
    CheckResult,
    Finding,
    NotChecked,
)

__all__ = [
    "CheckResult",
    "Finding",
    "NotChecked",
]
