"""NACA four-digit, modified four-digit and five-digit sections as published.

The thickness is laid off perpendicular to the mean line and the edge is left open, as in the
reports; nothing is rotated, scaled or closed. Where the mean line slopes at the nose the contour
reaches slightly ahead of x = 0, which is part of the definition.

References
----------
Jacobs, Ward, Pinkerton, NACA Report 460 (1933): four-digit thickness and mean lines.
Stack, von Doenhoff, NACA Report 492 (1934): modified thickness (nose radius and place).
Jacobs, Pinkerton, Greenberg, NACA Report 537 (1935) and TR-610: five-digit mean lines.
Abbott, von Doenhoff, Stivers, NACA Report 824 (1945), and Ladson, Brooks, Hill, Sproles, NASA
TM-4741 (1996): all of them collected. The constants below are from memory of these reports and
checked against their tabulated ordinates in tests/geometry.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np
from numpy.polynomial import polynomial as power

from optim.arrays import FloatArray
from optim.errors import Fault, SectionError
from optim.geometry import validity
from optim.geometry.curve import Curve
from optim.geometry.section import Section

FOUR_DIGIT_THICKNESS = (0.0, 0.2969, -0.1260, 0.0, -0.3516, 0.0, 0.2843, 0.0, -0.1015)
"""y/(5 t) in powers of sqrt(x); Report 460. The edge is open by 0.21 % of a unit thickness."""

MODIFIED_EDGE_SLOPE = {2: 0.200, 3: 0.234, 4: 0.315, 5: 0.465, 6: 0.700}
"""d1 for a thickness of 0.20, by the place of greatest thickness in tenths; Report 492."""

MODIFIED_NOSE = 0.296904
"""a0 for a thickness of 0.20 and the nose-radius index 6; Report 492."""

MODIFIED_EDGE = 0.002
"""d0: half the edge thickness for a thickness of 0.20; Report 492."""

LARGEST_NOSE_INDEX = 9
"""Index 9 stands for three times the normal nose radius; Report 492."""

FIVE_DIGIT_LIFT = 0.3
"""Design lift coefficient for which the table below holds; Report 537."""

FIVE_DIGIT_LINES = {
    "10": (0.0580, 361.400, 0.0),
    "20": (0.1260, 51.640, 0.0),
    "30": (0.2025, 15.957, 0.0),
    "40": (0.2900, 6.643, 0.0),
    "50": (0.3910, 3.230, 0.0),
    "21": (0.1300, 51.990, 0.000764),
    "31": (0.2170, 15.793, 0.00677),
    "41": (0.3180, 6.520, 0.0303),
    "51": (0.4410, 3.191, 0.1355),
}
"""Second and third digit -> m, k1, k2/k1 (0: not reflexed); Report 537, TM-4741."""

ACCEPTED = (
    "accepted are four digits (2412), four digits with nose index and place of thickness "
    "(0012-64: index 1 to 9, place 2 to 6) and five digits (23012: second digit 1 to 5, third 0; "
    "reflexed 23112: second digit 2 to 5, third 1)"
)


@dataclass(frozen=True)
class PiecewisePolynomial:
    """Two polynomials that meet at one place, evaluated with their derivatives.

    Attributes
    ----------
    place : float
        Where they meet.
    ahead, behind : tuple of float
        Coefficients by rising power.
    """

    place: float
    ahead: tuple[float, ...]
    behind: tuple[float, ...]

    def derivatives(self, x: FloatArray, order: int) -> list[FloatArray]:
        """Return the value and the derivatives up to `order` at `x`, each (n,)."""
        is_ahead = x < self.place
        found = []
        for k in range(order + 1):
            ahead, behind = (_derivative(c, k) for c in (self.ahead, self.behind))
            found.append(np.where(is_ahead, power.polyval(x, ahead), power.polyval(x, behind)))
        return found


def _derivative(coefficients: tuple[float, ...], order: int) -> FloatArray:
    return np.asarray(power.polyder(np.asarray(coefficients), order), dtype=np.float64)


@dataclass(frozen=True)
class NacaCurve(Curve):
    """Thickness laid off perpendicular to a mean line.

    Attributes
    ----------
    half_thickness : PiecewisePolynomial
        In powers of the square root of the chord station [chords].
    mean_line : PiecewisePolynomial
        In powers of the chord station [chords].
    """

    half_thickness: PiecewisePolynomial
    mean_line: PiecewisePolynomial

    @property
    def breaks(self) -> tuple[float, ...]:
        """Parameters between which the curve is analytic, from -1 to 1 in rising order."""
        inner = {self.half_thickness.place, float(np.sqrt(max(self.mean_line.place, 0.0)))}
        side = sorted({0.0, 1.0} | {u for u in inner if 0.0 < u < 1.0})
        return tuple(sorted({-u for u in side} | set(side)))

    def derivatives(self, t: FloatArray, order: int) -> tuple[FloatArray, ...]:
        """Return the point and its derivatives in t up to `order`, each (n, 2) [chords]."""
        t = np.asarray(t, dtype=np.float64)
        u = np.abs(t)
        side = np.where(t < 0.0, 1.0, -1.0)  # +1 on the upper side
        x = u * u
        half = [side * h for h in self.half_thickness.derivatives(u, order)]
        line = self.mean_line.derivatives(x, order + 1)
        secant = np.sqrt(1.0 + line[1] ** 2)
        sine, cosine = line[1] / secant, 1.0 / secant
        found = [np.stack([x - half[0] * sine, line[0] + half[0] * cosine], axis=-1)]
        if order == 0:
            return tuple(found)
        turn_x = line[2] * cosine**2  # d theta / dx
        turn = 2.0 * u * turn_x
        dx = 2.0 * u - half[1] * sine - half[0] * cosine * turn
        dy = 2.0 * u * line[1] + half[1] * cosine - half[0] * sine * turn
        found.append(np.stack([dx, dy], axis=-1) * -side[..., None])  # du/dt is -1 above
        if order == 1:
            return tuple(found)
        bend_x = (line[3] - 2.0 * line[1] * line[2] * turn_x) * cosine**2
        bend = 2.0 * turn_x + 4.0 * x * bend_x
        along = half[2] - half[0] * turn**2
        across = 2.0 * half[1] * turn + half[0] * bend
        ddx = 2.0 - along * sine - across * cosine
        ddy = 2.0 * line[1] + 4.0 * x * line[2] + along * cosine - across * sine
        found.append(np.stack([ddx, ddy], axis=-1))
        return tuple(found)


def naca_section(digits: str) -> Section:
    """Return the section that a NACA number names.

    Parameters
    ----------
    digits : str
        Such as "2412", "0012-64", "23012" or "23112".

    Returns
    -------
    Section
        Chord 1, never rotated; its edge is open as published.

    Raises
    ------
    SectionError
        If the number names no section of these families.
    """
    matched = re.fullmatch(r"(\d\d|\d\d\d)(\d\d)(?:-(\d)(\d))?", digits.strip())
    if matched is None:
        raise _refused(digits, "not a number of the NACA families known here")
    line_digits, percent, index, place = matched.groups()
    thickness = int(percent) / 100.0
    if thickness <= 0.0:
        raise _refused(digits, "it has no thickness")
    if index is None:
        half = _four_digit_thickness(thickness)
    elif int(place) in MODIFIED_EDGE_SLOPE:
        half = _modified_thickness(thickness, int(index), int(place))
    else:
        raise _refused(digits, f"no thickness with its greatest at {place} tenths was published")
    line = _mean_line(digits, line_digits)
    section = Section(name=f"NACA {digits.strip()}", curve=NacaCurve(half, line))
    found = validity.faults(section)
    if found:  # the formulas fold for extreme numbers, such as 9199
        raise _refused(digits, " ".join(fault.sentence for fault in found).rstrip("."))
    return section


def _refused(digits: str, reason: str) -> SectionError:
    return SectionError([Fault(f"naca:{digits} is not a section: {reason}; {ACCEPTED}.")])


def _four_digit_thickness(thickness: float) -> PiecewisePolynomial:
    coefficients = tuple(5.0 * thickness * c for c in FOUR_DIGIT_THICKNESS)
    return PiecewisePolynomial(0.0, coefficients, coefficients)


def _modified_thickness(thickness: float, index: int, place: int) -> PiecewisePolynomial:
    """Return the half thickness of Report 492 in powers of sqrt(x)."""
    m = place / 10.0
    d0, d1 = MODIFIED_EDGE, MODIFIED_EDGE_SLOPE[place]
    d2 = (0.294 - 2.0 * (1.0 - m) * d1) / (1.0 - m) ** 2
    d3 = (-0.196 + (1.0 - m) * d1) / (1.0 - m) ** 3
    rho = (1.0 - m) ** 2 / (5.0 * (0.588 - 2.0 * d1 * (1.0 - m)))  # radius of curvature at m
    a0 = MODIFIED_NOSE * (np.sqrt(3.0) if index == LARGEST_NOSE_INDEX else index / 6.0)
    a1 = 0.3 / m - 1.875 * a0 / np.sqrt(m) - m / (10.0 * rho)
    a2 = -0.3 / m**2 + 1.25 * a0 / m**1.5 + 1.0 / (5.0 * rho)
    a3 = 0.1 / m**3 - 0.375 * a0 / m**2.5 - 1.0 / (10.0 * rho * m)
    scale = thickness / 0.20
    ahead = scale * np.array([0.0, a0, a1, 0.0, a2, 0.0, a3])
    # d0 + d1 z + d2 z**2 + d3 z**3 with z = 1 - x, written out in powers of x = u**2
    behind = scale * np.array(
        [d0 + d1 + d2 + d3, 0.0, -d1 - 2 * d2 - 3 * d3, 0.0, d2 + 3 * d3, 0.0, -d3]
    )
    return PiecewisePolynomial(float(np.sqrt(m)), tuple(ahead.tolist()), tuple(behind.tolist()))


def _mean_line(digits: str, line_digits: str) -> PiecewisePolynomial:
    """Return the mean line that the digits ahead of the thickness name."""
    if len(line_digits) == len("24"):
        camber, place = int(line_digits[0]) / 100.0, int(line_digits[1]) / 10.0
        if (camber == 0.0) != (place == 0.0):
            raise _refused(digits, "camber and its place are either both zero or both given")
        return _four_digit_line(camber, place) if camber else PiecewisePolynomial(0.0, (0,), (0,))
    lift = 0.15 * int(line_digits[0])  # the first digit is 20/3 of the design lift coefficient
    if line_digits[1:] not in FIVE_DIGIT_LINES or lift == 0.0:
        raise _refused(digits, f"no mean line {line_digits} was published")
    m, k1, ratio = FIVE_DIGIT_LINES[line_digits[1:]]
    return _five_digit_line(m, k1 * lift / FIVE_DIGIT_LIFT, ratio)


def _four_digit_line(m: float, p: float) -> PiecewisePolynomial:
    ahead, behind = m / p**2, m / (1.0 - p) ** 2
    return PiecewisePolynomial(
        p,
        (0.0, 2.0 * p * ahead, -ahead),
        ((1.0 - 2.0 * p) * behind, 2.0 * p * behind, -behind),
    )


def _five_digit_line(m: float, k1: float, ratio: float) -> PiecewisePolynomial:
    """Return the mean line with k1 scaled to the design lift; `ratio` is k2/k1."""
    cubic = np.array([-(m**3), 3.0 * m**2, -3.0 * m, 1.0])  # (x - m)**3
    straight = np.array([m**3, -(m**3) - ratio * (1.0 - m) ** 3, 0.0, 0.0])
    ahead = k1 / 6.0 * (cubic + straight)
    behind = k1 / 6.0 * (ratio * cubic + straight)
    return PiecewisePolynomial(m, tuple(ahead.tolist()), tuple(behind.tolist()))
