"""Touchstone files of parts: read through scikit-rf, and what that lets pass is refused here.

In: a path and the number of ports expected. Out: :class:`PartData`, S-parameters to real constant reference
impedances. It does not write files, and it never extrapolates: :meth:`PartData.at` refuses frequencies
outside the data. scikit-rf is imported only when a file is read.
"""

from __future__ import annotations

import re
import stat
import warnings
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from layoutgen.reading.wording import quote
from layoutgen.response.chain import ComplexArray, FloatArray

__all__ = ["MAX_BYTES", "PartData", "UnusableDataError", "largest_gain", "largest_one_way", "read_part_data"]

MAX_BYTES = 16 * 1024 * 1024
"""Largest file read [byte]."""

_EXTENSION = re.compile(r"\.(?:s(\d{1,3})p|ts)", re.IGNORECASE)
_ROUNDING = 1e-9  # of a frequency written in another unit [-]
_NOISE_COLUMNS = 5


class UnusableDataError(Exception):
    """A file that cannot be used: what was found and what is allowed, for a fault."""

    def __init__(self, found: str, allowed: str) -> None:
        """Keep both phrases."""
        self.found, self.allowed = found, allowed
        super().__init__(f"found {found}; allowed: {allowed}")


@dataclass(frozen=True, slots=True, eq=False)
class PartData:
    """S-parameters of a part.

    Attributes:
        frequencies: Rising, shape (F,) [Hz].
        s: S-parameters, shape (F, N, N) [-].
        z0: Reference impedances, shape (N,) [ohm].
    """

    frequencies: FloatArray
    s: ComplexArray
    z0: FloatArray

    def covers(self, frequencies: FloatArray) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
        """Say which frequencies (B,) [Hz] lie within the data."""
        low, high = self.frequencies[0] * (1.0 - _ROUNDING), self.frequencies[-1] * (1.0 + _ROUNDING)
        return np.asarray((frequencies >= low) & (frequencies <= high))

    def at(self, frequencies: FloatArray) -> ComplexArray:
        """Return S (B, N, N) [-] at frequencies (B,) [Hz], real and imaginary part linear between the points.

        A mean of passive matrices is passive, so passive data stay so; a finer curve would not promise it.

        Raises:
            ValueError: A frequency lies outside the data.
        """
        if not np.all(self.covers(frequencies)):
            raise ValueError("a frequency lies outside the data")
        after = np.clip(np.searchsorted(self.frequencies, frequencies), 1, len(self.frequencies) - 1)
        low, high = self.frequencies[after - 1], self.frequencies[after]
        share = np.clip((frequencies - low) / (high - low), 0.0, 1.0)[:, None, None]
        return np.asarray((1.0 - share) * self.s[after - 1] + share * self.s[after])


def largest_gain(data: PartData) -> tuple[float, float]:
    """Return the largest singular value of S [-] (above 1: not passive) and its frequency [Hz]."""
    values = np.linalg.norm(data.s, 2, axis=(1, 2))
    worst = int(np.argmax(values))
    return float(values[worst]), float(data.frequencies[worst])


def largest_one_way(data: PartData) -> tuple[float, float]:
    """Return the largest difference of S from its transpose [-], 0 if reciprocal, and its frequency [Hz]."""
    values = np.max(np.abs(data.s - np.swapaxes(data.s, 1, 2)), axis=(1, 2))
    worst = int(np.argmax(values))
    return float(values[worst]), float(data.frequencies[worst])


