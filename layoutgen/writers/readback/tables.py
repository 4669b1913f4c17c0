"""Text files read back by plain readers: bill of materials, centroid, ports, bias, report, Touchstone."""

from __future__ import annotations

import csv
import hashlib
import io
import json
from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np

from layoutgen.writers.readback.areas import count_check
from layoutgen.writers.readback.records import Check, Evidence, NotProved
from layoutgen.writers.records import Result
from layoutgen.writers.touchstone import REFERENCE_OHM, renormalised

__all__ = ["read_csv", "read_report", "read_touchstone"]

_NM = 1e6
_MM_DIGIT = 1e-6
_S_DIGIT = 2e-9
"""Largest error of a printed S-parameter [-]: its ninth decimal, real and imaginary."""

Rows = Sequence[Mapping[str, str]]


def read_csv(file: str, data: bytes, result: Result) -> Evidence:
    """Yield whether a table's rows and places are the model's."""
    reader = next((reader for end, reader in _TABLES.items() if file.endswith(end)), None)
    if reader is None:
        yield NotProved(file, "a table that nothing is known of")
        return
    text = data.decode("utf-8")
    rows = list(csv.DictReader(io.StringIO(text)))
    broken = sum(None in row or None in row.values() for row in rows)
    yield count_check(file, "csv", "rows with cells too many or too few", broken, 0)
    yield from reader(file, rows, result)


def _bill(file: str, rows: Rows, result: Result) -> Evidence:
    named = [name for row in rows for name in row["References"].split()]
    odd = set(named) ^ set(result.placement.parts)
    yield count_check(file, "csv", "parts missing or invented", len(odd), 0)
    total = sum(int(row["Quantity"]) for row in rows)
    yield count_check(file, "csv", "sum of the quantities", total, len(result.placement.parts))


def _centroid(file: str, rows: Rows, result: Result) -> Evidence:
    places = {row["Reference"]: (float(row["x (mm)"]), float(row["y (mm)"])) for row in rows}
    wanted = {part.name: (part.x / _NM, part.y / _NM) for part in result.placement.parts.values()}
    yield _apart(file, places, wanted)
    turns = {row["Reference"]: _turn(row) for row in rows}
    off = sum(
        abs((turns.get(part.name, 999.0) - part.heading + 180.0) % 360.0 - 180.0) > 5e-4
        for part in result.placement.parts.values()
    )
    yield count_check(file, "csv", "rotations that differ", off, 0)


def _turn(row: Mapping[str, str]) -> float:
    return next(float(value) for key, value in row.items() if key.startswith("Rotation"))


def _ports(file: str, rows: Rows, result: Result) -> Evidence:
    places = {
        row["Name"]: (float(row["x (mm)"]), float(row["y (mm)"])) for row in rows if row["Kind"] != "pin"
    }
    wanted = {port.name: (port.x / _NM, port.y / _NM) for port in result.placement.ports.values()}
    yield _apart(file, places, wanted)
    numbered = [row["Name"] for row in rows if row["Touchstone port"]]
    told = list(result.response.ports) if result.response else []
    yield count_check(file, "csv", "Touchstone ports in another order", int(numbered != told), 0)


def _bias(file: str, rows: Rows, result: Result) -> Evidence:
    voltages = result.circuit.dc.voltages
    off = sum(abs(float(row["Expected voltage (V)"]) - voltages[row["Net"]]) > 5.1e-5 for row in rows)
    yield count_check(file, "csv", "voltages that differ", off, 0)
    missing = set(voltages) - {row["Net"] for row in rows}
    yield count_check(file, "csv", "nets without a row", len(missing), 0)


def _shapes(file: str, rows: Rows, result: Result) -> Evidence:
    widths = {row["Shape"]: row["Width (mm)"] for row in rows if row["Kind"] == "line"}
    lines = result.placement.lines
    same = sum(abs(float(widths.get(n) or "nan") * _NM - line.width) < 0.5 for n, line in lines.items())
    yield count_check(file, "csv", "lines with the model's width", same, len(lines))


def _layers(file: str, rows: Rows, result: Result) -> Evidence:
    from layoutgen.artwork import LAYERS

    found = {row["Layer"]: (int(row["GDS layer"]), int(row["GDS datatype"])) for row in rows}
    yield count_check(file, "csv", "layers that differ", len(set(found.items()) ^ set(LAYERS.items())), 0)


_TABLES: dict[str, Callable[[str, Rows, Result], Evidence]] = {
    "_bill_of_materials.csv": _bill,
    "_centroid.csv": _centroid,
    "_ports.csv": _ports,
    "_bias.csv": _bias,
    "_shapes.csv": _shapes,
    "_layers.csv": _layers,
}


def _apart(
    file: str, found: Mapping[str, tuple[float, float]], wanted: Mapping[str, tuple[float, float]]
) -> Check:
    """Return how many places are missing, invented, or off by more than the last digit."""
    odd = len(set(found) ^ set(wanted))
    odd += sum(
        max(abs(a - b) for a, b in zip(found[name], wanted[name], strict=True)) > _MM_DIGIT
        for name in set(found) & set(wanted)
    )
    return count_check(file, "csv", "places that differ", odd, 0)


def read_touchstone(file: str, data: bytes, result: Result) -> Evidence:
    """Yield how far the S-parameters that scikit-rf finds are from the response, at 50 ohm."""
    import skrf

    if result.response is None:
        yield NotProved(file, "the result has no response")
        return
    stream: Any = io.StringIO(data.decode("ascii"))
    stream.name = file.rsplit("/", 1)[-1]
    network = skrf.Network(stream)
    response = result.response
    wanted = response.wanted if stream.name.startswith("wanted") else response.as_drawn
    same = network.s.shape == wanted.shape
    yield count_check(file, "scikit-rf", "another number of ports or frequencies", int(not same), 0)
    if not same:
        return
    reference = np.full(len(response.ports), REFERENCE_OHM)
    error = float(np.abs(network.s - renormalised(wanted, response.impedances, reference)).max())
    yield Check(
        file=file, reader="scikit-rf", what="largest error of an S-parameter", measured=error, limit=_S_DIGIT
    )
    shift = float(np.abs(network.f - response.frequencies).max())
    yield Check(
        file=file,
        reader="scikit-rf",
        what="largest error of a frequency",
        measured=shift,
        limit=1e-3,
        unit="Hz",
    )


def read_report(file: str, data: bytes, result: Result, files: Mapping[str, bytes]) -> Evidence:
    """Yield whether the report's widths, vias and hashes are those of the model and of the files."""
    report = json.loads(data)
    lines = {line["name"]: line["width_mm"] for line in report["lines"]}
    model = result.placement.lines
    same = sum(abs((lines.get(n) or 0.0) * _NM - line.width) < 0.5 for n, line in model.items())
    yield count_check(file, "json", "lines with the model's width", same, len(model))
    yield count_check(file, "json", "vias", len(report["vias"]), len(result.artwork.vias))
    yield count_check(file, "json", "findings", len(report["findings"]), len(result.findings))
    wrong = sum(
        hashlib.sha256(files[entry["path"]]).hexdigest() != entry["sha256"]
        for entry in report["files"]
        if entry["path"] in files
    )
    yield count_check(file, "sha256", "files with another hash", wrong, 0)
