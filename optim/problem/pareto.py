"""Which designs nothing beats, and how much they gain: non-dominated sets and hypervolume.

Every objective is minimised here. A point dominates another if it is no worse in every objective
and better in one; equal points do not dominate each other, so all of them are kept. The
hypervolume is the measure of what a set dominates within the box that ends at the reference
point, and it is exact: a sweep in two dimensions, and above that the exclusive volumes of While,
Bradstreet and Barone, one dimension less at each level.

References
----------
.. [1] E. Zitzler, L. Thiele, "Multiobjective optimization using evolutionary algorithms: a
   comparative case study", PPSN V, LNCS 1498 (1998) 292-301 (the measure; from memory).
.. [2] L. While, L. Bradstreet, L. Barone, "A fast way of calculating exact hypervolumes", IEEE
   Transactions on Evolutionary Computation 16(1) (2012) 86-95 (from memory).
"""

from __future__ import annotations

import numpy as np

from optim.arrays import BoolArray, FloatArray, IntArray, check_finite, check_shape


def non_dominated(points: FloatArray) -> BoolArray:
    """Return which points are dominated by no other.

    Parameters
    ----------
    points : (n, n_objectives) array
        Objectives, minimised, finite.

    Returns
    -------
    (n,) array of bool
        True where no point dominates; equal points are all kept.

    Raises
    ------
    ValueError
        If the shape or a value is not as described.

    Notes
    -----
    The cost is the number of points times the size of the front, after sorting.
    """
    check_shape("points", points, {"n": None, "n_objectives": None})
    check_finite("points", points)
    unique, inverse = np.unique(points, axis=0, return_inverse=True)
    return _non_dominated_of_sorted(unique)[inverse.reshape(-1)]


def _non_dominated_of_sorted(points: FloatArray) -> BoolArray:
    """Non-dominated rows of unique points in lexicographic order: none can be beaten later."""
    kept = np.ones(len(points), dtype=np.bool_)
    if points.shape[1] == 2:
        best_before = np.minimum.accumulate(points[:, 1])
        kept[1:] = points[1:, 1] < best_before[:-1]
        return kept
    waiting = np.arange(len(points))
    while waiting.size:
        first, rest = waiting[0], waiting[1:]
        beaten = np.all(points[first] <= points[rest], axis=1)
        kept[rest[beaten]] = False
        waiting = rest[~beaten]
    return kept


def feasible_front(points: FloatArray, violation: FloatArray) -> IntArray:
    """Return which designs are feasible and dominated by no other feasible one.

    Parameters
    ----------
    points : (n, n_objectives) array
        Objectives, minimised; not-a-number where absent.
    violation : (n,) array
        Total violation of each design; 0 is feasible.

    Returns
    -------
    (n_front,) array of int
        Indices in ascending order; a design without a number is never among them.

    Raises
    ------
    ValueError
        If the shapes are not as described.
    """
    check_shape("points", points, {"n": None, "n_objectives": None})
    check_shape("violation", violation, {"n": len(points)})
    candidates = np.flatnonzero((violation == 0.0) & np.isfinite(points).all(axis=1))
    return candidates[non_dominated(points[candidates])]


def hypervolume(points: FloatArray, reference: FloatArray) -> float:
    """Return the exact hypervolume that a set of points dominates.

    Parameters
    ----------
    points : (n, n_objectives) array
        Objectives, minimised, finite; n may be 0. Points that are not better than the reference
        in every objective add nothing.
    reference : (n_objectives,) array
        The corner that bounds the volume.

    Returns
    -------
    float
        Volume in the product of the objectives' units, 0 for an empty set.

    Raises
    ------
    ValueError
        If a shape or a value is not as described.
    """
    check_shape("reference", reference, {"n_objectives": None})
    check_finite("reference", reference)
    check_shape("points", points, {"n": None, "n_objectives": len(reference)})
    check_finite("points", points)
    gains = reference - points[np.all(points < reference, axis=1)]
    return _volume(_maximal(gains))


def _maximal(gains: FloatArray) -> FloatArray:
    """Return the rows, each once, that no other row exceeds."""
    unique = np.unique(-gains, axis=0)
    return -unique[_non_dominated_of_sorted(unique)]


def _volume(gains: FloatArray) -> float:
    """Return the volume of the union of the boxes between the origin and each row.

    The rows are maximal: none lies within another's box. In the notation of [2]_ each level adds
    the exclusive volumes; taken in ascending order of the last coordinate, every later box reaches
    at least as high, so an exclusive volume is a height times one of a dimension less.
    """
    if gains.shape[0] == 0:
        return 0.0
    if gains.shape[1] == 1:
        return float(gains[:, 0].max())
    if gains.shape[1] == 2:
        return _area(gains)
    ordered = gains[np.argsort(gains[:, -1], kind="stable")]
    total = 0.0
    for k, box in enumerate(ordered):
        base = float(np.prod(box[:-1]))
        shared = np.minimum(ordered[k + 1 :, :-1], box[:-1])
        total += float(box[-1]) * (base - _volume(_maximal(shared)))
    return total


def _area(gains: FloatArray) -> float:
    """Return the area under a staircase of maximal corners."""
    ordered = gains[np.argsort(-gains[:, 0], kind="stable")]
    steps = np.diff(ordered[:, 1], prepend=0.0)
    return float(np.dot(ordered[:, 0], steps))
