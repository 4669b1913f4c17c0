"""The loop: wait for a file to be saved, draw, show; and the server beside it."""

from __future__ import annotations

import asyncio
import contextlib
import importlib.util
import socket
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault, Location
from layoutgen.pipeline import run
from layoutgen.watch.files import Mark, folders_of, marks_of, watched_files
from layoutgen.watch.redraw import Draw, Drawing, redraw
from layoutgen.watch.server import LOOPBACK, Stage, application
from layoutgen.writers import Job, file_names, older_packages, prepare_folder

if TYPE_CHECKING:
    from uvicorn import Server

__all__ = ["watch"]

_LIBRARIES = ("starlette", "uvicorn", "watchfiles")

Tell = Callable[[str], None]


def watch(
    circuit: str | Path,
    folder: str | Path,
    port: int = 0,
    *,
    job: Job | None = None,
    draw: Draw = run,
    tell: Tell = lambda text: None,
    ready: Callable[[str], None] = lambda address: None,
) -> None:
    """Draw a circuit file whenever it or a file it names is saved, and serve its page; until interrupted.

    A keyboard interrupt or a termination signal ends it; a drawing that is being made is finished first.

    Args:
        circuit: The circuit file; it must exist, but may be faulty.
        folder: Where the files go, at every drawing that can be made.
        port: The server's port on this machine; 0 takes a free one.
        job: How the files are written; None takes the circuit file's stem.
        draw: Makes every stage's result of a circuit file; give one that knows the day when waivers end.
        tell: Called with a text of one or more lines for each thing that happens.
        ready: Called once with the page's address, when it can be opened.

    Raises:
        WrongInputError: No such file, a folder that cannot be written, a port in use, a library missing.
    """
    _require_libraries()
    path, target = Path(circuit), Path(folder)
    if not path.is_file():
        raise _wrong(str(path), "no such file", "a circuit file")
    job = job or Job(stem=path.stem)
    prepare_folder(target, file_names(job.stem))
    with _listening(port) as listener, contextlib.suppress(KeyboardInterrupt):
        asyncio.run(_serve(_Task(path, target, job, draw, tell), listener, ready))


def _require_libraries() -> None:
    """Raise when the extra is not installed."""
    missing = [name for name in _LIBRARIES if importlib.util.find_spec(name) is None]
    if missing:
        raise _wrong(
            "layoutgen watch",
            f"no library {', '.join(missing)}",
            "an installation with the extra watch: pip install 'layoutgen[watch]'",
        )


def _wrong(place: str, found: str, allowed: str) -> WrongInputError:
    return WrongInputError([Fault(Location(place, 0), "", found, allowed)])


def _listening(port: int) -> socket.socket:
    """Return a socket that only this machine can reach."""
    listener = socket.socket(socket.AF_INET, socket.SOCK_STREAM)
    try:
        listener.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        listener.bind((LOOPBACK, port))
        listener.listen()
    except (OSError, OverflowError) as error:
        listener.close()
        reason = getattr(error, "strerror", None) or str(error)
        found = f"port {port}, which cannot be opened ({reason.lower()})"
        raise _wrong("layoutgen watch", found, "a free port of 0 to 65535; 0 takes any") from error
    return listener


@dataclass(frozen=True, slots=True)
class _Task:
    """What is drawn, where to, how, and who is told."""

    circuit: Path
    folder: Path
    job: Job
    draw: Draw
    tell: Tell

    def redraw(self) -> Drawing:
        """Draw once."""
        return redraw(self.circuit, self.folder, self.job, self.draw)


async def _serve(task: _Task, listener: socket.socket, ready: Callable[[str], None]) -> None:
    """Serve the page and follow the files until the server is told to end."""
    from uvicorn import Config, Server

    stage = Stage(task.circuit.name)
    config = Config(application(stage), log_level="error", lifespan="off", timeout_graceful_shutdown=1)
    server = Server(config)
    serving = asyncio.create_task(server.serve(sockets=[listener]))
    following = asyncio.create_task(_follow(task, stage))
    closing = asyncio.create_task(_close_with(server, stage))
    address = f"http://{LOOPBACK}:{listener.getsockname()[1]}/"
    task.tell(f"open {address}; it follows {task.circuit}, interrupt to end")
    ready(address)
    await asyncio.wait({serving, following}, return_when=asyncio.FIRST_COMPLETED)
    server.should_exit = True
    following.cancel()
    for outcome in await asyncio.gather(following, serving, closing, return_exceptions=True):
        if isinstance(outcome, Exception):
            raise outcome


async def _close_with(server: Server, stage: Stage) -> None:
    """Let listeners go as soon as the server wants to end; it would wait for them."""
    while not server.should_exit:
        await asyncio.sleep(0.1)
    await stage.close()


async def _follow(task: _Task, stage: Stage) -> None:
    """Draw now and after every change of a file the circuit depends on."""
    own = files = frozenset({task.circuit.absolute()})
    while True:
        seen = marks_of(own)
        files = watched_files(task.circuit) or files
        seen = marks_of(files) | seen
        await stage.begin()
        start = time.perf_counter()
        drawing = await asyncio.to_thread(task.redraw)
        await stage.finish(drawing)
        task.tell(_outcome(drawing, time.perf_counter() - start, older_packages(task.folder, ())))
        await _change(files, seen)


def _outcome(drawing: Drawing, seconds: float, packages: Sequence[str]) -> str:
    """Return what became of a drawing, and which packages beside it are not of it."""
    if not drawing.faults:
        older = f"; of an earlier drawing: {', '.join(packages)}" if packages else ""
        return f"drawn in {seconds:.1f} s{older}"
    return "\n".join((*drawing.faults, "nothing was written; waiting for the file to be saved"))


async def _change(files: frozenset[Path], seen: dict[Path, Mark]) -> None:
    """Wait until a file differs from what was seen, and has come to rest.

    The system's notices only shorten the wait: files are also looked at once a second, for folders that give
    no notices.
    """
    from watchfiles import awatch

    notices = awatch(
        *folders_of(files),
        watch_filter=None,
        recursive=False,
        debounce=400,
        step=50,
        rust_timeout=1000,
        yield_on_timeout=True,
        ignore_permission_denied=True,
    )
    now = marks_of(files)
    async with contextlib.aclosing(notices):
        while now == seen:
            await anext(notices)
            now = marks_of(files)
    while now != (now := await _a_moment_later(files)):
        pass


async def _a_moment_later(files: frozenset[Path]) -> dict[Path, Mark]:
    await asyncio.sleep(0.1)
    return marks_of(files)
