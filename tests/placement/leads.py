"""Footprints with leads in rows, and small circuits around them: amplifiers, a filter, launches."""

from __future__ import annotations

import random
from typing import Any

from tests.placement.circuits import base, chip, free, line, port, two_ports

Data = dict[str, Any]


def pad(x: float, y: float, w: float, h: float, heading: str, **more: Any) -> Data:
    return {"at": [f"{x} mm", f"{y} mm"], "size": [f"{w} mm", f"{h} mm"], "heading": heading, **more}


def slug(w: float, h: float, y: float = 0.0) -> Data:
    return {"at": ["0 mm", f"{y} mm"], "size": [f"{w} mm", f"{h} mm"], "ground": "vias"}


def two_rows(xs: float, ys: list[float], w: float, h: float) -> dict[str, Data]:
    """Return pins p1, p2, ... down the west side and up the east side."""
    west = [pad(-xs, y, w, h, "west") for y in ys]
    east = [pad(xs, y, w, h, "east") for y in ys[::-1]]
    return {f"p{k + 1}": one for k, one in enumerate((*west, *east))}


PITCH_65 = [0.65, 0.0, -0.65]
FOOTPRINTS: dict[str, dict[str, Data]] = {
    "six": two_rows(1.0, PITCH_65, 0.6, 0.35),
    "four": two_rows(0.95, [0.65, -0.65], 0.8, 0.6),
    "eight": {**two_rows(2.7, [1.905, 0.635, -0.635, -1.905], 1.5, 0.6), "ep": slug(2.4, 3.0)},
    "tab": {
        "i": pad(-1.5, -1.6, 0.9, 1.3, "south"),
        "g": pad(0, -1.6, 0.9, 1.3, "south"),
        "o": pad(1.5, -1.6, 0.9, 1.3, "south"),
        "tab": slug(1.9, 2.6, 1.0),
    },
    "quad": {
        **{f"w{k}": pad(-1.45, 0.5 - 0.5 * k, 0.7, 0.28, "west") for k in range(3)},
        **{f"s{k}": pad(-0.5 + 0.5 * k, -1.45, 0.28, 0.7, "south") for k in range(3)},
        **{f"e{k}": pad(1.45, -0.5 + 0.5 * k, 0.7, 0.28, "east") for k in range(3)},
        **{f"n{k}": pad(0.5 - 0.5 * k, 1.45, 0.28, 0.7, "north") for k in range(3)},
        "ep": slug(1.6, 1.6),
    },
    "twin": {
        "g1": pad(-2, 0.8, 1.2, 0.8, "west"),
        "g2": pad(-2, -0.8, 1.2, 0.8, "west"),
        "d1": pad(2, 0.8, 1.2, 0.8, "east"),
        "d2": pad(2, -0.8, 1.2, 0.8, "east"),
        "s": slug(2, 3),
    },
    "cross": {
        "g": pad(-1.6, 0, 1.2, 0.6, "west"),
        "d": pad(1.6, 0, 1.2, 0.6, "east"),
        "s1": pad(0, 1.6, 0.6, 1.2, "north"),
        "s2": pad(0, -1.6, 0.6, 1.2, "south"),
    },
    "launch": {
        "c": pad(0, 0, 2.5, 1.1, "east"),
        "l": pad(0, 2.8, 2.5, 1.6, "east"),
        "r": pad(0, -2.8, 2.5, 1.6, "east"),
    },
}


def grounded(names: str, **signals: str) -> dict[str, str]:
    """Return pins by name on gnd but for those given."""
    return {name: signals.get(name, "gnd") for name in names.split()}


def part(footprint: str, pins: dict[str, str], kind: str = "other") -> Data:
    return {"kind": kind, "footprint": footprint, "pins": pins}


def gain_block(footprint: str, pins: dict[str, str], **more: Any) -> Data:
    """Return an amplifier between two capacitors, fed through an inductor at its output."""
    return base(
        ports={
            "p1": port("a", edge="west"),
            "p2": port("z", edge="east"),
            "v": {"kind": "dc", "net": "v", "voltage": "5 V", "edge": "north"},
        },
        lines={
            "in": free("a", "n1"),
            "l1": free("n2", "i"),
            "l2": free("o", "n3"),
            "out": free("n4", "z"),
            "supply": free("k", "v", z=""),
        },
        parts={
            "C1": chip("capacitor", "100 pF", "n1", "n2", case="0402"),
            "C2": chip("capacitor", "100 pF", "n3", "n4", case="0402"),
            "U1": part(footprint, pins),
            "L1": chip("inductor", "47 nH", "n3", "k"),
            "C3": chip("capacitor", "100 pF", "k", "gnd", case="0402"),
        },
        footprints={footprint: {"pads": FOOTPRINTS[footprint]}},
        **more,
    )


def through(footprint: str, pins: dict[str, str], **more: Any) -> Data:
    """Return a part between two free lines from a to z."""
    return base(
        ports=two_ports(),
        lines={"in": free("a", "i"), "out": free("o", "z")},
        parts={"U1": part(footprint, pins)},
        footprints={footprint: {"pads": FOOTPRINTS[footprint]}},
        **more,
    )


