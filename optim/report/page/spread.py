"""Points of a front measured in shares of its range, and picks that lie far from each other."""

from __future__ import annotations

import numpy as np

from optim.arrays import FloatArray, IntArray


def shares(points: FloatArray, front: FloatArray) -> FloatArray:
    """Return points in shares of a front's range: 0 is its best, 1 its worst value.

    Parameters
    ----------
    points : (n, n_objectives) array
        Minimised.
    front : (m, n_objectives) array
        Minimised. Where all its values are equal, the range is one unit.
    """
    if not len(front):
        return np.zeros((len(points), front.shape[1]))
    best, worst = front.min(axis=0), front.max(axis=0)
    return np.asarray((points - best) / np.where(worst > best, worst - best, 1.0))


def spread_out(places: FloatArray, count: int, first: tuple[int, ...] = ()) -> IntArray:
    """Return points that lie far from each other: again and again the farthest from those picked.

    Parameters
    ----------
    places : (n, n_objectives) array
        Shares of the range.
    count : int
        How many are picked, those of `first` included.
    first : tuple of int
        Picked in any case; the first point if there are none.

    Returns
    -------
    (at most count,) array of int
        Each once, in the order of picking.

    Examples
    --------
    >>> spread_out(np.array([[0.0, 1.0], [0.1, 0.9], [0.5, 0.4], [1.0, 0.0]]), 3).tolist()
    [0, 3, 2]
    """
    if len(places) <= count and not first:
        return np.arange(len(places))
    picked = list(dict.fromkeys(first)) or [0]
    far = np.min([np.linalg.norm(places - places[k], axis=1) for k in picked], axis=0)
    while len(picked) < min(count, len(places)):
        far[picked] = -1.0
        k = int(np.argmax(far))
        picked.append(k)
        far = np.minimum(far, np.linalg.norm(places - places[k], axis=1))
    return np.array(picked)
