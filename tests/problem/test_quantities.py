"""Quantities: the study's words and the numbers behind them."""

from __future__ import annotations

import math

import numpy as np
import pytest

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow, SideState
from optim.geometry.naca import naca_section
from optim.outcomes import Outcome
from optim.problem.quantities import (
    RECORDED_OF_A_CONDITION,
    RECORDED_OF_A_SECTION,
    STAGNATION_SIDES,
    TRANSITION_KINDS,
    flow_quantities,
    judged,
    section_quantity,
)
from optim.study.vocabulary import QUANTITIES

POINT = OperatingPoint(reynolds=1e6, cl=0.6)
FLOW = SectionFlow(
    point=POINT,
    outcome=Outcome.CONVERGED,
    panels=160,
    alpha=0.05,
    cl=0.6,
    cd=0.01,
    cd_friction=0.007,
    cd_pressure=0.003,
    cm_quarter=-0.05,
    x_cp=0.333,
    stagnation_x=0.01,
    stagnation_side="lower",
    cp_min=-1.5,
    cp_min_x=0.02,
    upper=SideState(0.4, "bubble", math.nan, (0.38, 0.42)),
    lower=SideState(),
    iterations=7,
    residual=1e-9,
)
FAILED = SectionFlow(point=POINT, outcome=Outcome.NOT_CONVERGED, panels=160, iterations=60)


def recorded(flow, *, at_maximum=False):
    values = flow_quantities(flow, at_maximum=at_maximum)
    return dict(zip(RECORDED_OF_A_CONDITION, values, strict=True))


def test_every_word_of_the_vocabulary_is_computed():
    """Flow words are recorded for each condition, section words measured, and nothing is lost."""
    section = naca_section("2412")
    for name, quantity in QUANTITIES.items():
        if quantity.of == "condition":
            assert name in recorded(FLOW, at_maximum=True)
        else:
            at = 0.3 if quantity.needs_at else None
            assert math.isfinite(section_quantity(section, name, at))
            assert quantity.needs_at or name in RECORDED_OF_A_SECTION


def test_values_are_those_of_the_flow():
    values = recorded(FLOW)
    assert values["lift_to_drag"] == pytest.approx(60.0)
    assert values["nose_down_moment"] == 0.05
    assert values["transition_upper"] == 0.4
    assert TRANSITION_KINDS[int(values["transition_kind_upper"])] == "bubble"
    assert TRANSITION_KINDS[int(values["transition_kind_lower"])] == "none"
    assert STAGNATION_SIDES[int(values["stagnation_side"])] == "lower"
    assert (values["bubble_upper_start"], values["bubble_upper_end"]) == (0.38, 0.42)
    assert math.isnan(values["bubble_lower_start"])


def test_maximum_lift_exists_only_where_it_was_looked_for():
    assert recorded(FLOW, at_maximum=True)["cl_max"] == 0.6
    assert math.isnan(recorded(FLOW)["cl_max"])


def test_a_nose_up_moment_is_no_nose_down_moment():
    up = SectionFlow(point=POINT, outcome=Outcome.CONVERGED, panels=160, cm_quarter=0.02)
    assert recorded(up)["nose_down_moment"] == 0.0


def test_a_failed_flow_has_no_number_but_its_cost():
    values = flow_quantities(FAILED, at_maximum=True)
    left = {n for n, v in zip(RECORDED_OF_A_CONDITION, values, strict=True) if np.isfinite(v)}
    assert left == {"iterations"}


def test_what_is_absent_is_judged_as_lying_at_the_edge():
    assert judged("transition_lower", math.nan, converged=True) == 1.0
    assert judged("bubble_lower_end", math.nan, converged=True) == 0.0
    assert math.isnan(judged("transition_lower", math.nan, converged=False))
    assert math.isnan(judged("x_cp", math.nan, converged=True))
    assert judged("transition_lower", 0.3, converged=True) == 0.3


def test_measures_of_a_published_section():
    """NACA 2412 by its definition: 12 % thick, 2 % camber at 40 %; nose radius 1.1019 t^2."""
    section = naca_section("2412")
    assert section_quantity(section, "thickness") == pytest.approx(0.12, rel=2e-3)
    assert section_quantity(section, "camber") == pytest.approx(0.02, rel=1e-3)
    assert section_quantity(section, "camber_x") == pytest.approx(0.4, abs=5e-3)
    assert section_quantity(section, "nose_radius") == pytest.approx(1.1019 * 0.12**2, rel=2e-2)
    assert section_quantity(section, "depth", 0.3) <= section_quantity(section, "thickness")


def test_a_depth_without_a_place_is_refused():
    with pytest.raises(ValueError, match="needs its place"):
        section_quantity(naca_section("0012"), "depth")
