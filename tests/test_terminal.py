"""What a terminal shows, and what a pipe gets."""

from __future__ import annotations

import io
import os
import pty
import re
import subprocess
import sys
import time
from pathlib import Path

import pytest

from layoutgen.terminal import Progress, plain_table, rich_table

ROOT = Path(__file__).parents[1]
HEADS = ("line", "width mm", "at")
ROWS = [("first", "1.100", "a"), ("second_one", "12.5", "-"), ("third", "none", "gnd")]


def test_plain_tables_line_up_without_trailing_blanks() -> None:
    """Ragged columns cannot be read; trailing blanks break diffs."""
    assert plain_table(HEADS, ROWS).splitlines() == [
        "line        width mm  at",
        "first          1.100  a",
        "second_one      12.5  -",
        "third           none  gnd",
    ]


def test_terminal_tables_hold_every_cell() -> None:
    """Long cells are folded, never cut off."""
    stream = io.StringIO()
    rich_table("Lines", HEADS, [*ROWS, ("x" * 150, "1", "z")], stream)
    text = stream.getvalue()
    assert text.count("x") == 150
    for cell in ("Lines", "width mm", "second_one", "12.5", "gnd"):
        assert cell in text


class Terminal(io.StringIO):
    """A text stream that says it is a terminal."""

    def isatty(self) -> bool:
        return True


def test_progress_is_silent_for_quick_work() -> None:
    """A line that flashes up for a blink is noise."""
    stream = Terminal()
    with Progress(stream, enabled=True) as progress:
        progress("reading")
    assert stream.getvalue() == ""


def test_progress_names_the_stage_and_clears_its_line(monkeypatch: pytest.MonkeyPatch) -> None:
    """Left standing, it would end up in front of the results."""
    monkeypatch.setattr(Progress, "DELAY", 0.01)
    stream = Terminal()
    with Progress(stream, enabled=True) as progress:
        progress("placement")
        for _ in range(200):
            time.sleep(0.02)
            if "placement" in stream.getvalue():
                break
        progress("artwork")
        for _ in range(200):
            time.sleep(0.02)
            if "artwork" in stream.getvalue():
                break
    text = stream.getvalue()
    assert "placement ..." in text
    assert "artwork ..." in text
    assert "\x1b[2K" in text[text.rindex("artwork") :]


def test_progress_is_off_where_there_is_no_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    """Log files must not fill with spinners."""
    monkeypatch.setattr(Progress, "DELAY", 0.01)
    stream = io.StringIO()
    with Progress(stream, enabled=False) as progress:
        progress("placement")
        time.sleep(0.1)
    assert stream.getvalue() == ""


def test_a_terminal_gets_tables_with_lines_and_a_pipe_gets_plain_ones() -> None:
    """The same command, once under a pseudo-terminal and once piped."""
    circuit = str(ROOT / "examples" / "stub_notch.toml")
    command = [sys.executable, "-c", "from layoutgen.cli import main; main()", "size", circuit]
    piped = subprocess.run(command, capture_output=True, text=True, check=True).stdout
    leader, follower = pty.openpty()
    process = subprocess.Popen(
        command, stdout=follower, stderr=subprocess.DEVNULL, env={**os.environ, "TERM": "xterm"}
    )
    os.close(follower)
    shown = b""
    while True:
        try:
            block = os.read(leader, 65536)
        except OSError:  # Linux's way to tell the end of a pseudo-terminal
            break
        if not block:
            break
        shown += block
    assert process.wait() == 0
    os.close(leader)
    assert "\x1b" not in piped
    assert "━" in shown.decode()
    names = re.findall(r"^(\w+) ", piped, re.MULTILINE)
    assert all(name in shown.decode() for name in names)
