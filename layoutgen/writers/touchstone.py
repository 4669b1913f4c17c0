"""Touchstone 1.1: S-parameters to 50 ohm, real and imaginary parts, one comment line for each port."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import numpy.typing as npt

from layoutgen.numbers import fixed, mm_short
from layoutgen.response import Response
from layoutgen.response.pads import pad_frames
from layoutgen.writers.records import Job, Result

__all__ = ["renormalised", "write_as_drawn", "write_wanted"]

REFERENCE_OHM = 50.0
"""What the files' S-parameters refer to at every port [ohm]."""

_PLACES = 12
_PAIRS_PER_LINE = 4

Matrices = npt.NDArray[np.complex128]


def write_wanted(result: Result, job: Job) -> bytes:
    """Return the file of the schematic's response.

    Raises:
        ValueError: The result has no response.
    """
    response = _response(result)
    about = "as wanted: the schematic, lossless lines, no discontinuities"
    return _file(result, response, response.wanted, about, job)


def write_as_drawn(result: Result, job: Job) -> bytes:
    """Return the file of the drawn board's response.

    Raises:
        ValueError: The result has no response.
    """
    response = _response(result)
    about = "as drawn: lines with loss, junctions, bends, pads and vias"
    return _file(result, response, response.as_drawn, about, job)


def renormalised(s: Matrices, old: npt.ArrayLike, new: npt.ArrayLike) -> Matrices:
    """Return S-parameters to other port impedances, power waves before and after.

    Source: Kurokawa 1965 (from memory), the waves a = (v + z i) / 2 sqrt(Re z), b = (v - z* i) / 2 sqrt(Re z)
    solved for v and i and put together anew.

    Args:
        s: S-parameters (F, N, N) [-].
        old: Port impedances (N,) [ohm] that ``s`` refers to, real parts positive.
        new: Port impedances (N,) [ohm] wanted, real parts positive.
    """
    before, after = np.asarray(old, dtype=complex), np.asarray(new, dtype=complex)
    scale = 1.0 / (2.0 * np.sqrt(before.real * after.real))
    incident = np.diag((before.conj() + after) * scale) + ((before - after) * scale)[:, None] * s
    outgoing = (
        np.diag((before.conj() - after.conj()) * scale) + ((before + after.conj()) * scale)[:, None] * s
    )
    solved = np.linalg.solve(incident.swapaxes(1, 2), outgoing.swapaxes(1, 2))
    return np.asarray(solved.swapaxes(1, 2), dtype=np.complex128)


def _response(result: Result) -> Response:
    if result.response is None:
        raise ValueError("a result without RF ports has no response")
    return result.response


def _file(result: Result, response: Response, s: Matrices, about: str, job: Job) -> bytes:
    to_50 = renormalised(s, response.impedances, np.full(len(response.ports), REFERENCE_OHM))
    head = [f"! {job.stem}: {_plain(result.circuit.file.design.title)}", f"! {about}"]
    head += [f"! port {k}: {text}" for k, text in enumerate(_port_texts(result, response), start=1)]
    rows = (line for f, matrix in zip(response.frequencies, to_50, strict=True) for line in _rows(f, matrix))
    return ("\n".join([*head, f"# Hz S RI R {REFERENCE_OHM:g}", *rows]) + "\n").encode("ascii", "replace")


def _port_texts(result: Result, response: Response) -> Iterator[str]:
    """Yield each port's name, its own impedance in the schematic, and where its plane is on the board."""
    planes = _planes(result)
    for name, z in zip(response.ports, response.impedances, strict=True):
        imaginary = f" {'-' if z.imag < 0 else '+'} j{abs(z.imag):g}" if z.imag else ""
        port = result.circuit.file.ports.get(name)
        net = f", net {port.net}" if port else ""
        plane = f"; plane at {planes[name]}" if name in planes else ""
        yield f"{name}{net}, {z.real:g}{imaginary} ohm in the schematic{plane}"


def _planes(result: Result) -> dict[str, str]:
    """Return where the plane of each port and termination is: the copper's end, the pad's inner edge."""
    found = {
        name: f"the end of its copper, {_place(port.x, port.y)}"
        for name, port in result.placement.ports.items()
    }
    for frame in pad_frames(result.placement):
        found[frame.key] = f"the pad's inner edge, {_place(frame.x, frame.y)}"
    return found


def _place(x: float, y: float) -> str:
    return f"x {mm_short(round(x))} mm, y {mm_short(round(y))} mm"


def _rows(frequency: float, matrix: Matrices) -> Iterator[str]:
    """Yield one frequency's lines: a matrix of up to 2 x 2 on one line, larger ones row by row."""
    start = fixed(frequency, 3)
    if len(matrix) <= 2:
        yield " ".join([start, *map(_pair, matrix.T.ravel())])  # a two-port's order is S11 S21 S12 S22
        return
    for k, row in enumerate(matrix):
        for first in range(0, len(row), _PAIRS_PER_LINE):
            lead = start if k == first == 0 else " " * len(start)
            yield " ".join([lead, *map(_pair, row[first : first + _PAIRS_PER_LINE])])


def _pair(value: complex) -> str:
    return f"{fixed(value.real, _PLACES)} {fixed(value.imag, _PLACES)}"


def _plain(text: str) -> str:
    return text.replace("!", " ")
