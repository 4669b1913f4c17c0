"""Circuits with loops that one closing line cannot close: couplers of several sections, stages, feedback."""

from __future__ import annotations

from typing import Any

from tests.placement.circuits import Data, base, chip, free, hybrid, line, port, two_ports

SMALL: Data = {
    "pads": {
        "g": {"at": ["-2.4 mm", "0 mm"], "size": ["1.2 mm", "0.9 mm"], "heading": "west"},
        "d": {"at": ["2.4 mm", "0 mm"], "size": ["1.2 mm", "0.9 mm"], "heading": "east"},
        "s": {"at": ["0 mm", "0 mm"], "size": ["2.4 mm", "3.0 mm"], "ground": "vias"},
    }
}
"""Leads west and east, exposed pad between them."""

FLANGE: Data = {
    "cutout": {"size": ["4.4 mm", "10.4 mm"], "at": ["0 mm", "0 mm"]},
    "holes": [{"at": ["0 mm", f"{sign}7.2 mm"], "diameter": "2.7 mm", "plated": False} for sign in ("", "-")],
    "pads": {
        "g": {"at": ["-3.6 mm", "0 mm"], "size": ["2.4 mm", "2.0 mm"], "heading": "west"},
        "d": {"at": ["3.6 mm", "0 mm"], "size": ["2.4 mm", "4.0 mm"], "heading": "east"},
        "s": {"ground": "flange"},
    },
}
"""Screwed down over a cut-out."""

ASIDE: Data = {
    "pads": {
        "g": {"at": ["-0.95 mm", "0.65 mm"], "size": ["0.9 mm", "0.6 mm"], "heading": "west"},
        "s": {
            "at": ["-0.95 mm", "-0.65 mm"],
            "size": ["0.9 mm", "0.6 mm"],
            "heading": "west",
            "ground": "vias",
        },
        "d": {"at": ["0.95 mm", "-0.65 mm"], "size": ["0.9 mm", "0.6 mm"], "heading": "east"},
    }
}
"""Gate and drain at opposite corners: its mirror image is another part."""


def transistor(gate: str, drain: str) -> Data:
    """Return a transistor of the footprint ``f``, its source on ground."""
    return {"kind": "transistor", "footprint": "f", "pins": {"g": gate, "d": drain, "s": "gnd"}}


def coupler(sections: int) -> Data:
    """Return a branch-line coupler of several sections, its outer branches of high impedance."""
    lines: Data = {
        "i1": free("p1", "t0"),
        "i4": free("p4", "b0"),
        "o2": free(f"t{sections}", "p2"),
        "o3": free(f"b{sections}", "p3"),
    }
    for k in range(sections):
        lines[f"t{k}"] = line(f"t{k}", f"t{k + 1}", angle="90 deg", z="35.4 ohm")
        lines[f"b{k}"] = line(f"b{k}", f"b{k + 1}", angle="90 deg", z="35.4 ohm")
    for k in range(sections + 1):
        lines[f"v{k}"] = line(
            f"t{k}", f"b{k}", angle="90 deg", z="100 ohm" if k in (0, sections) else "50 ohm"
        )
    edges = {"p1": "west", "p4": "west", "p2": "east", "p3": "east"}
    return base(ports={name: port(name, edge=edge) for name, edge in edges.items()}, lines=lines)


def side_longer(name: str, degrees: float) -> Data:
    """Return a branch-line hybrid of which one side is so much longer than asked."""
    data = hybrid()
    data["lines"][name] = {**data["lines"][name], "angle": f"{90.0 + degrees} deg"}
    return data


def divider_of_sections(case: str) -> Data:
    """Return an equal divider of three sections, each ended by a resistor."""
    lines: Data = {"in": free("a", "t")}
    for side, out in (("1", "y"), ("2", "z")):
        nets = ["t", *(f"m{k}{side}" for k in range(3))]
        for k, ohms in enumerate((87.0, 70.7, 57.5)):
            lines[f"s{k}{side}"] = line(nets[k], nets[k + 1], angle="90 deg", z=f"{ohms} ohm")
        lines[f"o{side}"] = free(nets[3], out)
    parts = {
        f"R{k}": chip("resistor", f"{ohms} ohm", f"m{k}1", f"m{k}2", case=case)
        for k, ohms in enumerate((100, 210, 400))
    }
    ports = {"p1": port("a", edge="west"), "p2": port("y", edge="east"), "p3": port("z", edge="east")}
    return base(ports=ports, lines=lines, parts=parts)


def pair_of_resistors(footprint: Data, angle: str) -> Data:
    """Return two transistors in parallel, resistors between their gates and between their drains."""
    lines: Data = {"in": free("a", "t"), "out": free("u", "z")}
    parts: Data = {
        "RG": chip("resistor", "20 ohm", "g1", "g2"),
        "RD": chip("resistor", "30 ohm", "d1", "d2"),
    }
    for k in "12":
        lines[f"i{k}"] = line("t", f"g{k}", angle=angle, z="60 ohm")
        lines[f"o{k}"] = line(f"d{k}", "u", angle=angle, z="60 ohm")
        parts[f"Q{k}"] = transistor(f"g{k}", f"d{k}")
    return base(ports=_through(), lines=lines, parts=parts, footprints={"f": footprint})


