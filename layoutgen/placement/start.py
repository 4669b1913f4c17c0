"""Where the walk begins: the first port on its edge, and what is known of the board from the start."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace

from layoutgen.circuit import End, EndKind
from layoutgen.placement.clearance import Kind, Obstacle, Obstacles
from layoutgen.placement.frame import Pose, unit
from layoutgen.placement.kit import root_edge
from layoutgen.placement.lay import Layer
from layoutgen.placement.model import Model
from layoutgen.placement.state import EDGES, Bounds, Growth, LaidPort, State, nothing_laid
from layoutgen.placement.tour import Tour
from layoutgen.units import to_nm

__all__ = ["first_states", "join_root"]

_MM = 1_000_000
_GUESSES = (5, 8, 11, 14, 18, 22, 27, 33, 40, 50, 65, 80)
"""Distances [mm] of the straight path from the board's side that are tried where holes fix the frame."""


def first_states(
    model: Model, tour: Tour, layer: Layer, margins: Mapping[Kind, int], *, sized_board: bool = True
) -> Iterator[State]:
    """Yield the states to start from: one, or several guesses where the board's frame must be known."""
    bounds = _given_size(model) if sized_board else Bounds()
    root = tour.roots[0]
    if root.kind is not EndKind.PORT:
        yield _begin(model, tour, layer, margins, root, Pose(0, 0, 0.0), bounds)
        return
    port = model.file.ports[root.element]
    edge = root_edge(model, root.element)
    pose = Pose(0, 0, (EDGES[edge] + 180.0) % 360.0)
    inset = 0 if port.to_edge else model.limits.edge
    ux, uy = unit(EDGES[edge])
    side = "south" if ux else "west"
    settled = bounds.fixed(edge, (ux + uy) * inset)
    if port.at is not None:
        yield _begin(
            model,
            tour,
            layer,
            margins,
            root,
            pose,
            settled_at(settled if _needs_frame(model) else bounds, side, -to_nm(port.at)),
        )
        return
    if _needs_frame(model):
        for guess in _guesses(bounds, side):
            yield _begin(model, tour, layer, margins, root, pose, settled_at(settled, side, -guess))
        return
    yield _begin(model, tour, layer, margins, root, pose, bounds)


def settled_at(bounds: Bounds, edge: str, value: float) -> Bounds:
    """Return the bounds with one edge settled, unless it is already."""
    return bounds if bounds.known(edge) else bounds.fixed(edge, value)


def join_root(
    model: Model,
    tour: Tour,
    layer: Layer,
    margins: Mapping[Kind, int],
    state: State,
    root: End,
    shift: int,
) -> State:
    """Return a finished state with the root of a further, separate tree put beside it.

    Args:
        model: The circuit.
        tour: The walk.
        layer: Lays things.
        margins: How far inside the profile each kind stays [nm].
        state: All trees so far, complete.
        root: First end of the next tree.
        shift: How far beyond the extent the new straight path runs [nm]; negative: on the other side.
    """
    edge = root_edge(model, root.element) if root.kind is EndKind.PORT else "west"
    heading = (EDGES[edge] + 180.0) % 360.0
    x0, y0, x1, y1 = state.extent
    placed = [port for port in state.ports.values() if port.edge == edge]
    if edge in ("east", "west"):
        x = placed[0].point[0] if placed else round(x0 if edge == "west" else x1)
        y = round(y1 + shift if shift > 0 else y0 + shift)
    else:
        y = placed[0].point[1] if placed else round(y0 if edge == "south" else y1)
        x = round(x1 + shift if shift > 0 else x0 + shift)
    growth = Growth(state=state, bounds=state.bounds)
    _lay_root(model, tour, layer, growth, root, Pose(x, y, heading))
    return growth.applied(growth.extent(margins), state.cost)


def _given_size(model: Model) -> Bounds:
    size = model.file.board.size
    return Bounds() if size is None else Bounds(width=to_nm(size[0]), height=to_nm(size[1]))


def _needs_frame(model: Model) -> bool:
    """True when something has a place on the board from the start: holes, or ports at given places."""
    ports = list(model.file.ports.values())
    return bool(model.file.board.holes) or any(port.at is not None for port in ports[1:])


def _guesses(bounds: Bounds, side: str) -> list[int]:
    """Return distances [nm] of the straight path from a side: the middle of a given board first."""
    span = bounds.height if side == "south" else bounds.width
    guesses = [g * _MM for g in _GUESSES]
    if span == float("inf"):
        return guesses
    middle = round(span / 2)
    return sorted({middle, *(g for g in guesses if g < span)}, key=lambda g: abs(g - middle))


def _begin(
    model: Model, tour: Tour, layer: Layer, margins: Mapping[Kind, int], root: End, pose: Pose, bounds: Bounds
) -> State:
    holes = _board_holes(model, bounds)
    empty = replace(
        nothing_laid(),
        obstacles=Obstacles.empty().plus(holes),
        bounds=bounds,
        extent=(pose.x, pose.y, pose.x, pose.y),
    )
    growth = Growth(state=empty, bounds=bounds)
    _lay_root(model, tour, layer, growth, root, pose)
    growth.state = replace(empty, extent=_holes_extent(model, empty, holes))
    return growth.applied(growth.extent(margins), 0.0)


def _board_holes(model: Model, bounds: Bounds) -> list[Obstacle]:
    if not (bounds.known("west") and bounds.known("south")):
        return []
    out = []
    for hole in model.file.board.holes:
        x, y = round(bounds.x0) + to_nm(hole.at[0]), round(bounds.y0) + to_nm(hole.at[1])
        r = to_nm(hole.diameter / 2) + 1
        out.append(Obstacle((x - r, y - r, x + r, y + r), Kind.HOLE, "board"))
        if hole.plated:
            r += model.limits.hole_land
            out.append(Obstacle((x - r, y - r, x + r, y + r), Kind.GROUND, "board", corridor=True))
    return out


def _holes_extent(model: Model, state: State, holes: list[Obstacle]) -> tuple[float, float, float, float]:
    x0, y0, x1, y1 = state.extent
    for hole in (hole for hole in holes if hole.kind is Kind.HOLE):
        edge = model.limits.hole_edge
        x0, y0 = min(x0, hole.box[0] - edge), min(y0, hole.box[1] - edge)
        x1, y1 = max(x1, hole.box[2] + edge), max(y1, hole.box[3] + edge)
    return x0, y0, x1, y1


def _lay_root(model: Model, tour: Tour, layer: Layer, growth: Growth, root: End, pose: Pose) -> None:
    """Lay the first port and leave what follows pending; or begin at an element where there is no port."""
    net = next(net for end, net in model.ends[root.element] if end.index == root.index)
    hub = tour.hubs[net]
    if root.kind is not EndKind.PORT:
        layer.begin_without_port(growth, root, pose)
        return
    edge = root_edge(model, root.element)
    movable = not growth.bounds.known(edge) and layer.ports.root_can_move(hub)
    if not movable and not growth.bounds.known(edge):
        inset = 0 if model.file.ports[root.element].to_edge else model.limits.edge
        ux, uy = unit(EDGES[edge])
        growth.bounds = growth.bounds.fixed(edge, (pose.x if ux else pose.y) + (ux + uy) * inset)
    carrier, width = layer.leave_port(growth, hub, pose)
    growth.ports[root.element] = LaidPort(root.element, pose.point, edge, width, carrier, movable)
