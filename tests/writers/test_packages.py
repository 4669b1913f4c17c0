"""Packages: each receiver gets its files, whole, described, and the same from run to run."""

from __future__ import annotations

import hashlib
import io
import os
import pickle
import subprocess
import sys
import zipfile
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.writers import Job, Result, older_packages, write_files
from layoutgen.writers.packages import (
    MANIFEST,
    README,
    RECEIVERS,
    encode_packages,
    manifest,
    receivers_from,
    zipped,
)

JOB = Job(stem="gauge", repeatable=True)

PACKS = """
import hashlib, pickle, sys
from layoutgen.writers import Job
from layoutgen.writers.packages import encode_packages
with open(sys.argv[1], "rb") as stream:
    result = pickle.load(stream)
for name, data in encode_packages(result, Job(stem="gauge", repeatable=True)).items():
    print(name, hashlib.sha256(data).hexdigest())
"""


@pytest.fixture(scope="module")
def packages(driver: Result) -> dict[str, bytes]:
    return encode_packages(driver, JOB)


@pytest.fixture(scope="module")
def board_zip(packages: dict[str, bytes]) -> zipfile.ZipFile:
    return zipfile.ZipFile(io.BytesIO(packages["board-house/gauge_board.zip"]))


def test_every_receiver_has_a_folder_with_a_readme(packages: dict[str, bytes]) -> None:
    """A folder without a README leaves its receiver to guess units and origin."""
    folders = {name.split("/")[0] for name in packages}
    assert folders == set(RECEIVERS)
    assert all(f"{folder}/{README}" in packages for folder in folders)
    assert all(name.count("/") == 1 for name in packages)


def test_what_each_receiver_gets(packages: dict[str, bytes]) -> None:
    """A file in the wrong folder is missing where it is needed."""
    found = {
        folder: sorted(n.split("/")[1] for n in packages if n.startswith(f"{folder}/"))
        for folder in RECEIVERS
    }
    assert found == {
        "pcb-designer": ["README.txt", "gauge.dxf", "gauge_ports.csv", "gauge_r12.dxf", "gauge_shapes.csv"],
        "board-house": ["README.txt", "gauge_board.zip"],
        "mask-house": ["README.txt", "gauge.gds", "gauge.oas", "gauge_layers.csv"],
        "assembly": [
            "README.txt", "gauge_assembly.pdf", "gauge_bill_of_materials.csv", "gauge_centroid.csv",
            "gauge_paste_top.gbr",
        ],
        "test": [
            "README.txt", "as_drawn.s4p", "gauge_bias.csv", "gauge_ports.csv", "gauge_test_sheet.txt",
            "wanted.s4p",
        ],
        "reviewer": ["README.txt", "as_drawn.s4p", "gauge.svg", "gauge_review.pdf", "wanted.s4p"],
    }  # fmt: skip


def test_zip_holds_everything_for_the_board_house(board_zip: zipfile.ZipFile) -> None:
    """A board cannot be made from files that were left out."""
    assert board_zip.namelist() == [
        "README.txt", "gauge_copper_top.gbr", "gauge_copper_bottom.gbr", "gauge_soldermask_top.gbr",
        "gauge_soldermask_bottom.gbr", "gauge_paste_top.gbr", "gauge_legend_top.gbr", "gauge_profile.gbr",
        "gauge_drill_plated.xnc", "gauge_drill_nonplated.xnc", "gauge.ipc", "gauge_fabrication.pdf",
        "MANIFEST.sha256",
    ]  # fmt: skip
    assert board_zip.testzip() is None


def test_manifest_has_the_hash_of_every_member(board_zip: zipfile.ZipFile) -> None:
    """In the form that sha256sum checks, so that nobody needs this tool for it."""
    told = dict(reversed(line.split("  ")) for line in board_zip.read(MANIFEST).decode().splitlines())
    assert set(told) == set(board_zip.namelist()) - {MANIFEST}
    for name, digest in told.items():
        assert hashlib.sha256(board_zip.read(name)).hexdigest() == digest


