"""The package's exceptions: one small tree, each leaf tied to one exit status.

``cli.py`` is the only place that catches them. Every exception carries its faults as values, so that a
script can read them without parsing text.
"""

from __future__ import annotations

from collections.abc import Sequence

from layoutgen.origin import Fault

__all__ = ["InfeasibleError", "LayoutgenError", "WrongInputError"]


class LayoutgenError(Exception):
    """Base of all errors that a user can cause and mend."""

    exit_status = 2


class WrongInputError(LayoutgenError):
    """A file, value or request is faulty: exit status 2, nothing is written.

    Args:
        faults: Every fault found, in file order; at least one.
    """

    exit_status = 2

    def __init__(self, faults: Sequence[Fault]) -> None:
        """Keep the faults and join them into the message."""
        self.faults = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class InfeasibleError(LayoutgenError):
    """No placement exists, or a hint cannot be kept: exit status 3, nothing is written.

    Args:
        element: Name of the line, part, port or hint that cannot be placed.
        reason: What stands in its way.
        remedy: The nearest size or hint that would do.
    """

    exit_status = 3

    def __init__(self, element: str, reason: str, remedy: str) -> None:
        """Keep the three parts and join them into the message."""
        self.element, self.reason, self.remedy = element, reason, remedy
        super().__init__(f"{element}: {reason}; {remedy}")
