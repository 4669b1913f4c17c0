"""A folder for each receiver: only what that receiver needs, ready to be sent on, with a README.

The board house's folder holds one zip with everything, its members' hashes in ``MANIFEST.sha256``. Times in
the zip are fixed, so that equal results give equal bytes.
"""

from __future__ import annotations

import difflib
import hashlib
import io
import zipfile
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import partial

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault, Location
from layoutgen.writers.assembly_drawing import write_assembly_drawing
from layoutgen.writers.bill_of_materials import write_bill_of_materials
from layoutgen.writers.centroid import write_centroid
from layoutgen.writers.dxf import write_dxf
from layoutgen.writers.dxf_r12 import write_dxf_r12
from layoutgen.writers.fabrication_drawing import write_fabrication_drawing
from layoutgen.writers.gds import write_gds
from layoutgen.writers.gerber import GERBER_FUNCTIONS, is_drawn, write_gerber
from layoutgen.writers.ipcd356 import write_ipcd356
from layoutgen.writers.layer_table import write_layer_table
from layoutgen.writers.oasis import write_oasis
from layoutgen.writers.readme import write_readme
from layoutgen.writers.records import Job, Result
from layoutgen.writers.review_sheet import write_review_sheet
from layoutgen.writers.shape_table import write_shape_table
from layoutgen.writers.svg import write_svg
from layoutgen.writers.test_sheet import write_bias_points, write_port_table, write_test_sheet
from layoutgen.writers.touchstone import write_as_drawn, write_wanted
from layoutgen.writers.xnc import has_hits, write_xnc

__all__ = [
    "MANIFEST",
    "README",
    "RECEIVERS",
    "Item",
    "encode_packages",
    "manifest",
    "receivers_from",
    "zipped",
]

README, MANIFEST = "README.txt", "MANIFEST.sha256"
_ZIP_TIME = (1980, 1, 1, 0, 0, 0)
_PLAIN_FILE, _UNIX = 0o100644 << 16, 3

Writer = Callable[[Result, Job], bytes]


@dataclass(frozen=True, slots=True)
class Item:
    """One file of a package: its writer, what it is, and when there is one."""

    write: Writer
    about: str
    when: Callable[[Result], bool] = lambda result: True


def _responds(result: Result) -> bool:
    return result.response is not None


_PASTE = {
    "{stem}_paste_top.gbr": Item(
        partial(write_gerber, layer="paste_top"),
        "solder paste, Gerber X2",
        partial(is_drawn, layer="paste_top"),
    )
}
_ABOUT_LAYERS = {
    "copper_top": "copper 1: lines, pads, pour",
    "copper_bottom": "copper 2: ground plane",
    "soldermask_top": "openings of the top solder mask",
    "soldermask_bottom": "openings of the bottom solder mask",
    "paste_top": "solder paste",
    "legend_top": "legend",
    "profile": "outline and cut-outs, along the finished edge",
}
_GERBERS = {
    f"{{stem}}_{layer}.gbr": Item(
        partial(write_gerber, layer=layer),
        f"{_ABOUT_LAYERS[layer]}; Gerber X2, {function}",
        partial(is_drawn, layer=layer),
    )
    for layer, function in GERBER_FUNCTIONS.items()
}
_DRILLS = {
    f"{{stem}}_drill_{name}.xnc": Item(
        partial(write_xnc, plated=plated), f"{about}; XNC", partial(has_hits, plated=plated)
    )
    for name, plated, about in (
        ("plated", True, "plated holes"),
        ("nonplated", False, "holes without plating"),
    )
}

RECEIVERS: Mapping[str, Mapping[str, Item]] = {
    "pcb-designer": {
        "{stem}.dxf": Item(write_dxf, "artwork, DXF R2010 in millimetres, arcs as bulges"),
        "{stem}_r12.dxf": Item(write_dxf_r12, "the same for old readers, DXF R12, arcs as chords"),
        "{stem}_shapes.csv": Item(write_shape_table, "every piece of copper: net, size, what may be changed"),
        "{stem}_ports.csv": Item(write_port_table, "ports with their planes"),
    },
    "board-house": {
        **_GERBERS,
        **_DRILLS,
        "{stem}.ipc": Item(write_ipcd356, "netlist for the bare-board test, IPC-D-356A"),
        "{stem}_fabrication.pdf": Item(
            write_fabrication_drawing, "dimensions, drills, stackup, notes, critical widths"
        ),
    },
    "mask-house": {
        "{stem}.gds": Item(write_gds, "artwork, GDSII, 1 um user unit, 1 nm database unit"),
        "{stem}.oas": Item(write_oasis, "the same cells, OASIS"),
        "{stem}_layers.csv": Item(write_layer_table, "layer numbers and their meaning"),
    },
    "assembly": {
        "{stem}_bill_of_materials.csv": Item(write_bill_of_materials, "parts, equal ones on one row"),
        "{stem}_centroid.csv": Item(write_centroid, "places and rotations"),
        **_PASTE,
        "{stem}_assembly.pdf": Item(write_assembly_drawing, "references, mounting notes, cautions"),
    },
    "test": {
        "{stem}_test_sheet.txt": Item(
            write_test_sheet, "ports, order of switching on, bias and response to expect"
        ),
        "{stem}_ports.csv": Item(write_port_table, "ports with their planes and Touchstone numbers"),
        "{stem}_bias.csv": Item(write_bias_points, "voltages to expect, and where to probe"),
        "wanted.s{ports}p": Item(write_wanted, "response of the schematic, to 50 ohm", _responds),
        "as_drawn.s{ports}p": Item(write_as_drawn, "response of the drawn board, to 50 ohm", _responds),
    },
    "reviewer": {
        "{stem}_review.pdf": Item(
            write_review_sheet, "board at 1:1, verdict, dimensions, length budgets, what was not checked"
        ),
        "{stem}.svg": Item(write_svg, "the board as a picture"),
        "wanted.s{ports}p": Item(write_wanted, "response of the schematic, to 50 ohm", _responds),
        "as_drawn.s{ports}p": Item(write_as_drawn, "response of the drawn board, to 50 ohm", _responds),
    },
}  # fmt: skip
"""Receivers, and the files of each by the pattern of their names; ``README.txt`` comes to all of them."""

