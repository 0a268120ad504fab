"""What a run has come to: a function of its records, the same told live and read back."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

import numpy as np

from optim.archive.journal import Journal
from optim.arrays import FloatArray
from optim.outcomes import Outcome
from optim.problem.pareto import hypervolume
from optim.search.termination import Progress


@dataclass(frozen=True)
class Judged:
    """What a tally takes of a generation of n designs.

    Attributes
    ----------
    search_objectives : (n, n_objectives) array
        Minimised.
    violation : (n,) array
        0 is feasible.
    design_outcomes : (n,) integer array
        Codes of `Outcome`.
    points : int
        Coupled points of the generation.
    """

    search_objectives: FloatArray
    violation: FloatArray
    design_outcomes: np.typing.NDArray[np.integer]
    points: int


class Tally:
    """The running count of a run.

    Parameters
    ----------
    reference_point : (n_objectives,) array
        Reference point of the hypervolume, minimised.

    Attributes
    ----------
    evaluations, feasible : int
        Designs, and those of them without violation.
    failures : Counter
        Outcome -> designs, converged left out.
    hypervolumes : list of float
        One a generation.
    elapsed, last_duration : float
        Working time, and that of the last generation [s].
    """

    def __init__(self, reference_point: FloatArray) -> None:
        self._reference = reference_point
        self._front = np.empty((0, len(reference_point)))
        self.evaluations = 0
        self.feasible = 0
        self.failures: Counter[Outcome] = Counter()
        self.hypervolumes: list[float] = []
        self.elapsed = 0.0
        self.last_duration = 0.0

    @classmethod
    def of_journal(cls, journal: Journal) -> Tally:
        """Return the tally of what is recorded; the hypervolumes are taken as they stand."""
        tally = cls(journal.header.reference_point)
        for items in journal.each_generation():
            generation = Judged(
                items["/evaluations/search_objectives"],
                items["/evaluations/violation"],
                items["/evaluations/design_outcome"],
                int(items["/evaluations/points"].sum()),
            )
            for point in tally._count(generation):
                tally._enter(point)
            tally.hypervolumes.append(float(items["/generations/hypervolume"][0]))
            tally.pass_time(float(items["/timing/generation_elapsed"][0]))
        return tally

    def add(self, generation: Judged) -> float:
        """Add a generation and return the hypervolume with it.

        It grows by what each new design of the front dominates alone: a front of thousands in
        three objectives is not measured whole every time.
        """
        volume = self.hypervolumes[-1] if self.hypervolumes else 0.0
        for point in self._count(generation):
            volume += self._gain(point)
            self._enter(point)
        self.hypervolumes.append(volume)
        return volume

    def pass_time(self, elapsed: float) -> None:
        """Note when the generation added last was done [s, working time of all sessions]."""
        self.last_duration = elapsed - self.elapsed
        self.elapsed = elapsed

    def progress(self, now: float) -> Progress:
        """Return what the limits look at; `now` is the clock [s since 1970, UTC]."""
        return Progress(self.evaluations, self.elapsed, now, self.last_duration, self.hypervolumes)

    def _count(self, generation: Judged) -> FloatArray:
        """Count a generation and return its feasible points, (n, n_objectives)."""
        feasible = generation.violation == 0.0
        self.evaluations += len(feasible)
        self.feasible += int(feasible.sum())
        codes = (Outcome(int(code)) for code in generation.design_outcomes)
        self.failures.update(code for code in codes if code is not Outcome.CONVERGED)
        points: FloatArray = generation.search_objectives[feasible]
        return points

    def _beaten(self, point: FloatArray) -> bool:
        """Whether the front holds a point that is as good in every objective."""
        return bool(np.any(np.all(self._front <= point, axis=1)))

    def _gain(self, point: FloatArray) -> float:
        """Return the hypervolume that a point dominates and the front does not."""
        if self._beaten(point):
            return 0.0
        shared = np.maximum(self._front, point)
        whole = hypervolume(point[None], self._reference)
        return max(0.0, whole - hypervolume(shared, self._reference))

    def _enter(self, point: FloatArray) -> None:
        """Let a point into the front in the place of those that it beats."""
        if not self._beaten(point):
            kept = self._front[~np.all(self._front >= point, axis=1)]
            self._front = np.vstack([kept, point])
