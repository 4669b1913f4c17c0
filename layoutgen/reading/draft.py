"""A circuit file half read: the data as written beside the records of its faultless tables.

The checks across keys work on it, so that a fault in one table does not hide those of others.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any, TypeVar

from layoutgen.reading.circuit_records import (
    Board,
    CircuitFile,
    CoupledPair,
    Design,
    Footprint,
    Layout,
    Line,
    Part,
    Port,
    Substrate,
    Tolerance,
)
from layoutgen.reading.faults import Faults
from layoutgen.reading.records import Record
from layoutgen.reading.validate import misspelt, record_or_none

__all__ = ["ELEMENT_TABLES", "Draft", "Table", "given"]

R = TypeVar("R", bound=Record)

ELEMENT_TABLES = ("ports", "lines", "coupled", "parts")
"""Tables whose names share one name space."""


@dataclass(frozen=True)
class Table:
    """One table as written.

    Args:
        path: Its key path.
        raw: Its keys and values.
        meant: Known keys that its unknown ones most likely mean.
    """

    path: tuple[str, ...]
    raw: Mapping[str, Any]
    meant: frozenset[str]

    def has(self, *keys: str) -> bool:
        """Tell whether any of the keys is written, be it misspelt."""
        return any(key in self.raw or key in self.meant for key in keys)

    def written(self, *keys: str) -> list[str]:
        """Return those of the keys that are written."""
        return [key for key in keys if key in self.raw]

    def at(self, key: str) -> tuple[str, ...]:
        """Return the path of one of its keys."""
        return (*self.path, key)


def given(raw: object, *path: str) -> Any:
    """Return the value at a path of tables, None when there is none."""
    for key in path:
        raw = raw.get(key) if isinstance(raw, Mapping) else None
    return raw


@dataclass(frozen=True)
class Draft:
    """A circuit file half read.

    Args:
        data: The file's data.
        faults: Its faults so far; the checks add theirs.
    """

    data: Mapping[str, Any]
    faults: Faults

    @cached_property
    def misspelt_tables(self) -> set[str]:
        """Tables whose names are misspelt, so that what they hold is not seen."""
        return misspelt(self.data, CircuitFile)

    @property
    def elements_missed(self) -> bool:
        """Whether there may be elements that are not seen."""
        return bool(self.misspelt_tables & set(ELEMENT_TABLES)) or not self.faults.complete

    def tables(self, section: str, model: type[Record]) -> Iterator[tuple[str, Table]]:
        """Yield the named tables of a section."""
        section_raw = self.data.get(section)
        for name, raw in section_raw.items() if isinstance(section_raw, Mapping) else ():
            if isinstance(raw, Mapping) and isinstance(name, str):
                yield name, Table((section, name), raw, frozenset(misspelt(raw, model)))

    def names(self, section: str) -> list[str]:
        """Return the names of a section, faulty tables included."""
        raw = self.data.get(section)
        return [name for name in raw if isinstance(name, str)] if isinstance(raw, Mapping) else []

    def _named(self, section: str, model: type[R]) -> dict[str, R]:
        """Return the faultless records of a section."""
        raw = self.data.get(section)
        found = (
            {name: record_or_none(model, table) for name, table in raw.items()}
            if isinstance(raw, Mapping)
            else {}
        )
        return {name: record for name, record in found.items() if record is not None}

    def _single(self, section: str, model: type[R]) -> R | None:
        """Return the record of a table, None when it is absent or faulty."""
        return record_or_none(model, self.data[section]) if section in self.data else None

    @cached_property
    def design(self) -> Design | None:
        """``[design]``."""
        return self._single("design", Design)

    @cached_property
    def substrate(self) -> Substrate | None:
        """``[substrate]``."""
        return self._single("substrate", Substrate)

    @cached_property
    def board(self) -> Board | None:
        """``[board]``."""
        return self._single("board", Board)

    @cached_property
    def layout(self) -> Layout | None:
        """``[layout]``."""
        return self._single("layout", Layout)

    @cached_property
    def tolerance(self) -> Tolerance | None:
        """``[tolerance]``."""
        return self._single("tolerance", Tolerance)

    @cached_property
    def ports(self) -> dict[str, Port]:
        """Faultless ports."""
        return self._named("ports", Port)

    @cached_property
    def lines(self) -> dict[str, Line]:
        """Faultless lines."""
        return self._named("lines", Line)

    @cached_property
    def coupled(self) -> dict[str, CoupledPair]:
        """Faultless coupled pairs."""
        return self._named("coupled", CoupledPair)

    @cached_property
    def parts(self) -> dict[str, Part]:
        """Faultless parts."""
        return self._named("parts", Part)

    @cached_property
    def footprints(self) -> dict[str, Footprint]:
        """Faultless footprints."""
        return self._named("footprints", Footprint)
