"""The watcher without a browser: what it follows, what it serves, how it ends."""

from __future__ import annotations

import http.client
import json
import os
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from layoutgen.errors import InfeasibleError, WrongInputError
from layoutgen.watch import redraw, watch, watched_files
from layoutgen.watch.files import folders_of, marks_of
from layoutgen.writers import Job, Result

for library in ("starlette", "uvicorn", "watchfiles"):
    pytest.importorskip(library)

ROOT = Path(__file__).parents[2]
EXAMPLE = ROOT / "examples" / "quarter_wave_transformer.toml"
PROGRAM = """
import sys
from layoutgen.watch import watch
watch(sys.argv[1], sys.argv[2], tell=lambda text: print(text, flush=True),
      ready=lambda address: print(address, flush=True))
print("ended")
"""


def test_a_circuit_is_followed_with_its_rules_and_data(tmp_path: Path) -> None:
    """A rule file saved without effect is noticed only at the board house."""
    circuit = tmp_path / "a.toml"
    circuit.write_text(
        '[board]\nrules = "../house.toml"\n[parts.C1]\ndata = "data/c1.s2p"\n[parts.C2]\ndata = 3\n'
    )
    assert watched_files(circuit) == {circuit, tmp_path / "../house.toml", tmp_path / "data/c1.s2p"}


@pytest.mark.parametrize("text", ["board = 1\nparts = []\n", '[board]\nrules = "two-layer-standard"\n', ""])
def test_a_circuit_that_names_no_file_is_followed_alone(tmp_path: Path, text: str) -> None:
    """Data of a wrong kind must not end the watching."""
    circuit = tmp_path / "a.toml"
    circuit.write_text(text)
    assert watched_files(circuit) == {circuit}


def test_a_circuit_that_cannot_be_read_says_nothing(tmp_path: Path) -> None:
    """Half-saved files must not make the watcher forget the rule file."""
    circuit = tmp_path / "a.toml"
    assert watched_files(circuit) is None
    circuit.write_text("[board\n")
    assert watched_files(circuit) is None


def test_folders_that_do_not_exist_yet_are_waited_for_above(tmp_path: Path) -> None:
    """A data folder made later must be noticed."""
    assert folders_of(frozenset({tmp_path / "a.toml", tmp_path / "no" / "such" / "c.s2p"})) == (tmp_path,)


def test_a_save_is_seen_by_time_size_or_file(tmp_path: Path) -> None:
    """Editors write in place or put a new file there; either may keep the size."""
    file = tmp_path / "a.toml"
    files = frozenset({file})
    assert marks_of(files) == {file: None}
    file.write_text("a")
    first = marks_of(files)
    beside = tmp_path / "b"
    beside.write_text("b")
    os.utime(beside, ns=(0, file.stat().st_mtime_ns))
    beside.replace(file)
    assert marks_of(files) != first


def test_a_drawing_is_written_and_its_page_follows(tmp_path: Path) -> None:
    """The page that is served must be the one of the files, and the same input the same version."""
    first, again = (redraw(EXAMPLE, tmp_path / "out", Job(stem="q")) for _ in range(2))
    assert first.faults == ()
    assert first.version == again.version
    assert first.page == again.page
    assert f'content="{first.version}"'.encode() in first.page
    assert (tmp_path / "out" / "q.gds").is_file()


def test_faults_are_told_and_nothing_is_written(tmp_path: Path) -> None:
    """All faults at once, as on the command line."""
    circuit = tmp_path / "a.toml"
    circuit.write_text(
        EXAMPLE.read_text("utf-8").replace("format = 1", "format = 1\nfrmat = 1\nwidht = 2"), "utf-8"
    )
    drawing = redraw(circuit, tmp_path / "out", Job(stem="a"))
    assert drawing.page == b""
    assert len(drawing.faults) == 2
    assert all(fault.startswith(f"{circuit}:") for fault in drawing.faults)
    assert not (tmp_path / "out").exists()


def test_the_caller_says_how_to_draw(tmp_path: Path) -> None:
    """The command line's options, and the day on which waivers end, must reach every drawing."""

    def refuse(circuit: Path) -> Result:
        raise InfeasibleError(circuit.name, "not today", "tomorrow would do")

    drawing = redraw(EXAMPLE, tmp_path / "out", Job(stem="q"), refuse)
    assert drawing.faults == (f"no placement: {EXAMPLE.name}: not today; tomorrow would do",)


def test_no_such_file_is_an_error_at_once(tmp_path: Path) -> None:
    """A typing error in the name would be watched for ever."""
    with pytest.raises(WrongInputError, match="no such file"):
        watch(tmp_path / "a.toml", tmp_path / "out")


def test_a_port_in_use_is_told(tmp_path: Path) -> None:
    """A traceback of the socket library helps nobody."""
    import socket

    with socket.socket() as other:
        other.bind(("127.0.0.1", 0))
        other.listen()
        with pytest.raises(WrongInputError, match="cannot be opened"):
            watch(EXAMPLE, tmp_path / "out", other.getsockname()[1])
    with pytest.raises(WrongInputError, match="65535"):
        watch(EXAMPLE, tmp_path / "out", 70000)