def random_rows(seed: int) -> Data:
    """Return a part with two rows of leads, most of them on gnd, between two lines; something else beside."""
    rng = random.Random(seed)
    count, pitch = rng.choice([2, 3, 3, 4]), rng.choice([0.5, 0.65, 0.95, 1.27])
    rows = two_rows(
        rng.choice([1.0, 1.5, 2.5]),
        [round(pitch * ((count - 1) / 2 - k), 3) for k in range(count)],
        rng.choice([0.6, 0.8, 1.2]),
        round(pitch * rng.choice([0.5, 0.6, 0.7]), 3),
    )
    pins = dict.fromkeys(rows, "gnd")
    first, last = rng.randrange(count), count + rng.randrange(count)
    pins |= {f"p{first + 1}": "i", f"p{last + 1}": "o"}
    spare = [pin for pin, net in pins.items() if net == "gnd"]
    data = base(
        ports={"p1": port("a", edge="west"), "p2": port("z", edge="east")},
        lines={"in": free("a", "i"), "out": free("o", "z")},
        parts={"U1": part("rows", pins)},
        footprints={"rows": {"pads": rows}},
    )
    kind = rng.choice(["line", "chip", "stub", "shunt"])
    if kind == "chip":
        data["lines"]["in"] = free("a", "n1")
        data["parts"]["C1"] = chip("capacitor", "10 pF", "n1", "i", case=rng.choice(["0402", "0603"]))
    elif kind == "stub":
        data["lines"]["st"] = line("o", angle="40 deg", z="70 ohm")
    elif kind == "shunt":
        data["parts"]["L1"] = chip("inductor", "10 nH", "i", "gnd", case="0402")
    if spare and rng.random() < 0.5:
        pins[rng.choice(spare)] = "k"
        data["ports"]["v"] = {"kind": "dc", "net": "k2", "voltage": "5 V"}
        data["lines"]["s"] = free("k", "k2", z="")
        data["parts"]["C9"] = chip("capacitor", "100 pF", "k", "gnd", case="0402")
    return data


SIX, EIGHT = "p1 p2 p3 p4 p5 p6", "p1 p2 p3 p4 p5 p6 p7 p8 ep"
QUAD = "w0 w1 w2 s0 s1 s2 e0 e1 e2 n0 n1 n2 ep"

AMPLIFIERS: dict[str, Data] = {
    "six leads, middle ones": gain_block("six", grounded(SIX, p2="i", p5="o")),
    "six leads, outer ones": gain_block("six", grounded(SIX, p1="i", p6="o")),
    "four leads": gain_block("four", grounded("p1 p2 p3 p4", p2="i", p4="o")),
    "eight leads": gain_block("eight", grounded(EIGHT, p2="i", p6="o")),
    "eight leads, two and two": gain_block("eight", grounded(EIGHT, p2="i", p3="i", p6="o", p7="o")),
    "leads to one side": gain_block("tab", grounded("i g o tab", i="i", o="o")),
    "leads all round": gain_block("quad", grounded(QUAD, w1="i", e1="o")),
    "twin leads": through("twin", {"g1": "i", "g2": "i", "d1": "o", "d2": "o", "s": "gnd"}),
}

OSCILLATOR: Data = base(
    ports={"o": port("z", edge="east"), "v": {"kind": "dc", "net": "v", "voltage": "5 V", "edge": "north"}},
    lines={
        "tank": line("r", "b", angle="35 deg", z="60 ohm"),
        "mo": line("c", "n1", angle="20 deg"),
        "out": free("n2", "z"),
        "supply": free("k", "v", z=""),
    },
    parts={
        "C5": chip("capacitor", "1 pF", "r", "gnd", case="0402"),
        "Q1": part("four", {"p1": "e", "p2": "b", "p3": "e", "p4": "c"}, "transistor"),
        "Ce": chip("capacitor", "1 pF", "e", "gnd", case="0402"),
        "Re": chip("resistor", "100 ohm", "e", "gnd", case="0402"),
        "C1": chip("capacitor", "2 pF", "n1", "n2", case="0402"),
        "L1": chip("inductor", "10 nH", "n1", "k", case="0402"),
        "C2": chip("capacitor", "100 pF", "k", "gnd", case="0402"),
    },
    footprints={"four": {"pads": FOOTPRINTS["four"]}},
)


def launched(*, to_edge: bool = False, free_exit: bool = True) -> Data:
    """Return a line between two edge connectors."""
    exit_line = {"out": free("k", "z")} if free_exit else {"out": line("k", "z", angle="50 deg")}
    return base(
        ports={
            "p1": port("a", edge="west", to_edge=to_edge),
            "p2": port("z", edge="east", to_edge=to_edge),
        },
        lines={"in": free("a", "n"), "mid": line("n", "k", angle="60 deg", z="30 ohm"), **exit_line},
        parts={
            "J1": part("launch", {"c": "a", "l": "gnd", "r": "gnd"}),
            "J2": part("launch", {"c": "z", "l": "gnd", "r": "gnd"}),
        },
        footprints={"launch": {"pads": FOOTPRINTS["launch"]}},
    )
