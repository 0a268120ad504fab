"""How a run went: what it found over its evaluations, what failed, which limit holds it back."""

from __future__ import annotations

import math
from collections import Counter

import numpy as np

from optim.archive.reader import Run
from optim.arrays import BoolArray, FloatArray
from optim.outcomes import Outcome
from optim.problem.pareto import hypervolume
from optim.report.fields import Document
from optim.report.front import ACTIVE_MARGIN
from optim.report.judgement import Judgement
from optim.report.page.words import readable

LAST_PART = 0.25
"""Part of the generations, at the end, whose gain tells whether a run has settled."""

SETTLED_GAIN = 0.01
"""Gain of the last part, as a share of the hypervolume, below which a run counts as settled (rule
of thumb: a finer front alone still brings some thousandths)."""

LEAST_GENERATIONS = 8
"""A shorter run has no last part to judge by."""


def progress_fields(run: Run) -> Document:
    """Return the hypervolume over the evaluations, and what it says.

    Returns
    -------
    dict
        ``evaluations`` and ``hypervolume`` after each generation, ``gain`` of the last part (None
        where it cannot be told), ``verdict`` in one word and ``sentence``.
    """
    volumes = run.read("hypervolume").tolist() if run.generations else []
    counts = np.cumsum(run.read("evaluations")).tolist() if run.generations else []
    verdict, sentence, gain = verdict_of(volumes)
    return {
        "evaluations": counts,
        "hypervolume": volumes,
        "gain": gain,
        "verdict": verdict,
        "sentence": sentence,
    }


def verdict_of(volumes: list[float]) -> tuple[str, str, float | None]:
    """Return verdict, sentence and the gain of the last part of a run.

    Parameters
    ----------
    volumes : list of float
        Hypervolume after each generation.

    Examples
    --------
    >>> verdict_of([1.0] * 12)[0], verdict_of([0.1 * k for k in range(12)])[0]
    ('settled', 'still rising')
    """
    if not volumes:
        return "nothing yet", "No generation has been recorded yet.", None
    if volumes[-1] <= 0.0:
        return (
            "nothing feasible",
            "No design keeps every limit within the reference point, so there is no front yet.",
            None,
        )
    if len(volumes) < LEAST_GENERATIONS:
        said = f"With fewer than {LEAST_GENERATIONS} generations it cannot be told if it settled."
        return "too short to tell", said, None
    part = max(2, round(LAST_PART * len(volumes)))
    gain = (volumes[-1] - volumes[-1 - part]) / volumes[-1]
    added = f"The last {part} of {len(volumes)} generations added {100.0 * gain:.2g} %"
    if gain < SETTLED_GAIN:
        return "settled", f"{added} to the hypervolume.", gain
    more = "more generations are likely to find more."
    return "still rising", f"{added} to the hypervolume; {more}", gain


def ending_fields(run: Run) -> list[Document]:
    """Return how many designs ended in each way, with what that means."""
    counts = Counter(run.design_outcomes.tolist())
    return [
        {"outcome": Outcome(k).label, "count": counts[k], "sentence": Outcome(k).sentence}
        for k in sorted(counts)
    ]


def limit_fields(judgement: Judgement) -> list[Document]:
    """Return what each limit does to the search, the most costly first.

    Returns
    -------
    list of dict
        ``name``, ``kind``, ``limit``, ``unit``; ``kept``: share of the evaluations that keep it;
        ``alone``: number of evaluations that miss this limit only; ``active``: share of the front
        that it holds; ``cost``: share that the hypervolume would gain from the recorded designs if
        the limit were dropped, None without a front; a search without the limit would find more.
    """
    answered = _answered(judgement)
    front = judgement.front()
    fields = [
        {
            "name": limit.name,
            "kind": limit.kind,
            "limit": limit.limit,
            "unit": limit.unit,
            "kept": _share(judgement.margins[:, k] >= 0.0),
            "alone": int(np.count_nonzero(_only(judgement, answered, k))),
            "active": _share(judgement.margins[front, k] < ACTIVE_MARGIN),
            "cost": _cost(judgement, answered, k),
        }
        for k, limit in enumerate(judgement.limits)
    ]
    return sorted(fields, key=lambda one: (-(one["cost"] or 0.0), -one["alone"]))


def _answered(judgement: Judgement) -> BoolArray:
    """Which evaluations have all objectives and all limits to be judged by."""
    aims, margins = np.isfinite(judgement.objectives), np.isfinite(judgement.margins)
    return np.asarray(aims.all(axis=1) & margins.all(axis=1))


def _only(judgement: Judgement, answered: BoolArray, k: int) -> BoolArray:
    others = np.delete(judgement.margins, k, axis=1)
    return np.asarray(answered & (judgement.margins[:, k] < 0.0) & (others >= 0.0).all(axis=1))


def _cost(judgement: Judgement, answered: BoolArray, k: int) -> float | None:
    if judgement.hypervolume <= 0.0:
        return None
    missed = judgement.minimised[_only(judgement, answered, k)]
    front = judgement.minimised[judgement.front()]
    dropped = hypervolume(np.vstack([front, missed]), judgement.reference_point)
    return dropped / hypervolume(front, judgement.reference_point) - 1.0


def _share(which: BoolArray | FloatArray) -> float:
    return float(np.mean(which)) if len(which) else math.nan


def reason(limits: list[Document], endings: list[Document], evaluated: int) -> str:
    """Return in one sentence what keeps a run from its first feasible design.

    Parameters
    ----------
    limits : list of dict
        As `limit_fields` returns them.
    endings : list of dict
        As `ending_fields` returns them.
    evaluated : int
        Number of evaluations.
    """
    if not evaluated:
        return "Nothing has been evaluated yet."
    answered = sum(one["count"] for one in endings if one["outcome"] == Outcome.CONVERGED.label)
    if not answered:
        return "No design has an answer at every condition; the outcomes below say why."
    never = [readable(one["name"]) for one in limits if one["kept"] == 0.0]
    if never:
        return f"No design keeps: {'; '.join(never)}."
    hardest = min(limits, key=lambda one: one["kept"], default=None)
    if hardest is None:
        return "There is no limit to miss; no design has all its objectives."
    return (
        f"Each limit is kept by some design, but never all at once; fewest keep "
        f"{readable(hardest['name'])} ({100.0 * hardest['kept']:.1f} % of the designs)."
    )
