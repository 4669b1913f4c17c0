"""What stands around the board in a picture: title, ports, scale bar, key, and the page's size."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from layoutgen.artwork import Artwork
from layoutgen.geometry import Ring
from layoutgen.numbers import fixed
from layoutgen.placement import PlacedPort
from layoutgen.writers.picture_records import Area, Text

__all__ = ["Frame", "diamond"]

_NM = 1_000_000
_CHARACTER = 0.85
"""Mean width of a character in capital heights [-], generous."""

_KEY = {
    "line": "line",
    "pour": "ground pour",
    "pad": "pad",
    "via": "via",
    "hole": "hole, cut-out",
    "opening": "mask opening",
    "error": "error",
    "warning": "warning",
}


class Frame:
    """The surroundings of one board: sizes follow from the board's size and its ports' names.

    Args:
        artwork: The board.
        styles: Styles that the board's picture uses; the key explains those.
    """

    def __init__(self, artwork: Artwork, styles: Sequence[str]) -> None:
        """Measure the room that ports and texts take."""
        placement = artwork.placement
        self.file = placement.sized.circuit.file
        self.width, self.height = placement.width, placement.height
        self.unit = max(placement.width, placement.height, 20 * _NM) // 45
        self.ports = tuple(placement.ports.values())
        self.styles = [style for style in _KEY if style in styles]
        self.left, self.right = self._side_room("west"), self._side_room("east")
        self.below, self.above = self._end_room("south"), self._end_room("north")

    @property
    def box(self) -> tuple[int, int, int, int]:
        """Lower left and upper right corner of the page [nm]."""
        reach = max(
            self.width + self.right,
            *(text.x + _text_width(text) + self.unit for text in (*self._head(), *self._key_texts())),
        )
        lowest = min(y for _, _, y in self._key_places()) if self.styles else self._bar_y
        return (-self.left, lowest - 2 * self.unit, reach, self._head()[0].y + round(2.6 * self.unit))

    def areas(self) -> Iterator[Area]:
        """Yield port arrows, scale bar and the key's samples."""
        yield from map(self._arrow, self.ports)
        yield from self._bar()
        yield from map(self._sample, self._key_places())

    def texts(self) -> Iterator[Text]:
        """Yield title, port names, the scale bar's length and the key's words."""
        yield from self._head()
        yield from map(self._port_name, self.ports)
        yield self._bar_text()
        yield from self._key_texts()

    def _side_room(self, edge: str) -> int:
        names = [_width_of(port.name, self._name_height) for port in self.ports if port.edge == edge]
        return max([2 * self.unit, *(name + 3 * self.unit for name in names)])

    def _end_room(self, edge: str) -> int:
        return round((3.4 if any(port.edge == edge for port in self.ports) else 1.0) * self.unit)

    @property
    def _name_height(self) -> int:
        return round(0.9 * self.unit)

    def _head(self) -> list[Text]:
        """Return the title, and under it band, board and substrate."""
        design, substrate = self.file.design, self.file.substrate
        revision = f", revision {design.revision}" if design.revision else ""
        low, high = (fixed(f / 1e9, 3) for f in design.band)
        lines = [
            f"{low} to {high} GHz · {self.width / _NM:g} x {self.height / _NM:g} mm · seen from the top",
            f"permittivity {substrate.relative_permittivity:g}, height {substrate.height * 1e3:g} mm",
        ]
        y, size = self.height + self.above, round(0.7 * self.unit)
        if _width_of(" · ".join(lines), size) < self.width + self.right:
            lines = [" · ".join(lines)]
        step = round(1.15 * self.unit)
        texts = [Text(line, 0, y + step // 2 + k * step, size) for k, line in enumerate(reversed(lines))]
        title_y = texts[-1].y + round(1.6 * self.unit)
        return [Text(design.title + revision, 0, title_y, round(1.3 * self.unit)), *texts]

    def _arrow(self, port: PlacedPort) -> Area:
        """Return an arrow outside the board that points into it."""
        c, s = math.cos(math.radians(port.heading)), math.sin(math.radians(port.heading))
        tip, back, half = -0.35 * self.unit, -1.25 * self.unit, 0.45 * self.unit
        corners = ((tip, 0.0), (back, half), (back, -half))
        x, y = self._at_edge(port)
        points = tuple((round(x + a * c - b * s), round(y + a * s + b * c)) for a, b in corners)
        return Area((Ring(points),), "port", f"port {port.name}, net {port.net}")

    def _at_edge(self, port: PlacedPort) -> tuple[int, int]:
        """Return the place on the profile that a port's copper points to."""
        edges = {"west": (0, port.y), "east": (self.width, port.y), "south": (port.x, 0)}
        return edges.get(port.edge, (port.x, self.height))

    def _port_name(self, port: PlacedPort) -> Text:
        (x, y), size, away = self._at_edge(port), self._name_height, round(1.7 * self.unit)
        if port.edge == "west":
            return Text(port.name, x - away, y - size // 2, size, "port", "end")
        if port.edge == "east":
            return Text(port.name, x + away, y - size // 2, size, "port")
        return Text(
            port.name, x, y + away if port.edge == "north" else y - away - size, size, "port", "middle"
        )

    @property
    def _bar_y(self) -> int:
        return -self.below - round(1.4 * self.unit)

    def _bar_length(self) -> int:
        """Return the largest of 1, 2, 5 times a power of ten [nm] within a quarter of the board."""
        most = max(self.width // 4, 1)
        power: int = 10 ** (len(str(most)) - 1)
        return max(step * power for step in (1, 2, 5) if step * power <= most)

    def _bar(self) -> Iterator[Area]:
        length, y, thick = self._bar_length(), self._bar_y, self.unit // 8
        yield Area((Ring.box(0, y, length, y + thick),), "bar")
        for x in (0, length - thick):
            yield Area((Ring.box(x, y, x + thick, y + self.unit // 2),), "bar")

    def _bar_text(self) -> Text:
        length = self._bar_length()
        return Text(f"{length / _NM:g} mm", length + self.unit // 2, self._bar_y, round(0.75 * self.unit))

    def _key_places(self) -> list[tuple[str, int, int]]:
        """Return style and place [nm] of each entry of the key, in rows as wide as the board or 30 units."""
        places, x, y = [], 0, self._bar_y - 2 * self.unit
        for style in self.styles:
            advance = round(2.2 * self.unit) + _width_of(_KEY[style], self._key_height)
            if x and x + advance > max(self.width + self.right, 30 * self.unit):
                x, y = 0, y - round(1.4 * self.unit)
            places.append((style, x, y))
            x += advance
        return places

    @property
    def _key_height(self) -> int:
        return round(0.65 * self.unit)

    def _sample(self, place: tuple[str, int, int]) -> Area:
        style, x, y = place
        size = round(0.8 * self.unit)
        if style in ("via", "hole"):
            return Area((Ring.circle(x + size // 2, y + size // 2, size // 2),), style)
        if style in ("error", "warning"):
            return Area((diamond(x + size // 2, y + size // 2, round(0.6 * size)),), style)
        return Area((Ring.box(x, y, x + size, y + size),), style)

    def _key_texts(self) -> list[Text]:
        shift = round(1.2 * self.unit), self.unit // 16
        places = self._key_places()
        return [Text(_KEY[style], x + shift[0], y + shift[1], self._key_height) for style, x, y in places]


def diamond(x: int, y: int, half: int) -> Ring:
    """Return a square on its tip about (x, y) [nm], half its diagonal long [nm]."""
    return Ring(((x - half, y), (x, y - half), (x + half, y), (x, y + half)))


def _width_of(text: str, height: int) -> int:
    return round(_CHARACTER * height * len(text))


def _text_width(text: Text) -> int:
    return _width_of(text.text, text.height)
