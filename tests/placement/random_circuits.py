"""Random circuits: trees of lines, parts, stubs and feeds, with loops in them, from a source of chance."""

from __future__ import annotations

import random
from dataclasses import dataclass, field
from typing import Any

from tests.placement.circuits import FEEDBACK, base, chip, free, line, port

CASES = ("0201", "0402", "0603", "0805", "1206")
SHUNTS = (("capacitor", "4.7 pF"), ("inductor", "8.2 nH"), ("resistor", "51 ohm"))
SERIES = (("capacitor", "22 pF"), ("inductor", "3.3 nH"), ("resistor", "10 ohm"))


@dataclass
class RandomCircuit:
    """Grows a circuit from net to net, of about ``size`` elements, with ``loops`` loops."""

    chance: random.Random
    size: int
    loops: int
    lines: dict[str, Any] = field(default_factory=dict)
    parts: dict[str, Any] = field(default_factory=dict)
    coupled: dict[str, Any] = field(default_factory=dict)
    ports: dict[str, Any] = field(default_factory=dict)
    footprints: dict[str, Any] = field(default_factory=dict)

    def data(self) -> dict[str, Any]:
        """Return the circuit file's tables."""
        self.fed = self.chance.random() < 0.5
        self.ports = {"p1": port("a"), "p2": port("z")}
        self.lines["launch"] = free("a", "n0")
        spots = self._loop_spots()
        net, step = "n0", 0
        while self._count < self.size or spots:
            there = self._net("n")
            if step in spots or self._count >= self.size:
                spots = spots - {step} if step in spots else frozenset()
                self._loop(net, there)
            else:
                self._stretch(net, there)
                self._branch(net)
            net, step = there, step + 1
        self.lines["exit"] = free(net, "z")
        return self._file()

    @property
    def _count(self) -> int:
        return len(self.lines) + len(self.parts) + len(self.coupled)

    def _loop_spots(self) -> frozenset[int]:
        return frozenset(self.chance.randrange(0, 3 + self.size // 4) for _ in range(self.loops))

    def _file(self) -> dict[str, Any]:
        data = base(ports=self.ports, lines=self.lines)
        for key in ("parts", "coupled", "footprints"):
            if found := getattr(self, key):
                data[key] = found
        if self.chance.random() < 0.3:
            wide, high = (
                self.chance.randint(15, 60 + 3 * self.size),
                self.chance.randint(8, 30 + 2 * self.size),
            )
            data["board"]["size"] = [f"{wide} mm", f"{high} mm"]
        if self.chance.random() < 0.2:
            del data["ground"]
        return data

    def _net(self, kind: str) -> str:
        self._nets += 1
        return f"{kind}{self._nets}"

    _nets: int = 0
    fed: bool = False
    """Whether feeds hang on the path (else shorts do: both together would short the supply)."""

    def _ohms(self) -> str:
        return f"{self.chance.randint(20, 100)} ohm"

    def _degrees(self, least: int, most: int) -> str:
        return f"{self.chance.randint(least, most)} deg"

    def _line(self, *nets: str, least: int = 25, most: int = 110) -> str:
        name = f"l{len(self.lines)}"
        self.lines[name] = line(*nets, z=self._ohms(), angle=self._degrees(least, most))
        return name

    def _part(self, kinds: tuple[tuple[str, str], ...], *nets: str) -> None:
        kind, value = self.chance.choice(kinds)
        self.parts[f"X{len(self.parts)}"] = chip(kind, value, *nets, case=self.chance.choice(CASES))

    # -- along the path ------------------------------------------------------------------------------

    def _stretch(self, here: str, there: str) -> None:
        """Add what leads on from net to net: a line, a series part, rarely a pair or a transistor."""
        draw = self.chance.random()
        if draw < 0.70:
            self._line(here, there)
        elif draw < 0.90:
            self._part(SERIES, here, there)
        elif draw < 0.95:
            self._pair(here, there)
        else:
            self._transistor(here, there)

    def _pair(self, here: str, there: str) -> None:
        """Add a coupled pair: a filter's section, or a coupler whose second line ends in resistors."""
        if self.chance.random() < 0.5:
            nets = [here, "open", "open", there]
        else:
            nets = [here, there, self._net("c"), self._net("c")]
            for net in nets[2:]:
                self.parts[f"X{len(self.parts)}"] = chip("resistor", "50 ohm", net, "gnd")
        even = self.chance.randint(55, 75)
        self.coupled[f"pair{len(self.coupled)}"] = {
            "nets": nets,
            "even_impedance": f"{even} ohm",
            "odd_impedance": f"{even - self.chance.randint(10, 25)} ohm",
            "angle": self._degrees(40, 95),
        }

    def _transistor(self, here: str, there: str) -> None:
        self.footprints["small"] = FEEDBACK
        pins = {"b": here, "c": there, "e": "gnd"}
        self.parts[f"Q{len(self.parts)}"] = {"kind": "transistor", "footprint": "small", "pins": pins}

    def _loop(self, here: str, there: str) -> None:
        """Add a loop between two nets: lines, a part in it, a bridge, a free line, or parts side by side."""
        middle = self._net("m")
        kind = self.chance.choice(("ways", "part", "bridge", "free", "beside"))
        if kind == "beside":
            for _ in range(self.chance.randint(2, 3)):
                self._part(SERIES, here, middle)
        else:
            self._line(here, middle, least=40, most=120)
        if kind == "ways":
            self._line(here, middle, least=40, most=120)
        elif kind == "free":
            self.lines[f"l{len(self.lines)}"] = free(here, middle, z=self._ohms())
        elif kind in ("part", "bridge"):
            far = self._net("x")
            self._line(here, far, least=40, most=120)
            self._part(SERIES, far, middle)
            if kind == "bridge":
                self._line(far)
        self._line(middle, there)

    # -- beside the path -----------------------------------------------------------------------------

    def _branch(self, net: str) -> None:
        """Add what hangs on a net of the path, often nothing."""
        some = ("feed", "feed") if self.fed else ("short", "cross")
        kind = self.chance.choice(("", "", "", "stub", "shunt", "tree", "fan", *some))
        if kind in ("stub", "cross"):
            self._line(net, least=15)
        if kind in ("short", "cross"):
            self._line(net, "gnd", least=15)
        if kind == "shunt":
            self._shunt(net)
        elif kind == "feed":
            self._feed(net)
        elif kind == "tree":
            self._tree(net, 2)
        elif kind == "fan":
            radial = {"nets": [net], "shape": "radial", "sector": self._degrees(40, 80)}
            self.lines[f"l{len(self.lines)}"] = radial

    def _feed(self, net: str) -> None:
        """Add a feed with its bank and its supply."""
        bank, supply = self._net("b"), self._net("v")
        self.lines[f"l{len(self.lines)}"] = line(net, bank, z="90 ohm", angle=self._degrees(45, 180))
        self.lines[f"l{len(self.lines)}"] = free(bank, supply, z="")
        self.ports[supply] = {"kind": "dc", "net": supply, "voltage": "5 V"}
        for j in range(self.chance.randint(1, 4)):
            case = self.chance.choice(CASES[1:])
            self.parts[f"X{len(self.parts)}"] = chip(
                "capacitor", f"{10 ** (j + 1)} pF", bank, "gnd", case=case
            )

    def _tree(self, net: str, depth: int) -> None:
        """Add a line whose far end carries one or two stubs, parts or trees of its own."""
        far = self._net("t")
        self._line(net, far, least=35)
        for _ in range(self.chance.randint(1, 2)):
            kind = self.chance.choice(("stub", "short", "part", "tree"))
            if kind == "tree" and depth:
                self._tree(far, depth - 1)
            elif kind == "part":
                self._shunt(far)
            else:
                self._line(far, *(["gnd"] if kind == "short" and not self.fed else []), least=15)

    def _shunt(self, net: str) -> None:
        """Add a part to ground; where feeds are, none that would short them."""
        self._part(SHUNTS[:1] if self.fed else SHUNTS, net, "gnd")


def random_circuit(chance: random.Random, small: float = 0.94) -> dict[str, Any]:
    """Return a circuit; a share ``small`` has few elements and one loop at most, the rest up to 40."""
    draw = chance.random()
    if draw < small:
        size = chance.randint(1, 4)
    else:
        size = chance.randint(5, 9) if draw < 1.0 - (1.0 - small) / 4.0 else chance.randint(10, 36)
    loops = chance.choices((0, 1, 2, 3), (16, 3, 1, 1) if draw > small else (16, 3, 0, 0))[0]
    return RandomCircuit(chance, size, loops).data()
