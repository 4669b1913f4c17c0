"""Reads the reference tables as columns."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np

FOLDER = Path(__file__).parent / "reference"


def rows(name: str) -> list[dict]:
    """Return the rows of a table."""
    return json.loads((FOLDER / f"{name}.json").read_text(encoding="utf-8"))


def columns(name: str, *keys: str) -> list[np.ndarray]:
    """Return columns of a table; ``value.d1`` reaches into a nested record, null reads as NaN."""
    return [np.array([_reach(row, key.split(".")) for row in rows(name)], dtype=float) for key in keys]


def _reach(row: dict, path: list[str]):
    """Return the value under a path of keys."""
    for key in path:
        row = row[key]
    return row


def worst(found: np.ndarray, wanted: np.ndarray) -> float:
    """Return the largest relative deviation."""
    return float(np.max(np.abs(found / wanted - 1.0)))
