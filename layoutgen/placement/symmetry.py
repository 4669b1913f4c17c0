"""Symmetry of a loop cluster: the ways to map it on itself."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from layoutgen.placement.closure import Bar
from layoutgen.placement.drawings import Scheme

__all__ = ["Mapping2", "automorphisms", "mirrored_alike"]

Mapping2 = tuple[tuple[int, bool], ...]
"""By piece: the one it is mapped on, and whether its direction is kept."""


def automorphisms(scheme: Scheme) -> Iterator[Mapping2]:
    """Yield the ways to map a cluster on itself: by piece, its image and whether the direction is kept.

    Pieces are mapped on pieces of their kind; sizes may differ, as those of an unequal divider do.
    """
    hubs = len(scheme.outer)
    between: dict[tuple[int, int], list[tuple[int, bool]]] = {}
    for k, piece in enumerate(scheme.pieces):
        between.setdefault((piece.a, piece.b), []).append((k, True))
        between.setdefault((piece.b, piece.a), []).append((k, False))
    kinds = {pair: tuple(scheme.pieces[k].is_line for k, _ in found) for pair, found in between.items()}
    for image in _images([], hubs, kinds):
        for turned in (False, True):
            mapping: dict[int, tuple[int, bool]] = {}
            for (a, b), found in between.items():
                if a < b:
                    others = between[image[a], image[b]]
                    for (k, way), (other, its) in zip(found, others[::-1] if turned else others, strict=True):
                        mapping[k] = (other, way == its)
            if all(mapping[other][0] == k for k, (other, _) in mapping.items()):
                yield tuple(mapping[k] for k in range(len(scheme.pieces)))


def _images(
    image: list[int], hubs: int, kinds: dict[tuple[int, int], tuple[bool, ...]]
) -> Iterator[list[int]]:
    """Yield the permutations of hubs that keep what lies between them."""
    at = len(image)
    if at == hubs:
        yield image
        return
    for candidate in range(hubs):
        if candidate in image:
            continue
        trial = [*image, candidate]
        if all(kinds.get((at, i)) == kinds.get((candidate, trial[i])) for i in range(at)):
            yield from _images(trial, hubs, kinds)


def mirrored_alike(bars: Sequence[Bar], mapping: Mapping2) -> bool:
    """True when mirrored pieces ask for the same lengths."""
    return all(
        abs(bars[k].length - bars[other].length) <= 1 and len(bars[k].least) == len(bars[other].least)
        for k, (other, _) in enumerate(mapping)
    )
