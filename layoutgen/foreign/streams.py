"""GDSII and OASIS: filled polygons by layer and datatype, cells resolved, paths as their outlines.

The library reads in a process of its own, so that no broken file can end or fill this one. Paths with round
ends are outlined within 0.05 um.
"""

from __future__ import annotations

import subprocess
import sys
import tempfile
from pathlib import Path

import numpy as np

from layoutgen.foreign.records import ForeignNote, Primitive, Raw, refused

__all__ = ["CHORD_NM", "read_stream"]

CHORD_NM = 1_000.0
"""How far chords may lie off their curves in these formats [nm]: our own files' figure, common practice."""

_SECONDS = 120.0
_HEADS = {".gds": b"\x00\x06\x00\x02", ".oas": b"%SEMI-OASIS\r\n"}
_FORMS = {".gds": "a complete GDSII file", ".oas": "a complete OASIS file"}
_GDS_END = b"\x00\x04\x04\x00"
_OASIS_END, _OASIS_END_RECORD = 256, 2
"""An OASIS file ends with a record of type 2 that is 256 bytes long."""
_TAIL = 1 << 16


def read_stream(path: Path) -> Raw:
    """Return the polygons of a GDSII or OASIS file [nm].

    Raises:
        WrongInputError: The file is broken, cut off, or too large.
    """
    kind = path.suffix.lower()
    _refuse_torn(path, kind)
    with tempfile.TemporaryDirectory() as folder:
        target = Path(folder, "polygons.npz")
        child = Path(__file__).with_name("_gdstk_child.py")
        command = [sys.executable, "-P", str(child), str(path.resolve()), str(target)]
        try:
            run = subprocess.run(command, capture_output=True, timeout=_SECONDS, check=False)
        except subprocess.TimeoutExpired:
            raise refused(str(path), f"a file that takes over {_SECONDS:g} s to read", _FORMS[kind]) from None
        if run.returncode != 0 or not target.exists():
            raise refused(str(path), _why(run.stderr), _FORMS[kind])
        with np.load(target) as data:
            return _raw(data["counts"], data["points"], data["layers"], int(data["tops"]))


def _refuse_torn(path: Path, kind: str) -> None:
    """Refuse files that do not begin, or do not end, as their format does."""
    with path.open("rb") as file:
        head = file.read(len(_HEADS[kind]))
        size = file.seek(0, 2)
        file.seek(max(0, size - _TAIL))
        tail = file.read()
    if head != _HEADS[kind]:
        raise refused(str(path), "another format", _FORMS[kind])
    if kind == ".gds" and not tail.rstrip(b"\x00").endswith(_GDS_END.rstrip(b"\x00")):
        raise refused(str(path), "a file that is cut off", _FORMS[kind])
    if kind == ".oas" and not (size >= _OASIS_END and tail[-_OASIS_END] == _OASIS_END_RECORD):
        raise refused(str(path), "a file that is cut off", _FORMS[kind])


def _why(stderr: bytes) -> str:
    """Return what the reader's last line says, cut to what fits a message."""
    lines = stderr.decode("utf-8", "replace").strip().splitlines()
    text = "".join(c for c in lines[-1] if c.isprintable()) if lines else ""
    return f"a broken file ({text[:60]})" if text else "a broken file"


def _raw(counts: np.ndarray, points: np.ndarray, layers: np.ndarray, tops: int) -> Raw:
    """Return the arrays as primitives."""
    rings = np.split(points, np.cumsum(counts)[:-1]) if len(counts) else []
    primitives = tuple(
        Primitive((int(layer), int(kind)), "area", (ring,))
        for ring, (layer, kind) in zip(rings, layers.tolist(), strict=True)
    )
    notes: tuple[ForeignNote, ...] = ()
    if tops > 1:
        text = f"the file has {tops} top cells; all of them are taken together"
        notes = (ForeignNote("foreign.cells", "", None, text),)
    return Raw(primitives=primitives, unit="the file's own", notes=notes, chord=CHORD_NM)
