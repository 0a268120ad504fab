"""The layer equations on prescribed edge speeds, and the slopes of a station's terms.

Eight laminar flows against finite-difference solutions of Prandtl's equation computed apart from
this program (tests/data/laminar_flows, each with its reference).
"""

import math

import numpy as np
import pytest

from optim.aerodynamics.interval import plain_interval
from optim.aerodynamics.laminar import STAGNATION_H, STAGNATION_THETA
from optim.aerodynamics.layer import (
    ENERGY,
    EXCHANGE,
    FRICTION,
    LAMINAR,
    SLOPES,
    TERMS,
    edge_state,
    energy_compressed,
    kinematic_shape,
    laminar_station,
    stress_at_equilibrium,
    turbulent_station,
)

FLOWS = {
    "howarth": lambda x: 1 - x,
    "tani2": lambda x: 1 - x**2,
    "tani4": lambda x: 1 - x**4,
    "tani8": lambda x: 1 - x**8,
    "cylinder": lambda x: 2 * np.sin(x),
    "cosine": np.cos,
    "curle": lambda x: x - x**3,
    "ripple": lambda x: 1 - 0.04 * np.sin(2 * np.pi * x),
}
FROM_STAGNATION = {"cylinder": 2.0, "curle": 1.0}
"""Flows that start at a stagnation point, and du/dx there; the others at a sharp leading edge."""

BLASIUS_H, BLASIUS_THETA = 2.59110, 0.664115
"""Schlichting, Boundary-Layer Theory (from memory)."""

RE = 1e6


def laminar_terms(x):
    out = np.zeros((TERMS, SLOPES))
    laminar_station(x[0], x[1], x[2], RE, 0.0, growing=True, out=out)
    return out


def march(name, xi):
    """March the laminar layer with the edge speed given: theta sqrt(Re) and H by station."""
    ln_u = np.log(FLOWS[name](xi))
    if name in FROM_STAGNATION:
        t, H = math.log(STAGNATION_THETA / math.sqrt(RE * FROM_STAGNATION[name])), STAGNATION_H
    else:
        t, H = math.log(BLASIUS_THETA * math.sqrt(xi[0] / (RE * math.exp(ln_u[0])))), BLASIUS_H
    x1 = np.array([t, t + math.log(H), ln_u[0], 0.0, xi[0]])
    a = laminar_terms(x1)
    rows = [x1]
    R, J = np.zeros(3), np.zeros((3, 10))
    for k in range(1, len(xi)):
        x2 = x1.copy()
        x2[2], x2[4] = ln_u[k], xi[k]
        for _ in range(40):
            b = laminar_terms(x2)
            plain_interval(LAMINAR, x1, x2, a, b, R, J)
            if np.max(np.abs(R)) < 1e-12:
                break
            step = np.linalg.solve(J[:2, [5, 6]], R[:2])
            x2[:2] -= step * min(1.0, 0.2 / np.max(np.abs(step)))
        assert np.max(np.abs(R)) < 1e-10, (name, xi[k])
        x1, a = x2, b
        rows.append(x1)
    rows = np.array(rows)
    return np.exp(rows[:, 0]) * math.sqrt(RE), np.exp(rows[:, 1] - rows[:, 0])


@pytest.fixture(scope="module")
def separation(table):
    rows = table("laminar_flows/separation.csv", None)
    return {r["case"]: float(r["xsep_n800_steps4000"]) for r in rows if r["case"] != "ripple"}


def stations(rows, end, count):
    """The table's places up to `end`, and `count` more; denser at the start."""
    inner = rows["x"][rows["x"] <= end]
    return inner, np.unique(np.r_[np.geomspace(inner[0] / 50, inner[-1], count), inner])


@pytest.mark.parametrize("name", list(FLOWS))
def test_laminar_flows_up_to_separation(name, table, separation):
    """Momentum thickness within 1.5 % up to 95 % of the way to separation (ripple: to its end)."""
    rows = table(f"laminar_flows/{name}.csv")
    inner, xi = stations(rows, 0.95 * separation.get(name, math.inf), 400)
    theta, H = march(name, xi)
    at = np.searchsorted(xi, inner)
    exact = rows[: len(inner)]
    assert len(inner) >= 9
    assert theta[at] == pytest.approx(exact["theta_sqrtRe"], rel=0.015)
    attached = inner <= 0.9 * separation.get(name, math.inf)
    assert H[at][attached] == pytest.approx(exact["H"][attached], rel=0.03)


@pytest.mark.parametrize("name", ["howarth", "cylinder"])
def test_the_march_is_of_second_order(name, separation):
    """Against itself on many stations, half way to separation."""
    end = 0.5 * separation[name]
    last = [march(name, np.geomspace(end / 200, end, n))[0][-1] for n in (26, 101, 1601)]
    assert math.log(abs(last[0] - last[2]) / abs(last[1] - last[2]), 4) > 1.8


