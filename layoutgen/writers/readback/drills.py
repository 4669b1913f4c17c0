"""XNC drill files read back by gerbonara: unit, plating, every hit with its diameter."""

from __future__ import annotations

import warnings
from pathlib import Path

from layoutgen.writers.readback.areas import circle_check, count_check
from layoutgen.writers.readback.records import Evidence, NotProved, optional_library
from layoutgen.writers.records import Result

__all__ = ["read_xnc"]

_READER = "gerbonara"
_NM = 1e6
_ENDS = {"_drill_plated.xnc": True, "_drill_nonplated.xnc": False}


def read_xnc(file: str, data: bytes, result: Result) -> Evidence:
    """Yield what gerbonara finds in a drill file."""
    plated = next((plated for end, plated in _ENDS.items() if file.endswith(end)), None)
    library = optional_library("gerbonara")
    if plated is None:
        yield NotProved(file, "its name does not tell whether its holes are plated")
        return
    if library is None:
        yield NotProved(file, "no independent reader for drill files is installed (gerbonara)")
        return
    text = data.decode("ascii")
    with warnings.catch_warnings(record=True) as told:
        warnings.simplefilter("always")
        read = library.ExcellonFile.from_string(text, filename=Path(file))
    yield count_check(file, _READER, "warnings of the reader", len(told), 0)
    ends = text.rstrip().splitlines()[-1:] == ["M30"]
    yield count_check(file, "text", "end of program missing", int(not ends), 0)
    function = "Plated,1,2,PTH" if plated else "NonPlated,1,2,NPTH"
    missing = f"; #@! TF.FileFunction,{function}" not in text.splitlines()
    yield count_check(file, "text", f"file function {function} missing", int(missing), 0)
    found = [
        (_nm(item, item.x), _nm(item, item.y), _nm(item.aperture, item.aperture.diameter))
        for item in read.drills()
    ]
    yield circle_check(file, _READER, "hits that differ", found, _wanted(result, plated))
    yield count_check(file, _READER, "objects that are no hits", len(list(read.objects)) - len(found), 0)


def _nm(owner: object, value: float) -> float:
    """Return a length of the reader [nm]."""
    return float(owner.unit.convert_to("mm", value)) * _NM  # type: ignore[attr-defined]


def _wanted(result: Result, plated: bool) -> list[tuple[float, float, float]]:
    """Return the model's holes: middles and finished diameters [nm]."""
    vias = [(via.x, via.y, via.drill) for via in result.artwork.vias] if plated else []
    holes = [(h.x, h.y, h.diameter) for h in result.artwork.holes if h.plated is plated]
    return [(float(x), float(y), float(d)) for x, y, d in (*vias, *holes)]
