"""OASIS: the very cells of the GDSII file in the newer, smaller format; layers and units are the same.

It is made from the GDSII file, so that both hold the same polygons. Written without compression, so that its
bytes do not depend on a compression library's version, and with a checksum.
"""

from __future__ import annotations

import tempfile
from pathlib import Path

from layoutgen.writers.gds import write_gds
from layoutgen.writers.records import Job, Result

__all__ = ["write_oasis"]


def write_oasis(result: Result, job: Job) -> bytes:
    """Return the OASIS file.

    Raises:
        WrongInputError: A coordinate beyond what the GDSII file holds (boards over 2.147 m).
    """
    import gdstk

    data = job.files.get(f"{job.stem}.gds") or write_gds(result, job)
    with tempfile.TemporaryDirectory() as folder:
        source, target = Path(folder, "in.gds"), Path(folder, "out.oas")
        source.write_bytes(data)
        library = gdstk.read_gds(source)
        library.write_oas(target, compression_level=0, validation="crc32")
        return target.read_bytes()
