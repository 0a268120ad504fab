"""Sections with closed-form measures, tabulated ordinates and independent judges."""

from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
import shapely

from optim.geometry.curve import Curve
from optim.geometry.section import Section

DATA = Path(__file__).parent / "data"


@dataclass(frozen=True)
class EllipseCurve(Curve):
    """Half axes 1/2 and b: area pi b / 2, nose radius 2 b**2, thickness 2 b at mid-chord."""

    b: float

    def derivatives(self, t, order):
        phi = np.pi * (t + 1.0)
        x = (0.5 * (1 + np.cos(phi)), -0.5 * np.sin(phi), -0.5 * np.cos(phi))
        y = (self.b * np.sin(phi), self.b * np.cos(phi), -self.b * np.sin(phi))
        return tuple(np.pi**k * np.stack([x[k], y[k]], axis=-1) for k in range(order + 1))


@dataclass(frozen=True)
class JoukowskiCurve(Curve):
    """z = zeta + 1/zeta of the circle about (-e, h) through 1, scaled to the chord on its axis."""

    e: float
    h: float = 0.0

    def raw(self, phi):
        centre = complex(-self.e, self.h)
        arm = 1.0 - centre
        zeta = centre + arm * np.exp(1j * phi)
        turned = 1j * arm * np.exp(1j * phi)
        z = zeta + 1 / zeta
        first = (1 - zeta**-2) * turned
        second = 2 * zeta**-3 * turned**2 + (1 - zeta**-2) * 1j * turned
        return z, first, second

    def derivatives(self, t, order):
        fine = self.raw(np.pi * np.linspace(0.5, 1.5, 200001))[0]
        nose = fine[np.argmax(np.abs(fine - 2.0))]
        factor = 1.0 / (2.0 - nose)
        z, first, second = self.raw(np.pi * (t + 1.0))
        values = ((z - nose) * factor, first * factor * np.pi, second * factor * np.pi**2)
        return tuple(np.stack([v.real, v.imag], axis=-1) for v in values[: order + 1])


@pytest.fixture(scope="session")
def ellipse():
    return lambda b: Section("ellipse", EllipseCurve(b))


@pytest.fixture(scope="session")
def joukowski():
    return lambda e, h=0.0: Section("Joukowski", JoukowskiCurve(e, h))


@pytest.fixture(scope="session")
def ordinates():
    """Columns x_c, y_c of a table in data/, in its own order."""

    def read(name):
        with (DATA / f"{name}.csv").open(encoding="utf-8") as lines:
            rows = [line.strip().split(",") for line in lines if not line.startswith("#")]
        return np.array([[float(row[-2]), float(row[-1])] for row in rows[1:]])

    return read


@pytest.fixture(scope="session")
def polygon():
    """The contour as a fine polygon of a general-purpose geometry library."""

    def of(section, pieces=4000):
        t = -np.cos(np.linspace(0.0, np.pi, pieces + 1))
        return shapely.Polygon(section.points(t))

    return of


@pytest.fixture(scope="session")
def differentiated():
    """First and second derivatives of a curve by central differences of the next lower one."""

    def of(curve, t, step=1e-6):
        first = (curve.point(t + step) - curve.point(t - step)) / (2 * step)
        second = (curve.first(t + step) - curve.first(t - step)) / (2 * step)
        return first, second

    return of
