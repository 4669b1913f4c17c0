"""Limits that a yield is counted against, such as ``S21 >= -1 dB`` or ``change <= 0.1``.

In: texts and the names of the response's ports. Out: :class:`Limit`. All are over the whole band.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault, Location
from layoutgen.reading.wording import quote
from layoutgen.response.chain import ComplexArray, FloatArray

__all__ = ["DEFAULT_LIMIT", "Limit", "read_limits"]

DEFAULT_LIMIT = "change <= 0.1"
"""Limit when none is stated: no S-parameter in the band is off the wanted one by more than 0.1 [-]."""

_FORM = re.compile(
    r"(?:(?P<change>change)|S(?P<short>\d{2})|S\(\s*(?P<row>[^,\s]+)\s*,\s*(?P<column>[^)\s]+)\s*\))"
    r"\s*(?P<sense><=|>=)\s*(?P<value>[+-]?\d+(?:\.\d*)?|[+-]?\.\d+)\s*(?P<unit>dB)?"
)
_ALLOWED = '"S21 >= -1 dB", "S(out, in) >= -1 dB" with the ports\' names, or "change <= 0.1"'


@dataclass(frozen=True, slots=True)
class Limit:
    """A limit over the band: of one S-parameter's magnitude, or of the change from the wanted response.

    ``place`` is row and column of the S-parameter, None for the change; ``value`` [-] is a magnitude, which
    must not be exceeded, or must be reached everywhere when ``at_least``.
    """

    text: str
    place: tuple[int, int] | None
    at_least: bool
    value: float

    def measured(self, s: ComplexArray, wanted: ComplexArray) -> FloatArray:
        """Return the worst magnitude in the band (S,) [-] of samples (S, F, N, N); wanted is (F, N, N)."""
        if self.place is None:
            return np.asarray(np.max(np.abs(s - wanted), axis=(1, 2, 3)))
        size = np.abs(s[:, :, self.place[0], self.place[1]])
        return np.asarray(np.min(size, axis=1) if self.at_least else np.max(size, axis=1))

    def kept(self, measured: FloatArray) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
        """Tell which samples keep to the limit."""
        return np.asarray(measured >= self.value if self.at_least else measured <= self.value)


def read_limits(texts: Sequence[str], ports: Sequence[str]) -> tuple[Limit, ...]:
    """Return limits from their texts; the default one when there are none.

    Raises:
        WrongInputError: Texts of another form, or ports that the response has not, all in one go.

    >>> read_limits(["S(out, in) >= -1 dB"], ["in", "out"])[0].place
    (1, 0)
    """
    found: list[Limit] = []
    faults: list[Fault] = []
    for text in texts or (DEFAULT_LIMIT,):
        limit = _read(text, list(ports))
        if isinstance(limit, Limit):
            found.append(limit)
        else:
            faults.append(Fault(Location("limit", 0), "", quote(text), limit))
    if faults:
        raise WrongInputError(faults)
    return tuple(found)


def _read(text: str, ports: list[str]) -> Limit | str:
    """Return a limit, or what would be allowed."""
    form = _FORM.fullmatch(text.strip())
    if form is None:
        return _ALLOWED
    at_least, value = form["sense"] == ">=", float(form["value"])
    if form["change"]:
        fits = not at_least and form["unit"] is None and value > 0.0
        return Limit(text.strip(), None, False, value) if fits else '"change <= " with a positive number'
    if form["unit"] is None:
        return f"a value in dB, as in {_ALLOWED}"
    numbers = [str(k + 1) for k in range(len(ports))]
    names, known = (list(form["short"]), numbers) if form["short"] else ([form["row"], form["column"]], ports)
    if any(name not in known for name in names):
        return f"ports of the response: {', '.join(known)}"
    place = known.index(names[0]), known.index(names[1])
    return Limit(text.strip(), place, at_least, 10.0 ** (value / 20.0))
