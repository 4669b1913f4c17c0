"""What a rule says: a hit (later a finding), or that it could not look."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from layoutgen.checks.records import NotChecked
from layoutgen.geometry import Point

if TYPE_CHECKING:
    from layoutgen.checks.board import Board

__all__ = ["Hit", "Outcome", "Rule", "mm", "named", "too_small"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Hit:
    """What a rule found, before severity and waivers are known.

    Fields as in :class:`~layoutgen.checks.records.Finding`; ``note`` is True for an assumption or an
    exemption, which is never an error.
    """

    rule: str
    text: str
    items: tuple[str, ...]
    at: Point | None = None
    measured: float | None = None
    limit: float | None = None
    unit: str = ""
    layer: str = "copper_top"
    nets: tuple[str, ...] = ()
    note: bool = False

    @property
    def excess(self) -> float:
        """How far from the limit the measured value lies, in its unit; infinite without a figure."""
        if self.measured is None or self.limit is None:
            return float("inf")
        return abs(self.measured - self.limit)


Outcome = Hit | NotChecked


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """One rule: the names its findings carry, and the function that looks.

    ``names`` are key paths of the rule file or names of findings without a key. A name whose key is absent
    is listed as not checked; ``find`` runs when at least one key is given or none is needed. ``either`` is
    True when the keys are alternatives. ``keyless`` rules always run. ``needs_circuit`` rules look at what
    the circuit meant and cannot run on artwork alone.
    """

    names: tuple[str, ...]
    find: Callable[[Board], Iterator[Outcome]]
    either: bool = False
    keyless: bool = False
    needs_circuit: bool = False


def mm(nanometres: float) -> str:
    """Return a length [nm] as text in millimetres, to a tenth of a micrometre."""
    return f"{nanometres / 1e6:.4f} mm"


def named(*names: str) -> tuple[str, ...]:
    """Return names without repeats, in the order given: the items or nets of a hit."""
    return tuple(dict.fromkeys(name for name in names if name))


def too_small(
    rule: str,
    what: str,
    measured: float,
    limit: float,
    at: Point,
    items: tuple[str, ...],
    nets: tuple[str, ...] = (),
    layer: str = "copper_top",
) -> Hit:
    """Return the hit for a length [nm] that falls short of a limit [nm]."""
    return Hit(
        rule=rule,
        text=f"{what} {mm(measured)}, at least {mm(limit)}",
        items=items,
        at=at,
        measured=measured / 1e6,
        limit=limit / 1e6,
        unit="mm",
        layer=layer,
        nets=nets,
    )
