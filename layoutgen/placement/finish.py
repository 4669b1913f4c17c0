"""From the best state to the placement: the board's frame, ports moved to their edges, records."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace

from layoutgen.geometry import Point, Ring, path_length, turn_degrees
from layoutgen.origin import Origin
from layoutgen.placement.bodies import BodyLand
from layoutgen.placement.budgets import LineLengths
from layoutgen.placement.frame import Box, Pose, ring_to_world, to_world
from layoutgen.placement.kit import PIN_TOLERANCE
from layoutgen.placement.model import Model, strip_owner
from layoutgen.placement.records import (
    Bend,
    Choices,
    PlacedHole,
    PlacedLine,
    PlacedPad,
    PlacedPair,
    PlacedPart,
    PlacedPort,
    PlacedRadial,
    PlacedVia,
    Placement,
    Strip,
)
from layoutgen.placement.state import BOARD_STEP, EDGES, LaidLine, LaidPair, LaidPort, LaidStrip, State
from layoutgen.units import to_nm

__all__ = ["Frame", "finish", "frame_of"]


@dataclass(frozen=True, slots=True)
class Frame:
    """The board in the search's coordinates: south-west corner and size [nm]."""

    x0: int
    y0: int
    width: int
    height: int

    def moved(self, point: Point) -> Point:
        """Return a point of the search in the board's coordinates."""
        return point[0] - self.x0, point[1] - self.y0


def frame_of(state: State) -> Frame:
    """Return the smallest board in whole steps that holds a state, or the given one around it."""
    bounds, extent = state.bounds, state.extent
    x0, width = _axis(bounds.x0, bounds.x1, extent[0], extent[2], bounds.width)
    y0, height = _axis(bounds.y0, bounds.y1, extent[1], extent[3], bounds.height)
    return Frame(x0, y0, width, height)


def _axis(low: float, high: float, least: float, most: float, size: float) -> tuple[int, int]:
    """Return origin and size [nm] of one axis from what is known and what is needed."""
    start = low if math.isfinite(low) else least
    stop = high if math.isfinite(high) else most
    if math.isfinite(size):
        if math.isfinite(low):
            return round(low), round(size)
        if math.isfinite(high):
            return round(high - size), round(size)
        return round(start - (size - (stop - start)) / 2), round(size)
    need = math.ceil((stop - start) / BOARD_STEP) * BOARD_STEP
    if math.isfinite(low):
        return round(low), need
    if math.isfinite(high):
        return round(high - need), need
    return round(start - (need - (stop - start)) / 2), need


def finish(model: Model, lengths: LineLengths, state: State, effort: int = 0) -> Placement:
    """Return the placement of a finished state; ``effort`` is the one that found it."""
    frame = frame_of(state)
    maker = _Maker(model, lengths, state, frame)
    lines = {name: maker.line(state.lines[name]) for name in model.sized.lines if name in state.lines}
    ports = {name: maker.port(state.ports[name], lines) for name in model.file.ports if name in state.ports}
    parts = {name: maker.part(name, state.parts[name]) for name in model.file.parts if name in state.parts}
    return Placement(
        sized=model.sized,
        width=frame.width,
        height=frame.height,
        corner_radius=to_nm(model.file.board.corner_radius),
        lines=lines,
        pairs={name: maker.pair(state.pairs[name]) for name in model.sized.pairs if name in state.pairs},
        radials={
            name: maker.radial(name, state.radials[name].pose)
            for name in model.sized.radials
            if name in state.radials
        },
        parts=parts,
        ports=ports,
        strips=maker.strips(),
        vias=maker.vias(),
        holes=maker.holes(),
        ground_shapes=maker.grounds(),
        notes=maker.notes(),
        choices=Choices(effort, state.start, state.ways),
    )


