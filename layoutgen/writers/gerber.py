"""Gerber X2 by the open specification: one file for each layer, everything drawn, nothing taken away.

Millimetres with six decimals, so that every coordinate is a whole nanometre. Copper, mask openings, paste and
legend are flashes and regions; the profile is drawn along the board's outline and its cut-outs with a thin
round aperture, whose middle is what counts. Mask files hold the openings and say so (negative polarity). Nets
are named by conductor, since the two ends of a line are one piece of copper.
"""

from __future__ import annotations

import hashlib
import re
import uuid
from collections.abc import Callable, Iterator, Sequence
from functools import partial
from importlib.metadata import version
from itertools import chain

from layoutgen.errors import WrongInputError
from layoutgen.geometry import Ring
from layoutgen.numbers import mm
from layoutgen.origin import Fault, Location
from layoutgen.writers.cut_ins import arc_centre
from layoutgen.writers.gerber_objects import Aperture, Contour, Drawn, Flashes, Marks, objects_of
from layoutgen.writers.outlines import distinct_vertices, turned
from layoutgen.writers.records import Job, Result

__all__ = ["GERBER_FUNCTIONS", "GERBER_WRITERS", "is_drawn", "software", "write_gerber"]

GERBER_FUNCTIONS = {
    "copper_top": "Copper,L1,Top",
    "copper_bottom": "Copper,L2,Bot",
    "soldermask_top": "Soldermask,Top",
    "soldermask_bottom": "Soldermask,Bot",
    "paste_top": "Paste,Top",
    "legend_top": "Legend,Top",
    "profile": "Profile,NP",
}
"""File function of each layer that is a Gerber file; drills go into XNC files."""

_NEGATIVE = ("soldermask_top", "soldermask_bottom")
_PEN_MM = "0.100000"
_DIGITS = re.compile(r"\d+")
_TOO_FAR = 10_000_000_000
"""The first coordinate [nm] with more than four digits before the point."""
_FLASH = "D03*"
_FIRST_CODE = 10
_STRAIGHT_NM = 0.5
"""Arcs that bulge less than this [nm] are written as straight edges."""

_PROJECTS = uuid.UUID("6f1f5a52-7f0c-5b7e-9a55-6f2f0c5d9d51")


def write_gerber(result: Result, job: Job, layer: str) -> bytes:
    """Return the Gerber file of one layer, a key of :data:`GERBER_FUNCTIONS`.

    Raises:
        WrongInputError: A coordinate beyond 9.999 m.
    """
    shapes = result.artwork.on(layer)
    if layer == "profile":
        pen = Aperture(f"C,{_PEN_MM}", "Profile")
        drawn, body = Drawn([], [pen]), list(_outlines([shape.outline for shape in shapes]))
    else:
        drawn = objects_of(result, shapes)
        body = _Drawing(drawn.apertures).lines(drawn.objects)
    _refuse_large(drawn, body)
    text = "\n".join([*_header(result, job, layer), *_definitions(drawn.apertures), *body, ""])
    digest = hashlib.md5(text.replace("\n", "").encode("ascii"), usedforsecurity=False).hexdigest()
    return f"{text}%TF.MD5,{digest}*%\nM02*\n".encode("ascii")


GERBER_WRITERS: dict[str, Callable[[Result, Job], bytes]] = {
    f"{{stem}}_{layer}.gbr": partial(write_gerber, layer=layer) for layer in GERBER_FUNCTIONS
}
"""File names and their writers, one for each layer."""


def is_drawn(result: Result, layer: str) -> bool:
    """Tell whether a layer is a file: masks always, since an empty one covers all; others when not empty."""
    return layer in _NEGATIVE or bool(result.artwork.on(layer))


def software() -> str:
    """Return vendor, name and version of this package as an attribute's value."""
    return f"layoutgen,layoutgen,{version('layoutgen')}"


def _header(result: Result, job: Job, layer: str) -> Iterator[str]:
    """Yield attributes of the file, then number format, unit, polarity and arc mode, each once."""
    revision = result.circuit.file.design.revision or "none"
    name = _escaped(job.stem)
    yield f"G04 {layer}: seen from the top, origin at the board's south-west corner*"
    yield f"%TF.GenerationSoftware,{software()}*%"
    yield f"%TF.ProjectId,{name},{uuid.uuid5(_PROJECTS, job.stem)},{_escaped(revision)}*%"
    yield f"%TF.SameCoordinates,{name}*%"
    yield "%TF.Part,Single*%"
    yield f"%TF.FileFunction,{GERBER_FUNCTIONS[layer]}*%"
    yield f"%TF.FilePolarity,{'Negative' if layer in _NEGATIVE else 'Positive'}*%"
    yield "%FSLAX46Y46*%"
    yield "%MOMM*%"
    yield "%LPD*%"
    yield "G75*"
    yield "G01*"


def _escaped(text: str) -> str:
    """Return text that is legal as an attribute's field: ASCII, reserved characters as escapes."""
    return "".join(
        c if c.isascii() and c.isprintable() and c not in "%*,\\" else f"\\u{min(ord(c), 0xFFFD):04X}"
        for c in text
    )


