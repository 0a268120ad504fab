"""Beginning a run: from a study to its first session."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

from optim.aerodynamics.kernels import kernel_digest
from optim.archive.journal import Journal
from optim.archive.provenance import collect
from optim.errors import StoppedEarlyError
from optim.runner.driver import Session, conduct, search_space
from optim.runner.events import Listener, SessionBegan, WorkersStarting, ignore
from optim.runner.executors import Workers, one_thread
from optim.runner.interrupt import StopRequest, StopRequestedError
from optim.runner.records import run_header
from optim.runner.tally import Tally
from optim.runner.worker import Blueprint, BuildProblem, problem_of_text
from optim.search.algorithm import Search
from optim.search.termination import Ending, Limits, next_time_of_day
from optim.study.schema import SearchSettings, Study


@dataclass(frozen=True)
class SessionSettings:
    """What is given by hand for one sitting of a run.

    Attributes
    ----------
    workers : int
        Worker processes, at least 1; the archive does not depend on it.
    generations : int or None
        In all, in place of the study's.
    until : str or None
        "HH:MM", in place of the study's limits on time.
    """

    workers: int
    generations: int | None = None
    until: str | None = None


def with_search(study: Study, **changes: object) -> Study:
    """Return the study with other settings of its search, checked like written ones.

    Parameters
    ----------
    study : Study
        The study.
    **changes
        Settings by name, such as ``seed=7``; None leaves one as it is.

    Raises
    ------
    ValueError
        If a setting is out of its range.
    """
    given = {name: value for name, value in changes.items() if value is not None}
    search = study.search.model_dump(exclude_none=True) | given
    return study.model_copy(update={"search": SearchSettings.model_validate(search)})


def start_run(
    study: Study,
    run: Path,
    settings: SessionSettings,
    listener: Listener = ignore,
    build: BuildProblem = problem_of_text,
) -> Ending:
    """Run a study from its first generation.

    Parameters
    ----------
    study : Study
        What to run; its text and its resolved form are recorded.
    run : Path
        RUN.h5, which must not exist.
    settings : SessionSettings
        Workers and limits of this sitting.
    listener : callable
        Told of the events.
    build : callable
        Makes the problem in this process and in the workers.

    Returns
    -------
    Ending
        Why the run ended; RUN.h5 holds everything.

    Raises
    ------
    StudyError
        If the study cannot be flown.
    InputError
        If the run exists already or another process is writing it.
    StoppedEarlyError
        If the user asked to stop, or the disk is full.
    ValueError
        If a setting is out of its range.
    """
    limits = limits_of(study.search, settings)
    blueprint = Blueprint(build, study.resolved_text())
    problem = build(blueprint.text)
    listener(WorkersStarting(settings.workers))
    try:
        with StopRequest() as stop, Workers(blueprint, settings.workers, stop) as workers:
            reference = workers.reference_point
            header = run_header(study, problem, reference, provenance(study, settings.workers))
            search = study.search
            session = Session(
                problem=problem,
                search=Search(
                    search_space(problem), search.algorithm, search.population, search.seed
                ),
                journal=Journal.create(run, header),
                workers=workers,
                limits=limits,
                tally=Tally(reference),
                listener=listener,
            )
            listener(began(session, study))
            return conduct(session)
    except StopRequestedError:
        raise StoppedEarlyError(
            "Stopped while the workers were starting; nothing has been recorded."
        ) from None


def limits_of(search: SearchSettings, settings: SessionSettings) -> Limits:
    """Return the ends of a session: the study's, and in their place what is given by hand.

    A time of day is the next one that the clock on the wall shows.
    """
    now = datetime.now().astimezone()
    study = Limits(
        generations=search.generations,
        evaluations=search.evaluations,
        wall_time=search.wall_time,
        until=None if search.until is None else next_time_of_day(search.until, now),
        stall=search.stall,
    )
    until = None if settings.until is None else next_time_of_day(settings.until, now)
    return study.overridden(settings.generations, until)


def provenance(study: Study, workers: int) -> dict[str, Any]:
    """Return what computes a session, the environment being that of the workers."""
    digests = {"study": study.fingerprint(), "kernels": kernel_digest()}
    with one_thread():
        return collect(seed=study.search.seed, workers=workers, digests=digests)


def began(session: Session, study: Study) -> SessionBegan:
    """Return the event that the loop is about to begin."""
    return SessionBegan(
        run=session.journal.run,
        study=study.study,
        workers=session.workers.count,
        generations_done=session.search.generation,
        population=study.search.population,
        generations=session.limits.generations,
    )
