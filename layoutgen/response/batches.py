"""Who works out the batches of a tolerance analysis: this process, several, or a dask.distributed cluster.

In: how many processes, or a scheduler's address. Out: a function that maps a piece of work over batches and
returns the results in the batches' order. dask.distributed is imported only when a scheduler is named.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from contextlib import contextmanager
from importlib import import_module
from typing import Any

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault, Location
from layoutgen.response.chain import FloatArray
from layoutgen.response.samples import Found

__all__ = ["PATIENCE", "workers"]

PATIENCE = "10s"
"""How long a scheduler is waited for."""

_ADDRESS = re.compile(r"(?:(?:tcp|tls|ws|wss)://)?(?:[A-Za-z0-9_.-]+|\[[0-9A-Fa-f:.]+\]):\d{1,5}")

_Run = Callable[[Callable[[FloatArray], Found], Sequence[FloatArray]], list[Found]]


@contextmanager
def workers(processes: int, scheduler: str | None) -> Iterator[_Run]:
    """Give a function that works out batches in order: here, in other processes, or on a cluster.

    Args:
        processes: Number of processes; 1 works in this one.
        scheduler: Address of a dask.distributed scheduler; None for none.

    Raises:
        WrongInputError: The library is not installed, or no scheduler answers.
    """
    if scheduler is not None:
        with _cluster(scheduler) as run:
            yield run
    elif processes > 1:
        from multiprocessing import get_context

        with ProcessPoolExecutor(processes, mp_context=get_context("spawn")) as pool:
            yield lambda work, batches: list(pool.map(work, batches))
    else:
        yield lambda work, batches: [work(batch) for batch in batches]


@contextmanager
def _cluster(address: str) -> Iterator[_Run]:
    """Give a function that sends batches to a dask.distributed scheduler."""
    if _ADDRESS.fullmatch(address) is None:
        raise _no_cluster(address, "another form of address", 'such as "tcp://127.0.0.1:8786"')
    try:
        library: Any = import_module("distributed")
    except ImportError:
        found = "dask.distributed is not installed"
        raise _no_cluster(address, found, "pip install distributed") from None
    try:
        client = library.Client(address, timeout=PATIENCE, set_as_default=False)
    except (OSError, ValueError) as error:
        found = f"no scheduler ({error})"
        raise _no_cluster(address, found, "the address of a running scheduler") from None
    with client:
        yield lambda work, batches: list(client.gather(client.map(work, batches, pure=False)))


def _no_cluster(address: str, found: str, allowed: str) -> WrongInputError:
    """Return the error for a cluster that cannot be used."""
    return WrongInputError([Fault(Location(address, 0), "scheduler", found, allowed)])
