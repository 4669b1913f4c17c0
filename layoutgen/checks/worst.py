"""Of many hits of one rule between the same items, the worst stands for all."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from layoutgen.checks.outcome import Hit

__all__ = ["worst_of_each"]


def worst_of_each(hits: Iterable[Hit]) -> list[Hit]:
    """Return one hit for each rule, set of items and kind (note or not): the one farthest from its limit.

    The text of a hit that stands for several says of how many places it is the worst. Order: rule, place,
    items.
    """
    groups: dict[tuple[str, tuple[str, ...], bool], list[Hit]] = {}
    for hit in hits:
        groups.setdefault((hit.rule, tuple(sorted(hit.items)), hit.note), []).append(hit)
    return sorted((_worst(group) for group in groups.values()), key=_order)


def _worst(group: list[Hit]) -> Hit:
    """Return the hit that stands for a group."""
    if group[0].note:
        texts = dict.fromkeys(hit.text for hit in group)
        return replace(group[0], text="; ".join(texts))
    worst = min(group, key=lambda hit: (-hit.excess, _order(hit)))
    if len(group) == 1:
        return worst
    return replace(worst, text=f"{worst.text} (worst of {len(group)} places)")


def _order(hit: Hit) -> tuple[object, ...]:
    """Return the sort key of a hit: rule, place, items."""
    return (hit.rule, hit.at is None, hit.at or (0, 0), hit.layer, hit.items, hit.note, hit.text)
