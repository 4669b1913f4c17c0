"""Completion in the shell, by the scripts that the command itself prints."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
COMMAND = "layoutgen"


def run(*command: str, **variables: str) -> str:
    """Return what a command prints, with the environment's own command first on the path."""
    path = f"{Path(sys.executable).parent}{os.pathsep}{os.environ['PATH']}"
    environment = {**os.environ, "PATH": path, **variables}
    return subprocess.run(
        command, capture_output=True, text=True, check=True, env=environment, cwd=ROOT
    ).stdout


def completed(*words: str) -> list[str]:
    """Return what bash offers for the last word, through the function that it was given."""
    quoted = " ".join(f"'{word}'" for word in (COMMAND, *words))
    script = f"""
eval "$(_LAYOUTGEN_COMPLETE=bash_source {COMMAND})"
complete -p {COMMAND} > /dev/null || exit 1
COMP_WORDS=({quoted}) COMP_CWORD={len(words)}
_layoutgen_completion {COMMAND} 2> /dev/null
printf '%s\\n' "${{COMPREPLY[@]}}"
"""
    return run("bash", "--norc", "-c", script).split()


@pytest.mark.skipif(shutil.which("bash") is None, reason="needs bash")
@pytest.mark.parametrize(
    ("words", "offered"),
    [
        (("dr",), ["draw"]),
        (("draw", "--rep"), ["--repeatable"]),
        (("draw", "--for", "te"), ["test"]),
        (("draw", "--for", "test,board"), ["test,board-house"]),
        (("draw", "--for", "test,te"), []),
    ],
)
def test_bash_offers_commands_options_and_receivers(words: tuple[str, ...], offered: list[str]) -> None:
    """A script for another name, or one that prints a help text among the words, offers nothing."""
    assert completed(*words) == offered


@pytest.mark.parametrize(
    ("shell", "reply"),
    [("bash", "plain,tolerance"), ("zsh", "plain\ntolerance\n"), ("fish", "plain,tolerance\t")],
)
def test_every_shell_has_a_script_and_gets_its_own_form_of_reply(shell: str, reply: str) -> None:
    """The documented variable must work for each shell, also for one that is not installed here."""
    assert "_layoutgen_completion" in run(COMMAND, _LAYOUTGEN_COMPLETE=f"{shell}_source")
    word = "tol" if shell == "fish" else "1"
    told = run(COMMAND, _LAYOUTGEN_COMPLETE=f"{shell}_complete", COMP_WORDS=f"{COMMAND} tol", COMP_CWORD=word)
    assert told.startswith(reply)


def test_the_readme_tells_how() -> None:
    """Completion that nobody is told of is not there."""
    text = (ROOT / "README.md").read_text("utf-8")
    assert all(f"_LAYOUTGEN_COMPLETE={shell}_source layoutgen" in text for shell in ("bash", "zsh", "fish"))
