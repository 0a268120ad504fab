"""Going on with a run that was stopped or killed, or adding to one that was finished."""

from __future__ import annotations

from pathlib import Path

from optim.archive.journal import Journal
from optim.archive.reader import open_run
from optim.archive.reopen import reopen
from optim.errors import StoppedEarlyError
from optim.problem.problem import Problem
from optim.runner.driver import Session, conduct, search_space
from optim.runner.events import Listener, WorkersStarting, ignore
from optim.runner.executors import Workers
from optim.runner.interrupt import StopRequest, StopRequestedError
from optim.runner.start import SessionSettings, began, limits_of, provenance
from optim.runner.tally import Tally
from optim.runner.worker import Blueprint, BuildProblem, problem_of_text
from optim.search.algorithm import Search
from optim.search.space import SearchState
from optim.search.termination import Ending
from optim.study.load import parse_study
from optim.study.schema import SearchSettings


def resume_run(
    run: Path,
    settings: SessionSettings,
    listener: Listener = ignore,
    build: BuildProblem = problem_of_text,
) -> Ending:
    """Go on with a run as if it had never been interrupted.

    Parameters
    ----------
    run : Path
        RUN.h5; it, its journal or both exist. The study is the recorded one.
    settings : SessionSettings
        Workers and limits of this sitting; more generations than the study's let a finished run
        go on.
    listener : callable
        Told of the events.
    build : callable
        Makes the problem in this process and in the workers, as when the run began.

    Returns
    -------
    Ending
        Why the run ended; RUN.h5 holds everything, to the last bit what one uninterrupted run
        would have given, timing and provenance apart.

    Raises
    ------
    InputError
        If there is no such run, or another process is writing it.
    ArchiveVersionError, ArchiveDamagedError
        If it cannot be read.
    StoppedEarlyError
        If the user asked to stop, or the disk is full.
    ValueError
        If a setting is out of its range.
    """
    with open_run(run) as recorded:
        text = recorded.header.resolved_text
    study = parse_study(text)
    limits = limits_of(study.search, settings)
    problem = build(text)
    listener(WorkersStarting(settings.workers))
    try:
        with (
            StopRequest() as stop,
            Workers(Blueprint(build, text), settings.workers, stop) as workers,
        ):
            journal = reopen(run, provenance(study, settings.workers))
            session = Session(
                problem=problem,
                search=search_of(journal, problem, study.search),
                journal=journal,
                workers=workers,
                limits=limits,
                tally=Tally.of_journal(journal),
                listener=listener,
            )
            listener(began(session, study))
            return conduct(session)
    except StopRequestedError:
        raise StoppedEarlyError(
            f"Stopped while the workers were starting; nothing is lost. "
            f"Go on with: sectionwright resume {run}"
        ) from None


def search_of(journal: Journal, problem: Problem, search: SearchSettings) -> Search:
    """Return the search as it stood after the last recorded generation."""
    space = search_space(problem)
    recorded = journal.last_state()
    if recorded is None:  # killed in its first generation
        return Search(space, search.algorithm, search.population, search.seed)
    return Search.restore(space, search.algorithm, search.population, SearchState(*recorded))