def between_dividers(footprint: Data) -> Data:
    """Return two matched transistors between two equal dividers."""
    lines: Data = {"in": free("a", "t"), "out": free("u", "z")}
    parts: Data = {
        "RI": chip("resistor", "100 ohm", "p1", "p2"),
        "RO": chip("resistor", "100 ohm", "q1", "q2"),
    }
    for k in "12":
        lines |= {
            f"di{k}": line("t", f"p{k}", angle="90 deg", z="70.7 ohm"),
            f"i{k}": free(f"p{k}", f"m{k}"),
            f"si{k}": line(f"m{k}", angle="30 deg"),
            f"g{k}": line(f"m{k}", f"b{k}", angle="25 deg"),
            f"d{k}": line(f"c{k}", f"n{k}", angle="20 deg"),
            f"so{k}": line(f"n{k}", angle="35 deg"),
            f"o{k}": free(f"n{k}", f"q{k}"),
            f"do{k}": line(f"q{k}", "u", angle="90 deg", z="70.7 ohm"),
        }
        parts[f"Q{k}"] = transistor(f"b{k}", f"c{k}")
    return base(ports=_through(), lines=lines, parts=parts, footprints={"f": footprint})


def feedback(footprint: Data, base_angle: str, back: str, *, forth: bool = True) -> Data:
    """Return a transistor with a resistor, a capacitor and lines of given length from drain to gate."""
    lines: Data = {
        "in": free("a", "n"),
        "gate": line("n", "g", angle=base_angle),
        "drain": line("d", "m", angle=base_angle),
        "out": free("m", "z"),
        "back": line("n", "k", angle=back, z="90 ohm"),
    }
    if forth:
        lines["forth"] = line("l", "m", angle=back, z="90 ohm")
    parts = {
        "Q1": transistor("g", "d"),
        "R1": chip("resistor", "300 ohm", "k", "x"),
        "C1": chip("capacitor", "100 pF", "x", "l" if forth else "m"),
    }
    return base(ports=_through(), lines=lines, parts=parts, footprints={"f": footprint})


def unlike_pair() -> Data:
    """Return a hybrid, two transistors and a combiner of unequal paths, every length given."""
    series, across = {"angle": "90 deg", "z": "35.36 ohm"}, {"angle": "90 deg"}
    lines = {
        "in": free("a", "h1"),
        "s1": line("h1", "h2", **series),
        "v2": line("h2", "h3", **across),
        "s2": line("h4", "h3", **series),
        "v1": line("h1", "h4", **across),
        "load": free("h4", "r"),
        "g1": line("h2", "g1", angle="30 deg"),
        "g2": line("h3", "g2", angle="30 deg"),
        "d1": line("d1", "x", angle="40 deg", z="40 ohm"),
        "quarter": line("x", "y", angle="90 deg"),
        "d2": line("d2", "w", angle="40 deg", z="40 ohm"),
        "offset": line("w", "y", angle="20 deg"),
        "last": line("y", "e", angle="90 deg", z="35.4 ohm"),
        "out": free("e", "z"),
    }
    parts = {
        "R1": chip("resistor", "50 ohm", "r", "gnd"),
        "Q1": transistor("g1", "d1"),
        "Q2": transistor("g2", "d2"),
    }
    return base(ports=_through(), lines=lines, parts=parts, footprints={"f": SMALL})


def _through() -> dict[str, Any]:
    ports = two_ports()
    return {"p1": {**ports["p1"], "edge": "west"}, "p2": {**ports["p2"], "edge": "east"}}


LARGE: dict[str, Data] = {
    "coupler of two sections": coupler(2),
    "coupler of three sections": coupler(3),
    "hybrid with a longer side": side_longer("s1", 1.0),
    "hybrid with a shorter branch": side_longer("v1", -1.0),
    "divider of three sections": divider_of_sections("0402"),
    "pair with resistors": pair_of_resistors(SMALL, "45 deg"),
    "pair with resistors, leads aside": pair_of_resistors(ASIDE, "45 deg"),
    "flanged pair with resistors": pair_of_resistors(FLANGE, "75 deg"),
    "pair between dividers": between_dividers(SMALL),
    "flanged pair between dividers": between_dividers(FLANGE),
    "feedback by two lines": feedback(SMALL, "10 deg", "35 deg"),
    "feedback round a flange": feedback(FLANGE, "30 deg", "80 deg"),
    "feedback by one line": feedback(ASIDE, "10 deg", "75 deg", forth=False),
    "unlike pair": unlike_pair(),
}
"""Circuits whose loops pass through transistors, or need their lines to bow."""
