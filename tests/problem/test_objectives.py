"""Objectives: what a weighted mean means."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from optim.problem.objectives import ObjectiveSpec, weighted_mean

GLIDE = ObjectiveSpec(
    name="lift_to_drag@survey+loiter",
    sense="maximise",
    unit="",
    quantity="lift_to_drag",
    shares=(("survey", 0.7), ("loiter", 0.3)),
)


def test_lift_to_drag_is_averaged_as_drag_per_lift():
    """1 / sum(w cd/cl), by hand: cl 0.6, cd 0.01 for 70 %; cl 0.9, cd 0.012 for 30 %."""
    value = GLIDE.value({"survey": 0.6 / 0.01, "loiter": 0.9 / 0.012})
    assert value == pytest.approx(1.0 / (0.7 * 0.01 / 0.6 + 0.3 * 0.012 / 0.9), rel=1e-14)


def test_other_quantities_are_averaged_as_they_are():
    assert weighted_mean([0.01, 0.02], [0.25, 0.75], harmonic=False) == pytest.approx(0.0175)


@given(st.lists(st.floats(1.0, 300.0), min_size=1, max_size=5))
def test_a_mean_lies_between_its_parts(values):
    shares = [1.0 / len(values)] * len(values)
    for harmonic in (False, True):
        mean = weighted_mean(values, shares, harmonic=harmonic)
        assert min(values) * (1 - 1e-12) <= mean <= max(values) * (1 + 1e-12)


def test_a_missing_part_leaves_no_mean():
    assert math.isnan(GLIDE.value({"survey": 60.0, "loiter": math.nan}))


def test_no_lift_at_one_condition_leaves_no_ratio():
    assert GLIDE.value({"survey": 60.0, "loiter": 0.0}) == 0.0


def test_minimised_turns_a_gain_round_and_back():
    assert GLIDE.minimised(80.0) == -80.0
    assert GLIDE.minimised(GLIDE.minimised(80.0)) == 80.0
