"""The read-back proof: sound files pass, and each seeded corruption is caught, whatever the kind of file."""

from __future__ import annotations

import hashlib
import io
import json
import re
import struct
import tempfile
import zipfile
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import gdstk
import pytest
import shapely

from layoutgen.artwork import LAYERS
from layoutgen.pipeline import run
from layoutgen.writers import Job, Result, encode
from layoutgen.writers.packages import encode_packages, manifest
from layoutgen.writers.proof import Check, Proof, proof_rows, prove
from layoutgen.writers.readback import records
from layoutgen.writers.readback.areas import Area, area_check, circle_check, count_check, discs
from tests.writers.coupled_board import coupled_board

for needed in ("gerbonara", "gdsii", "pyogrio"):
    pytest.importorskip(needed)

ROOT = Path(__file__).parents[2]
JOB = Job(stem="board", repeatable=True)
OTHERS = sorted(p.stem for p in (ROOT / "examples").glob("*.toml") if p.stem != "telemetry_driver")


def all_files(result: Result) -> dict[str, bytes]:
    """Return every file of a run by path, and the members of the board house's zip by plain name."""
    files = encode(result, JOB)
    files |= encode_packages(result, replace(JOB, files=files))
    with zipfile.ZipFile(io.BytesIO(files["board-house/board_board.zip"])) as archive:
        files |= {name: archive.read(name) for name in archive.namelist() if name != "MANIFEST.sha256"}
    return files


@pytest.fixture(scope="module")
def files(driver: Result) -> dict[str, bytes]:
    return all_files(driver)


@pytest.fixture(scope="module")
def proof(driver: Result, files: dict[str, bytes]) -> Proof:
    return prove(driver, files)


@pytest.fixture(scope="module")
def small_files(handmade: Result) -> dict[str, bytes]:
    return all_files(handmade)


def sound(result: Result) -> Proof:
    proof = prove(result, all_files(result))
    assert proof.failures == ()
    assert proof.passed
    return proof


class TestSoundFiles:
    def test_of_the_amplifier(self, proof: Proof) -> None:
        """A proof that cries wolf is switched off."""
        assert proof.failures == ()
        readers = {check.reader for check in proof.checks}
        assert {"python-gdsii", "ezdxf", "GDAL", "gerbonara", "scikit-rf", "zipfile"} <= readers

    @pytest.mark.parametrize("name", OTHERS)
    def test_of_the_other_examples(self, name: str) -> None:
        """Every example is proved, not only the one that the writers were made with."""
        sound(run(ROOT / "examples" / f"{name}.toml"))

    def test_of_a_board_told_by_hand(self, handmade: Result) -> None:
        """Odd holes, bends and arcs that the examples do not have."""
        sound(handmade)

    def test_of_a_coupled_pair(self) -> None:
        """Pairs, open ends, long names."""
        sound(coupled_board())

    def test_every_file_is_looked_at(self, proof: Proof, files: dict[str, bytes]) -> None:
        """A file that no reader takes must at least be listed as not proved."""
        told = {check.file for check in proof.checks} | {item.file for item in proof.not_proved}
        assert set(files) <= told

    def test_what_could_not_be_shown_is_said(self, proof: Proof) -> None:
        """Silence would read as proof: drawings, pictures, the writer's own library."""
        told = {re.split("[/:]", item.file)[-1]: item.reason for item in proof.not_proved}
        assert "own library" in told["board.oas"]
        assert "lines and areas" in told["board_review.pdf"]
        assert "well-formed" in told["board.svg"]
        assert "nets" in told["board_copper_top.gbr"]


# -- seeded corruptions: each changes the bytes of one file


def gds_shifted(data: bytes) -> bytes:
    """Shift one layer by 1 um, its references with it."""
    return rewritten_gds(data, "copper_top", lambda cell, items: [item.translate(1.0, 0.0) for item in items])


def gds_without_a_hole(data: bytes) -> bytes:
    """Lose one drilled hole."""
    with_library = gds_library(data)
    (top,) = with_library.top_level()
    top.remove(next(r for r in top.references if "drill_plated" in r.cell.name))
    return gds_bytes(with_library)


