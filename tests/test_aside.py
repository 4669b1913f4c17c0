"""Work done in a copy of the process gives what it gives in this one."""

from __future__ import annotations

import os
import threading
import time
from collections.abc import Callable

import pytest

from layoutgen.aside import aside

HERE = os.getpid()


@pytest.fixture(autouse=True)
def only_thread(monkeypatch: pytest.MonkeyPatch) -> None:
    """The test runner's own threads must not decide."""
    monkeypatch.setattr(threading, "active_count", lambda: 1)


def test_outcome_comes_from_another_process() -> None:
    """Would catch work that is only put off: nothing would be gained."""
    with aside(os.getpid) as outcome:
        pass_time = sum(range(1000))
        assert outcome() != os.getpid() or (os.cpu_count() or 1) < 2
    assert pass_time == 499500


def test_large_outcomes_pass_whole() -> None:
    """A pipe holds 64 KiB: a reader that does not wait for more would lose the rest, or hang."""
    with aside(lambda: bytes(range(256)) * 40_000) as outcome:
        assert outcome() == bytes(range(256)) * 40_000


def dies() -> int:
    if os.getpid() != HERE:
        os._exit(9)
    return 5


def stops_half_way() -> int:
    """Return something that cannot be pickled, after which the copy has nothing to say."""
    return 5 if os.getpid() == HERE else lambda: 5  # type: ignore[return-value]


@pytest.mark.parametrize("work", [dies, stops_half_way])
def test_a_copy_that_comes_to_grief_is_made_good(
    work: Callable[[], int], capfd: pytest.CaptureFixture[str]
) -> None:
    """A copy killed for want of memory must not lose the files, nor print a traceback."""
    with aside(work) as outcome:
        assert outcome() == 5
    assert capfd.readouterr().err == ""


def test_errors_are_raised_here() -> None:
    """An error of the work must end the run as ever, not vanish in the copy."""

    def fails() -> int:
        raise ValueError("as it should")

    with aside(fails) as outcome, pytest.raises(ValueError, match="as it should"):
        outcome()


def test_without_copies_the_work_is_done_here(monkeypatch: pytest.MonkeyPatch) -> None:
    """Systems without a way to copy a process draw too."""
    monkeypatch.delattr(os, "fork")
    with aside(os.getpid) as outcome:
        assert outcome() == os.getpid()


def test_of_several_threads_none_is_copied(monkeypatch: pytest.MonkeyPatch) -> None:
    """A copy holds the locks of threads that it does not have, and may wait for them for ever."""
    monkeypatch.setattr(threading, "active_count", lambda: 2)
    with aside(os.getpid) as outcome:
        assert outcome() == os.getpid()


def test_a_block_that_fails_leaves_no_copy_behind(monkeypatch: pytest.MonkeyPatch) -> None:
    """An interrupt must not leave a process that works on."""
    copies, fork = [], os.fork

    def noted() -> int:
        copies.append(fork())
        return copies[-1]

    monkeypatch.setattr(os, "fork", noted)
    begun = time.monotonic()
    with pytest.raises(KeyboardInterrupt), aside(lambda: time.sleep(60)):
        raise KeyboardInterrupt
    assert time.monotonic() - begun < 30
    for number in copies:
        with pytest.raises(ChildProcessError):
            os.waitpid(number, os.WNOHANG)
