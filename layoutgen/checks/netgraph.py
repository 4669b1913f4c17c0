"""Which things hang together: clusters of index pairs."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

__all__ = ["clusters"]


def clusters(count: int, pairs: npt.NDArray[np.intp]) -> npt.NDArray[np.intp]:
    """Return for each of ``count`` things the lowest index in its cluster (N,).

    Args:
        count: Number of things.
        pairs: Index pairs (M, 2) of things that hang together.
    """
    label = np.arange(count, dtype=np.intp)
    if not len(pairs):
        return label
    first, second = pairs[:, 0], pairs[:, 1]
    while True:
        a, b = label[first], label[second]
        if (a == b).all():
            return label
        np.minimum.at(label, np.maximum(a, b), np.minimum(a, b))
        while not np.array_equal(label, label[label]):
            label = label[label]
