"""Checks across the keys of a circuit file: what each value alone allows, but together they do not.

In: a :class:`Draft` (the data as written and the records of the faultless tables). Out: nothing; faults are
added to the draft's collection. Not here: anything that needs a formula, a junction or a placement.
"""

from __future__ import annotations

from pathlib import Path

from layoutgen.reading.checks.elements import check_coupled, check_lines, check_ports
from layoutgen.reading.checks.footprints import check_footprints
from layoutgen.reading.checks.hints import check_layout
from layoutgen.reading.checks.names import check_names
from layoutgen.reading.checks.nets import check_nets
from layoutgen.reading.checks.parts import check_parts
from layoutgen.reading.checks.places import check_places
from layoutgen.reading.checks.tables import check_tables
from layoutgen.reading.draft import Draft

__all__ = ["check_circuit"]


def check_circuit(draft: Draft, folder: Path) -> None:
    """Add every fault across the keys of a circuit file.

    Args:
        draft: The file half read; its collection gets the faults.
        folder: The circuit file's folder, where the paths of data files start.
    """
    check_tables(draft)
    check_ports(draft)
    check_lines(draft)
    check_coupled(draft)
    check_parts(draft, folder)
    check_footprints(draft)
    check_names(draft)
    check_layout(draft)
    check_places(draft)
    check_nets(draft)
