"""Read-back proof: every written file is opened again and compared with the model it was written from.

Where an independent library is installed it does the reading; what cannot be shown is listed, never passed
over. A file that cannot be read is a failed check. Files inside a zip are looked at one by one, and those
with equal bytes once.
"""

from __future__ import annotations

import hashlib
import io
import re
import zipfile
from collections.abc import Callable, Iterator, Mapping
from functools import partial
from xml.etree import ElementTree

from layoutgen.writers.readback.areas import count_check
from layoutgen.writers.readback.drawings import read_pdf
from layoutgen.writers.readback.drills import read_xnc
from layoutgen.writers.readback.dxf import read_dxf
from layoutgen.writers.readback.gerber import read_gerber
from layoutgen.writers.readback.layout import read_gds, read_oasis
from layoutgen.writers.readback.netlist import read_netlist
from layoutgen.writers.readback.records import Check, Evidence, NotProved, Proof
from layoutgen.writers.readback.tables import read_csv, read_report, read_touchstone
from layoutgen.writers.records import Result

__all__ = ["Check", "NotProved", "Proof", "proof_rows", "prove"]

_MANIFEST = "MANIFEST.sha256"
_LISTS_FILES = "report.json"


def prove(result: Result, files: Mapping[str, bytes]) -> Proof:
    """Return what was found when all files were read again.

    Args:
        result: What the files were written from.
        files: Contents by path, such as :func:`layoutgen.writers.encode` and
            :func:`layoutgen.writers.packages.encode_packages` give.
    """
    checks: list[Check] = []
    not_proved: list[NotProved] = []
    for item in _evidence(result, files):
        if isinstance(item, Check):
            checks.append(item)
        else:
            not_proved.append(item)
    return Proof(checks=tuple(checks), not_proved=tuple(not_proved))


def proof_rows(proof: Proof) -> list[tuple[str, ...]]:
    """Return one row of text for each check: verdict, file, reader, what, measured, limit."""
    return [
        (
            "ok" if check.passed else "FAILED",
            check.file,
            check.reader,
            check.what,
            f"{check.measured:.3g} {check.unit}".strip() + (f" ({check.detail})" if check.detail else ""),
            f"{check.limit:.3g} {check.unit}".strip(),
        )
        for check in proof.checks
    ]


def _evidence(result: Result, files: Mapping[str, bytes]) -> Evidence:
    """Yield the evidence of all files, members of zips among them, equal ones once."""
    seen: dict[tuple[str, str], str] = {}
    for file, data in _opened(files):
        name = file.rsplit("/", 1)[-1].rsplit(":", 1)[-1]
        key = (name, hashlib.sha256(data).hexdigest())
        if key in seen:
            yield count_check(file, "bytes", f"the same as {seen[key]}: bytes that differ", 0, 0)
            continue
        seen[key] = file
        if name == _LISTS_FILES:
            yield from _guarded(file, partial(read_report, file, data, result, files))
        else:
            yield from _read(file, name, data, result)


def _opened(files: Mapping[str, bytes]) -> Iterator[tuple[str, bytes]]:
    """Yield files by path; after a zip its members, as ``path.zip:member``."""
    for file, data in files.items():
        yield file, data
        if file.endswith(".zip") and zipfile.is_zipfile(io.BytesIO(data)):
            with zipfile.ZipFile(io.BytesIO(data)) as archive:
                yield from ((f"{file}:{name}", archive.read(name)) for name in _sound(archive))


def _sound(archive: zipfile.ZipFile) -> list[str]:
    """Return the members that can be unpacked; :func:`_read_zip` tells of the others."""
    return [name for name in archive.namelist() if _unpacks(archive, name)]


def _unpacks(archive: zipfile.ZipFile, name: str) -> bool:
    try:
        archive.read(name)
    except Exception:  # whatever the library makes of a broken member
        return False
    return True


def _read(file: str, name: str, data: bytes, result: Result) -> Evidence:
    """Yield the evidence of one file by the kind that its name tells."""
    for pattern, reader in _READERS.items():
        if re.fullmatch(pattern, name):
            yield from _guarded(file, partial(reader, file, data, result))
            return
    yield NotProved(file, "no reader for this kind of file")


def _guarded(file: str, read: Callable[[], Evidence]) -> Evidence:
    """Yield what a reader yields; its failure to read the file is a failed check."""
    try:
        yield from read()
    except Exception as error:  # any library may fail in any way on a broken file
        reason = f"{type(error).__name__}: {error}"[:200]
        yield Check(file=file, reader="any", what="can be read", measured=1, limit=0, detail=reason)


def _read_zip(file: str, data: bytes, result: Result) -> Evidence:
    """Yield whether a zip is whole and its manifest right."""
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        names = archive.namelist()
        broken = [name for name in names if not _unpacks(archive, name)]
        yield count_check(file, "zipfile", "members that do not unpack", len(broken), 0)
        lines = archive.read(_MANIFEST).decode("utf-8").splitlines()
        told = {name: digest for digest, _, name in (line.partition("  ") for line in lines)}
        found = {name: hashlib.sha256(archive.read(name)).hexdigest() for name in names if name not in broken}
        found.pop(_MANIFEST, None)
        odd = len(set(told.items()) ^ set(found.items()))
        yield count_check(file, "sha256", "members that differ from the manifest", odd, 0)


def _read_svg(file: str, data: bytes, result: Result) -> Evidence:
    """Yield whether a picture is well-formed."""
    root = ElementTree.fromstring(data)
    yield count_check(file, "ElementTree", "roots that are no svg", int(not root.tag.endswith("}svg")), 0)
    yield NotProved(file, "what the picture shows: only that it is well-formed")


def _read_png(file: str, data: bytes, result: Result) -> Evidence:
    """Yield whether a picture can be decoded to its last row."""
    from PIL import Image

    with Image.open(io.BytesIO(data)) as picture:
        picture.load()
        empty = picture.getbbox() is None
    yield count_check(file, "Pillow", "pictures without content", int(empty), 0)
    yield NotProved(file, "what the picture shows: only that it can be decoded")


def _read_text(file: str, data: bytes, result: Result) -> Evidence:
    """Yield whether a text is UTF-8."""
    data.decode("utf-8")
    yield NotProved(file, "text for people: only that it is UTF-8")


_READERS: dict[str, Callable[[str, bytes, Result], Evidence]] = {
    r".*\.gds": read_gds,
    r".*\.oas": read_oasis,
    r".*\.dxf": read_dxf,
    r".*\.gbr": read_gerber,
    r".*\.xnc": read_xnc,
    r".*\.ipc": read_netlist,
    r".*\.csv": read_csv,
    r".*\.s\d+p": read_touchstone,
    r".*\.zip": _read_zip,
    r".*\.svg": _read_svg,
    r".*\.png": _read_png,
    r".*\.pdf": read_pdf,
    r".*\.(txt|html|sha256)": _read_text,
}
"""Kinds of files by their names."""
