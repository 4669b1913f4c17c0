"""Small circuits built in code, for placement tests: each shows one thing a schematic may ask for."""

from __future__ import annotations

from typing import Any

Data = dict[str, Any]


def base(**extra: Any) -> Data:
    """Return the tables that every circuit needs, on the example substrate, with more laid over them."""
    data: Data = {
        "format": 1,
        "design": {"title": "Test board", "frequency": "2.245 GHz", "band": ["2.20 GHz", "2.29 GHz"]},
        "substrate": {
            "relative_permittivity": 3.55,
            "loss_tangent": 0.0027,
            "height": "0.508 mm",
            "copper_thickness": "35 um",
        },
        "board": {"rules": "two-layer-standard"},
        "ground": {},
        "ports": {},
        "lines": {},
    }
    for key, value in extra.items():
        data[key] = {**data.get(key, {}), **value} if isinstance(value, dict) else value
    return data


def port(net: str, **more: Any) -> Data:
    return {"net": net, "impedance": "50 ohm", **more}


def line(*nets: str, z: str = "50 ohm", **more: Any) -> Data:
    asked = {} if "width" in more or (more.get("length") == "free" and z == "") else {"impedance": z}
    return {"nets": list(nets), **asked, **more}


def free(*nets: str, **more: Any) -> Data:
    return line(*nets, length="free", **more)


def chip(kind: str, value: str, *nets: str, case: str = "0603", **more: Any) -> Data:
    return {"kind": kind, "nets": list(nets), "value": value, "case": case, **more}


def two_ports(**more: Any) -> Data:
    return {"p1": port("a"), "p2": port("z"), **more}


def through_with(lines: Data, parts: Data | None = None, ports: Data | None = None, **extra: Any) -> Data:
    """Return a circuit with free launch lines a-n and m-z and whatever lies between n and m."""
    data = base(
        ports=ports if ports is not None else two_ports(),
        lines={"launch": free("a", "n"), **lines, "exit": free("m", "z")},
        **extra,
    )
    if parts:
        data["parts"] = parts
    return data


