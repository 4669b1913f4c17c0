"""What a comparison hands on: changes as values."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import shapely

from layoutgen.geometry import Point

__all__ = ["Change", "Comparison", "Kind"]

Kind = Literal["added", "removed", "moved", "resized", "joined", "parted"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Change:
    """One difference between two artworks.

    ``kind``: added and removed areas or holes; pieces of copper or holes moved as a whole; holes resized;
    nets joined or parted. ``at`` [nm] is its place, ``net`` a conductor's name in the first artwork
    (``new:N`` for one that only the second has, empty off copper), ``size`` [nm] how far the change reaches
    from the other artwork's outline, or how far a thing was moved. ``shape`` is the area, None for nets.
    """

    kind: Kind
    layer: str
    severity: Literal["error", "note"]
    at: Point
    net: str
    size: float
    text: str
    shape: shapely.Polygon | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Comparison:
    """All changes from ``first`` to ``second``, in a fixed order (errors first, layer, place)."""

    first: str
    second: str
    changes: tuple[Change, ...]

    @property
    def equal(self) -> bool:
        """True when nothing changed by more than a micrometre."""
        return not self.changes

    def count(self, severity: str) -> int:
        """Return how many changes are of one severity."""
        return sum(change.severity == severity for change in self.changes)

    def rows(self) -> Sequence[tuple[str, str, str, str, str]]:
        """Return the changes as rows of text: severity, layer, kind, net, what."""
        return [(c.severity, c.layer, c.kind, c.net or "-", c.text) for c in self.changes]

    def summary(self) -> str:
        """Return one line for people."""
        if self.equal:
            return f"{self.first} and {self.second} are equal within 1 um"
        errors, notes = self.count("error"), self.count("note")
        return f"{self.first} -> {self.second}: {errors} changes of copper, {notes} of other layers"