def read_part_data(path: Path, ports: tuple[int, ...]) -> PartData:
    """Read one Touchstone file, version 1 or 2.

    Args:
        path: The file.
        ports: Numbers of ports that are allowed.

    Raises:
        UnusableDataError: It is missing, too large, no Touchstone file, truncated, out of order, or has
            another number of ports.
    """
    text = _text(path)
    allowed = " or ".join(f"{count} port{'s' * (count > 1)}" for count in ports)
    extension = _EXTENSION.fullmatch(path.suffix)
    if extension is None:
        raise UnusableDataError(
            f"a name ending in {quote(path.suffix)}", "a Touchstone file, .s1p, .s2p, ... or .ts"
        )
    if extension[1] is not None and int(extension[1]) not in ports:
        raise UnusableDataError(f"a file of {int(extension[1])} ports by its name", allowed)
    if not re.search(r"^\s*#", text, re.MULTILINE):
        raise UnusableDataError("no option line", 'a line such as "# GHz S MA R 50" before the data')
    parsed = _parse(path.name, text)
    _check_form(parsed)
    count = int(parsed.rank)
    if count not in ports:
        raise UnusableDataError(f"data of {count} port{'s' * (count != 1)}", allowed)
    return _part_data(parsed)


def _text(path: Path) -> str:
    """Return the file's text; comments may be in an older encoding."""
    form = "a regular Touchstone file of up to 16 MB"
    try:
        mode = path.stat()
        if not stat.S_ISREG(mode.st_mode):
            raise UnusableDataError("a directory or device", form)
        if mode.st_size > MAX_BYTES:
            raise UnusableDataError(f"a file of {mode.st_size / 1e6:.1f} MB", form)
        raw = path.read_bytes()
    except OSError as error:
        raise UnusableDataError(error.strerror or "an unreadable file", form) from None
    if b"\0" in raw:
        raise UnusableDataError("binary data", form)
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError:
        return raw.decode("latin-1")


def _parse(name: str, text: str) -> Any:
    """Return scikit-rf's reading of the text."""
    import io

    from skrf.io.touchstone import Touchstone

    source = io.StringIO(text)
    source.name = name
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            return Touchstone(source)
    except Exception:  # whatever the reader trips over, the file is at fault
        raise UnusableDataError(
            "a file that breaks off or holds other things than numbers",
            "whole rows of numbers behind the option line",
        ) from None


def _check_form(parsed: Any) -> None:
    """Refuse what the reader takes silently: other order, missing rows, what is no number."""
    frequencies = np.asarray(parsed.f, dtype=np.float64)
    noise = parsed.noise
    if frequencies.size == 0:
        raise UnusableDataError("no data", "at least two frequencies")
    behind_noise = noise is not None and np.shape(noise)[-1] != _NOISE_COLUMNS
    if behind_noise or np.any(np.diff(frequencies) <= 0.0):
        raise UnusableDataError("frequencies out of order", "frequencies that rise from row to row")
    if parsed.frequency_nb is not None and parsed.frequency_nb != frequencies.size:
        raise UnusableDataError(
            f"{frequencies.size} frequencies where the file announces {parsed.frequency_nb}", "all of them"
        )
    if frequencies.size < 2:
        raise UnusableDataError("a single frequency", "at least two frequencies")
    if frequencies[0] < 0.0 or not np.all(np.isfinite(frequencies)) or not np.all(np.isfinite(parsed.s)):
        raise UnusableDataError("values that are no finite numbers", "finite numbers")
    if np.any(np.asarray(parsed.port_modes) != "S"):
        raise UnusableDataError("mixed-mode data", "single-ended S-parameters")
    if not np.all(np.isfinite(parsed.z0)) or np.any(np.real(parsed.z0) <= 0.0):
        raise UnusableDataError("a reference impedance without positive real part", "positive impedances")


def _part_data(parsed: Any) -> PartData:
    """Return the data to constant real reference impedances."""
    frequencies, s = np.asarray(parsed.f, dtype=np.float64), np.asarray(parsed.s, dtype=np.complex128)
    z0 = np.asarray(parsed.z0, dtype=np.complex128)
    if np.any(z0.imag != 0.0) or np.any(z0 != z0[0]):
        from skrf.network import renormalize_s

        s = renormalize_s(s, z0, 50.0, "power", parsed.s_def or "power")
        z0 = np.full_like(z0, 50.0)
    return PartData(frequencies, np.asarray(s, dtype=np.complex128), np.asarray(z0[0].real))
