"""A turbulent layer along edge speeds that are given, by the evaluator's own equations.

Each interval of `optim.aerodynamics.interval` is closed by Newton's method for momentum thickness,
displacement thickness and shear stress; the measured edge speed stands in the place of the outer
flow.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from optim.aerodynamics.interval import COLUMNS, DOWN, EQUATIONS, plain_interval
from optim.aerodynamics.layer import (
    FRICTION,
    SLOPES,
    TERMS,
    TURBULENT,
    station_terms,
    stress_at_equilibrium,
)
from optim.arrays import FloatArray

ITERATIONS = 40
"""A station takes 4 to 6."""

CLOSED = 1e-11
"""Residual of the logarithmic equations at which a station is closed [-]."""

LONGEST_STEP = 0.3
"""Of a logarithm in one iteration [-]."""

UNKNOWNS = [0, 1, 3]
"""Thickness, displacement thickness and stress; speed and length are given."""


@dataclass(frozen=True)
class Layer:
    """Momentum thickness, shape factor and friction on the local speed, station by station."""

    theta: FloatArray
    shape_factor: FloatArray
    skin_friction: FloatArray


def march(
    reynolds: float, length: FloatArray, speed: FloatArray, theta: float, shape_factor: float
) -> Layer:
    """Return the layer along a wall.

    Parameters
    ----------
    reynolds : float
        Of the unit of length and the unit of speed [-].
    length, speed : (n,) array
        Stations and the edge speeds there.
    theta, shape_factor : float
        At the first station, where the stress is in equilibrium.

    Returns
    -------
    Layer
        Not-a-number from a station on that does not close.
    """
    v = np.log(speed)
    t, d = math.log(theta), math.log(theta * shape_factor)
    stress = stress_at_equilibrium(t, d, v[0], reynolds, 0.0)[0]
    here = np.array([t, d, v[0], stress, length[0]])
    rows = np.full((len(length), 3), math.nan)
    terms = _terms(here, reynolds)
    rows[0] = _read(here, terms)
    for k in range(1, len(length)):
        there = here.copy()
        there[2], there[4] = v[k], length[k]
        found = _closed(here, there, terms, reynolds)
        if found is None:
            break
        here, terms = there, found
        rows[k] = _read(here, terms)
    return Layer(rows[:, 0], rows[:, 1], rows[:, 2])


def _terms(station: FloatArray, reynolds: float) -> FloatArray:
    out = np.zeros((TERMS, SLOPES))
    station_terms(TURBULENT, station, reynolds, 0.0, out)
    return out


def _closed(
    here: FloatArray, there: FloatArray, terms: FloatArray, reynolds: float
) -> FloatArray | None:
    """Solve for the state downstream, in place; return its terms, None if it does not close."""
    R, J = np.zeros(EQUATIONS), np.zeros((EQUATIONS, COLUMNS))
    for _ in range(ITERATIONS):
        after = _terms(there, reynolds)
        plain_interval(TURBULENT, here, there, terms, after, R, J)
        if np.max(np.abs(R)) < CLOSED:
            return after
        step = np.linalg.solve(J[:, [DOWN + k for k in UNKNOWNS]], R)
        there[UNKNOWNS] -= step * min(1.0, LONGEST_STEP / np.max(np.abs(step)))
    return None


def _read(station: FloatArray, terms: FloatArray) -> tuple[float, float, float]:
    theta = math.exp(station[0])
    return theta, math.exp(station[1] - station[0]), 2.0 * theta * float(terms[FRICTION, 0])
