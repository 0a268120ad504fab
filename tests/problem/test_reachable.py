"""What random designs look like, and what a run is estimated to take."""

from __future__ import annotations

import numpy as np
import pytest

from optim.problem.reachable import POINTS_OF_A_PEAK, estimate, reachable
from optim.study.schema import SearchSettings


def test_the_baseline_lies_amid_what_is_reachable(make_problem):
    """NACA 2412 and a moderate freedom: 5 and 95 percentiles on both sides of 12 %."""
    found = reachable(make_problem(), designs=200)
    low, middle, high = found.percentiles["thickness"]
    assert low < 0.12 < high
    assert low < middle < high
    assert 0.9 < found.share <= 1.0
    assert found.percentiles["nose_radius"][0] > 0.0
    assert found.warnings == ()


def test_the_same_study_shows_the_same_shares(make_problem):
    assert reachable(make_problem(), designs=60) == reachable(make_problem(), designs=60)


def test_the_share_is_that_of_a_plain_count(make_problem):
    """The share that keeps the thickness, counted from the designs themselves."""
    problem = make_problem()
    found = reachable(problem, designs=100, seed=3)
    drawn = np.random.default_rng(3).uniform(
        problem.lower, problem.upper, (100, len(problem.lower))
    )
    thick = [problem.section(design).thickness for design in drawn]
    assert found.share == 1.0
    assert found.kept["thickness"] == np.mean(np.array(thick) >= 0.10)


def test_wide_bounds_are_warned_of(make_problem, study_text):
    found = reachable(make_problem(study_text.replace("freedom: 0.12", "freedom: 0.9")), 200)
    assert found.share < 0.5
    assert any("bounds are wide" in warning for warning in found.warnings)


def test_a_limit_out_of_reach_is_warned_of_with_the_nearest(make_problem, study_text):
    text = study_text.replace("min: 17 mm", "min: 60 mm")
    found = reachable(make_problem(text), designs=100)
    assert found.kept["depth@30%"] == 0.0
    (warning,) = found.warnings
    assert "no random design keeps depth@30% at least 0.06 m" in warning


def test_an_estimate_counts_every_condition(make_problem):
    """80 x 150 designs with two given lifts and a peak."""
    search = SearchSettings(population=80, generations=150)
    found = estimate(make_problem(), search, points_per_second=400.0)
    assert (found.evaluations, found.points) == (12_000, 12_000 * (2 + POINTS_OF_A_PEAK))
    assert found.seconds == pytest.approx(found.points / 400.0)


def test_a_budget_of_evaluations_ends_the_estimate(make_problem):
    search = SearchSettings(population=80, generations=150, evaluations=1000)
    assert estimate(make_problem(), search, 100.0).evaluations == 1000


def test_a_rate_of_nothing_is_refused(make_problem):
    with pytest.raises(ValueError, match="rate must be positive"):
        estimate(make_problem(), SearchSettings(), 0.0)
