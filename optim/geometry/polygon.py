"""Where a chain of points crosses itself or has a spike."""

from __future__ import annotations

import numpy as np

from optim.arrays import BoolArray, FloatArray

CONCAVE_TURN = np.deg2rad(25.0)
"""A chain of a section that turns inwards by more than this from one piece to the next has a spike
or a dent there: cusped sides turn by a few degrees; rule of thumb."""

KNIFE_TURN = np.deg2rad(60.0)
"""Outward turn from one piece to the next beyond which even a nose is a knife edge; on 240 pieces
it stands for a nose radius of 0.01 % of the chord; rule of thumb."""


def crossings(chain: FloatArray) -> FloatArray:
    """Return the places where pieces of a chain cross that are not neighbours, (m, 2).

    The pieces are sorted by their left ends, and each is compared with its next neighbour, its
    next but one and so on, all at once, for as long as any of the compared pairs overlap in x.

    Parameters
    ----------
    chain : (n, 2) array
        Points joined by straight pieces.
    """
    a, b = chain[:-1], chain[1:]
    left, right = np.minimum(a[:, 0], b[:, 0]), np.maximum(a[:, 0], b[:, 0])
    order = np.argsort(left, kind="stable")
    left, right, a, b = left[order], right[order], a[order], b[order]
    found = []
    first = np.arange(order.size)
    for offset in range(1, order.size):
        first = first[first + offset < order.size]
        first = first[left[first + offset] <= right[first]]
        if first.size == 0:
            break
        second = first + offset
        apart: BoolArray = np.abs(order[first] - order[second]) > 1
        i, j = first[apart], second[apart]
        found.append(_meeting(a[i], b[i], a[j], b[j]))
    return np.concatenate(found) if found else np.empty((0, 2))


def _meeting(a: FloatArray, b: FloatArray, c: FloatArray, d: FloatArray) -> FloatArray:
    """Return where the pieces from a to b and from c to d properly cross, (m, 2)."""
    side_c, side_d = _turned(b - a, c - a), _turned(b - a, d - a)
    side_a, side_b = _turned(d - c, a - c), _turned(d - c, b - c)
    proper = (side_c * side_d < 0.0) & (side_a * side_b < 0.0)
    share = side_a[proper] / (side_a[proper] - side_b[proper])
    return np.asarray(a[proper] + share[:, None] * (b[proper] - a[proper]))


def _turned(first: FloatArray, second: FloatArray) -> FloatArray:
    """Return the cross product of two vectors a row."""
    return np.asarray(first[:, 0] * second[:, 1] - first[:, 1] * second[:, 0])


def turns(directions: FloatArray) -> FloatArray:
    """Return the angles from each direction to the next, positive outwards, (n - 1,) [rad]."""
    first, second = directions[:-1], directions[1:]
    along = first[:, 0] * second[:, 0] + first[:, 1] * second[:, 1]
    return np.arctan2(_turned(first, second), along)


def spikes(angles: FloatArray) -> list[int]:
    """Return the indices of the turns at which a spike or dent sits, one for each run.

    An outward spike is flanked by inward turns, a dent is one; the strongest turn of the
    neighbourhood is named.
    """
    suspect = np.flatnonzero((angles < -CONCAVE_TURN) | (angles > KNIFE_TURN))
    strongest = []
    for k in suspect.tolist():
        start = max(k - 1, 0)
        strongest.append(start + int(np.argmax(np.abs(angles[start : k + 2]))))
    return sorted(set(strongest))
