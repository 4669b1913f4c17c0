"""Tolerance: what the response does when boards and parts come out within their limits, not on the mark.

In: an artwork whose circuit file has a ``[tolerance]`` table. Out: :class:`Tolerance`: yield against stated
limits, corners, and which quantity moves the response most. Permittivity, height and etching are one value
for a board; each part's value is its own. Samples are uniform between the limits (the file does not say
more, and it is the cautious choice); corners take the board's quantities, and all values together, to their
limits. Measured data do not vary. Batches are of one size whoever works them out, so the result is the same
bytes with any number of processes.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import numpy.typing as npt

from layoutgen.artwork import Artwork
from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.response.batches import workers
from layoutgen.response.chain import FloatArray
from layoutgen.response.drawn import drawing_of
from layoutgen.response.limits import Limit, read_limits
from layoutgen.response.medium import medium_of
from layoutgen.response.parts import response_ports
from layoutgen.response.samples import ETCHING, HEIGHT, PERMITTIVITY, Found, Job, spreads
from layoutgen.response.solve import solve
from layoutgen.response.sweep import part_data
from layoutgen.response.threads import one_thread
from layoutgen.response.wanted import wanted_network

__all__ = ["BATCH_POINTS", "Contributor", "Corner", "LimitYield", "Tolerance", "tolerance"]

BATCH_POINTS = 20_000
"""Samples times frequencies of one batch [-]: small enough to stay in a processor's cache."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitYield:
    """How samples do against one limit: share that keeps to it [-], and magnitudes [-].

    ``nominal`` is the drawing as it is, ``median`` and ``worst`` are of the samples.
    """

    limit: str
    share: float
    nominal: float
    median: float
    worst: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Contributor:
    """What one quantity alone does at its worse limit: the largest change of an S-parameter in the band [-].

    ``name`` is ``relative_permittivity``, ``height``, ``width`` or a part's name; ``limit`` its plus-minus
    limit (in [-], [m], [m], or a share of the part's value [-]); ``sign`` says at which end.
    """

    name: str
    limit: float
    change: float
    sign: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Corner:
    """A corner: the sign of each board quantity and of all values, the change [-], if limits are kept."""

    signs: tuple[tuple[str, int], ...]
    change: float
    passes: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Tolerance:
    """Result of a tolerance analysis.

    ``yield_share`` [-] are the samples that keep to all limits; ``contributors`` and ``corners`` have the
    worst first; ``frequencies`` (F,) [Hz] span the band; ``nominal``, ``least`` and ``most`` (F, N, N) [-]
    are magnitudes as drawn and their range over the samples, for plots. Arrays are read-only.
    """

    samples: int
    seed: int
    ports: tuple[str, ...]
    yield_share: float
    limits: tuple[LimitYield, ...]
    contributors: tuple[Contributor, ...]
    corners: tuple[Corner, ...]
    frequencies: npt.NDArray[np.float64]
    nominal: npt.NDArray[np.float64]
    least: npt.NDArray[np.float64]
    most: npt.NDArray[np.float64]


