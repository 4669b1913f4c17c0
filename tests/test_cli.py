"""The command line as a user meets it: files, messages, exit status; faulty files, pipes and kills."""

from __future__ import annotations

import hashlib
import json
import os
import random
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from layoutgen import __version__
from layoutgen.cli import status_of

ROOT = Path(__file__).parents[1]
EXAMPLE = ROOT / "examples" / "telemetry_driver.toml"
COMMAND = [sys.executable, "-c", "from layoutgen.cli import main; main()"]

GOOD = """\
format = 1
[design]
title = "Gauge link, matching section"
frequency = "2.245 GHz"
band = ["2.20 GHz", "2.29 GHz"]
[substrate]
relative_permittivity = 3.55
loss_tangent = 0.0027
height = "0.508 mm"
copper_thickness = "35 um"
[board]
rules = "two-layer-standard"
[ports.west]
net = "a"
edge = "west"
[ports.east]
net = "b"
edge = "east"
[lines.section]
nets = ["a", "b"]
impedance = "50 ohm"
angle = "90 deg"
"""
"""A whole circuit, 22 lines; faults are put into it below."""


def changed(old: str, new: str) -> bytes:
    assert GOOD.count(old) == 1, old
    return GOOD.replace(old, new).encode()


SHORT_LINE = """\
nets = ["a", "c"]
impedance = "20 ohm"
angle = "0.2 deg"
[lines.rest]
nets = ["c", "b"]
impedance = "90 ohm"
angle = "40 deg\
"""
SHORTED = """\
[ports.vd]
kind = "dc"
voltage = "28 V"
net = "a"
[lines.short]
nets = ["b", "gnd"]
impedance = "90 ohm"
angle = "90 deg"
[ports.west]"""
SAME_NAME = """\
edge = "east"
[parts.section]
kind = "capacitor"
nets = ["a", "b"]
value = "1 pF"
case = "0603"
"""
SECTION = 'nets = ["a", "b"]\nimpedance = "50 ohm"\nangle = "90 deg'
RULES = '"two-layer-standard"'

FAULTY: dict[str, tuple[bytes, int, list[str]]] = {
    "wrong unit": (changed('"0.508 mm"', '"0.508 GHz"'), 2, [":9:", "substrate.height", "0.508 GHz"]),
    "unit in the wrong case": (changed('"35 um"', '"35 UM"'), 2, [":10:", "substrate.copper_thickness"]),
    "bare number": (changed('"0.508 mm"', "0.508"), 2, [":9:", "substrate.height", "0.508"]),
    "not a number": (changed('"0.508 mm"', '"nan mm"'), 2, [":9:", "substrate.height"]),
    "unknown key": (changed("loss_tangent", "los_tangent"), 2, [":8:", "substrate.los_tangent", "loss_tan"]),
    "missing key": (changed('title = "Gauge link, matching section"\n', ""), 2, [":2:", "design.title"]),
    "duplicate names": (changed('edge = "east"\n', SAME_NAME), 2, [":24:", "lines.section", "line 19"]),
    "dangling net": (changed('nets = ["a", "b"]', 'nets = ["a", "c"]'), 2, ["net", '"c"']),
    "same net twice": (changed('nets = ["a", "b"]', 'nets = ["a", "a"]'), 2, [":20:", "lines.section.nets"]),
    "impedance out of reach": (changed('"50 ohm"', '"900 ohm"'), 2, [":21:", "lines.section.impedance"]),
    "impedance of zero": (changed('"50 ohm"', '"0 ohm"'), 2, [":21:", "lines.section.impedance"]),
    "line too short": (changed(SECTION, SHORT_LINE), 2, [":22:", "lines.section.angle", "at least"]),
    "band beside the frequency": (changed('["2.20 GHz"', '["2.27 GHz"'), 2, [":4:", "design.frequency"]),
    "another format": (changed("format = 1", "format = 2"), 2, [":1:", "format", "2"]),
    "no such rule file": (changed(RULES, '"two-layer-standart"'), 2, [":12:", "board.rules", RULES[1:-1]]),
    "absolute path": (changed(RULES, '"/etc/passwd.toml"'), 2, [":12:", "board.rules"]),
    "broken TOML": (changed("[board]", "[board"), 2, [":11:"]),
    "not UTF-8": (GOOD.encode("utf-16"), 2, ["UTF-8"]),
    "binary junk": (bytes(range(256)) * 40, 2, ["circuit.toml"]),
    "empty": (b"", 2, ["circuit.toml", "design"]),
    "two faults at once": (
        GOOD.replace('"0.508 mm"', '"0.508 GHz"').replace('"90 deg"', '"90 V"').encode(),
        2,
        [":9:", "substrate.height", ":22:", "lines.section.angle"],
    ),
    "shorted supply": (changed("[ports.west]", SHORTED), 2, ["vd", "section", "short"]),
    "board too small": (changed("[ports.west]", 'size = ["8 mm", "5 mm"]\n[ports.west]'), 3, ["section"]),
}


