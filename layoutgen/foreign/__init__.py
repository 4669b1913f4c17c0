"""Artwork of other origin: GDSII, OASIS or DXF in, a board for the checks and its findings out.

In: a path, optionally a layers file and a unit (:func:`read_artwork`), and a rule file
(:func:`check_foreign`). Out: a :class:`ForeignArtwork`, polygons by layer of the contract with notes on
everything that was closed, guessed or not read; and a :class:`~layoutgen.checks.CheckResult`. Does not:
know a circuit, nets' names, or what a line was meant to be; rules that need them are listed as not checked.
"""

from layoutgen.foreign.board import board_of_foreign
from layoutgen.foreign.judge import check_foreign
from layoutgen.foreign.read import read_artwork
from layoutgen.foreign.records import ForeignArtwork, ForeignNote, RoundHole

__all__ = [
    "ForeignArtwork",
    "ForeignNote",
    "RoundHole",
    "board_of_foreign",
    "check_foreign",
    "read_artwork",
]
