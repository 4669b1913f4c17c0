"""From an artwork to the graph of its copper: where lengths of line begin and end, and what meets there.

In: an artwork with its placement. Out: :class:`Copper`. What leads where follows from the points at which
things lie, net by net. A line that ends at a pad's inner edge carries the pad on its last stretch; any
other pad is an arm from its inner edge to the first joint or strip along its axis.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence

from layoutgen.artwork import Artwork
from layoutgen.circuit import GROUND, OPEN
from layoutgen.geometry import Point
from layoutgen.placement import PlacedLine, PlacedPair, Strip
from layoutgen.response.copper import ChipGap, Copper, Joint, JointArm, PairCopper, Piece, Post
from layoutgen.response.pads import PadFrame, pad_frames
from layoutgen.response.parts import terminals
from layoutgen.response.paths import SNAP, direction_at, heading, position_on
from layoutgen.response.records import NOTE_RULE

__all__ = ["trace_copper"]

_NM = 1e-9
_XY = tuple[float, float]


def trace_copper(artwork: Artwork) -> Copper:
    """Return the graph of an artwork's copper."""
    tracer = _Tracer(artwork)
    placement = artwork.placement
    for line in placement.lines.values():
        tracer.line(line)
    for pair in placement.pairs.values():
        tracer.pair(pair)
    for name, stub in placement.radials.items():
        tracer.radials[name] = tracer.joint(stub.nets[0], stub.apex).node
    for name, port in placement.ports.items():
        tracer.ports[name] = tracer.joint(port.net, (port.x, port.y)).node
    for strip in placement.strips:
        tracer.joint(strip.net, strip.path[0])
        tracer.joint(strip.net, strip.path[-1])
    for pad in tracer.pads:
        tracer.pad(pad)
    for strip in placement.strips:
        tracer.strip(strip)
    return tracer.finish()


