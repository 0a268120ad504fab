"""What a session is given, and what is recorded of it."""

import json
import time
from datetime import datetime

import pytest

from optim.archive.reader import open_run
from optim.problem.problem import Problem
from optim.runner.executors import THREADS
from optim.runner.records import conditions_table
from optim.runner.resume import resume_run
from optim.runner.start import SessionSettings, limits_of, start_run, with_search
from optim.study.load import parse_study


def test_given_search_settings_are_recorded_with_the_study(analytic):
    study = analytic.study()
    changed = with_search(study, seed=9, generations=None, population=20)
    assert (changed.search.seed, changed.search.population) == (9, 20)
    assert changed.search.generations == study.search.generations
    assert changed.text == study.text
    assert parse_study(changed.resolved_text()) == changed
    assert study.search.seed == 3


@pytest.mark.parametrize("changes", [{"seed": -1}, {"generations": 0}, {"population": 3}])
def test_given_search_settings_are_checked(analytic, changes):
    with pytest.raises(ValueError, match=next(iter(changes))):
        with_search(analytic.study(), **changes)


def test_limits_are_those_of_the_study_unless_given(analytic):
    search = analytic.study(generations="9, evaluations: 500, wall_time: 60.0, stall: 4").search
    limits = limits_of(search, SessionSettings(1))
    assert (limits.generations, limits.evaluations) == (9, 500)
    assert (limits.wall_time, limits.until, limits.stall) == (60.0, None, 4)
    given = limits_of(search, SessionSettings(1, generations=12, until="07:30"))
    assert (given.generations, given.wall_time) == (12, None)
    shown = datetime.fromtimestamp(given.until).astimezone()
    assert f"{shown:%H:%M}" == "07:30"
    assert 0.0 < given.until - time.time() <= 25 * 3600.0


def test_time_of_day_of_the_study_is_the_next_one(analytic):
    study = with_search(analytic.study(), until="06:00", wall_time=100.0)
    limits = limits_of(study.search, SessionSettings(1))
    assert 0.0 < limits.until - time.time() <= 25 * 3600.0
    assert limits.wall_time == 100.0


def test_wrong_time_of_day_is_refused_before_anything_starts(analytic, tmp_path):
    with pytest.raises(ValueError, match="HH:MM"):
        start_run(
            analytic.study(),
            tmp_path / "r.h5",
            SessionSettings(1, until="7"),
            print,
            analytic.build,
        )


def test_sessions_are_recorded_with_what_computed_them(analytic, tmp_path):
    run, study = tmp_path / "run.h5", analytic.study(generations=2)
    start_run(study, run, SessionSettings(1, generations=1), build=analytic.build)
    resume_run(run, SessionSettings(2), build=analytic.build)
    with open_run(run) as recorded:
        first, second = (session["provenance"] for session in recorded.sessions())
        assert recorded.header.provenance == first
        assert recorded.header.study_text == study.text
        assert parse_study(recorded.header.resolved_text) == study
        assert recorded.header.algorithm == "nsga3"
    assert (first["workers"], second["workers"]) == (1, 2)
    assert first["seed"] == 3
    assert first["digests"]["study"] == study.fingerprint()
    assert len(first["digests"]["kernels"]) == 64
    assert {name: first["environment"][name] for name in THREADS} == dict.fromkeys(THREADS, "1")


def test_conditions_are_recorded_resolved(analytic):
    problem = analytic.build(analytic.STUDY)
    assert isinstance(problem, Problem)
    survey, loiter, slow = json.loads(conditions_table(problem))
    assert (survey["name"], survey["speed"], survey["cl"]) == ("survey", 20.0, 0.5)
    assert survey["alpha"] is None
    assert loiter["reynolds"] == pytest.approx(15.0 * 0.2 * 1.225 / 1.789e-5, rel=2e-3)
    assert slow["maximum"] is True
    assert slow["cl"] is None