@pytest.fixture
def circuit(tmp_path: Path) -> Path:
    path = tmp_path / "circuit.toml"
    path.write_text(GOOD)
    return path


@pytest.mark.parametrize("name", FAULTY)
def test_faulty_files(name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Each ends with its status, names line and key, one line a fault, and writes nothing at all."""
    data, status, words = FAULTY[name]
    path = tmp_path / "circuit.toml"
    path.write_bytes(data)
    out = tmp_path / "out"
    assert status_of(["draw", str(path), "--out", str(out)]) == status
    printed = capsys.readouterr()
    for word in words:
        assert word in printed.err
    assert printed.out == ""
    assert "Traceback" not in printed.err
    assert [p.name for p in tmp_path.iterdir()] == ["circuit.toml"]


def test_two_faults_are_two_lines(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Faults told one at a time cost a run each."""
    path = tmp_path / "circuit.toml"
    path.write_bytes(FAULTY["two faults at once"][0])
    assert status_of(["check", str(path)]) == 2
    lines = capsys.readouterr().err.splitlines()
    assert len(lines) == 2
    assert all(
        re.match(rf"{re.escape(str(path))}:\d+: [a-z_.]+: found .+; allowed: .+", line) for line in lines
    )


@pytest.mark.parametrize("command", ["draw", "size", "check", "response"])
def test_no_file_and_a_folder(command: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Neither is a traceback, in any command."""
    for path in (tmp_path, tmp_path / "missing.toml"):
        extra = ["--out", str(tmp_path / "out")] if command == "draw" else []
        assert status_of([command, str(path), *extra]) == 2
        printed = capsys.readouterr()
        assert str(path) in printed.err
        assert len(printed.err.splitlines()) == 1
    assert list(tmp_path.iterdir()) == []


def test_draw_writes_the_files_of_the_contract(circuit: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The names people script against; the first message says what to open."""
    out = circuit.parent / "made"
    assert status_of(["draw", str(circuit), "--out", str(out)]) == 0
    packages = ["assembly", "board-house", "mask-house", "pcb-designer", "reviewer", "test"]
    assert sorted(p.name for p in out.iterdir() if p.is_dir()) == packages
    assert all((out / name / "README.txt").is_file() for name in packages)
    assert sorted(p.name for p in out.iterdir() if p.is_file()) == [
        "as_drawn.s2p", "circuit.dxf", "circuit.gds", "circuit.png", "circuit.svg", "report.html",
        "report.json", "wanted.s2p",
    ]  # fmt: skip
    printed = capsys.readouterr()
    assert printed.err.splitlines()[0].startswith(f"open {out / 'report.html'}")
    assert "0 errors" in printed.out
    assert "\x1b" not in printed.out + printed.err


def test_the_default_folder_is_named_after_the_circuit(
    circuit: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """out/STEM, from the current folder."""
    monkeypatch.chdir(circuit.parent)
    assert status_of(["draw", "circuit.toml", "-q"]) == 0
    assert (circuit.parent / "out" / "circuit" / "report.json").is_file()
    printed = capsys.readouterr()
    assert printed.out == printed.err == ""


def test_repeatable_runs_are_the_same_byte_for_byte(circuit: Path) -> None:
    """Each run in its own process, so that hash seeds differ."""
    folders = [circuit.parent / name for name in ("first", "second")]
    for seed, folder in enumerate(folders):
        environment = {**os.environ, "PYTHONHASHSEED": str(seed + 1)}
        command = [*COMMAND, "draw", str(circuit), "--out", str(folder), "--repeatable", "-q"]
        subprocess.run(command, check=True, env=environment)
    files = [
        {p.relative_to(folder).as_posix(): p.read_bytes() for p in folder.rglob("*") if p.is_file()}
        for folder in folders
    ]
    assert len(files[0]) > 30
    assert files[0] == files[1]
    listed = json.loads(files[0]["report.json"])["files"]
    assert {entry["path"] for entry in listed} == set(files[0]) - {"report.json"}
    assert all(entry["sha256"] == hashlib.sha256(files[0][entry["path"]]).hexdigest() for entry in listed)


def test_findings_of_severity_error_give_status_one(
    circuit: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The files are written all the same, with the findings drawn in."""
    rules = (ROOT / "rules" / "two-layer-standard.toml").read_text("utf-8")
    strict = re.sub(r'min_island_area = "[^"]+"', 'min_island_area = "9000 mm^2"', rules, count=1)
    assert strict != rules
    (circuit.parent / "strict.toml").write_text(strict, "utf-8")
    circuit.write_text(GOOD.replace('"two-layer-standard"', '"strict.toml"'))
    out = circuit.parent / "out"
    status = status_of(["draw", str(circuit), "--out", str(out)])
    printed = capsys.readouterr()
    assert status == 1
    assert "copper.min_island_area" in printed.out
    assert (out / "report.json").is_file()


def test_size_prints_tables_and_json(circuit: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Widths, lengths and budgets; plain when piped; nothing written."""
    assert status_of(["size", str(circuit)]) == 0
    printed = capsys.readouterr()
    first = printed.out.splitlines()
    assert first[0].split()[:2] == ["line", "nets"]
    assert first[1].split()[:7] == ["section", "a,b", "50", "ohm,", "90", "deg", "50.00"]
    assert "deg" in printed.out
    assert "cause" in printed.out
    assert status_of(["size", str(circuit), "--json"]) == 0
    line = json.loads(capsys.readouterr().out)["lines"][0]
    assert line["width_mm"] == pytest.approx(1.1, abs=0.1)
    assert 0.0 < line["loss_db"] < 0.2
    assert abs(line["model_spread"]) < 0.01
    assert sum(entry["angle_deg"] for entry in line["budget"]) == pytest.approx(90.0, abs=1e-5)
    assert [p.name for p in circuit.parent.iterdir()] == ["circuit.toml"]


def test_check_prints_findings_and_json(circuit: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Also what was not checked; nothing written."""
    assert status_of(["check", str(circuit)]) == 0
    assert "not checked" in capsys.readouterr().out
    assert status_of(["check", str(circuit), "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert list(found) == ["format", "findings", "not_checked"]
    assert found["not_checked"]
    assert [p.name for p in circuit.parent.iterdir()] == ["circuit.toml"]


def test_response_prints_a_table_and_writes_its_files(
    circuit: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Without --out it writes nothing."""
    assert status_of(["response", str(circuit)]) == 0
    assert "west to east" in capsys.readouterr().out
    assert [p.name for p in circuit.parent.iterdir()] == ["circuit.toml"]
    out = circuit.parent / "out"
    assert status_of(["response", str(circuit), "--out", str(out)]) == 0
    assert sorted(p.name for p in out.iterdir()) == [
        "as_drawn.s2p",
        "response.csv",
        "response.json",
        "response.png",
        "response.svg",
        "wanted.s2p",
    ]


def test_schema_is_of_both_files(capsys: pytest.CaptureFixture[str]) -> None:
    """An editor completes keys from it."""
    assert status_of(["schema"]) == 0
    assert set(json.loads(capsys.readouterr().out)) == {"circuit", "rules"}


@pytest.mark.parametrize("name", ["board.gds", "board.oas", "board.DXF"])
def test_broken_artwork_is_refused_clearly(
    name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Read as a circuit file it would give a hundred faults of TOML; without rules it cannot be judged."""
    path = tmp_path / name
    path.write_bytes(b"\0\6\0\2")
    assert status_of(["check", str(path)]) == 2
    assert "--rules" in capsys.readouterr().err
    assert status_of(["check", str(path), "--rules", "two-layer-standard"]) == 2
    printed = capsys.readouterr().err
    assert name in printed
    assert printed.count("\n") == 1


def test_written_artwork_is_judged_and_compared(circuit: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The drawing's own files, read as anybody's, break no rule and equal each other."""
    out = circuit.parent / "out"
    assert status_of(["draw", str(circuit), "--out", str(out), "-q"]) == 0
    dxf, gds = str(out / "circuit.dxf"), str(out / "circuit.gds")
    assert status_of(["check", dxf, "--rules", "two-layer-standard"]) == 0
    assert status_of(["compare", dxf, gds]) == 0
    assert "equal" in capsys.readouterr().out


def test_packages_are_written_and_proved(circuit: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A receiver's folder that is missing, or a file that does not hold the model."""
    out = circuit.parent / "out"
    asked = ["draw", str(circuit), "--out", str(out), "--for", "test,assembly", "--prove"]
    assert status_of(asked) == 0
    assert " 0 failed" in capsys.readouterr().out
    assert (out / "assembly" / "README.txt").is_file()
    assert (out / "test" / "README.txt").is_file()
    assert status_of(["draw", str(circuit), "--out", str(out), "--for", "nobody"]) == 2


@pytest.mark.parametrize(
    "arguments", [["draw"], ["draw", "x.toml", "--dpi", "5"], ["paint"], ["draw", "x.toml", "--nonsense"]]
)
def test_wrong_usage_is_status_two(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    """As for any wrong input."""
    assert status_of(arguments) == 2
    assert "Traceback" not in capsys.readouterr().err


def test_help_and_version(capsys: pytest.CaptureFixture[str]) -> None:
    """Every option has a text; the version is the package's."""
    assert status_of(["--version"]) == 0
    assert capsys.readouterr().out == f"layoutgen {__version__}\n"
    for command in ("draw", "size", "check", "response", "schema"):
        assert status_of([command, "--help"]) == 0
        text = capsys.readouterr().out
        options = [line for line in text.splitlines() if line.startswith("  -")]
        assert options
        assert all(len(re.split(r"\s{2,}", line.strip())) == 2 for line in options), text


def test_an_unwritable_folder_is_found_before_any_work(
    circuit: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Status 2 at once: no stage may have run."""
    import layoutgen.pipeline

    def never(*_: object, **__: object) -> None:
        raise AssertionError("a stage has run")

    monkeypatch.setattr(layoutgen.pipeline, "run", never)
    (circuit.parent / "out").write_text("a file")
    assert status_of(["draw", str(circuit), "--out", str(circuit.parent / "out")]) == 2
    assert "cannot be written" in capsys.readouterr().err


def test_a_closed_pipe_is_no_traceback(circuit: Path) -> None:
    """layoutgen ... | head closes its end early."""
    command = [*COMMAND, "schema"]
    process = subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.read(10)
    process.stdout.close()
    errors = process.stderr.read().decode()
    process.stderr.close()
    assert process.wait() in (0, 141)
    assert errors == ""


def test_an_interrupt_is_tidy(
    circuit: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Control-C during a stage: one line, status 130, nothing written."""
    import layoutgen.pipeline

    def interrupted(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(layoutgen.pipeline, "run", interrupted)
    assert status_of(["draw", str(circuit), "--out", str(circuit.parent / "out")]) == 130
    assert capsys.readouterr().err.strip() == "interrupted; the files are as they were"
    assert [p.name for p in circuit.parent.iterdir()] == ["circuit.toml"]


def whole_set(folder: Path) -> dict[str, bytes]:
    """Return the folder's files after what the next run does first."""
    from layoutgen.writers import prepare_folder

    prepare_folder(folder)
    return {p.name: p.read_bytes() for p in folder.iterdir()}


def test_killed_at_twenty_moments_the_files_are_a_whole_set(circuit: Path) -> None:
    """The folder holds the old set or the new one, whatever moment the run was killed at."""
    out = circuit.parent / "out"
    options = ["--for", "none", "--repeatable", "-q"]  # packages: tests/writers/test_kills.py
    draw = [*COMMAND, "draw", str(circuit), "--out", str(out), *options]
    subprocess.run(draw, check=True)
    old = {p.name: p.read_bytes() for p in out.iterdir()}
    circuit.write_text(GOOD.replace('"90 deg"', '"80 deg"'))
    start = time.perf_counter()
    other = circuit.parent / "other"
    subprocess.run([*COMMAND, "draw", str(circuit), "--out", str(other), *options], check=True)
    takes = time.perf_counter() - start
    new = {p.name: p.read_bytes() for p in other.iterdir()}
    assert old != new
    rng = random.Random(11)
    seen = []
    for k in range(20):
        process = subprocess.Popen(draw)
        # half of the kills near the end, where the files are written
        low = 0.0 if k % 2 else 0.85
        time.sleep(takes * rng.uniform(low, 1.05))
        process.send_signal(signal.SIGKILL)
        process.wait()
        found = whole_set(out)
        differing = {name for name in found if found[name] not in (old.get(name), new.get(name))}
        assert found in (old, new), differing
        seen.append(found == new)
        for name, data in old.items():
            (out / name).write_bytes(data)
    assert not all(seen)


def test_the_example_draws_clean(tmp_path: Path) -> None:
    """The README's first command: no finding of severity error."""
    command = [*COMMAND, "draw", str(EXAMPLE), "--out", str(tmp_path / "out")]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
