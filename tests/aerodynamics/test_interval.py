"""Slopes of every kind of interval, of the growth of N and of the place of transition."""

import math

import numpy as np
import pytest

from optim.aerodynamics.interval import (
    amplified,
    fraction_at,
    growth_rise,
    length_weights,
    plain_interval,
    relaxation_weight,
    transition_interval,
)
from optim.aerodynamics.layer import (
    LAMINAR,
    SLOPES,
    TERMS,
    TURBULENT,
    WAKE,
    laminar_station,
    turbulent_station,
)

XI = (4, 9)
"""Places of the lengths among the ten variables of an interval."""


def terms(x, kind, Re, M2):
    out = np.zeros((TERMS, SLOPES))
    if kind == LAMINAR:
        laminar_station(x[0], x[1], x[2], Re, M2, growing=True, out=out)
    else:
        turbulent_station(x[0], x[1], x[2], x[3], Re, M2, kind == WAKE, out)
    return out


def pairs(seed, count, laminar):
    """Two stations as ten variables, Re and M2: H, growth and steps as on sections."""
    rng = np.random.default_rng(seed)
    for _ in range(count):
        xi = rng.uniform(0.001, 0.5)
        t = math.log(10 ** rng.uniform(-3.7, -2.3))
        H1, H2 = (rng.uniform(2.2, 6.0, 2)) if laminar else (rng.uniform(1.15, 2.8, 2))
        s1, s2 = np.log(rng.uniform(0.03, 0.2, 2))
        l1, l2 = np.log(rng.uniform(0.8, 1.5, 2))
        t2 = t + rng.uniform(-0.05, 0.3)
        z = [t, t + math.log(H1), l1, s1, xi]
        z += [t2, t2 + math.log(H2), l2, s2, xi + 10 ** rng.uniform(-3, -1.3)]
        yield np.array(z), 10 ** rng.uniform(5, 7), rng.choice([0.0, 0.09])


def steps(z):
    h = np.full(10, 1e-6)
    h[list(XI)] = 1e-6 * z[4]
    return h


@pytest.mark.parametrize("kind", [LAMINAR, TURBULENT, WAKE], ids=["laminar", "turbulent", "wake"])
def test_slopes_of_a_plain_interval(kind, differences):
    for z, Re, M2 in pairs(1 + kind, 100, kind == LAMINAR):

        def residuals(z, Re=Re, M2=M2):
            R, J = np.zeros(3), np.zeros((3, 10))
            a, b = terms(z[:5], kind, Re, M2), terms(z[5:], kind, Re, M2)
            plain_interval(kind, z[:5].copy(), z[5:].copy(), a, b, R, J)
            return R, J

        J = residuals(z)[1]
        found = differences(lambda z, f=residuals: f(z)[0], z, steps(z))
        size = np.abs(J).max(axis=1, keepdims=True) + 1e-12
        assert np.max(np.abs(found - J) / size) < 1e-5, (z, Re, M2)


@pytest.mark.parametrize("fraction", [0.02, 0.4, 0.97])
def test_slopes_of_an_interval_that_turns_turbulent(fraction, differences):
    """By the ten variables of the two stations and by the fraction at which it turns."""
    for z, Re, M2 in pairs(7, 60, laminar=True):
        z[6] = z[5] + math.log(1.4 + 0.3 * abs(math.sin(z[0])))

        def residuals(v, Re=Re, M2=M2):
            R, J, by_f = np.zeros(3), np.zeros((3, 10)), np.zeros(3)
            a, b = terms(v[:5], LAMINAR, Re, M2), terms(v[5:10], TURBULENT, Re, M2)
            x1, x2 = v[:5].copy(), v[5:10].copy()
            before = np.zeros((3, 2))
            ahead_counts = False
            transition_interval(x1, x1, x2, a, b, v[10], ahead_counts, Re, M2, R, J, by_f, before)
            assert not before.any()
            return R, np.c_[J, by_f]

        v = np.r_[z, fraction]
        J = residuals(v)[1]
        found = differences(lambda v, f=residuals: f(v)[0], v, np.r_[steps(z), 1e-6])
        size = np.abs(J).max(axis=1, keepdims=True)
        assert np.max(np.abs(found - J) / size) < 1e-5, (z, Re, M2)


@pytest.mark.parametrize("fraction", [0.02, 0.4, 0.97])
def test_slopes_of_an_interval_that_turns_behind_another(fraction, differences):
    """With the laminar station ahead: by its t and d too, and by a shift of all lengths."""
    for z, Re, M2 in pairs(11, 60, laminar=True):
        z[6] = z[5] + math.log(1.4 + 0.3 * abs(math.sin(z[0])))
        step = 0.8 * (z[9] - z[4])
        ahead = (z[0] - 0.04, z[1] - 0.06)

        def residuals(v, Re=Re, M2=M2, step=step):
            R, J, by_f, before = np.zeros(3), np.zeros((3, 10)), np.zeros(3), np.zeros((3, 2))
            x1, x2 = v[:5].copy(), v[5:10].copy()
            x1[4] += v[13]
            x2[4] += v[13]
            x0 = np.array([v[11], v[12], 0.0, 0.0, x1[4] - step])
            a, b = terms(x1, LAMINAR, Re, M2), terms(x2, TURBULENT, Re, M2)
            ahead_counts = True
            transition_interval(x0, x1, x2, a, b, v[10], ahead_counts, Re, M2, R, J, by_f, before)
            return R, np.c_[J, by_f, before, J[:, XI[0]] + J[:, XI[1]]]

        v = np.r_[z, fraction, ahead, 0.0]
        J = residuals(v)[1]
        h = np.r_[steps(z), 1e-6, 1e-6, 1e-6, 1e-6 * z[4]]
        found = differences(lambda v, f=residuals: f(v)[0], v, h)
        kept = [k for k in range(14) if k not in XI]  # lengths only ever move together
        size = np.abs(J).max(axis=1, keepdims=True)
        assert np.max(np.abs(found - J)[:, kept] / size) < 1e-5, (z, Re, M2)


