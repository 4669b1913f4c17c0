"""The records of a circuit file, one class a table; attribute names are the file's keys.

Values are SI: lengths [m], frequencies [Hz], impedances [ohm], angles [rad], percentages as fractions [-];
fields that hold headings (``heading``, ``leave``) are in degrees [deg] counter-clockwise from east.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, Literal

from pydantic import Field, model_validator

from layoutgen.reading.kinds import Name, Number, RelativePath, Text, WholeNumber
from layoutgen.reading.quantities import FreeLength, PartValue, Quantity
from layoutgen.reading.records import (
    Angle,
    Coordinate,
    CornerAngle,
    Direction,
    FileRecord,
    Length,
    LengthOrZero,
    Point,
    Record,
    Resistance,
    Size,
)
from layoutgen.reading.routes import Route, RouteKind
from layoutgen.reading.source import SourceMap

__all__ = [
    "Board",
    "CircuitFile",
    "CoupledPair",
    "Cutout",
    "Design",
    "Footprint",
    "Ground",
    "Hint",
    "Hole",
    "Layout",
    "Line",
    "Pad",
    "Part",
    "PinCurrent",
    "Port",
    "Rating",
    "Substrate",
    "Tolerance",
]

Frequency = Annotated[float, Quantity("frequency")]
Current = Annotated[float, Quantity("current", "any")]
Impedance = Annotated[complex, Quantity("impedance")]
Net = Annotated[str, Name("a net's name", ("open",))]
PortNet = Annotated[str, Name("a net's name", ("gnd", "open"))]
PairNet = Annotated[str, Name("a net's name")]
Pin = Annotated[str, Name("a pin's name")]
Element = Annotated[str, Name("an element's name")]
DEFAULT_PORT_IMPEDANCE = "50 ohm"
"""Of an RF port whose impedance is left out: common practice, no source."""
PortName = Annotated[str, Name("a port's name")]
LineName = Annotated[str, Name("a line's name")]
CoupledPairName = Annotated[str, Name("a pair's name")]
PartName = Annotated[str, Name("a part's name")]
FootprintName = Annotated[str, Name("a footprint's name")]
DataPath = Annotated[str, RelativePath("a Touchstone file", " (.s1p, .s2p, ...)")]
RulesPath = Annotated[str, RelativePath("a shipped rule file's name, or a path", ', ending in ".toml"')]


class Design(Record):
    """``[design]``: title and frequencies."""

    title: Annotated[str, Text()] = Field(description="title, printed in the report and on the legend")
    frequency: Frequency = Field(description="design frequency, inside the band; angles refer to it [Hz]")
    band: tuple[Frequency, Frequency] = Field(description="lower and upper edge of the band [Hz]")
    sweep: tuple[Frequency, Frequency] | None = Field(
        default=None,
        description="range of the response; left out: the band widened by its own width on each side [Hz]",
    )
    points: Annotated[int, WholeNumber(2, 100_001)] = Field(
        default=401, description="frequencies of the sweep [-]"
    )
    revision: Annotated[str, Text()] | None = Field(
        default=None, description="revision, printed on the legend"
    )


class Substrate(Record):
    """``[substrate]``: the board's material."""

    relative_permittivity: Annotated[float, Number(1.0, 1e4)] = Field(description="the design value [-]")
    loss_tangent: Annotated[float, Number(0.0, 10.0)] = Field(description="dielectric loss tangent [-]")
    height: Length = Field(description="distance from the ground plane to the lines [m]")
    copper_thickness: Length = Field(description="copper with its plating [m]")
    conductivity: Annotated[float, Quantity("conductivity")] = Field(
        default=58e6, description="of the copper [S/m]"
    )
    copper_roughness: LengthOrZero = Field(default=0.0, description="rms roughness towards the substrate [m]")


class Hole(Record):
    """A drilled hole of the board or of a footprint."""

    at: Point = Field(description="centre x, y; board: from the south-west corner, footprint: its origin [m]")
    diameter: Length = Field(description="finished diameter [m]")
    plated: bool = Field(description="true: plated through")


class Board(Record):
    """``[board]``: rule file and outline."""

    rules: RulesPath = Field(
        description='name of a rule file shipped with the tool, or a relative path ending in ".toml"'
    )
    size: Size | None = Field(
        default=None, description="width, height; left out: the smallest board in 0.5 mm steps [m]"
    )
    margin: LengthOrZero | None = Field(
        default=None, description="free of copper at the edge; left out: copper.min_edge_distance [m]"
    )
    corner_radius: LengthOrZero = Field(default=0.0, description="of the outline [m]")
    mask_over_lines: bool = Field(default=False, description="false: RF lines are free of solder mask")
    holes: tuple[Hole, ...] = Field(default=(), description="mounting holes")


class Ground(Record):
    """``[ground]``: the pour beside the lines and its fence."""

    max_impedance_shift: Annotated[float, Quantity("fraction", below=1.0, below_text="100 %")] = Field(
        default=0.01,
        description="sets the pour's distance: there the impedance of a bare line moves by this [-]",
    )
    gap: LengthOrZero | None = Field(default=None, description="sets the pour's distance instead [m]")
    fence: bool = Field(default=True, description="true: rows of vias along the pour's edges")


