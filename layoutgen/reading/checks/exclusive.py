"""Keys that exclude or need one another, by presence alone: the values need not be right."""

from __future__ import annotations

from layoutgen.reading.draft import Table
from layoutgen.reading.faults import Faults

__all__ = ["forbid", "one_of", "require"]


def one_of(
    faults: Faults, table: Table, first: str, second: str, needed: bool = True, note: str = ""
) -> None:
    """Add a fault when both keys are written, or none although one is needed.

    Args:
        faults: Collects the faults.
        table: The table.
        first: One key.
        second: The other.
        needed: Whether one of them must be there.
        note: Added to what is allowed.
    """
    written = table.written(first, second)
    if len(written) == 2:
        lines = {key: faults.source.location(table.at(key)).line for key in written}
        later, earlier = (first, second) if lines[first] > lines[second] else (second, first)
        found = f"{later} beside {earlier} ({faults.line_of(table.at(earlier))})"
        faults.add(table.at(later), found, f"{first} or {second}, not both")
    elif needed and not table.has(first, second) and faults.complete:
        faults.add(table.at(first), f"neither {first} nor {second}", f"one of the two{note}")


def require(faults: Faults, table: Table, key: str, reason: str) -> None:
    """Add a fault when a key is missing.

    Args:
        faults: Collects the faults.
        table: The table.
        key: The key.
        reason: What is allowed: why it is needed.
    """
    if not table.has(key) and faults.complete:
        faults.add(table.at(key), "nothing", reason)


def forbid(faults: Faults, table: Table, keys: tuple[str, ...], reason: str) -> None:
    """Add a fault for each of the keys that is written.

    Args:
        faults: Collects the faults.
        table: The table.
        keys: The keys that may not stand here.
        reason: What is allowed: where the key belongs.
    """
    for key in table.written(*keys):
        if not faults.about(table.at(key)):
            faults.add(table.at(key), f"{key} where it has no meaning", reason)
