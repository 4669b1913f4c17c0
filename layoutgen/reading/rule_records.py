"""The records of a rule file, one class a table; attribute names are the file's keys, values are SI.

An absent table or key is None (``copper`` alone is always a record): that rule is not checked, and listed so.
"""

from __future__ import annotations

import datetime
from collections.abc import Mapping
from typing import Annotated, Literal

from pydantic import Field

from layoutgen.reading.kinds import Date, Name, Number, Text, WholeNumber
from layoutgen.reading.quantities import Quantity
from layoutgen.reading.records import CornerAngle, FileRecord, Length, LengthOrZero, Record

__all__ = [
    "BankRules",
    "CopperRules",
    "CurrentRules",
    "FenceRules",
    "HoleRules",
    "LandPatternRules",
    "LegendRules",
    "MaskRules",
    "RuleFile",
    "SpacingRules",
    "ViaRules",
    "VoltageRules",
    "Waiver",
]

WaiverName = Annotated[str, Name("a waiver's name")]
Severity = Literal["error", "warning", "note"]


class CopperRules(Record):
    """``[copper]``: what can be etched."""

    min_width: Length | None = Field(
        default=None, description="distance of facing edges of one copper shape [m]"
    )
    min_gap: Length | None = Field(
        default=None, description="between nets, and between facing edges of one net [m]"
    )
    min_edge_distance: LengthOrZero | None = Field(
        default=None, description="copper to profile and cut-outs [m]"
    )
    min_corner_angle: CornerAngle | None = Field(default=None, description="sharpest inside corner [rad]")
    min_island_area: Annotated[float, Quantity("area")] | None = Field(
        default=None, description="smallest copper shape [m^2]"
    )
    undercut: LengthOrZero = Field(default=0.0, description="per edge: artwork is drawn wider by it [m]")


class HoleRules(Record):
    """``[holes]``: what can be drilled."""

    drills: tuple[Length, ...] = Field(min_length=1, description="finished diameters on offer [m]")
    min_diameter: Length | None = Field(default=None, description="smallest diameter [m]")
    max_aspect_ratio: Annotated[float, Number(0.0, 1e3, open_end=True)] | None = Field(
        default=None, description="(height + 2 copper_thickness) / drill [-]"
    )
    min_annular_ring: LengthOrZero | None = Field(default=None, description="copper around a plated hole [m]")
    min_web: LengthOrZero | None = Field(default=None, description="wall to wall of two holes [m]")
    min_copper_distance: LengthOrZero | None = Field(
        default=None, description="wall to copper of another net; unplated: any copper [m]"
    )
    min_edge_distance: LengthOrZero | None = Field(
        default=None, description="wall to profile and cut-outs [m]"
    )


class ViaRules(Record):
    """``[vias]``: the via that the tool sets."""

    diameter: Length = Field(description="of the land [m]")
    drill: Length = Field(description="finished hole [m]")
    min_pitch: Length | None = Field(default=None, description="axis to axis [m]")
    max_current: Annotated[float, Quantity("current")] | None = Field(
        default=None, description="through one via [A]"
    )
    plating: Length | None = Field(default=None, description="copper of the barrel [m]")
    per_ground_pad: Annotated[int, WholeNumber(1, 1000)] | None = Field(
        default=None, description="least number per pad [-]"
    )


class FenceRules(Record):
    """``[fence]``: vias along a pour edge that faces a line."""

    max_pitch: Length | None = Field(default=None, description="between consecutive axes [m]")
    max_pitch_wavelengths: Annotated[float, Number(0.0, 10.0, open_end=True)] | None = Field(
        default=None,
        description="the same in c/(f sqrt(er)) at the band's upper edge; the smaller governs [-]",
    )
    max_edge_distance: Length | None = Field(default=None, description="axis to pour edge [m]")


