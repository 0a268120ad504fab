"""Evaluations kept for designs that are asked for again, exact to the last bit.

An evaluation is a function of its design, so one that is kept equals one that is made again; the
archive cannot tell them apart but by the time they took. So it does not matter that the memory
is short, and that a resumed run begins without it.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from optim.arrays import FloatArray
from optim.problem.evaluation import Evaluation

KEPT = 2048
"""Evaluations kept, the latest ones; some megabytes."""


class EvaluationCache:
    """Evaluates designs, each different one once.

    Parameters
    ----------
    evaluate : callable
        (n, n_variables) array -> list of n evaluations, None for a design that was lost.
    kept : int
        How many evaluations are kept.
    """

    def __init__(
        self,
        evaluate: Callable[[FloatArray], list[Evaluation | None]],
        kept: int = KEPT,
    ) -> None:
        self._evaluate = evaluate
        self._most = kept
        self._kept: dict[bytes, Evaluation] = {}

    def evaluate(self, designs: FloatArray) -> list[Evaluation | None]:
        """Return the evaluations of designs, (n, n_variables), in their order.

        A lost design is not kept: it is tried again when it is asked for again.
        """
        keys = [design.tobytes() for design in designs]
        known = {key: replace(self._kept[key], seconds=0.0) for key in keys if key in self._kept}
        first = {key: i for i, key in reversed(list(enumerate(keys))) if key not in known}
        rows = sorted(first.values())
        made = self._evaluate(designs[rows]) if rows else []
        fresh = dict(zip([keys[row] for row in rows], made, strict=True))
        self._keep(fresh)
        found = {**known, **fresh}
        return [
            _again(found[key]) if key in first and first[key] != i else found[key]
            for i, key in enumerate(keys)
        ]

    def _keep(self, fresh: dict[bytes, Evaluation | None]) -> None:
        self._kept |= {key: made for key, made in fresh.items() if made is not None}
        for key in list(self._kept)[: max(0, len(self._kept) - self._most)]:
            del self._kept[key]


def _again(evaluation: Evaluation | None) -> Evaluation | None:
    return None if evaluation is None else replace(evaluation, seconds=0.0)
