"""What all records of both files share: a frozen, closed pydantic model, and where each key was written."""

from __future__ import annotations

import math
from typing import Annotated

from pydantic import BaseModel, ConfigDict, PrivateAttr

from layoutgen.origin import Location
from layoutgen.reading.quantities import Heading, Quantity
from layoutgen.reading.source import SourceMap
from layoutgen.reading.wording import Path

__all__ = [
    "Angle",
    "Coordinate",
    "CornerAngle",
    "Direction",
    "FileRecord",
    "Length",
    "LengthOrZero",
    "Point",
    "Record",
    "Resistance",
    "Size",
]

Length = Annotated[float, Quantity("length")]
LengthOrZero = Annotated[float, Quantity("length", "not negative")]
Coordinate = Annotated[float, Quantity("length", "any")]
Point = tuple[Coordinate, Coordinate]
Size = tuple[Length, Length]
Resistance = Annotated[float, Quantity("resistance")]
Angle = Annotated[float, Quantity("angle")]
CornerAngle = Annotated[float, Quantity("angle", below=math.pi, below_text="180 deg")]
Direction = Annotated[float, Heading()]


class Record(BaseModel):
    """One table of a file: frozen, no unknown keys, values in SI after reading."""

    model_config = ConfigDict(strict=True, extra="forbid", frozen=True, protected_namespaces=())


class FileRecord(Record):
    """A whole file: its tables, and the line of each key."""

    _source: SourceMap = PrivateAttr(default_factory=SourceMap)

    @property
    def source_map(self) -> SourceMap:
        """Where each key of the file was written."""
        return self._source

    @property
    def file(self) -> str:
        """The file's name as given, fit for printing."""
        return self._source.file

    def location(self, key: str | Path) -> Location:
        """Return the line of a key such as ``"copper.min_gap"``; a missing key is at its table's heading."""
        return self._source.location(key)
