"""The loop: ask, evaluate, tell, record."""

from __future__ import annotations

import contextlib
import time
from dataclasses import dataclass

import numpy as np

from optim.archive.journal import Journal
from optim.archive.writer import finish, stop
from optim.arrays import FloatArray
from optim.errors import StoppedEarlyError
from optim.problem.evaluation import Evaluation
from optim.problem.problem import Problem
from optim.runner.cache import EvaluationCache
from optim.runner.events import GenerationDone, Listener, RunEnded
from optim.runner.executors import Workers
from optim.runner.interrupt import StopRequestedError
from optim.runner.lost import lost_evaluation
from optim.runner.records import generation_record
from optim.runner.tally import Judged, Tally
from optim.search.algorithm import Search
from optim.search.space import SearchSpace
from optim.search.termination import Ending, Limits


@dataclass(frozen=True)
class Session:
    """All that one sitting of a run works with.

    Attributes
    ----------
    problem : Problem
        What is evaluated; its flows are computed in the workers only.
    search : Search
        As it stands after the last recorded generation.
    journal : Journal
        Open for writing.
    workers : Workers
        Started.
    limits : Limits
        When to end.
    tally : Tally
        Of what is recorded.
    listener : callable
        Told of every generation.
    """

    problem: Problem
    search: Search
    journal: Journal
    workers: Workers
    limits: Limits
    tally: Tally
    listener: Listener


def search_space(problem: Problem) -> SearchSpace:
    """Return what a search is told of a problem."""
    return SearchSpace(
        problem.lower,
        problem.upper,
        problem.baseline_design,
        len(problem.objectives),
        problem.n_search_constraints,
    )


def conduct(session: Session) -> Ending:
    """Run until an end is reached, and leave the archive whole in any case.

    Returns
    -------
    Ending
        Why the run ended; RUN.h5 holds everything then.

    Raises
    ------
    StoppedEarlyError
        If the user asked to stop, or the disk is full: everything recorded is safe.
    """
    journal = session.journal
    with contextlib.ExitStack() as still_open:
        still_open.callback(journal.close)
        try:
            ending = drive(session)
        except StopRequestedError:
            done = journal.generations
            stop(journal)
            still_open.pop_all()
            raise StoppedEarlyError(
                f"Stopped after generation {done}; everything up to there is recorded. "
                f"Go on with: sectionwright resume {journal.run}"
            ) from None
        finish(journal)
        still_open.pop_all()
    session.listener(RunEnded(journal.run, ending))
    return ending


def drive(session: Session) -> Ending:
    """Ask, evaluate, tell and record until an end is reached; the archive is not yet written.

    Raises
    ------
    StopRequestedError
        If the user asked to stop; the unfinished generation is dropped.
    """
    search, tally = session.search, session.tally
    cache = EvaluationCache(session.workers.evaluate)
    before, began = tally.elapsed, time.monotonic()
    while (ending := session.limits.ending(tally.progress(time.time()))) is None:
        designs = search.ask()
        if not len(designs):
            return Ending.EXHAUSTED
        evaluations = _evaluated(session, cache, designs)
        judged = _judged(evaluations)
        told = np.array([one.search_constraints for one in evaluations])
        search.tell(designs, judged.search_objectives, told)
        hypervolume = tally.add(judged)
        elapsed = before + time.monotonic() - began
        session.journal.append(
            generation_record(
                search.generation - 1, evaluations, hypervolume, elapsed, search.state()
            )
        )
        tally.pass_time(elapsed)
        session.listener(_done(session, judged))
    return ending


def _evaluated(session: Session, cache: EvaluationCache, designs: FloatArray) -> list[Evaluation]:
    """Return the evaluations in the order of the designs, lost ones filled in."""
    reference = session.journal.header.reference_point
    return [
        lost_evaluation(session.problem, reference, design) if found is None else found
        for design, found in zip(designs, cache.evaluate(designs), strict=True)
    ]


def _judged(evaluations: list[Evaluation]) -> Judged:
    return Judged(
        np.array([one.search_objectives for one in evaluations]),
        np.array([one.violation for one in evaluations]),
        np.array([int(one.design_outcome) for one in evaluations]),
        sum(one.points for one in evaluations),
    )


def _done(session: Session, judged: Judged) -> GenerationDone:
    tally = session.tally
    duration = max(tally.last_duration, 1e-9)
    return GenerationDone(
        generation=len(tally.hypervolumes),
        evaluations=tally.evaluations,
        points_per_second=judged.points / duration,
        failures={code.label: tally.failures[code] for code in sorted(tally.failures)},
        feasible_share=tally.feasible / tally.evaluations,
        feasible_now=float(np.mean(judged.violation == 0.0)),
        hypervolume=tally.hypervolumes[-1],
        elapsed=tally.elapsed,
        remaining=session.limits.remaining(tally.progress(time.time())),
    )
