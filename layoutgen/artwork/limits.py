"""The numbers that drawing needs, in whole nanometres: from the rule file, the substrate and ``[ground]``."""

from __future__ import annotations

import math
from dataclasses import dataclass

from layoutgen.formulas.constants import C0
from layoutgen.placement import DEFAULT_GAP, copper_edge, hole_land
from layoutgen.reading import FenceRules, LegendRules, MaskRules
from layoutgen.sizing import SizedCircuit
from layoutgen.units import to_nm

__all__ = ["Limits", "limits_of"]

_STITCH_WAVELENGTHS = 0.1
_STITCH_MOST_NM = 5_000_000
_FENCE_WAVELENGTHS = 0.05
_ROOM_NM = 100_000

# What is drawn by where the rule file is silent: common practice, no source. None of it is checked.
_MIN_WIDTH = 150_000
_ISLAND_NM2, _CORNER_DEG = 500_000.0 * 1e6, 85.0
_HOLE_WEB, _HOLE_COPPER, _HOLE_EDGE = 300_000, 200_000, 500_000
_MASK_EXPANSION, _MASK_WEB = 50_000, 100_000
_LEGEND_LINE, _LEGEND_DISTANCE = 150_000, 150_000


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """Sizes for drawing [nm]; ``island`` is an area [nm^2].

    ``edge`` is copper to profile and cut-outs, ``margin`` that of pour and plane to the profile. ``row`` is
    how far inside the pour's edge a fence axis stands: the pour is nowhere narrower than twice that, so each
    edge of it can be fenced. ``fence_pitch`` and ``stitch_pitch`` are the largest distances between axes
    along edges that face lines, and elsewhere. ``pour`` and ``fence`` say whether there is any.
    """

    pour: bool
    fence: bool
    min_width: int
    min_gap: int
    edge: int
    margin: int
    island: float
    undercut: int
    hole_web: int
    hole_copper: int
    hole_edge: int
    hole_land: int
    via_drill: int
    via_land: int
    via_pitch: int
    row: int
    fence_reach: int
    fence_pitch: int
    stitch_pitch: int
    mask_expansion: int
    mask_web: int
    legend_line: int
    legend_distance: int
    height: int
    default_gap: int

    @property
    def neck(self) -> float:
        """Half of the width below which ground copper is cut through [nm]: the least width with some room."""
        return 0.55 * self.min_width


def limits_of(sized: SizedCircuit) -> Limits:
    """Return the numbers of a circuit's artwork, with this project's habits where a rule is absent."""
    file, rules = sized.circuit.file, sized.circuit.rules
    copper, holes, vias = rules.copper, rules.holes, rules.vias
    fence, mask, legend = (
        rules.fence or FenceRules.model_construct(),
        rules.mask or MaskRules.model_construct(),
        rules.legend or LegendRules.model_construct(),
    )
    edge = copper_edge(rules)
    margin = edge if file.board.margin is None else max(edge, to_nm(file.board.margin))
    drill, land = to_nm(vias.drill), to_nm(vias.diameter)
    web = _nm(holes.min_web, _HOLE_WEB)
    pitch = max(_nm(vias.min_pitch, 0), drill + web)
    slab = C0 / (file.design.band[1] * math.sqrt(file.substrate.relative_permittivity))
    reach = _nm(fence.max_edge_distance, land // 2 + 2 * _ROOM_NM)
    min_width = _nm(copper.min_width, _MIN_WIDTH)
    return Limits(
        pour=file.ground is not None,
        fence=file.ground is not None and file.ground.fence,
        min_width=min_width,
        min_gap=_nm(copper.min_gap, DEFAULT_GAP),
        edge=edge,
        margin=margin,
        island=_ISLAND_NM2 if copper.min_island_area is None else copper.min_island_area * 1e18,
        undercut=_nm(copper.undercut, 0),
        hole_web=web,
        hole_copper=_nm(holes.min_copper_distance, _HOLE_COPPER),
        hole_edge=_nm(holes.min_edge_distance, _HOLE_EDGE),
        hole_land=hole_land(rules),
        via_drill=drill,
        via_land=land,
        via_pitch=pitch,
        row=max(min_width, min(land // 2 + _ROOM_NM, max(math.floor(reach / math.sqrt(2.0)), land // 2 + 1))),
        fence_reach=reach,
        fence_pitch=max(pitch, _fence_pitch(sized, slab)),
        stitch_pitch=max(pitch, min(to_nm(_STITCH_WAVELENGTHS * slab), _STITCH_MOST_NM)),
        mask_expansion=_nm(mask.expansion, _MASK_EXPANSION),
        mask_web=_nm(mask.min_web, _MASK_WEB),
        legend_line=_nm(legend.min_line, _LEGEND_LINE),
        legend_distance=_nm(legend.min_distance, _LEGEND_DISTANCE),
        height=to_nm(file.substrate.height),
        default_gap=_finite_nm(sized.default_pour_gap),
    )


def _fence_pitch(sized: SizedCircuit, slab: float) -> int:
    """Return the largest fence pitch [nm]: the smaller of the rules' two, a twentieth wave without them.

    ``slab`` is the wavelength in the substrate at the band's upper edge [m].
    """
    fence = sized.circuit.rules.fence or FenceRules.model_construct()
    by_wave = None if fence.max_pitch_wavelengths is None else fence.max_pitch_wavelengths * slab
    given = [limit for limit in (fence.max_pitch, by_wave) if limit is not None]
    return math.floor(min(given, default=_FENCE_WAVELENGTHS * slab) * 1e9)


def _nm(metres: float | None, habit: int) -> int:
    """Return a rule's length [nm], or the habit where the rule is absent."""
    return habit if metres is None else to_nm(metres)


def _finite_nm(metres: float) -> int:
    """Return a length [nm], 0 for an infinite one (no pour)."""
    return to_nm(metres) if math.isfinite(metres) else 0
