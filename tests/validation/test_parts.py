"""The parts of a comparison, against cases whose answer is known."""

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.stats import spearmanr

from optim.aerodynamics.operating_point import OperatingPoint
from optim.validation.case import FROM_MEMORY, NO_REASON, half_of, judge
from optim.validation.flight import Model, mean_error, naca, on_side, pressure
from optim.validation.prescribed import march
from optim.validation.record import read_record
from optim.validation.sources.e387 import low_drag
from optim.validation.sources.handbook_report824 import _rank_correlation
from optim.validation.sources.naca4412_cr152263 import _lift


@pytest.fixture(scope="module")
def record():
    return read_record("naca0012_tm4074")


@pytest.fixture(scope="module")
def section():
    return naca("0012")


class TestJudge:
    @pytest.mark.parametrize(
        ("computed", "verdict"),
        [
            (1.62, "reproduced"),
            (1.62 * 1.058, "reproduced"),
            (1.62 * 0.94, "not reproduced"),
            (math.nan, "not reproduced"),
        ],
    )
    def test_verdict_is_by_the_tolerance_of_5_9_percent(self, record, computed, verdict):
        assert judge(record, "cl_max", 1.62, computed).verdict == verdict

    def test_from_memory_and_shown_decide_nothing(self, record):
        assert judge(record, "cl_max", 1.6, 9.0, status=FROM_MEMORY).verdict == "shown"
        assert judge(record, "cl_max", 1.6, 9.0, shown=True).verdict == "shown"

    def test_reason_of_a_condition_goes_before_that_of_the_quantity(self, record):
        told = replace(record, reasons={"drag_at_angle 12 deg": "near", "drag_at_angle": "far"})
        found = [judge(told, "drag_at_angle", 1.0, 2.0, of=f"{a} deg").reason for a in (12, 15)]
        assert found == ["near", "far"]
        assert judge(told, "cl_max", 1.0, 2.0).reason == NO_REASON

    def test_differences_keep_their_sign_and_relative_errors_the_measured_value(self, record):
        assert judge(record, "lift_slope", 0.108, 0.107).error == pytest.approx(-0.001)
        assert judge(record, "cl_max", -2.0, -1.0).error == pytest.approx(0.5)

    def test_halves_are_by_section_whatever_the_condition(self):
        assert half_of("E387") == half_of("NACA 0012") == "calibration"
        assert half_of("S809") == half_of("NACA 4412") == "judged"


def test_a_missing_answer_is_a_missing_mean():
    assert math.isnan(mean_error(np.array([1.0, 1.0]), np.array([1.0, math.nan])))
    assert mean_error(np.array([1.0, 2.0]), np.array([1.1, 1.8])) == pytest.approx(0.1)


def test_rank_correlation_is_spearmans():
    a, b = np.array([1.5, 1.6, 1.6, 1.3, 1.9]), np.array([1.4, 1.7, 1.5, 1.45, 1.8])
    assert _rank_correlation(a, b) == pytest.approx(spearmanr(a, b).statistic, abs=1e-12)


def test_low_drag_range_is_contiguous_about_the_least():
    cd = np.array([1.3, 1.1, 1.0, 1.19, 1.21, 1.1])
    assert low_drag(np.arange(6.0), cd).tolist() == [False, True, True, True, False, False]


def test_lift_of_pressures_is_that_of_a_load():
    """A plate with cp -1 above and +1 below has cn 2, and cl = 2 cos(13.87 deg)."""
    x = np.linspace(0.0, 1.0, 11)
    table = {
        "x_c": np.r_[x[::-1], x],
        "y_c": np.zeros(22),
        "cp": np.r_[np.ones(11), -np.ones(11)],
    }
    side = np.array(["lower"] * 11 + ["upper"] * 11)
    assert _lift(table, side) == pytest.approx(2.0 * math.cos(math.radians(13.87)))


class TestFlight:
    def test_sides_are_told_by_the_nose_and_not_by_the_stagnation_point(self, section):
        """At 6 deg the stagnation point of NACA 0012 lies below: still the suction peak is above,
        and both sides' pressures at -6 deg are those at 6 deg, exchanged."""
        point = OperatingPoint(6e6, alpha=0.0, trip_upper=0.05, trip_lower=0.05)
        up, down = section.angles(point, [6.0])[0], section.angles(point, [-6.0])[0]
        x = np.linspace(0.02, 0.98, 25)
        assert pressure(up, "upper", x) == pytest.approx(pressure(down, "lower", x), abs=1e-6)
        assert pressure(up, "upper", np.array([0.02]))[0] < -1.5
        assert np.count_nonzero(on_side(up, "upper") & on_side(up, "lower")) == 1

    def test_lifts_are_met_in_the_order_asked(self, section):
        point = OperatingPoint(6e6, alpha=0.0)
        wanted = np.array([0.4, -0.3, 0.0, 0.8])
        found = [flow.cl for flow in section.lifts(point, wanted)]
        assert found == pytest.approx(wanted, abs=1e-6)

    def test_angles_are_counted_from_the_chord_of_the_report(self):
        """The ordinates of Model A are turned by 0.06 deg when put on their own chord line."""
        section = read_record("model_a").sides()
        assert abs(math.degrees(section.rotation)) == pytest.approx(0.06, abs=0.01)
        flown = Model(section, None)
        assert flown.degrees(math.radians(3.0) + section.rotation) == pytest.approx(3.0)


class TestPrescribed:
    def test_flat_plate_grows_as_its_own_friction_says(self):
        """Without a pressure gradient d(theta)/dx = cf/2: von Karman's momentum equation."""
        x = np.linspace(1.0, 5.0, 400)
        layer = march(2e6, x, np.ones(400), 2e-3, 1.4)
        growth = np.trapezoid(0.5 * layer.skin_friction, x)
        assert layer.theta[-1] - layer.theta[0] == pytest.approx(growth, rel=1e-4)

    def test_momentum_balance_in_adverse_pressure(self):
        """d(theta u^2)/dx = cf u^2/2 - delta* u du/dx, integrated on its own."""
        x = np.linspace(1.0, 2.0, 2000)
        u = 1.0 - 0.15 * (x - 1.0)
        layer = march(2e6, x, u, 3e-3, 1.4)
        displacement = layer.theta * layer.shape_factor
        force = 0.5 * layer.skin_friction * u**2 - displacement * u * np.gradient(u, x)
        rise = layer.theta[-1] * u[-1] ** 2 - layer.theta[0] * u[0] ** 2
        assert rise == pytest.approx(np.trapezoid(force, x), rel=1e-3)

    def test_from_a_station_that_does_not_close_on_it_is_not_a_number(self):
        """An edge that stops at once leaves the layer nowhere to go."""
        x = np.array([1.0, 1.01, 1.02])
        layer = march(2e6, x, np.array([1.0, 1e-6, 1e-6]), 3e-3, 1.4)
        assert math.isfinite(layer.theta[0])
        assert math.isnan(layer.theta[-1])