@dataclass(slots=True)
class _Maker:
    """Turns laid things into placed ones, in the board's coordinates."""

    model: Model
    lengths: LineLengths
    state: State
    frame: Frame

    def pose(self, pose: Pose) -> Pose:
        x, y = self.frame.moved(pose.point)
        return Pose(x, y, pose.heading)

    def line(self, laid: LaidLine) -> PlacedLine:
        path = [self.frame.moved(point) for point in laid.points]
        if laid.open_edge is not None:
            path[-1] = self._on_edge(path[-1], laid.open_edge, self._inset(laid.name))
        if laid.root_edge is not None:
            path[0] = self._on_edge(path[0], laid.root_edge, self._inset(laid.name))
        word = laid.route.word
        if laid.start == 1:
            path.reverse()
            word = tuple(-turn for turn in reversed(word))
        mitres = self.lengths.turns(laid.name, word)
        centre_line = path_length(path)
        angle, budget = self.lengths.budget(laid.name, word, centre_line, self.state.roles)
        return PlacedLine(
            name=laid.name,
            nets=self.model.file.lines[laid.name].nets,
            width=self.model.widths[laid.name],
            path=tuple(path),
            bends=tuple(
                Bend(i + 1, round(turn_degrees(path[i], path[i + 1], path[i + 2]), 6), mitre)
                for i, (_, mitre) in enumerate(mitres)
            ),
            centre_line=centre_line,
            budget=budget,
            angle=angle,
            origin=self.model.origin(laid.name),
        )

    def _inset(self, element: str) -> int:
        """Return how far short of the profile a port's copper ends [nm]."""
        nets = {net for _, net in self.model.ends[element]}
        to_edge = any(p.to_edge for p in self.model.file.ports.values() if p.net in nets)
        return 0 if to_edge else self.model.limits.edge

    def _on_edge(self, point: Point, edge: str, inset: int) -> Point:
        x, y = point
        return {
            "west": (inset, y),
            "east": (self.frame.width - inset, y),
            "south": (x, inset),
            "north": (x, self.frame.height - inset),
        }[edge]

    def port(self, laid: LaidPort, lines: Mapping[str, PlacedLine]) -> PlacedPort:
        to_edge = self.model.file.ports[laid.name].to_edge
        inset = 0 if to_edge else self.model.limits.edge
        x, y = self._on_edge(self.frame.moved(laid.point), laid.edge, inset)
        return PlacedPort(
            name=laid.name,
            net=self.model.file.ports[laid.name].net,
            x=x,
            y=y,
            heading=(EDGES[laid.edge] + 180.0) % 360.0,
            edge=laid.edge,
            width=laid.width,
            to_edge=to_edge,
            origin=self.model.origin(laid.name),
        )

    def part(self, name: str, at: Pose) -> PlacedPart:
        body, pose = self.model.bodies[name], self.pose(at)
        return PlacedPart(
            name=name,
            x=pose.x,
            y=pose.y,
            heading=pose.heading,
            pads=tuple(self._pad(land, pose) for land in body.lands),
            outline=ring_to_world(pose, body.outline),
            courtyard=ring_to_world(pose, body.courtyard),
            cutout=None if body.cutout is None else ring_to_world(pose, body.cutout),
            origin=self.model.origin(name),
        )

    def _pad(self, land: BodyLand, pose: Pose) -> PlacedPad:
        x, y = to_world(pose, land.x, land.y)
        return PlacedPad(
            pin=land.pin,
            net=land.net,
            x=x,
            y=y,
            outline=ring_to_world(pose, land.box),
            heading=(pose.heading + land.heading) % 360.0,
            ground=land.ground,
            thermal=land.thermal,
        )

    def pair(self, laid: LaidPair) -> PlacedPair:
        record, pose = self.model.sized.pairs[laid.name], self.pose(laid.pose)
        width, gap = to_nm(record.width), to_nm(record.gap)
        offset = laid.side * (width + gap)
        paths = tuple((to_world(pose, 0, side), to_world(pose, laid.length, side)) for side in (0, offset))
        angle, budget = self.lengths.pair_budget(laid.name, laid.length, self.state.roles)
        return PlacedPair(
            name=laid.name,
            nets=self.model.file.coupled[laid.name].nets,
            width=width,
            gap=gap,
            paths=(paths[0], paths[1]),
            centre_line=float(laid.length),
            budget=budget,
            angle=angle,
            origin=self.model.origin(laid.name),
        )

    def radial(self, name: str, at: Pose) -> PlacedRadial:
        stub, pose = self.model.sized.radials[name], self.pose(at)
        return PlacedRadial(
            name=name,
            nets=self.model.file.lines[name].nets,
            apex=pose.point,
            heading=pose.heading,
            sector_deg=math.degrees(stub.sector),
            inner_radius=to_nm(stub.inner_radius),
            outer_radius=to_nm(stub.outer_radius),
            origin=self.model.origin(name),
        )

    def strips(self) -> tuple[Strip, ...]:
        strips = [self._strip(laid) for laid in self.state.strips]
        strips += self._port_extensions()
        return tuple(_numbered(strips))

    def _strip(self, laid: LaidStrip) -> Strip:
        path = [self.frame.moved(point) for point in laid.points]
        if laid.open_edge is not None:
            path[-1] = self._on_edge(path[-1], laid.open_edge, laid.inset)
        if laid.root_edge is not None:
            path[0] = self._on_edge(path[0], laid.root_edge, laid.inset)
        return self._named_strip(laid.net, laid.width, tuple(path))

    def _named_strip(self, net: str, width: int, path: tuple[Point, ...]) -> Strip:
        return Strip(
            name=strip_owner(net),
            net=net,
            width=width,
            path=path,
            current=self._net_current(net),
            origin=self.model.origin(self.model.circuit.nets[net].ends[0].element),
        )

    def _net_current(self, net: str) -> float:
        """Return the largest current [A] of any line, part or port of a net: what its strip may carry."""
        currents = self.model.circuit.dc.currents
        keys = [
            key
            for end in self.model.circuit.nets[net].ends
            for key in (end.element, f"{end.element}.{end.pin}", f"{end.element}:{end.index // 2}")
        ]
        return max((abs(currents[key]) for key in keys if key in currents), default=0.0)

    def _short_ports(self) -> list[tuple[LaidPort, Point, Point, int]]:
        """Return the ports whose copper of given length ends short of the edge: from where to where, by how
        much [nm]."""
        out = []
        for laid in self.state.ports.values():
            start = self.frame.moved(laid.point)
            inset = 0 if self.model.file.ports[laid.name].to_edge else self.model.limits.edge
            stop = self._on_edge(start, laid.edge, inset)
            short = round(math.dist(start, stop))
            if not laid.movable and short > PIN_TOLERANCE:
                out.append((laid, start, stop, short))
        return out

    def _port_extensions(self) -> list[Strip]:
        """Return strips that carry ports on to the edge where given lengths end short of it."""
        return [
            self._named_strip(self.model.file.ports[laid.name].net, laid.width, (start, stop))
            for laid, start, stop, _ in self._short_ports()
        ]

    def vias(self) -> tuple[PlacedVia, ...]:
        out = [
            self._via(self.frame.moved(to_world(pose, x, y)), f"part:{name}", name)
            for name, pose in self.state.parts.items()
            for x, y in self.model.bodies[name].vias
        ]
        out += [self._via(self.frame.moved(at), f"line:{name}", name) for name, at in self.state.line_vias]
        order = [*self.model.file.parts, *self.model.file.lines, *self.model.file.coupled]
        return tuple(sorted(out, key=lambda via: order.index(via.origin.element)))

    def _via(self, at: Point, purpose: str, element: str) -> PlacedVia:
        limits = self.model.limits
        return PlacedVia(
            x=at[0],
            y=at[1],
            drill=limits.drill,
            land=limits.land,
            net="gnd",
            purpose=purpose,
            origin=self.model.origin(element),
        )

    def holes(self) -> tuple[PlacedHole, ...]:
        out = [
            PlacedHole(
                x=to_nm(hole.at[0]),
                y=to_nm(hole.at[1]),
                diameter=to_nm(hole.diameter),
                plated=hole.plated,
                origin=self.model.origin("board"),
            )
            for hole in self.model.file.board.holes
        ]
        for name, at in self.state.parts.items():
            for hole in self.model.bodies[name].holes:
                x, y = to_world(self.pose(at), hole.x, hole.y)
                out.append(
                    PlacedHole(
                        x=x, y=y, diameter=hole.diameter, plated=hole.plated, origin=self.model.origin(name)
                    )
                )
        return tuple(out)

    def grounds(self) -> tuple[tuple[Ring, Origin], ...]:
        out = []
        for name, at in self.state.parts.items():
            pose = self.pose(at)
            out += [
                (ring_to_world(pose, box), self.model.origin(name)) for box in self.model.bodies[name].grounds
            ]
        out += [(self._box(box), self.model.origin(name)) for name, box in self.state.line_grounds]
        return tuple(out)

    def _box(self, box: Box) -> Ring:
        (x0, y0), (x1, y1) = self.frame.moved(box[:2]), self.frame.moved(box[2:])
        return Ring.box(x0, y0, x1, y1)

    def notes(self) -> tuple[tuple[str, str, str], ...]:
        text = "the lengths along the board are all given: a strip of {:.3f} mm carries {} on to the edge"
        return tuple(
            ("placement.port", laid.name, text.format(short / 1e6, laid.name))
            for laid, _, _, short in self._short_ports()
        )


def _numbered(strips: list[Strip]) -> list[Strip]:
    """Give strips of one net different names: the first keeps the net's, later ones are numbered."""
    seen: dict[str, int] = {}
    out = []
    for strip in strips:
        seen[strip.name] = seen.get(strip.name, 0) + 1
        out.append(
            strip if seen[strip.name] == 1 else replace(strip, name=f"{strip.name}.{seen[strip.name]}")
        )
    return out
