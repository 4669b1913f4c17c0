"""Everything the search needs, taken once from the sized circuit and turned into whole nanometres."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

from layoutgen.circuit import End, EndKind
from layoutgen.circuit.queries import elements, ends_of
from layoutgen.origin import Origin
from layoutgen.placement.bodies import PartBody, part_body
from layoutgen.reading import RuleFile
from layoutgen.sizing import SizedCircuit
from layoutgen.units import to_nm

__all__ = [
    "DEFAULT_GAP",
    "GROUND",
    "Limits",
    "Model",
    "copper_edge",
    "hole_land",
    "line_heights",
    "other_heights",
    "strip_owner",
]

GROUND = "gnd"
DEFAULT_GAP = 150_000
"""Between copper of two nets [nm], where no rule says so: drawn, not checked; common practice, no source."""
_DEFAULT_SPACING_HEIGHTS = 3.0  # used to place when the rule file is silent; common practice, no source
_NODE_HEIGHTS = 3.0  # around a shared node [substrate heights]; as the check of line spacing has it
_NEARER = (0.95, 0.8, 0.6, 0.4)  # shares of the spacing rule at which lines are laid where it cannot be kept
_RING_ROOM = 100_000  # [nm] more than a row of vias must have
_DEFAULT_EDGE = 300_000  # [nm], copper to profile and cut-outs; common practice, no source
_HOLE_LAND = 400_000  # [nm], copper around a plated hole, for the head of a screw; common practice, no source
_DEFAULT_GROUND_VIAS = 2  # per ground pad; common practice, no source


@dataclass(frozen=True, slots=True)
class Limits:
    """Distances the placement keeps [nm], from the rule file where it has them, else as is common practice.

    ``spacing`` between lines not meant to couple, ``gap`` between copper of two nets, ``edge`` from copper
    to profile and cut-outs, ``hole`` from copper to an unplated hole's wall, ``hole_edge`` from a hole's wall
    to the profile, ``hole_land`` how far a plated hole's land reaches from its wall, ``margin`` from copper
    to the profile where no ground ring is wanted, ``neck`` the least width.
    """

    height: int
    spacing: int
    gap: int
    edge: int
    hole: int
    hole_edge: int
    hole_land: int
    margin: int
    neck: int
    expansion: int
    drill: int
    land: int
    pitch: int
    ground_vias: int

    @classmethod
    def of(cls, sized: SizedCircuit) -> Limits:
        """Read the limits of a circuit's rule file and board."""
        file, rules = sized.circuit.file, sized.circuit.rules
        height = to_nm(file.substrate.height)
        copper, holes, vias = rules.copper, rules.holes, rules.vias
        gap = DEFAULT_GAP if copper is None or copper.min_gap is None else to_nm(copper.min_gap)
        edge = copper_edge(rules)
        land, drill = to_nm(vias.diameter), to_nm(vias.drill)
        web = _nm(holes.min_web)
        return cls(
            height=height,
            spacing=max(math.ceil(line_heights(rules) * height), gap),
            gap=gap,
            edge=edge,
            hole=_nm(holes.min_copper_distance),
            hole_edge=_nm(holes.min_edge_distance),
            hole_land=hole_land(rules),
            margin=max(edge, _nm(file.board.margin)),
            neck=_nm(None if copper is None else copper.min_width),
            expansion=_nm(None if rules.mask is None else rules.mask.expansion),
            drill=drill,
            land=land,
            pitch=max(_nm(vias.min_pitch), drill + web, land),
            ground_vias=vias.per_ground_pad or _DEFAULT_GROUND_VIAS,
        )

    @property
    def near(self) -> int:
        """How far from a shared node [nm] lines are not compared with what they meet there.

        Never less than the check passes over, so that a looser spacing rule is no harder to keep.
        """
        return max(self.spacing, math.ceil(_NODE_HEIGHTS * self.height))


def copper_edge(rules: RuleFile) -> int:
    """Return how far copper is kept from the profile and from cut-outs [nm], also where no rule says so.

    Ports end and lines and pours are cut back at this one distance.
    """
    asked = rules.copper.min_edge_distance
    return _DEFAULT_EDGE if asked is None else to_nm(asked)


def line_heights(rules: RuleFile) -> float:
    """Return how far lines not meant to couple keep apart [substrate heights], also where no rule says so."""
    asked = None if rules.spacing is None else rules.spacing.min_line_heights
    return _DEFAULT_SPACING_HEIGHTS if asked is None else asked


