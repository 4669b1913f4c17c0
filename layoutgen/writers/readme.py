"""The README of each package: what is in it, extents, counts, units, conventions."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping

from layoutgen.numbers import mm, mm_short
from layoutgen.writers.centroid import ROTATION_CONVENTION
from layoutgen.writers.fabrication_facts import drill_rows, open_points
from layoutgen.writers.gerber import GERBER_FUNCTIONS, is_drawn
from layoutgen.writers.part_texts import flange_parts
from layoutgen.writers.plain import columns, heading, many, paragraph
from layoutgen.writers.records import Job, Result
from layoutgen.writers.review_sheet import verdict
from layoutgen.writers.scene import layers_of
from layoutgen.writers.supplies import supplies_of

__all__ = ["write_readme"]


def write_readme(
    result: Result, job: Job, receiver: str, abouts: Mapping[str, str], files: Mapping[str, bytes]
) -> bytes:
    """Return the README of one receiver as plain text in UTF-8.

    Args:
        result: Every stage's result.
        job: Names the board.
        receiver: A key of :data:`layoutgen.writers.packages.RECEIVERS`.
        abouts: What each file is, by name.
        files: The files themselves, for their sizes.
    """
    design = result.circuit.file.design
    title = f"{job.stem}: files for the {_TITLES[receiver]}"
    rows = [(name, str(len(data)), abouts[name]) for name, data in files.items()]
    text = [
        heading(title, "="),
        paragraph(f"{design.title}, revision {design.revision or 'none'}."),
        *([paragraph(f"Do not make this board: {verdict(result)}")] if result.count("error") else []),
        columns(("File", "Bytes", "What it is"), rows),
        heading("Board"),
        columns(("What", "How much"), list(_facts(result))),
        heading("Conventions"),
        *(paragraph(line, "- ") for line in (*_COMMON, *_NOTES[receiver](result))),
    ]
    return "\n".join(text).encode("utf-8")


_TITLES = {
    "pcb-designer": "PCB designer",
    "board-house": "board house",
    "mask-house": "mask or ceramic house",
    "assembly": "assembler",
    "test": "test engineer",
    "reviewer": "reviewer",
}

_COMMON = (
    "Millimetres. Origin at the board's south-west corner, x east, y north, everything seen from the top; "
    "nothing is mirrored, bottom layers neither.",
)


def _facts(result: Result) -> Iterator[tuple[str, str]]:
    """Yield extents and counts."""
    placement, artwork = result.placement, result.artwork
    yield "extents", f"x 0 to {mm(placement.width)} mm, y 0 to {mm(placement.height)} mm"
    cutouts = sum(shape.role == "cutout" for shape in artwork.on("profile"))
    yield "outlines", f"1 board, {many(cutouts, 'cut-out')}"
    yield "lines", str(len(placement.lines) + len(placement.pairs) + len(placement.radials))
    yield "parts", str(len(placement.parts))
    pads = sum(shape.role == "pad" for shape in artwork.on("copper_top"))
    yield "pads", str(pads)
    yield "vias", str(len(artwork.vias))
    plated = sum(hole.plated for hole in artwork.holes)
    yield "other holes", f"{plated} plated, {len(artwork.holes) - plated} not plated"
    yield "nets", str(len(result.circuit.nets))


def _designer(result: Result) -> Iterator[str]:
    yield (
        "Layers have the names of their functions. Closed polylines, outer ones counter-clockwise, holes and "
        "cut-outs clockwise; copper is where outlines wind round more often than holes. Drills are circles. "
        "No hatches, no blocks, no edge below 1 um."
    )
    yield (
        "The R12 file has arcs as chords within 1 um and no unit: its reference square, south-west of the "
        "board, measures 10.000 mm. Its layer keepout holds the parts' courtyards. Round lands are circles "
        "there, and count as outlines."
    )
    yield "Shapes of one net overlap on purpose; join them or leave them. Pads are in the copper layers too."
    yield (
        'The table of shapes says what may be changed. "do not change width": the circuit asks for the width '
        'itself. "impedance, may be adjusted": the width follows from the impedance and may follow it on '
        "another stackup, the length with it; the board house is told to leave both alone."
    )
    yield "A conductor is the copper that a net belongs to: a line joins the nets at its ends."


def _board_house(result: Result) -> Iterator[str]:
    missing = [layer for layer in GERBER_FUNCTIONS if not is_drawn(result, layer)]
    yield (
        "Gerber X2 with six decimals of a millimetre, one file a layer, nothing subtracted; mask files "
        "hold the openings (negative polarity). The profile is the middle of the drawn line."
    )
    if missing:
        yield f"Empty and left out: {', '.join(missing)}."
    tools = [
        f"{count} of {diameter} mm {_plating(plated)}" for _, diameter, count, plated, _ in drill_rows(result)
    ]
    yield f"Drills, finished diameters: {', '.join(tools) or 'none'}."
    yield "Nets in Gerber and netlist are conductors: a line of the circuit joins the nets at its ends."
    yield "MANIFEST.sha256 inside the zip holds the hash of every file (sha256sum --check MANIFEST.sha256)."
    yield from open_points(result)


def _plating(plated: str) -> str:
    return "plated" if plated == "yes" else "not plated"


def _mask_house(result: Result) -> Iterator[str]:
    yield (
        "One user unit is 1 um, one database unit 1 nm; one top cell, round shapes as references to cells. "
        "Arcs are chords with their vertices on the arc, within 1 um."
    )
    yield "Copper with holes is cut into plain pieces that touch along whole edges; merge them before sizing."
    counts = [f"{name} {len(shapes)}" for name, shapes in layers_of(result).items() if shapes]
    yield f"Shapes before cutting: {', '.join(counts)}."
    undercut = result.circuit.rules.copper.undercut
    yield (
        f"Copper is drawn wider than finished by {mm_short(round(undercut * 1e9))} mm on each edge."
        if undercut
        else "Copper is drawn as wide as it is to be when finished: add your own etch compensation."
    )
    yield "The layer findings is not to be made."


def _assembly(result: Result) -> Iterator[str]:
    if not result.placement.parts:
        yield "There is nothing to place: the board carries no parts of the circuit file, only connections."
        return
    yield ROTATION_CONVENTION
    yield "All parts are on the top side. Connectors, wires, screws and carrier are not in the parts list."
    yield "The circuit file names values, cases and ratings, no makers' part numbers."
    for part in flange_parts(result):
        yield f"{part.name} is screwed to the carrier through the board: see the drawing before soldering."


def _test(result: Result) -> Iterator[str]:
    order = [supply.port for supply in supplies_of(result)]
    if order:
        yield f"Supplies in the order of switching on: {', '.join(order)}; see the test sheet."
    if result.response is not None:
        named = ", ".join(f"{k} {name}" for k, name in enumerate(result.response.ports, start=1))
        yield f"Touchstone ports: {named}. All to 50 ohm."
    if order:
        yield (
            "Voltages are the solution of the bias point with the resistance of the drawn lines, without RF "
            "drive."
        )


def _reviewer(result: Result) -> Iterator[str]:
    yield verdict(result)
    yield "Print the review sheets at 100 %: the bars of 50 mm tell whether the board is at 1:1."
    yield "report.html, in the folder above, shows the same board with everything to be pointed at."


_NOTES: dict[str, Callable[[Result], Iterator[str]]] = {
    "pcb-designer": _designer,
    "board-house": _board_house,
    "mask-house": _mask_house,
    "assembly": _assembly,
    "test": _test,
    "reviewer": _reviewer,
}
