"""The coupled flow against measurements: NACA 0012 tripped, and four sections at Re 9e6.

The figures are printed: `pytest -s -m published` shows them.
"""

import math

import numpy as np
import pytest

from optim.aerodynamics.operating_point import OperatingPoint
from optim.aerodynamics.sweep import sweep

pytestmark = pytest.mark.published


def say(text):
    print(text)  # noqa: T201  (figures for the reader, shown by pytest -s)


@pytest.fixture(scope="module")
def tripped(naca):
    """NACA 0012, Re 6e6, M 0.15, fixed at 5 %: the test's conditions, -4 to 10 degrees."""
    point = OperatingPoint(6e6, alpha=0.0, mach=0.15, trip_upper=0.05, trip_lower=0.05)
    flows, derived = sweep(naca("0012"), point, np.radians(np.arange(-5.0, 11.0)))
    assert all(flow.converged for flow in flows)
    return flows, derived


@pytest.fixture(scope="module")
def ladson(table):
    """Attached points of NASA TM-4074, all three grits."""
    rows = table("naca0012_tripped_re6e6.csv")
    return rows[(np.abs(rows["cl"]) <= 1.0) & (rows["alpha_deg"] < 15.0)]


def drag_at(flows, cl):
    """Computed drag at a lift, by a cubic through the four flows about it."""
    lifts = np.array([f.cl for f in flows])
    drags = np.array([f.cd for f in flows])
    near = np.argsort(np.abs(lifts - cl))[:4]
    return float(np.polyval(np.polyfit(lifts[near] - cl, drags[near], 3), 0.0))


def test_drag_at_zero_lift(tripped, ladson):
    """Measured: mean of the points within 0.05 of zero lift; they scatter by 1 % between grits."""
    measured = np.mean(ladson["cd"][np.abs(ladson["cl"]) < 0.05])
    computed = drag_at(tripped[0], 0.0)
    say(f"\ncd at zero lift: measured {measured:.5f}, computed {computed:.5f}")
    assert computed == pytest.approx(measured, rel=0.03)


def test_mean_drag_error_up_to_a_lift_of_one(tripped, ladson):
    """Compared at equal lift, so that the error of the angle does not enter."""
    errors = [drag_at(tripped[0], row["cl"]) / row["cd"] - 1 for row in ladson]
    size = np.mean(np.abs(errors))
    signed = np.mean(errors)
    say(f"\ncd to cl 1.0: mean error {size:.2%}, signed {signed:+.2%}, {len(errors)} points")
    assert len(errors) == 23
    assert size < 0.05


def test_lift_slope(tripped, ladson):
    """Straight lines over |alpha| < 8.5 deg. The slope is known to come out high; not tuned."""
    straight = np.abs(ladson["alpha_deg"]) < 8.5
    measured = np.polyfit(ladson["alpha_deg"][straight], ladson["cl"][straight], 1)[0]
    inside = [f for f in tripped[0] if abs(f.alpha) < math.radians(8.5)]
    computed = np.polyfit([math.degrees(f.alpha) for f in inside], [f.cl for f in inside], 1)[0]
    error = computed / measured - 1
    say(f"\nlift slope a degree: measured {measured:.4f}, computed {computed:.4f} ({error:+.1%})")
    assert abs(error) < 0.06


def characteristics(number, table):
    """Zero-lift angle [deg], cm about the aerodynamic centre, slope [1/deg] and centre. The table
    has 0006 and 0009 but no 0012: a symmetric section's angle and moment are zero, as theirs."""
    every = table("naca_characteristics_re9e6.csv", None)
    rows = [r for r in every if f"{r['section']:04d}" == number]
    if not rows:
        return 0.0, 0.0, math.nan, math.nan
    names = ("alpha_zero_lift_deg", "cm_ac", "cl_alpha_per_deg", "x_ac")
    return tuple(float(rows[0][name]) for name in names)


NOT_REPRODUCED = {"4412": (0.008, 0.0095)}
"""Sections whose moment about the aerodynamic centre is not within the 0.008 asked, and between
which errors it lies today: 4412 has -0.1023 against -0.093 (thin-aerofoil theory -0.106). The lower
bound makes the test fail once it is reproduced, so that the entry goes."""


@pytest.mark.parametrize("number", ["0012", "2412", "4412", "23012"])
def test_handbook_characteristics(number, naca, table):
    """NACA Report 824 as in DATCOM: Re 9e6, smooth. Zero-lift angles are read to 0.1 deg and
    scatter by 0.5 deg between sections of one mean line; cm by 0.003 to 0.005."""
    alpha_0, cm, slope, centre = characteristics(number, table)
    angles = np.radians(np.arange(-6.0, 9.0))
    flows, derived = sweep(naca(number), OperatingPoint(9e6, alpha=0.0), angles)
    assert all(flow.converged for flow in flows)
    zero = math.degrees(derived.alpha_zero_lift)
    moment = derived.cm_aerodynamic_centre
    say(
        f"\n{number}: alpha_0 {zero:.2f} ({alpha_0}), cm_ac {moment:.4f} ({cm}), slope a degree"
        f" {math.radians(derived.lift_slope):.4f} ({slope}), centre"
        f" {derived.aerodynamic_centre_x:.4f} ({centre})"
    )
    assert zero == pytest.approx(alpha_0, abs=0.5)
    least, greatest = NOT_REPRODUCED.get(number, (0.0, 0.008))
    assert least <= abs(moment - cm) <= greatest
