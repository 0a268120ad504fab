"""When a run ends: pure functions of what is recorded.

A limit looks at numbers that the archive holds, so a resumed run ends where the uninterrupted one
would have, and anyone can see afterwards why a run ended. The two limits on time also look at the
duration of the last generation: a run that must be done by seven does not begin a generation that
would end at five past.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from enum import StrEnum


class Ending(StrEnum):
    """Why a run ended."""

    GENERATIONS = "generations"
    EVALUATIONS = "evaluations"
    WALL_TIME = "wall_time"
    UNTIL = "until"
    STALLED = "stalled"
    EXHAUSTED = "exhausted"

    @property
    def sentence(self) -> str:
        """What happened."""
        return _SENTENCES[self]


_SENTENCES = {
    Ending.GENERATIONS: "All generations asked for are done.",
    Ending.EVALUATIONS: "All evaluations asked for are done.",
    Ending.WALL_TIME: "The time given to the run is used up.",
    Ending.UNTIL: "The hour at which the run was to end is reached.",
    Ending.STALLED: "The hypervolume has stopped growing.",
    Ending.EXHAUSTED: "The search finds no design that it does not hold already.",
}


LEAST_GROWTH = 1e-3
"""Growth of the hypervolume over the window, as a fraction of its present value, below which it
counts as none [-]; rule of thumb: a search always finds a little more of what it has."""


@dataclass(frozen=True)
class Progress:
    """What is recorded of a run so far.

    Attributes
    ----------
    evaluations : int
        Designs recorded.
    elapsed : float
        Working time up to the last record, interruptions left out [s].
    now : float
        The clock at the last record, or where the run (again) began [s since 1970, UTC].
    last_duration : float
        Time the last generation took, 0 before the first [s].
    hypervolumes : sequence of float
        One a generation, 0 as long as no design is feasible.
    """

    evaluations: int
    elapsed: float
    now: float
    last_duration: float
    hypervolumes: Sequence[float]

    @property
    def generations(self) -> int:
        """Generations recorded."""
        return len(self.hypervolumes)


@dataclass(frozen=True)
class Limits:
    """The ends of a run; None where there is no such limit.

    Attributes
    ----------
    generations : int or None
        Generations in all.
    evaluations : int or None
        Designs in all; the generation that reaches it is completed.
    wall_time : float or None
        Working time in all [s].
    until : float or None
        Moment [s since 1970, UTC], from `next_time_of_day`.
    stall : int or None
        Generations over which the hypervolume may stand still, at least 1.
    """

    generations: int | None = None
    evaluations: int | None = None
    wall_time: float | None = None
    until: float | None = None
    stall: int | None = None

    def overridden(self, generations: int | None, until: float | None) -> Limits:
        """Return the limits with what was given by hand for this session.

        Parameters
        ----------
        generations : int or None
            Takes the place of the number of generations.
        until : float or None
            Takes the place of both limits on time [s since 1970, UTC].
        """
        changed = self
        if generations is not None:
            changed = replace(changed, generations=generations)
        if until is not None:
            changed = replace(changed, until=until, wall_time=None)
        return changed

    def ending(self, progress: Progress) -> Ending | None:
        """Return why the run ends here, or None if it goes on."""
        reached = {
            Ending.GENERATIONS: _reached(progress.generations, self.generations),
            Ending.EVALUATIONS: _reached(progress.evaluations, self.evaluations),
            Ending.WALL_TIME: _overrun(progress.elapsed, progress.last_duration, self.wall_time),
            Ending.UNTIL: _overrun(progress.now, progress.last_duration, self.until),
            Ending.STALLED: self.stall is not None and stalled(progress.hypervolumes, self.stall),
        }
        return next((ending for ending, here in reached.items() if here), None)

    def remaining(self, progress: Progress) -> float | None:
        """Return the time that the run will take at most, judged by its generations so far.

        Returns
        -------
        float or None
            None before the first generation and where nothing but a stall ends the run [s].
        """
        if not progress.generations:
            return None
        mean = progress.elapsed / progress.generations
        a_generation = progress.evaluations / progress.generations
        left = [
            _left(self.generations, progress.generations, mean),
            _left(self.evaluations, progress.evaluations, mean / a_generation),
            _left(self.wall_time, progress.elapsed, 1.0),
            _left(self.until, progress.now, 1.0),
        ]
        return min((time for time in left if time is not None), default=None)


def stalled(hypervolumes: Sequence[float], window: int) -> bool:
    """Tell whether the hypervolume has stopped growing.

    A window that begins before the first feasible design cannot have stalled: there the search
    is looking for feasible designs, and the hypervolume says nothing about it.

    Parameters
    ----------
    hypervolumes : sequence of float
        One a generation.
    window : int
        Generations over which it must have grown by `LEAST_GROWTH`.
    """
    if len(hypervolumes) <= window:
        return False
    before, now = hypervolumes[-1 - window], hypervolumes[-1]
    return before > 0.0 and now - before < LEAST_GROWTH * now


def next_time_of_day(time_of_day: str, now: datetime) -> float:
    """Return the next moment at which a clock on the wall shows a time.

    Parameters
    ----------
    time_of_day : str
        "HH:MM", 00:00 to 23:59.
    now : datetime
        The present, with its time zone, which is that of the clock on the wall.

    Returns
    -------
    float
        Later than `now` by a day at most, but for a change of the clocks [s since 1970, UTC].

    Raises
    ------
    ValueError
        If the text is no such time.
    """
    try:
        wanted = datetime.strptime(time_of_day, "%H:%M").time()  # noqa: DTZ007 - a time of day
    except ValueError as error:
        raise ValueError(
            f"The time must be given as HH:MM, from 00:00 to 23:59; found {time_of_day!r}."
        ) from error
    moment = datetime.combine(now.date(), wanted, tzinfo=now.tzinfo)
    return (moment if moment > now else moment + timedelta(days=1)).timestamp()


def _reached(done: int, limit: int | None) -> bool:
    return limit is not None and done >= limit


def _overrun(now: float, next_duration: float, limit: float | None) -> bool:
    return limit is not None and now + next_duration >= limit


def _left(limit: float | None, done: float, each: float) -> float | None:
    return None if limit is None else max(0.0, limit - done) * each
