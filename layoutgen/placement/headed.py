"""Words by where they lead: from one heading to another, and round things between two nodes."""

from __future__ import annotations

from layoutgen.placement.words import Word

__all__ = ["ROUND_WORDS", "TARGET_WORDS", "is_slanted", "turn_to", "words_to"]

TARGET_WORDS: tuple[Word, ...] = (
    (),
    (90.0,),
    (-90.0,),
    (90.0, -90.0),
    (-90.0, 90.0),
    (90.0, 90.0),
    (-90.0, -90.0),
    (90.0, -90.0, -90.0),
    (-90.0, 90.0, 90.0),
    (90.0, 90.0, -90.0),
    (-90.0, -90.0, 90.0),
    (90.0, -90.0, -90.0, 90.0),
    (-90.0, 90.0, 90.0, -90.0),
)
"""Words for a line that has somewhere to go, the simplest first."""

ROUND_WORDS: tuple[Word, ...] = (
    (90.0, 90.0, 90.0),
    (-90.0, -90.0, -90.0),
    (90.0, -90.0, 90.0),
    (-90.0, 90.0, -90.0),
    (90.0, 90.0, -90.0, -90.0),
    (-90.0, -90.0, 90.0, 90.0),
    (90.0, 90.0, 90.0, -90.0),
    (-90.0, -90.0, -90.0, 90.0),
    (90.0, -90.0, -90.0, -90.0),
    (-90.0, 90.0, 90.0, 90.0),
)
"""Further words for lines between two placed nodes."""


def is_slanted(word: Word) -> bool:
    """True for a word with a turn that is no quarter turn."""
    return any(turn % 90.0 for turn in word)


def words_to(heading: float, wanted: float) -> list[Word]:
    """Return the words that turn a heading [deg] to another: of quarter turns, and one other if need be."""
    turn = (wanted - heading) % 360.0
    if turn % 90.0:
        turn = turn if turn < 180.0 else turn - 360.0
        quarter = 90.0 if turn > 0 else -90.0
        return [(turn,)] if abs(turn) < 90.0 else [(quarter, turn - quarter), (turn - quarter, quarter)]
    return [word for word in TARGET_WORDS if sum(word) % 360.0 == turn]


def turn_to(heading: float, out: float) -> float:
    """Return how far a heading must turn [deg, 0 to 180] to leave by an edge."""
    turn = abs((out - heading) % 360.0)
    return min(turn, 360.0 - turn)
