"""The frequencies of the response, and the parts' data that limit them.

In: the circuit file and its folder. Out: the sweep, cut to what the data cover, the spots that the report
tabulates (band edges and design frequency), the data themselves, notes. Raises when data do not cover the
band; never extrapolates.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from layoutgen.circuit import GROUND
from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile, Part
from layoutgen.reading.wording import quote
from layoutgen.response.chain import FloatArray
from layoutgen.response.parts import data_terminals, terminals
from layoutgen.response.records import NOTE_RULE
from layoutgen.response.touchstone import (
    PartData,
    UnusableDataError,
    largest_gain,
    largest_one_way,
    read_part_data,
)

__all__ = ["Sweep", "part_data", "plan_sweep"]

_PASSIVE = 1.001  # rounding of four digits in a file [-]
_RECIPROCAL = ("resistor", "capacitor", "inductor")
_ONE_WAY = 0.01  # of S from its transpose: above the noise of a good measurement [-]
_COARSE = 0.01  # error of the straight line between two points of data [-]


@dataclass(frozen=True, slots=True, eq=False)
class Sweep:
    """Frequencies (F,) and spots (3,) [Hz], data by part, notes (rule, element, text)."""

    frequencies: FloatArray
    spots: FloatArray
    data: Mapping[str, PartData]
    notes: tuple[tuple[str, str, str], ...]


def plan_sweep(file: CircuitFile, folder: Path | None = None) -> Sweep:
    """Return the sweep of a circuit file whose data files lie relative to a folder; None: the file's own.

    Raises:
        WrongInputError: Every data file that cannot be used, or does not cover the band.
    """
    low, high = file.design.band
    start, stop = file.design.sweep or (max(2.0 * low - high, 0.01 * low), 2.0 * high - low)
    frequencies = np.linspace(start, stop, file.design.points)
    data = part_data(file, folder)
    kept, notes = _cut(file, frequencies, data)
    return Sweep(kept, _spots(file), data, (*notes, *_remarks(file, data)))


def _spots(file: CircuitFile) -> FloatArray:
    """Return the band edges and the design frequency between them [Hz]."""
    low, high = file.design.band
    return np.array([low, file.design.frequency, high])


def part_data(file: CircuitFile, folder: Path | None = None) -> dict[str, PartData]:
    """Return the measured data by part, read from files relative to a folder; None: the circuit file's own.

    Raises:
        WrongInputError: Every data file that cannot be used, or does not cover the band.
    """
    place = Path(file.file).parent if folder is None else folder
    data: dict[str, PartData] = {}
    faults: list[Fault] = []
    for name, part in file.parts.items():
        if part.data is None:
            continue
        try:
            data[name] = _covering(read_part_data(place / part.data, _port_counts(part)), _spots(file))
        except UnusableDataError as error:
            key = f"parts.{name}.data"
            found = f"{quote(part.data)}: {error.found}"
            faults.append(Fault(file.location(key), key, found, error.allowed))
    if faults:
        raise WrongInputError(faults)
    return data


def _port_counts(part: Part) -> tuple[int, ...]:
    """Return the numbers of ports that a part's data may have."""
    count = len(data_terminals(part))
    shunt = part.nets is not None and GROUND in part.nets
    return (1, count) if shunt else (count,)


def _covering(data: PartData, spots: FloatArray) -> PartData:
    """Return the data when they cover the band."""
    if not np.all(data.covers(spots)):
        raise UnusableDataError(
            f"data from {_ghz(data.frequencies[0])} to {_ghz(data.frequencies[-1])}",
            f"data that cover the band, {_ghz(spots[0])} to {_ghz(spots[-1])}",
        )
    return data


def _cut(
    file: CircuitFile, frequencies: FloatArray, data: Mapping[str, PartData]
) -> tuple[FloatArray, list[tuple[str, str, str]]]:
    """Return the frequencies that all data cover, with a note for each part that cuts the sweep."""
    inside = np.ones(frequencies.shape, dtype=np.bool_)
    notes = []
    for name, measured in data.items():
        covered = measured.covers(frequencies)
        inside &= covered
        if not np.all(covered):
            span = f"{_ghz(measured.frequencies[0])} to {_ghz(measured.frequencies[-1])}"
            text = f"{file.parts[name].data} covers {span}: the sweep is cut to that"
            notes.append((NOTE_RULE, name, text))
    return frequencies[inside], notes


def _remarks(file: CircuitFile, data: Mapping[str, PartData]) -> list[tuple[str, str, str]]:
    """Return notes on data that are used but look doubtful, and on parts that are open at RF."""
    notes = []
    for name, part in file.parts.items():
        measured = data.get(name)
        if measured is None:
            if part.value is None and len(terminals(part)) > len(part.terminations) + _grounded(part):
                notes.append((NOTE_RULE, name, "without value or data it is taken as open at RF"))
            continue
        notes += [
            (NOTE_RULE, name, f"{part.data} {text}") for text in _doubts(part, measured, file.design.band)
        ]
    return notes


def _doubts(part: Part, data: PartData, band: tuple[float, float]) -> Iterator[str]:
    """Yield what looks doubtful in a part's data."""
    gain, at = largest_gain(data)
    if part.kind != "transistor" and gain > _PASSIVE:
        yield f"is not passive: largest singular value {gain:.4f} at {_ghz(at)}; used as it is"
    one_way, at = largest_one_way(data)
    if part.kind in _RECIPROCAL and one_way > _ONE_WAY:
        yield f"is not reciprocal: S12 and S21 differ by {one_way:.4f} at {_ghz(at)}; used as it is"
    error = _straight_line_error(data, band)
    if error is None:
        yield "is coarse: its points at the band are too few to tell how far off straight lines are"
    elif error > _COARSE:
        yield f"is coarse: straight lines between its points are off by up to {error:.2g} in S"


def _grounded(part: Part) -> int:
    """Return how many terminals of a part are on ground."""
    return sum(net == GROUND for _, net in terminals(part))


def _straight_line_error(data: PartData, band: tuple[float, float]) -> float | None:
    """Return the error [-] of straight lines within the band, an eighth of the second difference.

    None when no three points in a row lie at the band.
    """
    inside = (data.frequencies >= band[0]) & (data.frequencies <= band[1])
    near = np.flatnonzero(inside | np.roll(inside, 1) | np.roll(inside, -1))
    if near.size == 0:  # the band lies between two points
        near = np.searchsorted(data.frequencies, band[0]) + np.array([-1, 0])
    near = near[(near > 0) & (near < data.frequencies.size - 1)]
    if near.size == 0:
        return None
    second = data.s[near + 1] - 2.0 * data.s[near] + data.s[near - 1]
    return float(np.max(np.abs(second)) / 8.0)


def _ghz(frequency: float) -> str:
    """Return a frequency for people."""
    return f"{frequency / 1e9:.6g} GHz"