def test_times_and_rights_in_the_zip_are_fixed(board_zip: zipfile.ZipFile) -> None:
    """A clock or the maker's umask would change the bytes."""
    for entry in board_zip.infolist():
        assert entry.date_time == (1980, 1, 1, 0, 0, 0)
        assert entry.external_attr >> 16 == 0o100644
        assert entry.create_system == 3


def test_readmes_tell_extents_counts_units_and_conventions(
    driver: Result, packages: dict[str, bytes]
) -> None:
    """The first page that a receiver reads must answer what they ask first."""
    for folder in RECEIVERS:
        text = packages[f"{folder}/{README}"].decode()
        assert f"x 0 to {driver.placement.width / 1e6:.6f} mm" in text
        assert f"y 0 to {driver.placement.height / 1e6:.6f} mm" in text
        assert "Millimetres. Origin at the board's south-west corner" in text
        assert f"\nvias         {len(driver.artwork.vias)}\n" in text
        assert "NOT CLEAN" not in text
        assert max(map(len, text.splitlines())) <= 140
    assert "reference square" in packages[f"pcb-designer/{README}"].decode()
    drills = f"{len(driver.artwork.vias)} of 0.3 mm plated, {len(driver.artwork.holes)} of 2.7 mm not plated"
    assert drills in packages[f"board-house/{README}"].decode()
    assert "counter-clockwise" in packages[f"assembly/{README}"].decode()
    assert "1 rf_in, 2 rf_out, 3 Q1.gate, 4 Q1.drain" in packages[f"test/{README}"].decode()


def test_readmes_list_their_files_with_sizes(packages: dict[str, bytes]) -> None:
    """A file that is not listed, or of another size, did not come through whole."""
    for folder in RECEIVERS:
        text = packages[f"{folder}/{README}"].decode()
        members = {n.split("/")[1]: d for n, d in packages.items() if n.startswith(f"{folder}/")}
        for name, data in members.items():
            if name != README and not name.endswith(".zip"):
                assert any(line.split()[:2] == [name, str(len(data))] for line in text.splitlines()), name


def test_a_board_with_errors_says_so_in_every_readme(handmade: Result) -> None:
    """Files that are sent on in spite of errors must carry the warning themselves."""
    packages = encode_packages(handmade, JOB)
    for folder in RECEIVERS:
        assert "Do not make this board" in packages[f"{folder}/{README}"].decode()


def test_files_that_are_written_already_are_used(handmade: Result) -> None:
    """Every format is encoded once a run; the package must hold the very same bytes."""
    given = {"gauge.dxf": b"dxf written before", "gauge.svg": b"picture written before"}
    packages = encode_packages(handmade, replace(JOB, files=given), ["pcb-designer", "reviewer"])
    assert packages["pcb-designer/gauge.dxf"] == b"dxf written before"
    assert packages["reviewer/gauge.svg"] == b"picture written before"
    assert {name.split("/")[0] for name in packages} == {"pcb-designer", "reviewer"}


def test_without_a_response_there_are_no_touchstone_files(handmade: Result) -> None:
    """A board without RF ports has no S-parameters, and still a test package."""
    packages = encode_packages(replace(handmade, response=None), JOB, ["test", "reviewer"])
    assert not any(name.endswith("p") and ".s" in name for name in packages)
    assert "test/gauge_test_sheet.txt" in packages