_ZIPPED = {"board-house": "{stem}_board.zip"}


def receivers_from(text: str) -> tuple[str, ...]:
    """Return the receivers named in a list with commas, in the order of :data:`RECEIVERS`, each once.

    Args:
        text: Names with commas, or ``all``, or ``none``.

    Raises:
        WrongInputError: An unknown receiver, with the nearest known one; or nothing named.
    """
    named = [word.strip() for word in text.split(",") if word.strip()]
    if named == ["none"]:
        return ()
    if named == ["all"]:
        return tuple(RECEIVERS)
    faults = [_unknown(name) for name in dict.fromkeys(named) if name not in RECEIVERS]
    if not named:
        faults = [
            Fault(
                Location("--for", 0), "", "no receiver", f"one or more of {', '.join(RECEIVERS)}; all; none"
            )
        ]
    if faults:
        raise WrongInputError(faults)
    return tuple(name for name in RECEIVERS if name in named)


def _unknown(name: str) -> Fault:
    near = difflib.get_close_matches(name, RECEIVERS, 1, 0.5)
    hint = f"; the nearest is {near[0]}" if near else ""
    return Fault(Location("--for", 0), "", f'receiver "{name[:40]}"', f"{', '.join(RECEIVERS)}{hint}")


def encode_packages(
    result: Result, job: Job, receivers: Sequence[str] = tuple(RECEIVERS)
) -> dict[str, bytes]:
    """Return the files of some receivers by their paths, such as ``assembly/README.txt``.

    Args:
        result: Every stage's result.
        job: Its ``files`` are used where a package holds one of them, instead of writing it again.
        receivers: Names of receivers, keys of :data:`RECEIVERS`.
    """
    written = dict(job.files)
    packages: dict[str, bytes] = {}
    for receiver in receivers:
        files = _files_of(result, replace(job, files=written), receiver)
        written.update(files)
        readme = write_readme(result, job, receiver, _abouts(result, job, receiver), files)
        if receiver in _ZIPPED:
            name = _ZIPPED[receiver].format(stem=job.stem)
            files = {name: zipped({README: readme, **files})}
        packages.update({f"{receiver}/{name}": data for name, data in {README: readme, **files}.items()})
    return packages


def _files_of(result: Result, job: Job, receiver: str) -> dict[str, bytes]:
    """Return a receiver's files by name."""
    files: dict[str, bytes] = {}
    for pattern, item in RECEIVERS[receiver].items():
        if item.when(result):
            name = _name(result, job, pattern)
            files[name] = job.files[name] if name in job.files else item.write(result, job)
    return files


def _abouts(result: Result, job: Job, receiver: str) -> dict[str, str]:
    """Return what each file of a receiver is."""
    items = RECEIVERS[receiver].items()
    return {_name(result, job, pattern): item.about for pattern, item in items if item.when(result)}


def _name(result: Result, job: Job, pattern: str) -> str:
    ports = len(result.response.ports) if result.response else 0
    return pattern.format(stem=job.stem, ports=ports)


def zipped(files: Mapping[str, bytes]) -> bytes:
    """Return files and their manifest as one zip, with fixed times and permissions."""
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w") as archive:
        for name, data in {**files, MANIFEST: manifest(files)}.items():
            entry = zipfile.ZipInfo(name, _ZIP_TIME)
            entry.compress_type, entry.create_system = zipfile.ZIP_DEFLATED, _UNIX
            entry.external_attr = _PLAIN_FILE
            archive.writestr(entry, data)
    return stream.getvalue()


def manifest(files: Mapping[str, bytes]) -> bytes:
    """Return the files' SHA-256, in the form that ``sha256sum --check`` reads."""
    lines = (f"{hashlib.sha256(data).hexdigest()}  {name}\n" for name, data in files.items())
    return "".join(lines).encode("utf-8")