@pytest.mark.parametrize("m", [-0.05, 0.0, 0.3, 1.0])
def test_power_law_flows_are_exact_on_two_stations(m):
    """u = x^m has one H, and theta grows as x^((1 - m)/2): the scheme keeps both."""
    xi = np.array([0.1, 0.2, 0.8])
    ln_u = m * np.log(xi)

    def state(H):
        """The first station with theta by momentum, and what is left of the energy equation."""
        x = np.array([0.0, math.log(H), ln_u[0], 0.0, xi[0]])
        wanted = (0.5 * (1 - m) + (H + 2) * m) / xi[0]
        x[:2] -= 0.5 * math.log(wanted / laminar_terms(x)[FRICTION, 0])
        terms = laminar_terms(x)
        return terms[ENERGY, 0] * xi[0] - terms[EXCHANGE, 0] * m, x

    low, high = (2.15, 2.75) if m >= 0 else (2.6, 3.4)
    for _ in range(60):
        middle = 0.5 * (low + high)
        if (state(low)[0] > 0) == (state(middle)[0] > 0):
            low = middle
        else:
            high = middle
    x1 = state(low)[1]
    R, J = np.zeros(3), np.zeros((3, 10))
    for k in (1, 2):
        x2 = x1.copy()
        rise = 0.5 * (1 - m) * math.log(xi[k] / x1[4])
        x2[:3] += [rise, rise, ln_u[k] - x1[2]]
        x2[4] = xi[k]
        plain_interval(LAMINAR, x1, x2, laminar_terms(x1), laminar_terms(x2), R, J)
        assert R[:2] == pytest.approx([0.0, 0.0], abs=1e-9)
        x1 = x2


def test_whitfield_shape_factors_by_hand():
    """M = 0.5, H = 2: Hk = (2 - 0.0725)/1.02825 = 1.8746; H* = (1.6 + 0.007)/1.0035 = 1.60140."""
    assert kinematic_shape(2.0, 0.25)[0] == pytest.approx(1.87454, abs=1e-5)
    assert energy_compressed(1.6, 0.25)[0] == pytest.approx(1.601395, abs=1e-6)


def test_edge_state_is_isentropic():
    """Tables of NACA Report 1135: T/T0 = 0.95238 at M = 0.5, so that u = 1.2 gives M = 0.606."""
    Me2, _, q, _ = edge_state(math.log(1.2), 0.25)
    T = 1 + 0.2 * 0.25 * (1 - 1.44)
    assert math.sqrt(Me2) == pytest.approx(1.2 * 0.5 / math.sqrt(T), rel=1e-12)
    assert math.exp(q) == pytest.approx(T**2.5 / T**0.76, rel=1e-12)
    assert edge_state(0.3, 0.0) == (0.0, 0.0, 0.0, 0.0)


def random_states(seed, count):
    """t, d, l, s, Re and M2, over what sections meet."""
    rng = np.random.default_rng(seed)
    for _ in range(count):
        H = rng.choice([rng.uniform(1.05, 2.1), rng.uniform(2.2, 4.0), rng.uniform(4.0, 12.0)])
        t = math.log(10 ** rng.uniform(-4, -2))
        x = np.array(
            [t, t + math.log(H), math.log(rng.uniform(0.4, 2.0)), math.log(rng.uniform(0.02, 0.3))]
        )
        yield x, 10 ** rng.uniform(5, 7.3), rng.choice([0.0, 0.04, 0.16])


@pytest.mark.parametrize("kind", ["laminar", "turbulent", "wake"])
def test_slopes_of_the_terms(kind, differences):
    """Every term of a station by t, d, l and s, at 150 random states."""

    def fill(x, Re, M2):
        out = np.zeros((TERMS, SLOPES))
        if kind == "laminar":
            laminar_station(x[0], x[1], x[2], Re, M2, growing=True, out=out)
        else:
            turbulent_station(x[0], x[1], x[2], x[3], Re, M2, kind == "wake", out)
        return out

    for x, Re, M2 in random_states(5, 150):
        out = fill(x, Re, M2)
        J = differences(lambda z, Re=Re, M2=M2: fill(z, Re, M2)[:, 0], x)
        size = np.abs(out[:, 1:]).max(axis=1, keepdims=True) + np.abs(out[:, :1]) + 1e-12
        assert np.max(np.abs(J - out[:, 1:]) / size) < 2e-6, (x, Re, M2)


def test_slopes_of_the_equilibrium_stress(differences):
    for x, Re, M2 in random_states(6, 60):
        J = differences(lambda z, Re=Re, M2=M2: [stress_at_equilibrium(*z, Re, M2)[0]], x[:3])
        found = np.array(stress_at_equilibrium(*x[:3], Re, M2)[1:])
        assert found == pytest.approx(J[0], rel=1e-5, abs=1e-6)


def test_slopes_of_edge_and_shape(differences):
    J = differences(lambda z: edge_state(z[0], 0.16)[::2], [0.3])
    assert np.array(edge_state(0.3, 0.16)[1::2]) == pytest.approx(J[:, 0], rel=1e-7)
    for function, value in ((kinematic_shape, 2.4), (energy_compressed, 1.6)):
        J = differences(lambda z, f=function: [f(*z)[0]], [value, 0.2])
        assert np.array(function(value, 0.2)[1:]) == pytest.approx(J[0], rel=1e-7)