def test_empty_layers_and_missing_holes_are_no_files(handmade: Result) -> None:
    """A board without paste and holes: no empty files, and the README says which layers are empty."""
    shapes = tuple(s for s in handmade.artwork.shapes if s.layer not in ("paste_top", "legend_top"))
    bare = replace(handmade, artwork=replace(handmade.artwork, shapes=shapes, vias=(), holes=()))
    packages = encode_packages(bare, JOB, ["board-house", "assembly"])
    with zipfile.ZipFile(io.BytesIO(packages["board-house/gauge_board.zip"])) as archive:
        names = archive.namelist()
        readme = archive.read(README).decode()
    assert not any("paste" in name or "legend" in name or name.endswith(".xnc") for name in names)
    assert "Empty and left out: paste_top, legend_top." in readme
    assert "Drills, finished diameters: none." in readme
    assert "assembly/gauge_paste_top.gbr" not in packages


def test_receivers_are_taken_from_a_list() -> None:
    """In the order of the table, each once, blanks ignored."""
    assert receivers_from("test, board-house,test") == ("board-house", "test")
    assert receivers_from(",".join(RECEIVERS)) == tuple(RECEIVERS)


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("board-hous", 'receiver "board-hous"; allowed: pcb-designer, board-house, mask-house, assembly, '
         "test, reviewer; the nearest is board-house"),
        ("", "no receiver"),
        (" , ", "no receiver"),
        ("x" * 90, f'receiver "{"x" * 40}"'),
    ],
)  # fmt: skip
def test_unknown_receivers_are_refused(text: str, told: str) -> None:
    """A misspelt receiver must not end in a package that is silently missing."""
    with pytest.raises(WrongInputError) as caught:
        receivers_from(text)
    assert told in str(caught.value)


def test_all_unknown_receivers_are_told_at_once() -> None:
    """One fault for each, not one a run."""
    with pytest.raises(WrongInputError) as caught:
        receivers_from("tester,reviewr,test")
    assert len(caught.value.faults) == 2


def test_zip_and_manifest_on_their_own() -> None:
    """Names with blanks, and contents of no length."""
    files = {"a b.txt": b"", "c.txt": b"c"}
    assert manifest(files).decode().splitlines()[1] == f"{hashlib.sha256(b'c').hexdigest()}  c.txt"
    with zipfile.ZipFile(io.BytesIO(zipped(files))) as archive:
        assert archive.read("a b.txt") == b""


def test_no_package_depends_on_the_hash_seed(
    handmade: Result, remake: Callable[[], Result], tmp_path: Path
) -> None:
    """Equal results in other processes, with other orders of sets, give equal bytes."""
    (tmp_path / "result").write_bytes(pickle.dumps(handmade))
    here = {name: hashlib.sha256(data).hexdigest() for name, data in encode_packages(remake(), JOB).items()}
    done = subprocess.run(
        [sys.executable, "-c", PACKS, str(tmp_path / "result")],
        check=True,
        capture_output=True,
        text=True,
        env={**os.environ, "PYTHONHASHSEED": "3"},
    )
    assert dict(line.rsplit(" ", 1) for line in done.stdout.splitlines()) == here


def test_packages_of_an_earlier_run_are_told_of(handmade: Result, tmp_path: Path) -> None:
    """Left beside a new report without a word, the old board is sent to the board house."""
    packages = encode_packages(handmade, JOB, ("test", "assembly"))
    write_files(tmp_path, {**packages, "report.json": b"{}"})
    (tmp_path / "photos").mkdir()
    (tmp_path / "photos" / "README.txt").write_text("holiday: files for the album")
    assert older_packages(tmp_path, packages) == []
    assert older_packages(tmp_path, ["test/README.txt", "report.json"]) == ["assembly"]
    assert older_packages(tmp_path, ["report.json"]) == ["assembly", "test"]
    assert older_packages(tmp_path / "none", []) == []


def test_all_and_none_are_lists_too(handmade: Result) -> None:
    """Taken for names of receivers, they would be refused; taken for each other, everything is lost."""
    assert receivers_from(" all ") == tuple(RECEIVERS)
    assert receivers_from("none") == ()
    for text in ("all,test", "none,test", ""):
        with pytest.raises(WrongInputError, match=", ".join(RECEIVERS)):
            receivers_from(text)
