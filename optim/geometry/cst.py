"""Class-shape transformation: a class function times a Bernstein polynomial on each side.

y = C(x) S(x) + x (gap / 2) on the upper side and C(x) S(x) - x (gap / 2) on the lower, with
C(x) = x**N1 (1 - x)**N2 and S a Bernstein polynomial whose coefficients are the design. N1 = 1/2
and N2 = 1 make a round nose and a wedge-shaped edge. With x = t**2 the root is gone and every
derivative is closed-form.

The first coefficient of a side sets its nose radius, A**2 / 2, the last one its slope at the edge.
In the plain form each side has its own first coefficient, as in the papers; the nose radii of the
sides may then differ, and the curvature steps at the nose.

The optional leading-edge term adds a x (1 - x)**(n + 1/2) to both sides: it slopes the mean line at
the nose, which a product with C(x) cannot, and which unequal first coefficients only imitate. With
the term the sides therefore share the first coefficient, so the curvature runs through the nose
without a step, and the number of variables stays the same.

References
----------
Kulfan, Bussoletti, AIAA 2006-6948: class and shape functions.
Kulfan, "Universal parametric geometry representation method", J. Aircraft 45 (1), 2008, 142-158.
Kulfan, modification of the CST representation by a leading-edge term, 2010 (from memory; the term
is given here in the form a x (1 - x)**(n + 1/2) for N1 = 1/2, N2 = 1).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from optim.arrays import FloatArray
from optim.geometry import bernstein
from optim.geometry.curve import Curve
from optim.geometry.parameterisation import Parameterisation
from optim.geometry.section import Section

COEFFICIENTS = (4, 13)
"""Fewest and most coefficients a side: Bernstein order 3 to 12. Fewer cannot shape a section,
more fit the noise of measured ordinates (Kulfan 2008 finds 6 to 9 enough)."""

NOSE_EXPONENTS = (0.5, 0.75)
"""N1 from round to pointed; below 1/2 the nose is flat, and towards 1 it is a knife edge that no
attached flow turns round (rule of thumb)."""

EDGE_EXPONENTS = (1.0, 2.0)
"""N2 from a wedge to a cusp; below 1 the edge is round and the flow does not leave at it."""

LARGEST_GAP = 0.1
"""An edge more open than this is no edge [chords]; rule of thumb."""


@dataclass(frozen=True, eq=False)
class CstCurve(Curve):
    """The contour of one design; see the module.

    Attributes
    ----------
    shape : TwoSides
        S of both sides.
    exponents : (float, float)
        N1 and N2.
    gap : float
        Edge gap [chords].
    leading_edge : float
        Coefficient of the leading-edge term [-].
    orders : (int, int)
        Bernstein order of the upper and the lower side.
    """

    shape: bernstein.TwoSides
    exponents: tuple[float, float]
    gap: float
    leading_edge: float
    orders: tuple[int, int]

    abscissa_is_square = True

    def derivatives(self, t: FloatArray, order: int) -> tuple[FloatArray, ...]:
        """Return the point and its derivatives in t up to `order`, each (n, 2) [chords]."""
        t = np.asarray(t, dtype=np.float64)
        u, is_upper = np.abs(t), np.asarray(t < 0.0, dtype=np.float64)
        x, side = u * u, 2.0 * is_upper - 1.0
        s = self.shape.derivatives(x, is_upper, order)
        c = class_function(u, self.exponents, order)
        y = [c[0] * s[0] + side * (0.5 * self.gap) * x]
        if order > 0:
            s_u = 2.0 * u * s[1]
            y.append(c[1] * s[0] + c[0] * s_u + side * self.gap * u)
        if order > 1:
            s_uu = 2.0 * s[1] + 4.0 * x * s[2]
            y.append(c[2] * s[0] + 2.0 * c[1] * s_u + c[0] * s_uu + side * self.gap)
        if self.leading_edge != 0.0:
            power = np.where(t < 0.0, self.orders[0], self.orders[1]) + 0.5
            terms = leading_edge_term(u, power, order)
            y = [a + self.leading_edge * b for a, b in zip(y, terms, strict=True)]
        if order > 0:
            y[1] *= -side  # dy/dt: du/dt is -1 on the upper side
        return square_abscissa(t, y)


def square_abscissa(t: FloatArray, y: list[FloatArray]) -> tuple[FloatArray, ...]:
    """Return points and derivatives of the curve (t**2, y(t)), each (n, 2)."""
    x = (t * t, 2.0 * t, np.array(2.0))
    found = []
    for abscissa, ordinate in zip(x, y, strict=False):
        both = np.empty((t.size, 2))  # half the time of np.stack, at every evaluation
        both[:, 0] = abscissa
        both[:, 1] = ordinate
        found.append(both)
    return tuple(found)


def class_function(
    u: FloatArray, exponents: tuple[float, float], order: int
) -> tuple[FloatArray, ...]:
    """Return x**N1 (1 - x)**N2 with x = u**2 and its derivatives in u up to `order`, (n,) [-].

    A derivative that is infinite at the nose (1/2 < N1 < 1) or at the edge (1 < N2 < 2) is
    answered as it is a hair away from it.
    """
    a, b = 2.0 * exponents[0], exponents[1]
    if (a, b) == (1.0, 1.0):
        return (u * (1.0 - u * u), 1.0 - 3.0 * u * u, -6.0 * u)[: order + 1]
    u = np.maximum(u, 1e-9)
    w = np.maximum(1.0 - u * u, 1e-12)
    value = u**a * w**b
    # logarithmic derivative and its slope
    rate = a / u - 2.0 * b * u / w
    slope = -a / u**2 - 2.0 * b / w - 4.0 * b * (u / w) ** 2
    return (value, value * rate, value * (rate**2 + slope))[: order + 1]


def leading_edge_term(u: FloatArray, power: FloatArray, order: int) -> tuple[FloatArray, ...]:
    """Return x (1 - x)**power with x = u**2 and its derivatives in u up to `order`, (n,) [-]."""
    x, q = u * u, power
    w = 1.0 - x
    in_x = w**q - q * x * w ** (q - 1.0)
    in_xx = q * w ** (q - 2.0) * ((q - 1.0) * x - 2.0 * w)
    return (x * w**q, 2.0 * u * in_x, 2.0 * in_x + 4.0 * x * in_xx)[: order + 1]


@dataclass(frozen=True)
class Cst(Parameterisation):
    """Class-shape transformation with a fixed edge gap.

    Attributes
    ----------
    upper, lower : int
        Number of coefficients of each side, 4 to 13: one more than the Bernstein order.
    gap : float
        Edge gap [chords].
    leading_edge_term : bool
        Whether the design begins with the first coefficient of both sides and ends with that of
        the leading-edge term.
    exponents : (float, float)
        N1, 0.5 to 0.75, and N2, 1 to 2, of the class function.
    """

    upper: int = 6
    lower: int = 6
    gap: float = 0.0
    leading_edge_term: bool = False
    exponents: tuple[float, float] = (0.5, 1.0)

    def __post_init__(self) -> None:
        check_range("The number of upper coefficients", self.upper, COEFFICIENTS)
        check_range("The number of lower coefficients", self.lower, COEFFICIENTS)
        check_range("The edge gap in chords", self.gap, (0.0, LARGEST_GAP))
        check_range("The nose exponent of the class function", self.exponents[0], NOSE_EXPONENTS)
        check_range("The edge exponent of the class function", self.exponents[1], EDGE_EXPONENTS)

    @property
    def names(self) -> tuple[str, ...]:
        """upper_1, ..., lower_1, ... or nose, upper_2, ..., lower_2, ..., leading_edge.

        upper_1 is A0 of the papers, and nose is A0 of the upper and -A0 of the lower side.
        """
        first = 2 if self.leading_edge_term else 1
        upper = tuple(f"upper_{i}" for i in range(first, self.upper + 1))
        lower = tuple(f"lower_{i}" for i in range(first, self.lower + 1))
        if self.leading_edge_term:
            return ("nose", *upper, *lower, "leading_edge")
        return (*upper, *lower)

    @property
    def reach(self) -> FloatArray:
        """One for each coefficient: freedom is counted in units of the coefficients [-]."""
        return np.ones(len(self.names))

    def section(self, design: FloatArray) -> Section:
        """Return the section of a design; lower coefficients are usually negative."""
        d = self.checked(design)
        upper, lower = d[: self.upper], d[self.upper :]
        if self.leading_edge_term:
            lower = np.concatenate([[-d[0]], lower[:-1]])
        curve = CstCurve(
            shape=bernstein.TwoSides(upper, lower),
            exponents=self.exponents,
            gap=self.gap,
            leading_edge=float(d[-1]) if self.leading_edge_term else 0.0,
            orders=(self.upper - 1, self.lower - 1),
        )
        return Section(name="cst", curve=curve)

    def basis(self, t: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the ordinate at `t` as offset (n,) and matrix (n, n_variables)."""
        u, is_upper = np.abs(t), (t < 0.0)[:, None]
        x = u * u
        c = class_function(u, self.exponents, 0)[0][:, None]
        upper = np.where(is_upper, c * bernstein.evaluate(self.upper - 1, x), 0.0)
        lower = np.where(is_upper, 0.0, c * bernstein.evaluate(self.lower - 1, x))
        columns = [upper, lower]
        if self.leading_edge_term:
            power = np.where(t < 0.0, self.upper, self.lower) - 0.5
            term = leading_edge_term(u, power, 0)[0]
            columns = [upper[:, 0] - lower[:, 0], upper[:, 1:], lower[:, 1:], term]
        return np.where(t < 0.0, 0.5, -0.5) * self.gap * x, np.column_stack(columns)


def check_range(what: str, found: float, accepted: tuple[float, float]) -> None:
    """Raise ValueError unless `found` lies within `accepted`, both ends included."""
    low, high = accepted
    if not low <= found <= high:
        raise ValueError(f"{what} must lie between {low} and {high}; found {found}.")
