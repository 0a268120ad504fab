"""Constraints: margins are measured by each limit's own size."""

from __future__ import annotations

import math

import pytest

from optim.problem.constraints import ConstraintSpec, scale_of, shortfall


def limit(kind, value, scale):
    return ConstraintSpec("x", value, "", kind, scale, "thickness")


def test_margins_are_positive_inside_and_negative_outside():
    least, most = limit("min", 0.10, 0.10), limit("max", 0.10, 0.10)
    assert least.margin(0.12) == pytest.approx(0.2)
    assert least.margin(0.08) == pytest.approx(-0.2)
    assert most.margin(0.12) == pytest.approx(-0.2)
    assert least.margin(0.10) == most.margin(0.10) == 0.0


def test_the_scale_is_the_size_of_the_limit():
    assert scale_of("cl_max", 1.4, None) == 1.4
    assert scale_of("cm_quarter", -0.075, None) == 0.075


def test_a_limit_near_zero_is_measured_by_its_quantity():
    assert scale_of("cm_quarter", 0.0, None) == 0.02
    assert scale_of("thickness", 0.0, None) == 0.01


def test_least_scales_of_lengths_follow_the_unit():
    """A hundredth of a chord of 0.212 m is 2.12 mm."""
    assert scale_of("depth", 0.0, None, unit_size=0.212) == pytest.approx(0.00212)


def test_a_given_scale_goes_before_all_else():
    assert scale_of("cm_quarter", -0.075, 1e-3) == 1e-3


def test_equal_relative_violations_weigh_the_same():
    """A tenth short of 0.8 mm of edge and a tenth short of cl_max 1.4."""
    edge = limit("min", 0.0008, scale_of("trailing_edge_gap", 0.0008, None, 0.212))
    lift = limit("min", 1.4, scale_of("cl_max", 1.4, None))
    assert shortfall(edge.margin(0.9 * 0.0008)) == pytest.approx(0.1)
    assert shortfall(lift.margin(0.9 * 1.4)) == pytest.approx(0.1)


def test_shortfalls_are_never_negative_nor_missing():
    assert shortfall(0.3) == 0.0
    assert shortfall(-0.3) == 0.3
    assert shortfall(math.nan) == 0.0
