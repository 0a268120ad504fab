"""Conditions: flight states resolved to operating points, and what disagrees.

Reference values: ISO 2533 air worked by hand for an invented survey wing (500 m, 10 K warm:
density 1.128 kg/m3, viscosity 1.615e-5 m2/s) and an invented club glider (1000 m); ITTC fresh
water at 15 C. Mack's turbulence law, AGARD CP-224, 1977, FROM MEMORY.
"""

from __future__ import annotations

import json
import math

import pytest

from optim.errors import StudyError
from optim.problem.conditions import mack_n_factor, resolve
from optim.study.schema import Study

SURVEY = {
    "study": "survey",
    "section": {"shape": "cst", "baseline": "naca:2412"},
    "chord": "212 mm",
    "air": {"altitude": "500 m", "warmer_than_standard": "10 K"},
    "craft": {"mass": "6.0 kg", "wing_area": "0.55 m^2"},
    "objectives": [{"minimise": "cd", "at": "survey"}, {"minimise": "area"}],
}


def study(conditions, **changes):
    data = {**SURVEY, "conditions": conditions, **changes}
    return Study.model_validate({key: value for key, value in data.items() if value is not None})


def resolved(state, **changes):
    return resolve(study({"survey": state}, **changes))[0]


def faults_of(conditions, **changes):
    with pytest.raises(StudyError) as caught:
        resolve(study(conditions, **changes))
    return caught.value.faults


@pytest.mark.parametrize(
    ("speed", "cl", "reynolds"),
    [("12.5 m/s", 1.21, 1.64e5), ("14.5 m/s", 0.90, 1.90e5), ("18 m/s", 0.59, 2.36e5),
     ("25 m/s", 0.30, 3.28e5)],
)  # fmt: skip
def test_a_survey_wing_in_level_flight(speed, cl, reynolds):
    """Lift and Reynolds number to the figures worked by hand."""
    condition = resolved({"speed": speed})
    assert condition.cl == pytest.approx(cl, abs=6e-3)
    assert condition.reynolds == pytest.approx(reynolds, rel=3e-3)
    assert condition.density == pytest.approx(1.128, abs=5e-4)
    assert condition.viscosity / condition.density == pytest.approx(1.615e-5, abs=5e-9)
    assert condition.n_factor == 9.0
    assert condition.point.cl == condition.cl


def test_lift_carries_the_weight():
    """rho V^2 S cl / 2 = n m g, whatever the numbers."""
    condition = resolved({"speed": "40 m/s", "load_factor": 1.31})
    lift = 0.5 * condition.density * condition.speed**2 * 0.55 * condition.cl
    assert lift == pytest.approx(1.31 * 6.0 * 9.80665, rel=1e-12)


def test_mach_is_speed_over_sound():
    """18 m/s in air of 294.9 K: sound by sqrt(1.4 x 287.053 x 294.9)."""
    expected = 18.0 / math.sqrt(1.4 * 287.05287 * (288.15 - 3.25 + 10.0))
    assert resolved({"speed": "18 m/s"}).mach == pytest.approx(expected, rel=1e-12)


def test_a_reynolds_number_alone_gives_the_speed():
    condition = resolved({"reynolds": 2.36e5})
    assert condition.speed == pytest.approx(18.0, rel=3e-3)
    assert condition.reynolds == 2.36e5
    assert condition.mach == 0.0


def test_a_reynolds_number_without_a_medium_needs_no_speed():
    condition = resolved({"reynolds": 1e6, "lift": 0.5}, air=None, craft=None)
    assert (condition.reynolds, condition.cl) == (1e6, 0.5)
    assert math.isnan(condition.speed)
    assert math.isnan(condition.density)


def test_a_stated_condition_has_no_missing_numbers():
    """What JSON is written from: None in place of not-a-number."""
    stated = resolved({"speed": "12.5 m/s", "lift": "maximum"}).stated()
    assert stated["cl"] is None
    assert stated["maximum"] is True
    assert stated["speed"] == 12.5
    assert json.loads(json.dumps(stated, allow_nan=False)) == stated