def gds_with_a_filled_cutout(data: bytes) -> bytes:
    """Fill the plane's clearances."""
    library = gds_library(data)
    (top,) = library.top_level()
    layer, kind = LAYERS["copper_bottom"]
    boxes = [p.bounding_box() for p in top.polygons if p.layer == layer]
    low = min(b[0][0] for b in boxes), min(b[0][1] for b in boxes)
    high = max(b[1][0] for b in boxes), max(b[1][1] for b in boxes)
    top.add(gdstk.rectangle((low[0] + 2e3, low[1] + 2e3), (high[0] - 2e3, high[1] - 2e3), layer, kind))
    return gds_bytes(library)


def gds_in_other_units(data: bytes) -> bytes:
    """Say that a database unit is a hundredth of a mil."""
    at = data.index(b"\x00\x14\x03\x05") + 4
    return data[:at] + excess_64(0.01) + excess_64(2.54e-7) + data[at + 16 :]


def cut_short(data: bytes) -> bytes:
    """Lose the last third."""
    return data[: 2 * len(data) // 3]


def dxf_bulge_flipped(data: bytes) -> bytes:
    """Let one arc bulge the other way."""
    head, mark, entities = data.partition(b"ENTITIES")
    return head + mark + entities.replace(b" 42\n0.", b" 42\n-0.", 1)


def dxf_without_a_pad(data: bytes) -> bytes:
    """Lose one pad of the top copper."""
    entities = re.split(rb"(?=  0\n)", data)
    pads = [
        k for k, e in enumerate(entities) if b"LWPOLYLINE" in e and b"copper_top" in e and b" 90\n4\n" in e
    ]
    del entities[pads[-1]]
    return b"".join(entities)


def dxf_in_inches(data: bytes) -> bytes:
    """Say that the numbers are inches."""
    return data.replace(b"$INSUNITS\n 70\n4\n", b"$INSUNITS\n 70\n1\n")


def dxf_opened(data: bytes) -> bytes:
    """Leave one polyline open."""
    return data.replace(b" 70\n1\n 10", b" 70\n0\n 10", 1)


def dxf_on_another_layer(data: bytes) -> bytes:
    """Move one outline to another layer."""
    return data.replace(b"  8\nsoldermask_top\n", b"  8\npaste_top\n", 1)


def r12_square_too_small(data: bytes) -> bytes:
    """Draw the reference square a micrometre too small."""
    return data.replace(b"-15.000000", b"-14.999000")


def gerber_without_a_pad(data: bytes) -> bytes:
    """Lose one flash."""
    return signed(re.sub(rb"X\d+Y\d+D03\*\n", b"", data, count=1))


def gerber_in_inches(data: bytes) -> bytes:
    """Say that the numbers are inches."""
    return signed(data.replace(b"%MOMM*%", b"%MOIN*%"))


def gerber_shifted(data: bytes) -> bytes:
    """Shift the layer by 1 um."""
    return signed(re.sub(rb"X(\d+)Y", lambda m: b"X%dY" % (int(m[1]) + 1000), data))


def gerber_arcs_turned(data: bytes) -> bytes:
    """Let one arc run the other way round."""
    return signed(data.replace(b"G03*", b"G02*", 1))


def gerber_polarity_turned(data: bytes) -> bytes:
    """Say that a mask file holds the mask."""
    return signed(data.replace(b"FilePolarity,Negative", b"FilePolarity,Positive"))


def gerber_pins_swapped(data: bytes) -> bytes:
    """Name the first pad after another pin."""
    return signed(re.sub(rb"%TO\.P,(\w+),1\*%", rb"%TO.P,\1,2*%", data, count=1))


def gerber_clear(data: bytes) -> bytes:
    """Take away what should be added."""
    return signed(data.replace(b"%LPD*%", b"%LPC*%"))


def unsigned(data: bytes) -> bytes:
    """Change one character of a comment, and not the digest."""
    return data.replace(b"seen from", b"Seen from", 1)


def xnc_without_a_hit(data: bytes) -> bytes:
    """Lose one hole."""
    return re.sub(rb"X[-0-9.]+Y[-0-9.]+\n", b"", data, count=1)


def xnc_with_another_drill(data: bytes) -> bytes:
    """Drill a micrometre too large."""
    return data.replace(b"T01C0.300000", b"T01C0.301000")


def ipc_without_a_point(data: bytes) -> bytes:
    """Lose one pad."""
    return re.sub(rb"327.*\n", b"", data, count=1)


def ipc_net_renamed(data: bytes) -> bytes:
    """Move one via to another net."""
    return data.replace(b"317gnd", b"317vdd", 1)


def centroid_turned(data: bytes) -> bytes:
    """Turn one part."""
    return data.replace(b"270.000,top", b"90.000,top", 1)


def bill_without_a_part(data: bytes) -> bytes:
    """Lose one reference."""
    return data.replace(b"C1 C2", b"C1")


def bias_changed(data: bytes) -> bytes:
    """Tell another gate voltage."""
    return data.replace(b"-2.8000", b"-2.7000", 1)


def ports_moved(data: bytes) -> bytes:
    """Move one port's plane by 1 um."""
    return re.sub(rb"0\.300000", b"0.301000", data, count=1)


def shapes_changed(data: bytes) -> bytes:
    """Tell another width."""
    return data.replace(b"0.300000", b"0.310000", 1)


def layers_swapped(data: bytes) -> bytes:
    """Tell another layer number."""
    return data.replace(b"copper_top,1,0", b"copper_top,2,0")


def touchstone_changed(data: bytes) -> bytes:
    """Change a digit of one value."""
    head, mark, tail = data.partition(b"# Hz S RI R 50\n")
    return (
        head
        + mark
        + re.sub(rb"(-?0\.\d\d)\d", lambda m: m[1] + (b"0" if m[0][-1:] != b"0" else b"1"), tail, count=1)
    )


def zip_with_a_member_swapped(data: bytes) -> bytes:
    """Put another file under a member's name, the manifest as it was."""
    stream = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(stream, "w") as new:
        for name in old.namelist():
            source = "board_copper_bottom.gbr" if name == "board_copper_top.gbr" else name
            new.writestr(name, old.read(source))
    return stream.getvalue()


def pdf_with_another_width(data: bytes) -> bytes:
    """Keep the file whole and lose its last page's content."""
    at = data.rindex(b"stream", 0, data.rindex(b"endstream")) + 8
    return data[:at] + bytes(64) + data[at + 64 :]


def report_changed(data: bytes) -> bytes:
    """Tell another width in the report."""
    report = json.loads(data)
    report["lines"][0]["width_mm"] += 0.001
    return json.dumps(report).encode()


def svg_broken(data: bytes) -> bytes:
    """Lose an end tag."""
    return data.replace(b"</svg>", b"")


CORRUPTIONS: list[tuple[str, Callable[[bytes], bytes]]] = [
    ("board.gds", gds_shifted),
    ("board.gds", gds_without_a_hole),
    ("board.gds", gds_with_a_filled_cutout),
    ("board.gds", gds_in_other_units),
    ("board.gds", cut_short),
    ("mask-house/board.oas", cut_short),
    ("board.dxf", dxf_bulge_flipped),
    ("board.dxf", dxf_without_a_pad),
    ("board.dxf", dxf_in_inches),
    ("board.dxf", dxf_opened),
    ("board.dxf", dxf_on_another_layer),
    ("board.dxf", cut_short),
    ("pcb-designer/board_r12.dxf", r12_square_too_small),
    ("board_copper_top.gbr", gerber_without_a_pad),
    ("board_paste_top.gbr", gerber_without_a_pad),
    ("board_copper_top.gbr", gerber_in_inches),
    ("board_legend_top.gbr", gerber_shifted),
    ("board_profile.gbr", gerber_shifted),
    ("board_copper_bottom.gbr", gerber_arcs_turned),
    ("board_profile.gbr", gerber_arcs_turned),
    ("board_soldermask_top.gbr", gerber_polarity_turned),
    ("board_copper_top.gbr", gerber_pins_swapped),
    ("board_copper_bottom.gbr", gerber_clear),
    ("board_copper_bottom.gbr", unsigned),
    ("board_copper_top.gbr", cut_short),
    ("board_drill_plated.xnc", xnc_without_a_hit),
    ("board_drill_plated.xnc", xnc_with_another_drill),
    ("board_drill_nonplated.xnc", cut_short),
    ("board.ipc", ipc_without_a_point),
    ("board.ipc", ipc_net_renamed),
    ("board.ipc", cut_short),
    ("assembly/board_centroid.csv", centroid_turned),
    ("assembly/board_bill_of_materials.csv", bill_without_a_part),
    ("test/board_bias.csv", bias_changed),
    ("test/board_ports.csv", ports_moved),
    ("pcb-designer/board_shapes.csv", shapes_changed),
    ("mask-house/board_layers.csv", layers_swapped),
    ("as_drawn.s4p", touchstone_changed),
    ("as_drawn.s4p", cut_short),
    ("board-house/board_board.zip", zip_with_a_member_swapped),
    ("board-house/board_board.zip", cut_short),
    ("board_fabrication.pdf", pdf_with_another_width),
    ("reviewer/board_review.pdf", cut_short),
    ("report.json", report_changed),
    ("report.json", cut_short),
    ("board.svg", svg_broken),
    ("board.png", cut_short),
]


class TestCorruptions:
    @pytest.mark.parametrize(
        ("file", "corrupt"), CORRUPTIONS, ids=[f"{f.split('/')[-1]}-{c.__name__}" for f, c in CORRUPTIONS]
    )
    def test_is_caught(
        self, request: pytest.FixtureRequest, file: str, corrupt: Callable[[bytes], bytes]
    ) -> None:
        """A corruption that passes would be found by the receiver."""
        drawn = file.endswith((".gds", ".oas", ".dxf", ".gbr", ".xnc", ".ipc"))
        result = request.getfixturevalue("handmade" if drawn else "driver")
        whole = request.getfixturevalue("small_files" if drawn else "files")[file]
        broken = corrupt(whole)
        assert broken != whole, "the corruption changed nothing"
        assert prove(result, {file: whole}).passed
        proof = prove(result, {file: broken})
        assert not proof.passed
        assert all(check.file.startswith(file) for check in proof.failures)

    def test_a_member_of_the_zip_is_judged_by_itself(self, driver: Result, files: dict[str, bytes]) -> None:
        """A zip whose manifest was made anew for a wrong member is still wrong."""
        with zipfile.ZipFile(io.BytesIO(files["board-house/board_board.zip"])) as archive:
            members = {n: archive.read(n) for n in archive.namelist() if n != "MANIFEST.sha256"}
        members["board_copper_top.gbr"] = gerber_without_a_pad(members["board_copper_top.gbr"])
        stream = io.BytesIO()
        with zipfile.ZipFile(stream, "w") as new:
            for name, data in {**members, "MANIFEST.sha256": manifest(members)}.items():
                new.writestr(name, data)
        proof = prove(driver, {"board.zip": stream.getvalue()})
        assert {check.file for check in proof.failures} == {"board.zip:board_copper_top.gbr"}

    def test_a_file_that_differs_from_the_report(self, driver: Result, files: dict[str, bytes]) -> None:
        """A sound file of another run beside the report: only the hash tells."""
        other = {**files, "board.svg": files["board.svg"] + b"\n"}
        failures = prove(driver, {name: other[name] for name in ("board.svg", "report.json")}).failures
        assert [(check.file, check.reader) for check in failures] == [("report.json", "sha256")]


class TestMeasures:
    """The measures of the proof on shapes whose answer is known."""

    def test_area_of_a_shift(self) -> None:
        """A square of 2 mm shifted by 1 um differs by 2 x 2 mm x 1 um on each side."""
        here, there = (Area([shapely.box(x, 0, x + 2e6, 2e6)]) for x in (0, 1000))
        check = area_check("f", "r", "w", there, here)
        assert check.measured == pytest.approx(2 * 2.0 * 0.001)
        assert not check.passed
        assert area_check("f", "r", "w", here, here).passed

    def test_every_shape_counts(self) -> None:
        """A cut-out is taken away; a pad under a line that is lost or moved must show."""
        line, pad, moved = shapely.box(0, 0, 9, 4), shapely.box(1, 1, 2, 2), shapely.box(2, 1, 3, 2)
        assert Area([line, pad]).region().area == 35.0
        assert Area([line, pad, moved]).region().area == 34.0
        assert area_check("f", "r", "w", Area([line, moved]), Area([line, pad])).measured > 0
        assert Area([]).region().is_empty

    def test_circles_are_counted_with_their_number(self) -> None:
        """A hole drilled twice is one too many."""
        one, two = [(0.0, 0.0, 3e5)], [(0.0, 0.0, 3e5), (0.0, 0.0, 3e5)]
        assert circle_check("f", "r", "w", two, one).measured == 1
        assert circle_check("f", "r", "w", one, [(0.0, 1.0, 3e5)]).measured == 2
        assert circle_check("f", "r", "w", one, one).passed

    def test_counts(self) -> None:
        """One too few is as wrong as one too many."""
        assert count_check("f", "r", "w", 2, 3).measured == 1
        assert not count_check("f", "r", "w", 4, 3).passed

    def test_discs_have_nearly_the_circles_area(self) -> None:
        """Polygons in place of circles must be about as large."""
        (disc,) = discs([(5.0, 5.0, 2.0)])
        assert disc.area == pytest.approx(3.1416, rel=2e-3)

    def test_rows_for_people(self) -> None:
        """A failed check must stand out and say what was measured."""
        check = Check(file="f", reader="r", what="w", measured=2.0, limit=1.0, unit="mm^2", detail="why")
        assert proof_rows(Proof(checks=(check,), not_proved=())) == [
            ("FAILED", "f", "r", "w", "2 mm^2 (why)", "1 mm^2")
        ]


class TestMissingReaders:
    def test_are_said_and_not_failed(
        self, driver: Result, files: dict[str, bytes], monkeypatch: pytest.MonkeyPatch
    ) -> None:
        """Without the outside readers the proof must say what it did not show, and go on."""
        from layoutgen.writers.readback import drills, dxf, gerber, layout, netlist

        assert records.optional_library("no_library_of_that_name") is None
        for module in (drills, dxf, gerber, layout, netlist):
            monkeypatch.setattr(module, "optional_library", lambda name: None)
        names = ("board.gds", "board.dxf", "board_copper_top.gbr", "board_drill_plated.xnc", "board.ipc")
        proof = prove(driver, {name: files[name] for name in names})
        assert proof.passed
        assert {item.file for item in proof.not_proved} == set(names)
        assert {check.reader for check in proof.checks} == {"gdstk, the writer's own library", "ezdxf"}


# -- helpers of the corruptions


def gds_library(data: bytes) -> gdstk.Library:
    return on_disk(data, ".gds", gdstk.read_gds)


def gds_bytes(library: gdstk.Library) -> bytes:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder, "x.gds")
        library.write_gds(path)
        return path.read_bytes()


