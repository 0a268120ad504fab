"""Sections whose potential flow is known in closed form, by conformal maps of a circle.

Karman, Th. von, Trefftz, E., Z. Flugtechnik und Motorluftschiffahrt 9, 1918 (Joukowski: exponent
2); van de Vooren, A. I., as in Katz, J., Plotkin, A., Low-Speed Aerodynamics, 2nd ed., 2001, ch. 6.
Lift by Kutta and Joukowski, moment by Blasius. Both maps keep the far field: dz/dzeta -> 1.
"""

from dataclasses import dataclass, field

import numpy as np
from scipy.optimize import minimize_scalar

FINE = 4096


@dataclass
class MappedSection:
    """A map of the circle of `radius` about `centre`; its edge is the image of zeta = 1."""

    centre: complex
    exponent: float
    eps: float | None = None  # van de Vooren's thickness parameter; None for Karman and Trefftz
    radius: float = field(init=False)
    edge_angle: float = field(init=False)

    def __post_init__(self):
        self.radius = abs(1.0 - self.centre)
        self.edge_angle = float(np.angle(1.0 - self.centre))
        self.edge = self.place(np.array([self.edge_angle]))[0]
        grid = self.edge_angle + np.linspace(0.7 * np.pi, 1.3 * np.pi, 2001)
        guess = grid[np.argmax(abs(self.place(grid) - self.edge))]
        self.nose_angle = minimize_scalar(
            lambda theta: -abs(self.place(np.array([theta]))[0] - self.edge),
            bounds=(guess - 0.01, guess + 0.01),
            method="bounded",
            options={"xatol": 1e-12},
        ).x
        self.nose = self.place(np.array([self.nose_angle]))[0]
        self.chord = abs(self.edge - self.nose)
        self.turn = float(np.angle(self.edge - self.nose))

    def map(self, zeta):
        """Return z and dz/dzeta."""
        n = self.exponent
        if self.eps is None:
            w = (zeta - 1.0) / (zeta + 1.0)
            high = w**n
            slope = 2 * n * n * w ** (n - 1) / (1 - high) ** 2 * 2 / (zeta + 1.0) ** 2
            return n * (1 + high) / (1 - high), slope
        w = (zeta - 1.0) / (zeta - self.eps)
        return (zeta - 1.0) * w ** (n - 1), w ** (n - 1) * (n - (n - 1) * w)

    def place(self, theta):
        return self.map(self.centre + self.radius * np.exp(1j * theta))[0]

    def contour(self, theta):
        """Points on the chord line, chord 1, shape (n, 2)."""
        z = (self.place(theta) - self.nose) * np.exp(-1j * self.turn) / self.chord
        return np.stack([z.real, z.imag], axis=-1)

    def angles(self, panels):
        """Angles on the circle, even, from the upper edge to the lower one."""
        return self.edge_angle + np.linspace(0.0, 2 * np.pi, panels + 1)

    def nodes(self, panels):
        nodes = self.contour(self.angles(panels))
        nodes[0] = nodes[-1] = 1.0, 0.0
        return nodes

    def speed(self, theta, alpha):
        """Signed along increasing theta; not at a finite edge angle's edge, where it is 0/0."""
        a = alpha + self.turn
        slope = self.map(self.centre + self.radius * np.exp(1j * theta))[1]
        return -2 * (np.sin(theta - a) - np.sin(self.edge_angle - a)) / abs(slope)

    def lift(self, alpha):
        sine = np.sin(alpha + self.turn - self.edge_angle)
        return 8 * np.pi * self.radius * sine / self.chord

    def moment(self, alpha):
        """Nose up, about a quarter of the chord, by Blasius on a circle well outside."""
        a = alpha + self.turn
        theta = np.linspace(0.0, 2 * np.pi, FINE, endpoint=False)
        arm = 3 * self.radius * np.exp(1j * theta)
        z, slope = self.map(self.centre + arm)
        circulation = 4 * np.pi * self.radius * np.sin(a - self.edge_angle)
        stream = np.exp(-1j * a) - self.radius**2 * np.exp(1j * a) / arm**2
        w = stream + 1j * circulation / (2 * np.pi * arm)
        quarter = self.nose + 0.25 * (self.edge - self.nose)
        integral = np.mean((z - quarter) * w**2 / slope * 1j * arm) * 2 * np.pi
        return integral.real / self.chord**2

    def stagnation(self, alpha):
        """The stagnation point at the nose."""
        a = alpha + self.turn
        return self.contour(np.array([np.pi + 2 * a - self.edge_angle]))[0]

    def suction_peak(self, alpha):
        theta = np.linspace(self.edge_angle + 0.2, self.edge_angle + 2 * np.pi - 0.2, 200001)
        return 1.0 - float(np.max(self.speed(theta, alpha) ** 2))


def karman_trefftz(ex, ey, tau_deg):
    return MappedSection(complex(-ex, ey), 2.0 - tau_deg / 180.0)


def van_de_vooren(eps, tau_deg):
    return MappedSection(0j, 2.0 - tau_deg / 180.0, eps)


SECTIONS = {
    "joukowski_sym12": (karman_trefftz(0.102019, 0.0, 0.0), (0, 5)),
    "kt_sym12_te12": (karman_trefftz(0.063422, 0.0, 12.0), (0, 5)),
    "kt_cambered13_te15": (karman_trefftz(0.061325, 0.085, 15.0), (0, 6)),
    "kt_cambered10_te8": (karman_trefftz(0.058738, 0.055, 8.0), (2, 8)),
    "vandevooren_sym15_te18": (van_de_vooren(0.054745, 18.0), (0, 5)),
}
"""Section and angles of attack [deg] of tests/data/exact_sections."""
