"""Which designs of a run the page holds: the front, and those nearest to it, `MOST` at most.

How far a feasible design is behind the front is the least step, in shares of the front's range and
the same in every objective, after which no member of the front beats it any more: the additive
epsilon indicator of a single design.

References
----------
.. [1] E. Zitzler, L. Thiele, M. Laumanns, C. M. Fonseca, V. Grunert da Fonseca, "Performance
   assessment of multiobjective optimizers: an analysis and review", IEEE Transactions on
   Evolutionary Computation 7(2) (2003) 117-132 (the indicator; from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from optim.arrays import FloatArray, IntArray
from optim.report.front import BASELINE
from optim.report.judgement import Judgement
from optim.report.page.spread import shares, spread_out

MOST = 400
"""Designs on the page, the baseline included: as many as a table is still looked through."""

MOST_OF_THE_FRONT = 300
"""Of a larger front the page holds this many, picked to lie far from each other."""

LEAST_VIOLATED = 60
"""Designs that miss a limit on the page, those that miss least."""

FRONT, BEATEN, MISSED = "front", "beaten", "missed"


@dataclass(frozen=True)
class Shown:
    """The designs of the page.

    Attributes
    ----------
    rows : (n,) array of int
        Evaluations: the baseline, then the front, the beaten and those that miss a limit.
    kinds : tuple of str
        "front", "beaten" or "missed", of each.
    front_size : int
        How many the front of the run has; more than are shown if it was thinned.
    """

    rows: IntArray
    kinds: tuple[str, ...]
    front_size: int

    def of_kind(self, kind: str) -> IntArray:
        """Return the positions of the designs of a kind, the baseline among them if it is one."""
        return np.flatnonzero(np.array(self.kinds) == kind)


def shown(judgement: Judgement, sound: np.typing.NDArray[np.bool_]) -> Shown:
    """Return which designs are shown.

    Parameters
    ----------
    judgement : Judgement
        Of n evaluations.
    sound : (n,) array of bool
        Whether the design is a section.
    """
    if not len(judgement.violation):
        return Shown(np.empty(0, dtype=np.int64), (), 0)
    front = judgement.front()
    minimised = judgement.minimised
    members = _thinned(minimised, front)
    missed = _least_violated(judgement, sound)
    room = MOST - len({BASELINE, *members.tolist(), *missed.tolist()})
    beaten = [row for row in _nearest(judgement, front).tolist() if row != BASELINE][:room]
    rows = list(dict.fromkeys((BASELINE, *members.tolist(), *beaten, *missed.tolist())))
    on_front = set(front.tolist())
    return Shown(
        np.array(rows, dtype=np.int64),
        tuple(_kind(row, on_front, judgement.violation) for row in rows),
        len(front),
    )


def _thinned(minimised: FloatArray, front: IntArray) -> IntArray:
    """Return a front with its extremes, thinned if it has too many members."""
    if len(front) <= MOST_OF_THE_FRONT:
        return front
    places = shares(minimised[front], minimised[front])
    extremes = tuple(np.argmin(places, axis=0).tolist())
    return front[np.sort(spread_out(places, MOST_OF_THE_FRONT, extremes))]


def _kind(row: int, front: set[int], violation: FloatArray) -> str:
    if row in front:
        return FRONT
    return BEATEN if violation[row] == 0.0 else MISSED


def _least_violated(judgement: Judgement, sound: np.typing.NDArray[np.bool_]) -> IntArray:
    known = sound & np.isfinite(judgement.violation) & (judgement.violation > 0.0)
    rows = np.flatnonzero(known)
    return rows[np.argsort(judgement.violation[rows], kind="stable")][:LEAST_VIOLATED]


def _nearest(judgement: Judgement, front: IntArray) -> IntArray:
    """Return the feasible designs that the front beats, the least beaten first."""
    minimised = judgement.minimised
    feasible = (judgement.violation == 0.0) & np.isfinite(minimised).all(axis=1)
    rows = np.setdiff1d(np.flatnonzero(feasible), front)
    if not len(rows):
        return rows
    places = shares(minimised[rows], minimised[front])
    members = shares(minimised[front], minimised[front])
    behind = np.array([np.min(place - members, axis=1).max() for place in places])
    return rows[np.argsort(behind, kind="stable")]