CIRCUITS: dict[str, Data] = {
    "plain": base(ports=two_ports(), lines={"only": line("a", "z", angle="120 deg")}),
    "plain free": base(ports=two_ports(), lines={"only": free("a", "z")}),
    "cross": through_with(
        {
            "mid": line("n", "m", angle="60 deg"),
            "up": line("n", angle="30 deg"),
            "down": line("n", angle="40 deg", z="70 ohm"),
        }
    ),
    "shunt part": through_with(
        {"mid": line("n", "m", angle="60 deg")},
        {
            "C1": chip("capacitor", "1.2 pF", "n", "gnd"),
            "L1": chip("inductor", "8.2 nH", "m", "gnd", case="0402"),
        },
    ),
    "pads only": base(
        ports=two_ports(),
        lines={"launch": free("a", "n"), "exit": free("m", "z")},
        parts={"C1": chip("capacitor", "10 pF", "n", "x"), "R1": chip("resistor", "10 ohm", "x", "m")},
    ),
    "part at ports": base(
        ports=two_ports(), lines={}, parts={"C1": chip("capacitor", "10 pF", "a", "z", case="0805")}
    ),
    "radial": through_with(
        {
            "mid": line("n", "m", angle="60 deg"),
            "fan": {"nets": ["n"], "shape": "radial", "sector": "60 deg"},
        }
    ),
    "shorted": through_with(
        {"mid": line("n", "m", angle="60 deg"), "short": line("n", "gnd", angle="50 deg", z="80 ohm")}
    ),
    "wide shorted": through_with(
        {"mid": line("n", "m", angle="90 deg"), "short": line("n", "gnd", angle="60 deg", z="20 ohm")}
    ),
    "wall": base(
        ports=two_ports(),
        lines={
            "launch": free("a", "n"),
            "wall": {
                "nets": ["n", "z"],
                "kind": "grounded_coplanar",
                "gap": "0.3 mm",
                "impedance": "50 ohm",
                "angle": "80 deg",
            },
        },
    ),
    "long feed": through_with(
        {
            "mid": line("n", "m", angle="60 deg"),
            "feed": line("n", "k", angle="270 deg", z="90 ohm"),
            "supply": free("k", "v", z=""),
        },
        {"C1": chip("capacitor", "22 pF", "k", "gnd"), "C2": chip("capacitor", "1 nF", "k", "gnd")},
        {**two_ports(), "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
    ),
    "bank on the line": base(
        ports={"p1": port("a"), "v": {"kind": "dc", "net": "v", "voltage": "5 V", "edge": "east"}},
        lines={"feed": line("a", "k", angle="90 deg"), "supply": free("k", "v", z="")},
        parts={
            "C1": chip("capacitor", "22 pF", "k", "gnd"),
            "C2": chip("capacitor", "1 nF", "k", "gnd"),
            "C3": chip("capacitor", "100 nF", "k", "gnd", case="1206"),
        },
    ),
    "inductor feed": through_with(
        {"mid": line("n", "m", angle="60 deg"), "supply": free("k", "v", z="")},
        {
            "L1": chip("inductor", "47 nH", "n", "k"),
            "C1": chip("capacitor", "22 pF", "k", "gnd"),
            "C2": chip("capacitor", "1 nF", "k", "gnd"),
        },
        {**two_ports(), "v": {"kind": "dc", "net": "v", "voltage": "5 V", "edge": "south"}},
    ),
    "splitter": base(
        ports={"p1": port("a"), "p2": port("y", edge="east"), "p3": port("z", edge="east")},
        lines={
            "in": free("a", "t"),
            "arm_1": line("t", "m1", angle="90 deg", z="70.7 ohm"),
            "arm_2": line("t", "m2", angle="90 deg", z="70.7 ohm"),
            "out_1": free("m1", "y"),
            "out_2": free("m2", "z"),
        },
    ),
    "coupler": base(
        ports={"p1": port("a"), "p2": port("z"), "p3": port("s")},
        lines={
            "in": free("a", "a1"),
            "out": free("a2", "z"),
            "pick": free("b1", "s"),
            "load": free("b2", "t"),
        },
        coupled={
            "pair": {
                "nets": ["a1", "a2", "b1", "b2"],
                "even_impedance": "56 ohm",
                "odd_impedance": "45 ohm",
                "angle": "90 deg",
            }
        },
        parts={"R1": chip("resistor", "50 ohm", "t", "gnd")},
    ),
    "coupled resonators": base(
        ports=two_ports(),
        lines={"in": free("a", "i"), "out": free("o", "z")},
        coupled={
            "first": {
                "nets": ["i", "open", "open", "k"],
                "even_impedance": "63.54 ohm",
                "odd_impedance": "41.36 ohm",
                "angle": "90 deg",
            },
            "second": {
                "nets": ["k", "open", "open", "o"],
                "even_impedance": "63.54 ohm",
                "odd_impedance": "41.36 ohm",
                "angle": "90 deg",
            },
        },
    ),
    "fixed board": through_with(
        {"mid": line("n", "m", angle="60 deg"), "stub": line("n", angle="80 deg")},
        board={"rules": "two-layer-standard", "size": ["30 mm", "14 mm"]},
    ),
    "fixed board and holes": through_with(
        {"mid": line("n", "m", angle="60 deg"), "stub": line("n", angle="40 deg")},
        board={
            "rules": "two-layer-standard",
            "size": ["40 mm", "30 mm"],
            "holes": [
                {"at": [f"{x} mm", f"{y} mm"], "diameter": "2.7 mm", "plated": False}
                for x in (3, 37)
                for y in (3, 27)
            ],
        },
    ),
    "ports placed": through_with(
        {"mid": line("n", "m", angle="60 deg")},
        ports={"p1": port("a", edge="west", at="9 mm"), "p2": port("z", edge="east", at="14 mm")},
    ),
    "to edge": base(
        ports={"p1": port("a", to_edge=True), "p2": port("z", to_edge=True)},
        lines={"only": line("a", "z", angle="120 deg")},
    ),
    "north to south": base(
        ports={"p1": port("a", edge="south"), "p2": port("z", edge="north")},
        lines={
            "one": free("a", "n"),
            "two": line("n", "z", angle="70 deg", z="35 ohm"),
            "stub": line("n", angle="30 deg"),
        },
    ),
    "corner": base(
        ports={"p1": port("a", edge="west"), "p2": port("z", edge="south")},
        lines={"one": line("a", "n", angle="40 deg"), "two": free("n", "z")},
    ),
    "hinted feed": through_with(
        {"mid": line("n", "m", angle="60 deg"), "feed": line("n", angle="90 deg", z="90 ohm")},
        layout={"hints": {"feed": {"leave": "south", "route": ["5 mm", "left", "*", "right", "4 mm"]}}},
    ),
    "two trees": base(
        ports={"p1": port("a"), "p2": port("b"), "p3": port("c"), "p4": port("d")},
        lines={
            "one": free("a", "b"),
            "two": free("c", "d"),
            "stub": line("a2", angle="30 deg"),
            "three": line("e", "a2", angle="20 deg"),
        },
    ),
}
del CIRCUITS["two trees"]["lines"]["stub"], CIRCUITS["two trees"]["lines"]["three"]


def divider(z_1: str = "70.7 ohm", z_2: str = "70.7 ohm", resistor: str = "100 ohm", **extra: Any) -> Data:
    """Return a power divider: two quarter waves whose ends a resistor bridges."""
    return base(
        ports={"p1": port("a", edge="west"), "p2": port("y", edge="east"), "p3": port("z", edge="east")},
        lines={
            "in": free("a", "t"),
            "arm_1": line("t", "m1", angle="90 deg", z=z_1),
            "arm_2": line("t", "m2", angle="90 deg", z=z_2),
            "out_1": free("m1", "y"),
            "out_2": free("m2", "z"),
        },
        parts={"R1": chip("resistor", resistor, "m1", "m2")},
        **extra,
    )


def hybrid(series: str = "35.36 ohm", across: str = "50 ohm", **extra: Any) -> Data:
    """Return a branch-line hybrid."""
    return base(
        ports={
            "p1": port("a", edge="west"),
            "p2": port("b", edge="east"),
            "p3": port("c", edge="east"),
            "p4": port("d", edge="west"),
        },
        lines={
            "in": free("a", "n1"),
            "s1": line("n1", "n2", angle="90 deg", z=series),
            "v2": line("n2", "n3", angle="90 deg", z=across),
            "s2": line("n4", "n3", angle="90 deg", z=series),
            "v1": line("n1", "n4", angle="90 deg", z=across),
            "o2": free("n2", "b"),
            "o3": free("n3", "c"),
            "o4": free("n4", "d"),
        },
        **extra,
    )


def ring(**extra: Any) -> Data:
    """Return a ring hybrid: three quarters of a wave between two neighbours, a quarter between the others."""
    return base(
        ports={
            "p1": port("a", edge="west"),
            "p2": port("b", edge="west"),
            "p4": port("d", edge="east"),
            "p3": port("c", edge="east"),
        },
        lines={
            "in": free("a", "n1"),
            "q1": line("n1", "n2", angle="90 deg", z="70.7 ohm"),
            "q2": line("n2", "n3", angle="90 deg", z="70.7 ohm"),
            "q3": line("n3", "n4", angle="90 deg", z="70.7 ohm"),
            "q4": line("n4", "n1", angle="270 deg", z="70.7 ohm"),
            "o2": free("n2", "b"),
            "o3": free("n3", "c"),
            "o4": free("n4", "d"),
        },
        **extra,
    )


SUPPLY: Data = {"kind": "dc", "net": "v", "voltage": "5 V", "edge": "north"}
FEEDBACK: Data = {
    "pads": {
        "b": {"at": ["-1 mm", "0 mm"], "size": ["0.8 mm", "0.6 mm"], "heading": "west"},
        "c": {"at": ["1 mm", "0 mm"], "size": ["0.8 mm", "0.6 mm"], "heading": "east"},
        "e": {"at": ["0 mm", "-1 mm"], "size": ["0.8 mm", "0.6 mm"], "ground": "vias", "heading": "south"},
    }
}

LOOPS: dict[str, Data] = {
    "equal divider": divider(),
    "unequal divider": divider("51.5 ohm", "103 ohm", "106 ohm"),
    "branch-line hybrid": hybrid(),
    "unequal hybrid": hybrid("40.8 ohm", "70.7 ohm"),
    "ring": ring(),
    "two lines between two nets": through_with(
        {"one": line("n", "m", angle="90 deg"), "two": line("n", "m", angle="60 deg", z="70 ohm")}
    ),
    "loop with parts": through_with(
        {
            "one": line("n", "m", angle="80 deg"),
            "two": line("n", "k", angle="70 deg", z="70 ohm"),
            "three": line("l", "m", angle="75 deg", z="70 ohm"),
        },
        {"C1": chip("capacitor", "10 pF", "k", "l")},
    ),
    "loop with parts end to end": through_with(
        {
            "one": line("n", "m", angle="80 deg"),
            "two": line("n", "k", angle="70 deg", z="70 ohm"),
            "three": line("l", "m", angle="75 deg", z="70 ohm"),
        },
        {"C1": chip("capacitor", "10 pF", "k", "x"), "R1": chip("resistor", "5 ohm", "x", "l", case="0402")},
    ),
    "two-stage divider": base(
        ports={"p1": port("a", edge="west"), "p2": port("y", edge="east"), "p3": port("z", edge="east")},
        lines={
            "in": free("a", "t"),
            "a1": line("t", "m1", angle="90 deg", z="82 ohm"),
            "a2": line("t", "m2", angle="90 deg", z="82 ohm"),
            "b1": line("m1", "n1", angle="90 deg", z="61 ohm"),
            "b2": line("m2", "n2", angle="90 deg", z="61 ohm"),
            "out_1": free("n1", "y"),
            "out_2": free("n2", "z"),
        },
        parts={"R1": chip("resistor", "100 ohm", "m1", "m2"), "R2": chip("resistor", "240 ohm", "n1", "n2")},
    ),
    "two supplies from one": through_with(
        {
            "mid": line("n", "m", angle="60 deg"),
            "f1": line("n", "k1", angle="90 deg", z="90 ohm"),
            "f2": line("m", "k2", angle="90 deg", z="90 ohm"),
            "s1": free("k1", "v", z=""),
            "s2": free("k2", "v", z=""),
        },
        {"C1": chip("capacitor", "22 pF", "k1", "gnd"), "C2": chip("capacitor", "22 pF", "k2", "gnd")},
        {**two_ports(), "v": SUPPLY},
    ),
    "side by side": base(
        ports=two_ports(),
        lines={"in": free("a", "n"), "out": free("m", "z")},
        parts={
            "C1": chip("capacitor", "22 pF", "n", "m"),
            "R1": chip("resistor", "10 ohm", "n", "m"),
            "C2": chip("capacitor", "2 pF", "m", "n", case="0402"),
        },
    ),
    "feedback": base(
        ports=two_ports(),
        lines={
            "in": free("a", "n"),
            "base": line("n", "b", angle="10 deg"),
            "collector": line("c", "m", angle="10 deg"),
            "out": free("m", "z"),
            "back": line("n", "k", angle="20 deg", z="90 ohm"),
            "forth": free("l", "m", z="90 ohm"),
        },
        parts={
            "Q1": {
                "kind": "transistor",
                "footprint": "small",
                "pins": {"b": "b", "c": "c", "e": "gnd"},
            },
            "R1": chip("resistor", "300 ohm", "k", "l"),
        },
        footprints={"small": FEEDBACK},
    ),
}
"""Circuits with loops."""
