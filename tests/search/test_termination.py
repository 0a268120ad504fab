"""When a run ends."""

from dataclasses import replace
from datetime import UTC, datetime, timedelta, timezone

import pytest

from optim.search.termination import Ending, Limits, Progress, next_time_of_day, stalled

PROGRESS = Progress(
    evaluations=200, elapsed=100.0, now=5000.0, last_duration=10.0, hypervolumes=[0.0, 1.0, 2.0]
)


@pytest.mark.parametrize(
    ("limits", "ending"),
    [
        (Limits(), None),
        (Limits(generations=4, evaluations=201, wall_time=110.5, until=5010.5), None),
        (Limits(generations=3), Ending.GENERATIONS),
        (Limits(evaluations=200), Ending.EVALUATIONS),
        (Limits(evaluations=150), Ending.EVALUATIONS),
        (Limits(wall_time=110.0), Ending.WALL_TIME),
        (Limits(until=5010.0), Ending.UNTIL),
        (Limits(stall=1), None),
    ],
)
def test_each_limit_ends_the_run_at_its_place(limits, ending):
    assert limits.ending(PROGRESS) == ending


def test_stalled_run_ends():
    still = replace(PROGRESS, hypervolumes=[2.0, 2.0, 2.001])
    assert Limits(stall=2).ending(still) is Ending.STALLED


@pytest.mark.parametrize(
    ("limits", "seconds"),
    [
        (Limits(generations=9), 200.0),  # six generations of 33.3 s
        (Limits(evaluations=500), 150.0),  # three hundred designs of 0.5 s
        (Limits(generations=9, wall_time=130.0), 30.0),
        (Limits(generations=9, until=5020.0), 20.0),
        (Limits(generations=2), 0.0),
        (Limits(stall=5), None),
    ],
)
def test_time_left(limits, seconds):
    assert limits.remaining(PROGRESS) == (None if seconds is None else pytest.approx(seconds))
    assert limits.remaining(replace(PROGRESS, hypervolumes=[], evaluations=0)) is None


def test_no_limit_but_the_clock_reads_the_clock():
    """Generations, evaluations and stall give the same answer at any hour."""
    limits = Limits(generations=9, evaluations=900, stall=2)
    later = replace(PROGRESS, elapsed=1e9, now=1e12, last_duration=1e6)
    assert limits.ending(PROGRESS) == limits.ending(later)


@pytest.mark.parametrize(
    ("hypervolumes", "expected"),
    [
        ([], False),
        ([5.0, 5.0, 5.0], False),  # the window of three is not full
        ([5.0, 5.0, 5.0, 5.0], True),
        ([0.0, 0.0, 0.0, 0.0, 0.0], False),  # still looking for a feasible design
        ([0.0, 5.0, 5.0, 5.0], False),  # the window begins before the first one
        ([0.0, 5.0, 5.0, 5.0, 5.0], True),
        ([1.0, 4.996, 4.997, 4.998, 5.0], True),  # 0.08 % growth
        ([1.0, 4.994, 4.997, 4.998, 5.0], False),  # 0.12 % growth
    ],
)
def test_stall(hypervolumes, expected):
    assert stalled(hypervolumes, 3) is expected


def test_hand_given_limits_take_the_place_of_the_study():
    study = Limits(generations=100, wall_time=3600.0)
    assert study.overridden(None, None) == study
    assert study.overridden(7, None) == Limits(generations=7, wall_time=3600.0)
    assert study.overridden(None, 9e9) == Limits(generations=100, until=9e9)


def test_next_time_of_day_is_today_or_tomorrow():
    zone = timezone(timedelta(hours=2))
    evening = datetime(2027, 1, 31, 22, 15, tzinfo=zone)
    assert (
        next_time_of_day("23:00", evening) == datetime(2027, 1, 31, 21, 0, tzinfo=UTC).timestamp()
    )
    assert next_time_of_day("07:30", evening) == datetime(2027, 2, 1, 5, 30, tzinfo=UTC).timestamp()
    assert next_time_of_day("22:15", evening) == (evening + timedelta(days=1)).timestamp()


@pytest.mark.parametrize("text", ["7", "24:00", "07:60", "seven", "07:00:00", ""])
def test_wrong_times_of_day_are_refused(text):
    with pytest.raises(ValueError, match="HH:MM"):
        next_time_of_day(text, datetime(2027, 1, 1, tzinfo=UTC))


def test_every_ending_has_a_sentence():
    assert all(ending.sentence.endswith(".") for ending in Ending)