class MaskRules(Record):
    """``[mask]``: solder mask."""

    expansion: LengthOrZero | None = Field(default=None, description="opening beyond the pad, per edge [m]")
    min_web: LengthOrZero | None = Field(default=None, description="narrowest mask between openings [m]")


class LegendRules(Record):
    """``[legend]``: printed text."""

    min_line: Length | None = Field(default=None, description="narrowest stroke [m]")
    min_distance: LengthOrZero | None = Field(default=None, description="to mask openings [m]")


class CurrentRules(Record):
    """``[current]``: what copper may carry; both are checked when both are given."""

    temperature_rise: Annotated[float, Quantity("temperature")] | None = Field(
        default=None, description="allowed by the IPC-2221 equation [K]"
    )
    max_density: Annotated[float, Quantity("current_density")] | None = Field(
        default=None, description="[A/m^2]"
    )


class VoltageRules(Record):
    """``[voltage]``: clearance against voltage, by a column of IPC-2221B table 6-1 or an own table."""

    condition: Literal["B1", "B2", "B3", "B4", "A5", "A6", "A7"] | None = Field(
        default=None, description="column of IPC-2221B table 6-1"
    )
    table: tuple[tuple[Annotated[float, Quantity("voltage")], Length], ...] | None = Field(
        default=None, min_length=1, description="rows of: up to this voltage [V], at least this distance [m]"
    )


class SpacingRules(Record):
    """``[spacing]``: lines that are not meant to couple."""

    min_line_heights: Annotated[float, Number(0.0, 1e3)] | None = Field(
        default=None, description="edge to edge in substrate heights [-]"
    )
    max_coupling: Annotated[float, Quantity("level", "not positive")] | None = Field(
        default=None, description="of parallel runs [dB]"
    )


class BankRules(Record):
    """``[bank]``: capacitors at the end of a feed."""

    max_distance: LengthOrZero | None = Field(
        default=None, description="feed's end to the first capacitor's pad [m]"
    )


class LandPatternRules(Record):
    """``[land_pattern]``: pads of chips."""

    density: Literal["most", "nominal", "least"] | None = Field(
        default=None, description="IPC-7351 density level"
    )


class Waiver(Record):
    """``[waive.NAME]``: findings that were accepted, with the reason."""

    rule: Annotated[str, Text("a rule's name")] = Field(description="name of the rule")
    items: tuple[Annotated[str, Text("an item's name")], ...] = Field(
        min_length=1, description="matches a finding whose items contain all of these"
    )
    reason: Annotated[str, Text()] = Field(description="why it was accepted")
    until: Annotated[datetime.date, Date()] | None = Field(
        default=None, description="last day on which the waiver counts"
    )


class RuleFile(FileRecord):
    """A rule file: what a board house can make."""

    format: Literal[1] = Field(description="version of the file's form")
    name: Annotated[str, Text()] = Field(description="name of the class")
    source: Annotated[str, Text()] | None = Field(default=None, description="where the numbers come from")
    copper: CopperRules = Field(default=CopperRules(), description="what can be etched")
    holes: HoleRules = Field(description="what can be drilled")
    vias: ViaRules = Field(description="the via that the tool sets")
    fence: FenceRules | None = Field(default=None, description="vias along pour edges")
    mask: MaskRules | None = Field(default=None, description="solder mask")
    legend: LegendRules | None = Field(default=None, description="printed text")
    current: CurrentRules | None = Field(default=None, description="what copper may carry")
    voltage: VoltageRules | None = Field(default=None, description="clearance against voltage")
    spacing: SpacingRules | None = Field(default=None, description="lines not meant to couple")
    bank: BankRules | None = Field(default=None, description="capacitors at a feed's end")
    land_pattern: LandPatternRules | None = Field(default=None, description="pads of chips")
    severity: Mapping[str, Severity] = Field(default_factory=dict, description="rule -> severity, overrides")
    waive: Mapping[WaiverName, Waiver] = Field(default_factory=dict, description="name -> waiver")
