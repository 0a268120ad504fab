"""Designs of a front that deserve a look, by rules that the page states.

The knee is the member that gives up least in total, each objective measured from the best value of
the front to its worst. With two objectives it is the member farthest below the line that joins the
two extremes, as in Das (1999); with more it is the same below the plane.

References
----------
.. [1] I. Das, "On characterizing the 'knee' of the Pareto curve based on normal-boundary
   intersection", Structural Optimization 18 (1999) 107-115 (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from optim.arrays import IntArray
from optim.report.judgement import Judgement
from optim.report.page.shown import FRONT, MISSED, Shown
from optim.report.page.spread import shares, spread_out

FINALISTS = 8
"""Designs that are flown again for the page, beside the baseline: some twenty seconds."""

LEAST_FOR_A_KNEE = 3
"""A front of two has two ends and nothing between."""

RULES = {
    "extreme": "best of the front in one objective",
    "knee": (
        "gives up least in total, each objective measured from the best value of the front to "
        "its worst"
    ),
    "finalist": (
        "flown again for the tray: the extremes, the knee, and members of the front as far from "
        "those as there are"
    ),
    "nothing": "flown again for the tray: the designs that miss their limits by least",
    "asked": "flown again for the tray: the designs that were asked for",
}
"""How the marks and the finalists are chosen, in words."""


@dataclass(frozen=True)
class Choice:
    """What is marked, by positions among the shown designs.

    Attributes
    ----------
    extremes : tuple of int
        Of each objective, the best member of the front; empty without a front.
    knee : int or None
        None for fewer than three members.
    finalists : tuple of int
        Positions of the designs whose flow the page holds; the baseline is not among them.
    rule : str
        Key of `RULES` by which the finalists were chosen.
    """

    extremes: tuple[int, ...] = ()
    knee: int | None = None
    finalists: tuple[int, ...] = ()
    rule: str = "finalist"


def choice(judgement: Judgement, designs: Shown, asked: tuple[int, ...] = ()) -> Choice:
    """Return what is marked.

    Parameters
    ----------
    judgement : Judgement
        Of all evaluations.
    designs : Shown
        The designs of the page.
    asked : tuple of int
        Evaluations, all of them shown, to be finalists in place of those of the rule.
    """
    front = designs.of_kind(FRONT)
    extremes, knee = _marks(judgement, designs, front)
    if asked:
        place = {row: k for k, row in enumerate(designs.rows.tolist())}
        return Choice(extremes, knee, tuple(place[row] for row in asked if place[row]), "asked")
    if not len(front):
        least = tuple(k for k in designs.of_kind(MISSED).tolist() if k)[:LEAST_FOR_A_KNEE]
        return Choice(finalists=least, rule="nothing")
    first = dict.fromkeys((*extremes, *(() if knee is None else (knee,))))
    where = {position: k for k, position in enumerate(front.tolist())}
    minimised = judgement.minimised[designs.rows[front]]
    found = spread_out(
        shares(minimised, minimised), FINALISTS, tuple(where[position] for position in first)
    )
    return Choice(extremes, knee, tuple(k for k in front[found].tolist() if k))


def _marks(
    judgement: Judgement, designs: Shown, front: IntArray
) -> tuple[tuple[int, ...], int | None]:
    if not len(front):
        return (), None
    minimised = judgement.minimised[designs.rows[front]]
    extremes = tuple(front[np.argmin(minimised, axis=0)].tolist())
    if len(front) < LEAST_FOR_A_KNEE:
        return extremes, None
    given_up = shares(minimised, minimised).sum(axis=1)
    return extremes, int(front[np.argmin(given_up)])