class _Tracer:
    """What has been traced so far; joints are found again by their place."""

    def __init__(self, artwork: Artwork) -> None:
        """Take the pads first: lines that end on them carry them."""
        self.line_copper = artwork.line_copper
        self.placement = artwork.placement
        self.circuit = artwork.placement.sized.circuit
        self.pads = tuple(pad_frames(artwork.placement))
        self.pieces: list[Piece] = []
        self.joints: dict[str, list[Joint]] = {}
        self.posts: list[Post] = []
        self.pairs: list[PairCopper] = []
        self.radials: dict[str, str] = {}
        self.ports: dict[str, str] = {}
        self.terminals: dict[str, str] = {}
        self.ties: list[tuple[str, str]] = []
        self.notes: list[tuple[str, str, str]] = []
        default = artwork.placement.sized.default_pour_gap
        self.default_gaps = (default, default)

    # -- bookkeeping

    def joint(self, net: str, at: _XY) -> Joint:
        """Return the net's joint at a point [nm], a new one where there is none."""
        held = self.joints.setdefault(net, [])
        for joint in held:
            if math.dist((joint.x, joint.y), at) <= SNAP:
                return joint
        held.append(Joint(net, f"{net} at {len(held)}", *at))
        return held[-1]

    def piece(self, piece: Piece, *ends: tuple[Joint | None, float, bool]) -> None:
        """Keep a piece, as an arm of the joints it ends in; each end is (joint, heading [deg], is a line)."""
        self.pieces.append(piece)
        for joint, away, is_line in ends:
            if joint is not None:
                joint.arms.append(JointArm(len(self.pieces) - 1, away, piece.width, is_line))

    def note(self, element: str, text: str) -> None:
        """Keep a note."""
        self.notes.append((NOTE_RULE, element, text))

    def gaps(self, name: str) -> tuple[float, float]:
        """Return the pour's distances [m] that a line got in the artwork, or is to get; infinity for none."""
        copper = self.line_copper.get(name)
        if copper is None:
            sized = self.placement.sized
            intended = sized.lines[name] if name in sized.lines else sized.pairs[name]
            return intended.pour_gap, intended.pour_gap
        left, right = (math.inf if gap is None else gap * _NM for gap in (copper.gap_left, copper.gap_right))
        return left, right

    # -- lines and pairs

    def line(self, line: PlacedLine) -> None:
        """Trace a line: its own piece, and at each end a joint, a pad, ground or nothing."""
        width, gaps = line.width * _NM, self.gaps(line.name)
        nets = line.nets if len(line.nets) == 2 else (*line.nets, OPEN)
        legs = ((line.path[0], line.path[1]), (line.path[-1], line.path[-2]))
        near, far = (
            self.end((line.name, index), net, leg[0], width, gaps)
            for index, (net, leg) in enumerate(zip(nets, legs, strict=True))
        )
        length = line.centre_line * _NM - near[1] - far[1]
        self.piece(
            Piece(near[0], far[0], width, gaps, length, line.bends, nets[1] == OPEN, line.name),
            (near[2], heading(*legs[0]), True),
            (far[2], heading(*legs[1]), True),
        )

    def pair(self, pair: PlacedPair) -> None:
        """Trace a coupled pair: the pair itself, and a stretch of single line of no length at each end."""
        width, gaps = pair.width * _NM, self.gaps(pair.name)
        corners = tuple(f"corner {k} of {pair.name}" for k in range(4))
        a, b = pair.paths
        legs = ((a[0], a[1]), (a[-1], a[-2]), (b[0], b[1]), (b[-1], b[-2]))
        for index, (net, leg) in enumerate(zip(pair.nets, legs, strict=True)):
            node, taken, joint = self.end((pair.name, index), net, leg[0], width, gaps)
            stretch = Piece(corners[index], node, width, gaps, -taken, (), net == OPEN)
            self.piece(stretch, (joint, heading(*leg), True))
        nodes = (corners[0], corners[1], corners[2], corners[3])
        length = pair.centre_line * _NM
        self.pairs.append(PairCopper(nodes, width, pair.gap * _NM, min(gaps), length, pair.name))

    def end(
        self, owner: tuple[str, int], net: str, at: Point, width: float, gaps: tuple[float, float]
    ) -> tuple[str, float, Joint | None]:
        """Return the node at a line's end, the length [m] that a pad takes over there, and the joint.

        Args:
            owner: Name of the line or pair, and number of the end.
            net: The net at the end, or ``open``.
            at: The end's point [nm].
            width: The line's width [m].
            gaps: Its pour's distances [m].
        """
        name, index = owner
        if net == OPEN:
            return f"end {index} of {name}", 0.0, None
        if net == GROUND:
            node = f"foot {index} of {name}"
            self.post(node, f"line:{name}", self.axes_at(name, at), width)
            return node, 0.0, None
        pad = next((p for p in self.pads if p.net == net and math.dist((p.x, p.y), at) <= SNAP), None)
        if pad is None:
            joint = self.joint(net, at)
            return joint.node, 0.0, joint
        joint = self.joint(net, pad.at(pad.along))
        self.carried(pad, joint, width, gaps)
        return joint.node, pad.along * _NM, joint

    def carried(self, pad: PadFrame, joint: Joint, width: float, gaps: tuple[float, float]) -> None:
        """Trace a pad at a line's end: its stretch is as wide as the wider of the two."""
        if pad.plane:
            self.terminals[pad.key] = joint.node
            return
        wider = pad.across * _NM > width
        self.arm(pad, joint, pad.along, max(width, pad.across * _NM), self.default_gaps if wider else gaps)

    # -- pads and ground

    def pad(self, pad: PadFrame) -> None:
        """Trace a pad that no line has taken: to ground, or as an arm to the first copper along its axis."""
        if pad.key in self.terminals:
            return
        if pad.on_carrier:
            self.terminals[pad.key] = GROUND
        elif pad.net == GROUND:
            self.ground_pad(pad)
        else:
            joint, distance = self.met_by(pad)
            self.arm(pad, joint, distance - pad.plane, pad.across * _NM, self.default_gaps)

    def arm(
        self, pad: PadFrame, joint: Joint, length: float, width: float, gaps: tuple[float, float]
    ) -> None:
        """Add a pad's copper between a joint and its terminal; ``length`` [nm], ``width`` and gaps [m]."""
        node = f"pad {pad.key}"
        self.terminals[pad.key] = node
        piece = Piece(joint.node, node, width, gaps, length * _NM)
        self.piece(piece, (joint, (pad.heading + 180.0) % 360.0, False))

    def met_by(self, pad: PadFrame) -> tuple[Joint, float]:
        """Return the joint that a pad's axis meets first, with its distance [nm] from the inner edge."""
        paths: list[Sequence[_XY]] = [strip.path for strip in self.placement.strips if strip.net == pad.net]
        points = [(joint.x, joint.y) for joint in self.joints.get(pad.net, [])]
        found = [distance for path in (*paths, *((at, at) for at in points)) for distance in pad.meets(path)]
        if found:
            return self.joint(pad.net, pad.at(min(found))), min(found)
        joints = self.joints.get(pad.net) or [self.joint(pad.net, pad.at(pad.along))]
        joint = min(joints, key=lambda other: math.dist((other.x, other.y), (pad.x, pad.y)))
        distance = math.dist((joint.x, joint.y), (pad.x, pad.y))
        if distance > pad.along + SNAP:
            self.note(pad.part, f"pad {pad.terminal} meets no copper of net {pad.net} along its axis")
        return joint, distance

    def ground_pad(self, pad: PadFrame) -> None:
        """Trace a pad on ground: its copper as far as the vias' axes, and the vias."""
        rivals = [p for p in self.pads if p.part == pad.part and p.net == GROUND and p is not pad]
        axes = [
            axis
            for axis in self.axes(f"part:{pad.part}")
            if all(math.dist(axis, (pad.x, pad.y)) <= math.dist(axis, (p.x, p.y)) for p in rivals)
        ]
        node, foot = f"pad {pad.key}", f"foot of {pad.key}"
        self.terminals[pad.key] = node
        distance = sum(pad.place(axis)[0] for axis in axes) / len(axes) if axes else 0.0
        length = max(0.0, distance - pad.plane) * _NM
        self.piece(Piece(node, foot, pad.across * _NM, self.default_gaps, length))
        self.post(foot, f"part:{pad.part}", axes, pad.across * _NM)

    def axes(self, purpose: str) -> list[_XY]:
        """Return the axes [nm] of an element's vias."""
        return [(via.x, via.y) for via in self.placement.vias if via.purpose == purpose]

    def axes_at(self, name: str, end: Point) -> list[_XY]:
        """Return the axes [nm] of the vias at one end of a line or pair: those that are nearest to it.

        A coupled pair may end on gnd at several of its corners.
        """
        axes = self.axes(f"line:{name}")
        pair = self.placement.pairs.get(name)
        if pair is None:
            return axes
        corners = [path[k] for path in pair.paths for k in (0, -1)]
        feet = [at for at, net in zip(corners, pair.nets, strict=True) if net == GROUND]
        return [axis for axis in axes if min(feet, key=lambda foot: math.dist(foot, axis)) == end]

    def post(self, node: str, purpose: str, axes: Sequence[_XY], width: float) -> None:
        """Keep an element's ground vias; a node without any is tied to ground, with a note."""
        if not axes:
            self.ties.append((node, GROUND))
            self.note(purpose.partition(":")[2], "no via at its end on gnd; it is taken as grounded there")
            return
        drill = next(via.drill for via in self.placement.vias if via.purpose == purpose)
        radius = 0.5 * drill * _NM + (self.circuit.rules.vias.plating or 0.0)
        self.posts.append(Post(node, tuple((x * _NM, y * _NM) for x, y in axes), radius, width))

    # -- strips, and the result

    def strip(self, strip: Strip) -> None:
        """Trace a strip as one piece between each two neighbouring joints on it."""
        found = [(position_on(strip.path, (j.x, j.y)), j) for j in self.joints[strip.net]]
        on_it = sorted(((at, j) for at, j in found if at is not None), key=lambda pair: pair[0])
        for (start, near), (stop, far) in itertools.pairwise(on_it):
            piece = Piece(near.node, far.node, strip.width * _NM, self.default_gaps, (stop - start) * _NM)
            self.piece(
                piece,
                (near, direction_at(strip.path, start, True), False),
                (far, direction_at(strip.path, stop, False), False),
            )

    def finish(self) -> Copper:
        """Tie what no copper joins, and return everything."""
        for net, joints in self.joints.items():
            self.tie(net, joints)
        for name, part in self.circuit.file.parts.items():
            for terminal, net in terminals(part):
                if f"{name}.{terminal}" not in self.terminals:
                    self.terminals[f"{name}.{terminal}"] = self.without_pad(net)
        return Copper(
            pieces=tuple(self.pieces),
            joints=tuple(joint for joints in self.joints.values() for joint in joints),
            posts=tuple(self.posts),
            pairs=tuple(self.pairs),
            radials=self.radials,
            terminals=self.terminals,
            ports=self.ports,
            gaps=dict(self.chip_gaps()),
            ties=tuple(self.ties),
            notes=tuple(self.notes),
        )

    def without_pad(self, net: str) -> str:
        """Return the node of a terminal that has no pad: ground, or the net's first joint."""
        if net == GROUND:
            return GROUND
        joints = self.joints.get(net)
        return joints[0].node if joints else self.joint(net, (0.0, 0.0)).node

    def tie(self, net: str, joints: Sequence[Joint]) -> None:
        """Tie the joints of a net that its strips leave apart, with a note."""
        group = {joint.node: joint.node for joint in joints}

        def root(node: str) -> str:
            while group[node] != node:
                node = group[node]
            return node

        for piece in self.pieces:
            if piece.near in group and piece.far in group:
                group[root(piece.far)] = root(piece.near)
        first = joints[0]
        for joint in joints[1:]:
            if root(joint.node) != root(first.node):
                group[root(joint.node)] = root(first.node)
                self.ties.append((first.node, joint.node))
                apart = math.dist((first.x, first.y), (joint.x, joint.y)) * 1e-6
                self.note(net, f"its copper meets at points {apart:.3f} mm apart; they are taken as one")

    def chip_gaps(self) -> list[tuple[str, ChipGap]]:
        """Return the gaps under the two-pad parts that are given by value."""
        found = []
        for name, part in self.circuit.file.parts.items():
            pads = [pad for pad in self.pads if pad.part == name]
            if part.nets is None or part.data is not None or len(pads) != 2:
                continue
            first, second = pads
            gap = math.dist((first.x, first.y), (second.x, second.y)) * _NM
            nodes = (self.terminals[first.key], self.terminals[second.key])
            found.append((name, ChipGap(nodes, min(first.across, second.across) * _NM, gap)))
        return found