def _definitions(apertures: Sequence[Aperture]) -> Iterator[str]:
    """Yield the macros, then the apertures with their functions."""
    yield from (_macro(k, a) for k, a in enumerate(apertures, start=_FIRST_CODE) if a.outline)
    function = None
    for code, aperture in enumerate(apertures, start=_FIRST_CODE):
        if aperture.function != function:
            function = aperture.function
            yield f"%TA.AperFunction,{function}*%"
        template = aperture.template or f"OUTLINE{code}"
        yield f"%ADD{code}{template}*%"
    if function is not None:
        yield "%TD.AperFunction*%"


def _macro(code: int, aperture: Aperture) -> str:
    """Return an outline macro: exposure on, number of edges, vertices with the first repeated, no turn."""
    points = (*aperture.outline, aperture.outline[0])
    vertices = ",\n".join(f"{mm(x)},{mm(y)}" for x, y in points)
    return f"%AMOUTLINE{code}*\n4,1,{len(aperture.outline)},\n{vertices},\n0*%"


class _Drawing:
    """Turns objects into commands, and says only what changes."""

    def __init__(self, apertures: Sequence[Aperture]) -> None:
        self.codes = {aperture: code for code, aperture in enumerate(apertures, start=_FIRST_CODE)}
        self.marks = Marks("")
        self.function: str | None = None

    def lines(self, objects: Sequence[Flashes | Contour]) -> list[str]:
        """Return the commands of all objects, and leave no attribute behind."""
        out: list[str] = []
        aperture = None
        for item in objects:
            if item.marks is not self.marks:
                out += self._attributes(item.marks)
            if isinstance(item, Contour):
                out += self._region(item)
                continue
            if item.aperture is not aperture:
                aperture = item.aperture
                out.append(f"D{self.codes[aperture]}*")
            out.append("\n".join([f"X{x}Y{y}{_FLASH}" for x, y, _ in item.places]))
        return [*out, *self._attributes(Marks("")), *self._function(None)]

    def _attributes(self, marks: Marks) -> Iterator[str]:
        """Yield what is new or no longer true of the objects that follow."""
        old, self.marks = self.marks, marks
        for name, before, now in (
            (".N", old.net, marks.net),
            (".P", _pin(old), _pin(marks)),
            (".C", old.part, marks.part),
        ):
            if now is not None and now != before:
                yield f"%TO{name},{now}*%"
            elif now is None and before is not None:
                yield f"%TD{name}*%"

    def _function(self, function: str | None) -> Iterator[str]:
        """Yield the function of the regions that follow; flashes have that of their aperture."""
        if function != self.function:
            self.function = function
            yield f"%TA.AperFunction,{function}*%" if function else "%TD.AperFunction*%"

    def _region(self, contour: Contour) -> Iterator[str]:
        yield from self._function(contour.marks.function)
        yield "G36*"
        yield from _path(contour.ring)
        yield "G37*"


def _pin(marks: Marks) -> str | None:
    return None if marks.pin is None else ",".join(marks.pin)


def _outlines(rings: Sequence[Ring]) -> Iterator[str]:
    """Yield the profile: each outline drawn once round, the board's counter-clockwise, cut-outs clockwise."""
    yield f"D{_FIRST_CODE}*"
    for number, ring in enumerate(rings):
        yield from _path(turned(ring, -1 if number else 1))


def _path(ring: Ring) -> Iterator[str]:
    """Yield the commands along a closed outline, beginning and ending with straight edges."""
    vertices = distinct_vertices(ring)
    (x, y), _ = vertices[0]
    yield f"X{x}Y{y}D02*"
    mode = "G01*"
    for (start, bulge), (end, _) in zip(vertices, (*vertices[1:], vertices[0]), strict=True):
        sagitta = abs(bulge) * max(abs(end[0] - start[0]), abs(end[1] - start[1])) / 2.0
        wanted = "G01*" if sagitta < _STRAIGHT_NM else "G03*" if bulge > 0 else "G02*"
        if wanted != mode:
            mode = wanted
            yield mode
        centre = "" if mode == "G01*" else _from_start(start, end, bulge)
        yield f"X{end[0]}Y{end[1]}{centre}D01*"
    if mode != "G01*":
        yield "G01*"


def _from_start(start: tuple[int, int], end: tuple[int, int], bulge: float) -> str:
    """Return an arc's centre as offsets from its start."""
    x, y = arc_centre(start, end, bulge)
    return f"I{round(x - start[0])}J{round(y - start[1])}"


def _refuse_large(drawn: Drawn, lines: Sequence[str]) -> None:
    """Refuse coordinates that need more than four digits before the point."""
    flashes = (item.places for item in drawn.objects if isinstance(item, Flashes))
    reach = max(map(abs, chain.from_iterable(chain.from_iterable(flashes))), default=0)
    paths = "".join(line for line in lines if line[0] == "X" and not line.endswith(_FLASH))
    reach = max((reach, *map(int, _DIGITS.findall(paths))))
    if reach >= _TOO_FAR:
        found = f"a coordinate of {reach / 1e9:.3f} m"
        raise WrongInputError([Fault(Location("artwork", 0), "", found, "up to 9.999 m")])