@one_thread()
def tolerance(
    artwork: Artwork,
    *,
    samples: int = 1000,
    seed: int = 1,
    limits: Sequence[str] = (),
    points: int = 101,
    processes: int = 1,
    scheduler: str | None = None,
    folder: Path | None = None,
) -> Tolerance:
    """Return what the tolerances of a circuit file do to an artwork's response in the band.

    Args:
        artwork: The drawing; its widths, lengths and places stay.
        samples: Number of samples, at least 1.
        seed: Seed of the samples; the same gives the same bytes.
        limits: Texts of :func:`~layoutgen.response.limits.read_limits`; none: ``change <= 0.1``.
        points: Frequencies over the band, at least 2.
        processes: Processes that share the batches; 1 works in this one.
        scheduler: Address of a dask.distributed scheduler that gets the batches instead.
        folder: What the paths of data files start from; None: the folder of the circuit file.

    Raises:
        WrongInputError: No ``[tolerance]``, nothing in it, or limits that leave no line or gap; faulty
            ``limits``; data files that cannot be used; a scheduler that is not there.
    """
    job = _job(artwork, limits, points, folder)
    count = len(job.spread)
    board = [name for name in (PERMITTIVITY, HEIGHT, ETCHING) if name in job.spread]
    alone = np.concatenate([sign * np.eye(count) for sign in (1.0, -1.0)])
    corner_signs, corners = _corners(list(job.spread), board)
    drawn = np.random.default_rng(seed).uniform(-1.0, 1.0, (samples, count))
    size = max(1, BATCH_POINTS // points)
    fixed = np.concatenate([np.zeros((1, count)), alone, corners])
    batches = [part[k : k + size] for part in (fixed, drawn) for k in range(0, len(part), size)]
    with workers(processes, scheduler) as run:
        found = run(job.run, batches)
    first = -(-len(fixed) // size)
    head, tail = _joined(found[:first]), _joined(found[first:])
    kept = np.stack([limit.kept(head.measured[:, k]) for k, limit in enumerate(job.limits)], axis=1)
    return Tolerance(
        samples=samples,
        seed=seed,
        ports=tuple(name for name, _ in job.drawing.ports),
        yield_share=_share(job.limits, tail),
        limits=tuple(_yields(job.limits, head, tail)),
        contributors=_contributors(job, head.off[1 : 1 + 2 * count]),
        corners=_by_change(corner_signs, head.off[1 + 2 * count :], kept[1 + 2 * count :]),
        frequencies=_frozen(job.medium.frequencies),
        nominal=_frozen(np.abs(job.nominal)),
        least=_frozen(tail.least),
        most=_frozen(tail.most),
    )


def _job(artwork: Artwork, limits: Sequence[str], points: int, folder: Path | None) -> Job:
    """Return what the batches need."""
    circuit = artwork.placement.sized.circuit
    file = circuit.file
    data = part_data(file, folder)
    spread = spreads(file, data)
    _refuse(artwork, spread)
    drawing = drawing_of(artwork)
    read = read_limits(limits, [name for name, _ in response_ports(file)])
    medium = medium_of(circuit, np.linspace(*file.design.band, points))
    wanted = solve(wanted_network(artwork.placement, medium.frequencies, data))
    job = Job(drawing, medium, data, spread, read, wanted, wanted)
    return replace(job, nominal=job.responses(np.zeros((1, len(spread))))[0])


def _refuse(artwork: Artwork, spread: dict[str, float]) -> None:
    """Raise when nothing varies, or etching leaves no line or no gap.

    Raises:
        WrongInputError: With every fault.
    """
    file = artwork.placement.sized.circuit.file
    faults = []
    if not response_ports(file):
        faults.append(("ports", "no RF port and no termination", "a circuit with a response"))
    if not spread:
        faults.append(("tolerance", "no limits to vary within", "a [tolerance] table with a value above 0"))
    for what, sizes in (("narrowest line", _widths(artwork)), ("narrowest gap", _gaps(artwork))):
        least = min(sizes, default=0) * 1e-9
        if sizes and spread.get(ETCHING, 0.0) >= least:
            found = f"{spread[ETCHING] * 1e3:g} mm"
            faults.append(("tolerance.width", found, f"less than the {what}, {least * 1e3:g} mm"))
    if faults:
        raise WrongInputError([Fault(file.location(key), key, *texts) for key, *texts in faults])


def _widths(artwork: Artwork) -> list[int]:
    """Return the widths of all lines and pairs [nm]."""
    lines = [line.width for line in artwork.placement.lines.values()]
    return lines + [pair.width for pair in artwork.placement.pairs.values()]


def _gaps(artwork: Artwork) -> list[int]:
    """Return the gaps that etching makes narrower [nm]: within pairs, and between lines and pour."""
    gaps = [gap for copper in artwork.line_copper.values() for gap in (copper.gap_left, copper.gap_right)]
    return [pair.gap for pair in artwork.placement.pairs.values()] + [gap for gap in gaps if gap is not None]


def _corners(names: list[str], board: list[str]) -> tuple[list[tuple[tuple[str, int], ...]], FloatArray]:
    """Return the corners' signs by name, and as shares (C, P) [-]; all values go together as ``value``."""
    keys = board + (["value"] if len(names) > len(board) else [])
    signs = [tuple(zip(keys, pick, strict=True)) for pick in itertools.product((1, -1), repeat=len(keys))]
    rows = [[dict(pick)[name if name in board else "value"] for name in names] for pick in signs]
    return signs, np.array(rows, dtype=np.float64)


def _joined(parts: Sequence[Found]) -> Found:
    """Return batches as one."""
    measured, off, least, most = zip(*parts, strict=True)
    ends = np.minimum.reduce(least), np.maximum.reduce(most)
    return Found(np.concatenate(measured), np.concatenate(off), *ends)


def _share(limits: Sequence[Limit], found: Found) -> float:
    """Return the share of samples that keep to all limits [-]."""
    kept = [limit.kept(found.measured[:, k]) for k, limit in enumerate(limits)]
    return float(np.mean(np.logical_and.reduce(kept)))


def _yields(limits: Sequence[Limit], head: Found, tail: Found) -> Iterator[LimitYield]:
    """Yield how the samples do against each limit; the first row of ``head`` is nominal."""
    for k, limit in enumerate(limits):
        measured = tail.measured[:, k]
        yield LimitYield(
            limit=limit.text,
            share=float(np.mean(limit.kept(measured))),
            nominal=float(head.measured[0, k]),
            median=float(np.median(measured)),
            worst=float(np.min(measured) if limit.at_least else np.max(measured)),
        )


def _contributors(job: Job, off: FloatArray) -> tuple[Contributor, ...]:
    """Return what each quantity does alone, the worst first; ``off`` holds all at plus, then all at minus."""
    plus, minus = np.split(off, 2)
    found = [
        Contributor(name=name, limit=limit, change=float(max(up, down)), sign=1 if up >= down else -1)
        for (name, limit), up, down in zip(job.spread.items(), plus, minus, strict=True)
    ]
    return tuple(sorted(found, key=lambda item: -item.change))


def _by_change(
    signs: Sequence[tuple[tuple[str, int], ...]], off: FloatArray, kept: npt.NDArray[np.bool_]
) -> tuple[Corner, ...]:
    """Return the corners, the farthest from nominal first."""
    found = [
        Corner(signs=pick, change=float(change), passes=bool(np.all(row)))
        for pick, change, row in zip(signs, off, kept, strict=True)
    ]
    return tuple(sorted(found, key=lambda corner: -corner.change))


def _frozen(values: FloatArray) -> FloatArray:
    """Return an array that can no longer be written to."""
    values.setflags(write=False)
    return values