def on_disk(data: bytes, suffix: str, read: Callable[[Path], gdstk.Library]) -> gdstk.Library:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder, f"x{suffix}")
        path.write_bytes(data)
        return read(path)


def rewritten_gds(
    data: bytes, layer: str, change: Callable[[gdstk.Cell, list[gdstk.Polygon]], object]
) -> bytes:
    """Return a GDSII file with the polygons of one layer changed, those inside references too."""
    library = gds_library(data)
    for cell in library.cells:
        change(cell, [p for p in cell.polygons if p.layer == LAYERS[layer][0]])
    return gds_bytes(library)


def excess_64(value: float) -> bytes:
    """Return a positive number as the format's eight-byte real."""
    exponent = 64
    while value >= 1.0:
        value /= 16.0
        exponent += 1
    while value < 1.0 / 16.0:
        value *= 16.0
        exponent -= 1
    return bytes([exponent]) + struct.pack(">Q", round(value * 2**56))[1:]


def signed(data: bytes) -> bytes:
    """Return a Gerber file with its digest made anew, so that only its content can give it away."""
    body = data.partition(b"%TF.MD5,")[0]
    digest = hashlib.md5(body.replace(b"\n", b""), usedforsecurity=False).hexdigest()
    return body + f"%TF.MD5,{digest}*%\nM02*\n".encode()
