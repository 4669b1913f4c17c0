"""How near a drawing comes to its schematic in the band, with and without its response correction."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from layoutgen.artwork import Artwork
from layoutgen.response.copper import Copper
from layoutgen.response.drawn import drawn_network
from layoutgen.response.fit import largest
from layoutgen.response.holders import holders, reachable
from layoutgen.response.match import Match
from layoutgen.response.records import CLOSE_ENOUGH, Correction
from layoutgen.response.solve import solve
from layoutgen.response.touchstone import PartData

__all__ = ["correction_figures"]


def correction_figures(
    artwork: Artwork, data: Mapping[str, PartData], copper: Copper | None = None
) -> Correction:
    """Return what the corrections of a drawing have done, and what holds the rest.

    Args:
        artwork: The drawing.
        data: Measured data by part.
        copper: The artwork's copper when it is already traced.
    """
    match = Match(artwork, data, copper)
    here, undone = match.difference(np.array([0.0 * match.total, -match.total]))
    after, before = largest(here), largest(undone)
    lossy = solve(drawn_network(artwork, match.frequencies, data, copper=match.copper))
    short = after > CLOSE_ENOUGH
    best = min(after, reachable(match)) if short else after
    return Correction(
        before=before,
        after=after,
        unallowed=largest(match.unallowed()),
        losses=largest(lossy - match.wanted - here),
        angles=dict(artwork.placement.sized.corrections),
        reachable=best,
        holders=holders(match, best) if best > CLOSE_ENOUGH else (),
    )