class Port(Record):
    """``[ports.NAME]``: where a signal or a supply enters."""

    net: PortNet = Field(description="net at the port")
    kind: Literal["rf", "dc"] = Field(default="rf", description="signal or supply")
    impedance: Impedance | None = Field(
        default=None, description="rf: reference impedance; 50 ohm where left out [ohm]"
    )
    voltage: Annotated[float, Quantity("voltage", "any")] | None = Field(
        default=None, description="dc: supply voltage [V]"
    )
    edge: Literal["west", "east", "north", "south"] | None = Field(
        default=None, description="edge of the board; left out: free"
    )
    at: Coordinate | None = Field(default=None, description="along the edge from its west or south end [m]")
    to_edge: bool = Field(default=False, description="true: the copper runs to the profile")
    current: Current | None = Field(default=None, description="direct current drawn out at the port [A]")

    @model_validator(mode="before")
    @classmethod
    def _default_impedance(cls, table: Any) -> Any:
        """Give an RF port without an impedance the usual one: the file's form leaves it open."""
        if isinstance(table, Mapping) and table.get("kind", "rf") == "rf":
            return {"impedance": DEFAULT_PORT_IMPEDANCE, **table}
        return table


class Line(Record):
    """``[lines.NAME]``: an ideal transmission line of the schematic, or a radial stub."""

    nets: tuple[Net, ...] = Field(
        min_length=1, max_length=2, description="two nets; one: the far end is open"
    )
    impedance: Resistance | None = Field(
        default=None, description="quasi-static impedance of the drawn cross-section [ohm]"
    )
    width: Length | None = Field(default=None, description="finished width, instead of the impedance [m]")
    angle: Angle | None = Field(default=None, description="electrical length at the design frequency [rad]")
    length: Annotated[float | Literal["free"], FreeLength()] | None = Field(
        default=None, description='centre-line between the node points; "free": the placer chooses [m]'
    )
    shape: Literal["radial"] | None = Field(default=None, description="radial stub")
    sector: CornerAngle | None = Field(default=None, description="radial: opening angle [rad]")
    radius: Length | None = Field(
        default=None, description="radial: outer radius; left out: short at the design frequency [m]"
    )
    inner_radius: Length | None = Field(
        default=None, description="radial: inner radius; left out: from the host line's width [m]"
    )
    kind: Literal["microstrip", "grounded_coplanar"] = Field(
        default="microstrip", description="cross-section"
    )
    gap: LengthOrZero | None = Field(default=None, description="grounded_coplanar: strip to pour [m]")
    current: Current | None = Field(
        default=None, description="direct current, overrides the computed one [A]"
    )


class CoupledPair(Record):
    """``[coupled.NAME]``: edge-coupled pair; first line a1-a2, second b1-b2, a1 beside b1."""

    nets: tuple[PairNet, PairNet, PairNet, PairNet] = Field(
        description='a1, a2, b1, b2; "open" for an open end'
    )
    even_impedance: Resistance | None = Field(
        default=None, description="even-mode impedance of one line [ohm]"
    )
    odd_impedance: Resistance | None = Field(default=None, description="odd-mode impedance of one line [ohm]")
    width: Length | None = Field(
        default=None, description="of each strip, with gap instead of the impedances [m]"
    )
    gap: LengthOrZero | None = Field(default=None, description="strip to strip [m]")
    angle: Angle | None = Field(
        default=None, description="mean of the modes' electrical lengths at the design frequency [rad]"
    )
    length: Length | None = Field(default=None, description="centre-line, instead of the angle [m]")


class Rating(Record):
    """What a part survives; what is left out is not checked."""

    voltage: Annotated[float, Quantity("voltage")] | None = Field(
        default=None, description="largest voltage [V]"
    )
    current: Annotated[float, Quantity("current")] | None = Field(
        default=None, description="largest current [A]"
    )
    power: Annotated[float, Quantity("power")] | None = Field(
        default=None, description="largest dissipation [W]"
    )


class PinCurrent(Record):
    """A direct current that a part draws from one pin to another."""

    from_: Pin = Field(alias="from", description="pin that the current enters")
    to: Pin = Field(description="pin that it leaves")
    current: Current = Field(description="direct current [A]")