@pytest.mark.parametrize("fraction", [0.0, 1.0])
def test_an_interval_that_turns_at_an_end_is_of_one_kind(fraction):
    """Momentum, which no stress enters: turbulent from the first station at 0, laminar at 1."""
    z, Re, M2 = next(pairs(11, 1, laminar=True))
    z[6] = z[5] + math.log(1.5)
    R, J, by_f = np.zeros(3), np.zeros((3, 10)), np.zeros(3)
    a, b = terms(z[:5], LAMINAR, Re, M2), terms(z[5:], TURBULENT, Re, M2)
    x1, x2 = z[:5].copy(), z[5:].copy()
    before = np.zeros((3, 2))
    ahead_counts = False
    transition_interval(x1, x1, x2, a, b, fraction, ahead_counts, Re, M2, R, J, by_f, before)
    plain, K = np.zeros(3), np.zeros((3, 10))
    kind = LAMINAR if fraction == 1.0 else TURBULENT
    plain_interval(kind, x1, x2, terms(x1, kind, Re, M2), terms(x2, kind, Re, M2), plain, K)
    assert R[0] == pytest.approx(plain[0], abs=1e-12)


@pytest.mark.parametrize("L", [1e-8, 1e-3, 0.0499, 0.0501, 0.7, 4.0])
def test_weight_of_a_length_integrates_straight_lines_exactly(L, differences):
    """int g dlnxi of g = 1 and g = xi: the closed forms L and exp(L) - 1, lengths in xi1."""
    value = length_weights(1.0, math.exp(L))
    assert value[0] == pytest.approx(L, rel=1e-7)
    assert L + value[1] * math.expm1(L) == pytest.approx(math.expm1(L), rel=1e-6)
    if L > 1e-3:
        J = differences(lambda z: [length_weights(1.0, math.exp(z[0]))[k] for k in (1, 3)], [L])
        assert [value[2], value[4]] == pytest.approx(J[:, 0], rel=1e-5, abs=1e-8)


@pytest.mark.parametrize("x", [1e-3, 0.0499, 0.0501, 1.0, 8.0, 39.9, 40.1, 500.0])
def test_weight_of_a_relaxation_is_exact_for_an_exponential(x, differences):
    """y' = -y over a step x: (y1 - y2)/x = (1 - w) y1 + w y2 with y2 = y1 exp(-x)."""
    w, slope = relaxation_weight(x)
    assert -math.expm1(-x) / x == pytest.approx(1 - w + w * math.exp(-x), abs=1e-12)
    assert slope == pytest.approx(
        differences(lambda z: [relaxation_weight(z[0])[0]], [x], 1e-6 * x)[0, 0], rel=1e-5
    )


@pytest.mark.parametrize(
    ("A1", "A0", "ratio"), [(30.0, 20.0, 1.1), (30.0, 45.0, 0.9), (5.0, 60.0, 1.0)]
)
def test_slopes_of_the_growth(A1, A0, ratio, differences):
    rise, by_1, by_0 = growth_rise(A1, A0, ratio)
    J = differences(lambda z: [growth_rise(z[0], z[1], ratio)[0]], [A1, A0])
    assert [by_1, by_0] == pytest.approx(J[0], rel=1e-7, abs=1e-9)
    assert A1 + rise >= 0.0


def test_growth_extrapolated_is_exact_where_it_is_straight():
    """A = 2 + 3 x from 0: N = 2 x + 1.5 x^2, from stations at -0.1 and 0 with a step of 0.2."""
    rise = growth_rise(2.0, 1.7, 2.0)[0]
    for f in (0.3, 1.0):
        x = 0.2 * f
        assert amplified(0.5, 2.0, rise, 0.2, f) == pytest.approx(0.5 + 2 * x + 1.5 * x * x)


@pytest.mark.parametrize(
    ("N", "A1", "rise"), [(8.0, 20.0, 5.0), (8.0, 20.0, -12.0), (8.9, 0.5, 40.0)]
)
def test_place_of_transition_is_where_n_is_critical(N, A1, rise, differences):
    """The fraction against the amplification it inverts, and its slope as the solver uses it."""
    step, critical = 0.1, 9.0
    f = fraction_at(N, A1, rise, step, critical)
    assert 0.0 < f < 1.0
    assert amplified(N, A1, rise, step, f) == pytest.approx(critical, abs=1e-12)
    J = differences(lambda z: [fraction_at(z[0], z[1], z[2], step, critical)], [N, A1, rise])[0]
    slope = -1.0 / (step * (A1 + f * rise))
    expected = [slope, slope * step * f, slope * step * 0.5 * f * f]
    assert expected == pytest.approx(J, rel=1e-5)


def test_no_place_where_growth_does_not_reach():
    assert fraction_at(3.0, 10.0, 0.0, 0.1, 9.0) == -1.0
    assert fraction_at(3.0, 10.0, -10.0, 1.0, 9.0) == -1.0
    assert fraction_at(9.5, 10.0, 0.0, 0.1, 9.0) == 0.0