def other_heights(rules: RuleFile) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return distances of lines [substrate heights] to try where none is found at the rule's: wider, nearer.

    Wider ones keep the rule as well; nearer ones, the widest first, are empty where that is an error.
    """
    heights = line_heights(rules)
    wider = (_DEFAULT_SPACING_HEIGHTS,) if heights < _DEFAULT_SPACING_HEIGHTS else ()
    is_error = rules.severity.get("spacing.min_line_heights") == "error"
    return wider, () if is_error or not heights else tuple(share * heights for share in _NEARER)


def hole_land(rules: RuleFile) -> int:
    """Return how far the land of a plated hole reaches beyond its wall [nm] (common practice, no source)."""
    return max(_HOLE_LAND, _nm(rules.holes.min_annular_ring))


def _nm(value: float | None) -> int:
    """Return a rule's length [nm], 0 where the rule is absent."""
    return 0 if value is None else to_nm(value)


class Model:
    """The sized circuit as the search sees it: sizes in nanometres and questions answered once."""

    def __init__(self, sized: SizedCircuit) -> None:
        """Take the sized circuit over."""
        self.sized = sized
        self.circuit = sized.circuit
        self.file = sized.circuit.file
        self.limits = Limits.of(sized)
        self.has_ground = self.file.ground is not None
        self.widths = {name: to_nm(line.width) for name, line in sized.lines.items()}
        self.widths |= {name: to_nm(pair.width) for name, pair in sized.pairs.items()}
        self.bodies: dict[str, PartBody] = {
            name: part_body(lands, self.limits) for name, lands in sized.lands.items()
        }
        self.ends = {name: ends_of(self.file, name) for name in elements(self.file)}
        self._nets_of = {(end.element, end.index): net for found in self.ends.values() for end, net in found}
        self.owner_nets = self._owner_nets()
        self._reaches: dict[str, int] = {}

    def _owner_nets(self) -> dict[str, frozenset[str]]:
        """Return the nets (ground left out) of every element that lays copper."""
        nets: dict[str, set[str]] = {}
        for net in self.circuit.nets.values():
            if net.name == GROUND:
                continue
            for end in net.ends:
                nets.setdefault(end.element, set()).add(net.name)
            nets[strip_owner(net.name)] = {net.name}
        return {name: frozenset(found) for name, found in nets.items()}

    def net_of(self, end: End) -> str:
        """Return the net of an end."""
        return self._nets_of[end.element, end.index]

    def far_end(self, end: End) -> tuple[End, str] | None:
        """Return the first other end of an element with its net; None where there is no other."""
        return next((item for item in self.ends[end.element] if item[0].index != end.index), None)

    def pour_gap(self, name: str) -> int:
        """Return the distance [nm] that ground copper keeps from a line, pair or radial stub."""
        sized = self.sized
        record = sized.lines.get(name) or sized.pairs.get(name) or sized.radials.get(name)
        gap = sized.default_pour_gap if record is None else record.pour_gap
        return 2 * self.limits.height if math.isinf(gap) else to_nm(gap)

    @cached_property
    def default_gap(self) -> int:
        """The distance [nm] that ground copper keeps from RF copper that is no line."""
        gap = self.sized.default_pour_gap
        return 2 * self.limits.height if math.isinf(gap) else to_nm(gap)

    @cached_property
    def ground_ring(self) -> int:
        """Width [nm] wanted for the ground between the outermost clearance and the board's margin.

        It holds a row of vias, also where holes keep farther from the profile than copper does.
        """
        limits = self.limits
        if not self.has_ground:
            return 0
        beyond = limits.hole_edge + limits.drill // 2 + limits.land // 2 - limits.margin
        return max(limits.land + 2 * limits.neck, beyond) + _RING_ROOM

    def reach_at(self, net: str) -> int:
        """Return how far [nm] a junction's own copper reaches from its node: half widths and pads."""
        if net not in self._reaches:
            self._reaches[net] = self._reach_at(net)
        return self._reaches[net]

    def _reach_at(self, net: str) -> int:
        reach = 0
        for end in self.circuit.nets[net].ends:
            if end.kind is EndKind.PAD:
                land = self.bodies[end.element].land_at(end)
                reach = max(reach, land.along, land.across // 2)
            elif end.element in self.widths:
                reach = max(reach, self.widths[end.element] // 2)
        return reach

    def origin(self, element: str) -> Origin:
        """Return where an element stands in the circuit file."""
        for table in ("lines", "coupled", "parts", "ports"):
            if element in getattr(self.file, table):
                return Origin(element, self.file.location(f"{table}.{element}"))
        return Origin(element)


def strip_owner(net: str) -> str:
    """Return the name under which a net's common strip is known: it can be no element's name."""
    return f"strip:{net}"