class Part(Record):
    """``[parts.NAME]``: a chip of two pads, or a part with a footprint."""

    kind: Literal["resistor", "capacitor", "inductor", "transistor", "other"] = Field(
        description="what it is"
    )
    nets: tuple[Net, Net] | None = Field(default=None, description="two-pad parts: nets of the pads in order")
    pins: Mapping[Pin, Net] | None = Field(default=None, description="pin -> net")
    value: Annotated[float, PartValue()] | None = Field(
        default=None, description="resistance [ohm], capacitance [F] or inductance [H] by kind"
    )
    case: Literal["0201", "0402", "0603", "0805", "1206", "1210", "2010", "2512"] | None = Field(
        default=None, description="inch code of a chip"
    )
    footprint: FootprintName | None = Field(default=None, description="name of a footprint of the file")
    series_resistance: Annotated[float, Quantity("resistance", "not negative")] = Field(
        default=0.0, description="in series with the value [ohm]"
    )
    series_inductance: Annotated[float, Quantity("inductance", "not negative")] = Field(
        default=0.0, description="in series with the value [H]"
    )
    data: DataPath | None = Field(
        default=None, description="Touchstone file; port n at nets[n] or data_ports[n]"
    )
    planes: Literal["pad_outer", "pad_inner"] = Field(
        default="pad_outer", description="where the data was measured"
    )
    rating: Rating | None = Field(default=None, description="what the part survives")
    dc: tuple[PinCurrent, ...] = Field(default=(), description="direct currents between pins")
    terminations: Mapping[Pin, Impedance] = Field(
        default_factory=dict, description="pin -> the device's own impedance seen from the board [ohm]"
    )
    data_ports: tuple[Pin, ...] | None = Field(default=None, description="pins of the data's ports in order")


class Cutout(Record):
    """The rectangular cut-out under a flange."""

    size: Size = Field(description="along x, along y at heading east [m]")
    at: Point = Field(description="middle, from the footprint's origin [m]")


class Pad(Record):
    """One pad of a footprint, as drawn at heading east."""

    at: Point | None = Field(
        default=None, description="middle, from the footprint's origin; left out: flange pin [m]"
    )
    size: Size | None = Field(default=None, description="along x, along y; left out: flange pin [m]")
    heading: Direction | None = Field(
        default=None, description="in which a line leaves; left out: ground pads [deg]"
    )
    ground: Literal["flange", "vias"] | None = Field(
        default=None,
        description="flange: meets the carrier under the cut-out; vias: thermal vias under the pad",
    )
    thermal: Annotated[float, Quantity("thermal_resistance")] | None = Field(
        default=None, description="largest resistance of all vias under the pad together [K/W]"
    )


class Footprint(Record):
    """``[footprints.NAME]``: pads, holes and cut-out of a part; turned when placed, never mirrored."""

    cutout: Cutout | None = Field(default=None, description="cut-out under a flange")
    holes: tuple[Hole, ...] = Field(default=(), description="holes, from the footprint's origin")
    pads: Mapping[Pin, Pad] = Field(min_length=1, description="pin -> pad")


class Hint(Record):
    """``[layout.hints.NAME]``: binding wish for one line, pair or part."""

    leave: Direction | None = Field(
        default=None, description="lines and pairs: heading at the first net [deg]"
    )
    route: Annotated[Route, RouteKind()] | None = Field(
        default=None, description="lines: lengths and turns in alternation"
    )
    at: Point | None = Field(default=None, description="parts: place, from the board's south-west corner [m]")
    heading: Direction | None = Field(default=None, description="parts: how the part is turned [deg]")


class Layout(Record):
    """``[layout]``: hints, all optional; a hint given is binding."""

    spine: tuple[Element, ...] | None = Field(
        default=None, min_length=2, description="the path drawn straight through"
    )
    hints: Mapping[Element, Hint] = Field(default_factory=dict, description="element -> hint")


class Tolerance(Record):
    """``[tolerance]``: plus-minus limits; 0 where left out."""

    relative_permittivity: Annotated[float, Number(0.0, 1e4)] = Field(
        default=0.0, description="of the substrate [-]"
    )
    height: LengthOrZero = Field(default=0.0, description="of the substrate [m]")
    width: LengthOrZero = Field(default=0.0, description="of etched copper [m]")
    value: Annotated[float, Quantity("fraction", "not negative", 1.0, "100 %")] = Field(
        default=0.0, description="of the parts' values [-]"
    )


class CircuitFile(FileRecord):
    """A circuit file: what was designed."""

    format: Literal[1] = Field(description="version of the file's form")
    design: Design = Field(description="title and frequencies")
    substrate: Substrate = Field(description="the board's material")
    board: Board = Field(description="rule file and outline")
    ground: Ground | None = Field(default=None, description="pour and fence; left out: neither")
    ports: Mapping[PortName, Port] = Field(default_factory=dict, description="name -> port, in file order")
    lines: Mapping[LineName, Line] = Field(default_factory=dict, description="name -> line, in file order")
    coupled: Mapping[CoupledPairName, CoupledPair] = Field(
        default_factory=dict, description="name -> pair, in file order"
    )
    parts: Mapping[PartName, Part] = Field(default_factory=dict, description="name -> part, in file order")
    footprints: Mapping[FootprintName, Footprint] = Field(
        default_factory=dict, description="name -> footprint"
    )
    layout: Layout = Field(default=Layout(), description="hints")
    tolerance: Tolerance | None = Field(
        default=None, description="plus-minus limits; left out: no tolerance analysis"
    )

    @property
    def source(self) -> SourceMap:
        """Where each key of the file was written; its ``location(key_path)`` gives the line."""
        return self.source_map
