"""What a run tells its listener, such as a console, while it goes on."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TypeAlias

from optim.search.termination import Ending


@dataclass(frozen=True)
class WorkersStarting:
    """The worker processes are being started; on a new machine this compiles the kernels.

    Attributes
    ----------
    workers : int
        How many.
    """

    workers: int


@dataclass(frozen=True)
class SessionBegan:
    """The workers are ready and the journal is open.

    Attributes
    ----------
    run : Path
        RUN.h5.
    study : str
        Name of the study.
    workers : int
        Worker processes.
    generations_done : int
        0 for a new run.
    population : int
        Designs in a generation.
    generations : int or None
        Generations in all, None without such a limit.
    """

    run: Path
    study: str
    workers: int
    generations_done: int
    population: int
    generations: int | None


@dataclass(frozen=True)
class GenerationDone:
    """A generation is recorded and durable.

    Attributes
    ----------
    generation : int
        How many are recorded, this one included.
    evaluations : int
        How many designs are recorded.
    points_per_second : float
        Coupled points of this generation over the time it took.
    failures : mapping of str to int
        Outcome's label -> number of designs so far, converged left out, in the order of codes.
    feasible_share : float
        Share of all designs so far that keep every limit [-].
    feasible_now : float
        The same of this generation alone [-].
    hypervolume : float
        Of all feasible designs so far against the reference point.
    elapsed : float
        Working time over all sessions [s].
    remaining : float or None
        Time left at most, None where nothing but a stall ends the run [s].
    """

    generation: int
    evaluations: int
    points_per_second: float
    failures: Mapping[str, int]
    feasible_share: float
    feasible_now: float
    hypervolume: float
    elapsed: float
    remaining: float | None


@dataclass(frozen=True)
class RunEnded:
    """The run is done and RUN.h5 holds everything.

    Attributes
    ----------
    run : Path
        RUN.h5.
    ending : Ending
        Why.
    """

    run: Path
    ending: Ending


Event: TypeAlias = WorkersStarting | SessionBegan | GenerationDone | RunEnded
Listener: TypeAlias = Callable[[Event], None]


def ignore(_event: Event) -> None:
    """Listen to nothing."""
