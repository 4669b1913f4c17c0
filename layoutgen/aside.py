"""One piece of work done in a copy of this process, while this one goes on with something else."""

from __future__ import annotations

import os
import pickle
import signal
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from typing import IO, TypeVar, cast

__all__ = ["aside"]

Outcome = TypeVar("Outcome")


@contextmanager
def aside(work: Callable[[], Outcome]) -> Iterator[Callable[[], Outcome]]:
    """Begin some work; calling what the block is given waits for its outcome and returns it.

    The outcome is the same as that of calling ``work`` there and then: where processes cannot be copied, as
    in one of several threads, where there is one core only, and where the copy comes to grief, that is what
    happens.

    Args:
        work: Takes nothing; must not depend on what the block does, and its outcome can be pickled.
    """
    if not hasattr(os, "fork") or threading.active_count() > 1 or (os.cpu_count() or 1) < 2:
        yield work
        return
    source, sink = os.pipe()
    child = os.fork()
    if child == 0:
        os.close(source)
        _work_and_leave(work, sink)
    os.close(sink)
    with os.fdopen(source, "rb") as answer:
        try:
            yield lambda: _outcome(work, answer)
        finally:
            with suppress(ProcessLookupError):
                os.kill(child, signal.SIGKILL)
            os.waitpid(child, 0)


def _work_and_leave(work: Callable[[], object], sink: int) -> None:
    """Work in the copy, hand the outcome over, and end the copy; nothing is printed or flushed twice."""
    try:
        for number in (signal.SIGINT, signal.SIGTERM):
            signal.signal(number, signal.SIG_DFL)
        with os.fdopen(sink, "wb") as answer:
            pickle.dump(work(), answer)
    finally:
        os._exit(0)


def _outcome(work: Callable[[], Outcome], answer: IO[bytes]) -> Outcome:
    """Return what the copy found, or find it here."""
    try:
        return cast("Outcome", pickle.loads(answer.read()))
    except (EOFError, pickle.UnpicklingError):
        return work()