def test_an_angle_takes_the_place_of_lift():
    condition = resolved({"speed": "18 m/s", "alpha": "5 deg"})
    assert condition.point.alpha == pytest.approx(math.radians(5.0))
    assert condition.point.cl is None
    assert math.isnan(condition.cl)


def test_a_peak_is_sought_from_no_lift_at_all():
    condition = resolved({"speed": "12.5 m/s", "lift": "maximum"})
    assert condition.maximum
    assert math.isnan(condition.cl)
    assert condition.point.reynolds == pytest.approx(1.64e5, rel=3e-3)


def test_transition_and_n_factor_reach_the_point():
    state = {"speed": "18 m/s", "transition": {"upper": "5 %", "lower": "10 %"}, "n_factor": 11}
    point = resolved(state).point
    assert (point.trip_upper, point.trip_lower, point.n_factor) == (0.05, 0.10, 11.0)


def test_water_is_incompressible():
    condition = resolved(
        {"speed": "8 m/s", "lift": 0.24}, air=None, craft=None, chord="130 mm",
        water={"temperature": "15 degC", "salt": True},
    )  # fmt: skip
    assert condition.reynolds == pytest.approx(8.0 * 0.13 / 1.1892e-6, rel=1e-3)
    assert condition.mach == 0.0


def test_a_condition_may_have_its_own_air():
    """Sea level for the stall, 1000 m for the rest: densities 1.225 and 1.112."""
    high = {"altitude": "1000 m"}
    low = resolved({"speed": "80 km/h", "air": {"altitude": "0 m"}}, air=high)
    assert low.density == pytest.approx(1.225, abs=5e-4)
    assert resolved({"speed": "80 km/h"}, air=high).density == pytest.approx(1.1116, abs=5e-4)


@pytest.mark.published
@pytest.mark.parametrize(
    ("percent", "N"), [(0.070, 9.0), (0.1, 8.15), (0.161, 7.0), (0.563, 4.0), (1.97, 1.0)]
)
def test_mack_s_exponent(percent, N):
    assert mack_n_factor(percent / 100.0) == pytest.approx(N, abs=0.01)


def test_turbulence_gives_the_exponent_by_mack():
    assert resolved({"speed": 18.0}, turbulence="0.1 %").n_factor == mack_n_factor(0.001)


def test_a_reynolds_number_that_agrees_is_kept():
    assert resolved({"speed": "18 m/s", "reynolds": 2.37e5}).reynolds == 2.37e5


def test_all_disagreements_are_told_at_once():
    """Each with its path: Reynolds number, Mach number, too slow to fly, supersonic."""
    found = faults_of(
        {
            "survey": {"speed": "18 m/s", "reynolds": 2.4e5},
            "fast": {"speed": "18 m/s", "mach": 0.2},
            "crawl": {"speed": "2 m/s"},
            "dive": {"speed": "390 m/s"},
        }
    )
    assert [fault.path for fault in found] == [
        ("conditions", "survey", "reynolds"),
        ("conditions", "fast", "mach"),
        ("conditions", "crawl", "speed"),
        ("conditions", "dive", "speed"),
    ]
    assert "accepted is within 1 %" in found[0].message
    assert all("accepted is" in fault.message for fault in found)


def test_a_reynolds_number_outside_the_method_is_a_fault():
    """0.5 m/s on 212 mm is about 6600."""
    found = faults_of({"survey": {"speed": "0.5 m/s", "lift": 0.5}})
    assert found[0].path == ("conditions", "survey", "speed")
    assert "Reynolds number" in found[0].message


def test_turbulence_beyond_growing_waves_is_a_fault():
    found = faults_of({"survey": {"speed": "18 m/s"}}, turbulence="2.5 %")
    assert [fault.path for fault in found] == [("turbulence",)]


def test_level_flight_without_a_craft_is_a_fault():
    found = faults_of({"survey": {"speed": "18 m/s"}}, craft=None)
    assert [fault.path for fault in found] == [("conditions", "survey", "lift")]