def test_a_missing_library_is_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The extra is optional: the message must say how to get it."""
    monkeypatch.setattr("importlib.util.find_spec", lambda name: None if name == "uvicorn" else object())
    with pytest.raises(WrongInputError, match=r"no library uvicorn.*pip install 'layoutgen\[watch\]'"):
        watch(EXAMPLE, tmp_path / "out")


class Running:
    """`watch` in a process of its own."""

    def __init__(self, circuit: Path, folder: Path) -> None:
        command = [sys.executable, "-c", PROGRAM, str(circuit), str(folder)]
        self.process = subprocess.Popen(
            command, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True, encoding="utf-8"
        )
        assert self.process.stdout is not None
        self.lines = self.process.stdout
        self.open: list[http.client.HTTPResponse | http.client.HTTPConnection] = []
        self.told = self.lines.readline()
        self.port = int(self.lines.readline().strip().rstrip("/").rpartition(":")[2])

    def ask(self, path: str, host: str = "127.0.0.1") -> tuple[int, str]:
        """Return status and text."""
        connection = http.client.HTTPConnection("127.0.0.1", self.port, timeout=10)
        connection.request("GET", path, headers={"Host": f"{host}:{self.port}"})
        answer = connection.getresponse()
        text = answer.read().decode()
        connection.close()
        return answer.status, text

    def events(self) -> Iterator[dict[str, Any]]:
        """Yield the states that the server tells of."""
        connection = http.client.HTTPConnection("127.0.0.1", self.port, timeout=20)
        connection.request("GET", "/events")
        answer = connection.getresponse()
        self.open += [answer, connection]
        assert answer.headers["Content-Type"].startswith("text/event-stream")
        for line in answer:
            if line.startswith(b"data: "):
                yield json.loads(line.removeprefix(b"data: "))


@pytest.fixture
def running(tmp_path: Path) -> Iterator[Callable[[Path], Running]]:
    """Return what starts `watch` on a circuit; it is ended afterwards."""
    started: list[Running] = []

    def start(circuit: Path) -> Running:
        started.append(Running(circuit, tmp_path / "out"))
        return started[-1]

    yield start
    for run in started:
        if run.process.poll() is None:
            run.process.terminate()
        run.process.communicate(timeout=20)
        for connection in run.open:
            connection.close()


def settled(states: Iterator[dict[str, Any]]) -> dict[str, Any]:
    """Return the next state in which nothing is being drawn."""
    return next(state for state in states if not state["busy"])


def test_a_rule_file_of_ones_own_is_followed(running: Callable[[Path], Running], tmp_path: Path) -> None:
    """Saving the rules must draw again, with the new rules; a fault in them is told with their own lines."""
    rules = tmp_path / "house.toml"
    shutil.copy(ROOT / "rules" / "two-layer-standard.toml", rules)
    circuit = tmp_path / "a.toml"
    text = EXAMPLE.read_text("utf-8").replace('rules = "two-layer-standard"', 'rules = "house.toml"')
    circuit.write_text(text, "utf-8")
    run = running(circuit)
    states = run.events()
    first = settled(states)
    assert first["faults"] == []
    assert first["version"]
    good = rules.read_text("utf-8")
    rules.write_text(good + "\n[nonsense]\n", "utf-8")
    wrong = settled(states)
    assert len(wrong["faults"]) == 1
    assert "house.toml:" in wrong["faults"][0]
    assert wrong["version"] == first["version"]
    rules.write_text(good.replace('name = "', 'name = "Another '), "utf-8")
    again = settled(states)
    assert again["faults"] == []
    assert again["version"] != first["version"]
    assert "Another" in run.ask("/")[1]


def test_a_file_wrong_from_the_start_is_served_too(
    running: Callable[[Path], Running], tmp_path: Path
) -> None:
    """The page must be there before the first drawing, and bring it when there is one."""
    circuit = tmp_path / "a.toml"
    circuit.write_text("x", "utf-8")
    run = running(circuit)
    states = run.events()
    assert len(settled(states)["faults"]) == 1
    status, text = run.ask("/")
    assert status == 200
    assert "Nothing has been drawn yet" in text
    shutil.copy(EXAMPLE, circuit)
    assert settled(states)["version"]


def test_only_this_machine_by_its_own_name_is_answered(running: Callable[[Path], Running]) -> None:
    """A foreign page that points its own name at this machine must not read the board."""
    run = running(EXAMPLE)
    assert run.told.startswith(f"open http://127.0.0.1:{run.port}/")
    assert run.ask("/", "localhost")[0] == 200
    assert run.ask("/", "elsewhere.example")[0] == 400
    assert run.ask("/report.json")[0] == 404
    assert run.ask("/../../etc/passwd")[0] == 404


@pytest.mark.parametrize(("number", "status"), [(signal.SIGINT, 0), (signal.SIGTERM, -signal.SIGTERM)])
def test_it_ends_when_told_to(
    running: Callable[[Path], Running], number: signal.Signals, status: int
) -> None:
    """With a listener still there: no traceback, no waiting, an interrupt is a normal end."""
    run = running(EXAMPLE)
    settled(run.events())
    start = time.monotonic()
    run.process.send_signal(number)
    rest = run.process.communicate(timeout=20)[0]
    assert run.process.returncode == status
    assert "Traceback" not in rest
    assert ("ended" in rest) == (number == signal.SIGINT)
    assert time.monotonic() - start < 5.0
