"""Bezier sides that share a nose with a vertical tangent and one radius of curvature.

Each side is a Bezier curve of degree n from the nose to its end of the edge. Its control abscissas
are fixed at i (i - 1) / (n (n - 1)), which makes x = u**2 exactly with the Bezier parameter u: the
first two coincide, so the tangent at the nose is vertical, and the design is the ordinates alone.
The first ordinate of both sides follows from one variable, the slope dy/du at the nose, so the
curvature runs through the nose without a step; the nose radius is half its square.

Why sides and not thickness and mean line: the sides end exactly at the given gap, their tangents
and curvature at the nose hold by construction, the contour stays linear in the design (a fit is a
linear problem, a section one product of matrices), and the height of one side over the chord,
which spars, skins and low-drag pressure distributions are about, belongs to few variables. A
thickness laid off across a curved mean line has none of this; its gain, that camber and thickness
are variables, a study has anyway by naming them as quantities.

References
----------
Farin, Curves and Surfaces for CAGD, 5th ed., 2002, chapters 4-5 (Bernstein form, end derivatives).
Venkataraman, AIAA 95-1875 (from memory): Bezier sides for the optimisation of sections.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from optim.arrays import FloatArray
from optim.geometry import bernstein
from optim.geometry.cst import COEFFICIENTS, LARGEST_GAP, check_range, square_abscissa
from optim.geometry.curve import Curve
from optim.geometry.parameterisation import Parameterisation
from optim.geometry.section import Section


@dataclass(frozen=True, eq=False)
class BezierCurve(Curve):
    """The contour of one design; see the module.

    Attributes
    ----------
    ordinates : TwoSides
        y of both sides in the Bezier parameter u = |t|.
    """

    ordinates: bernstein.TwoSides

    abscissa_is_square = True

    def derivatives(self, t: FloatArray, order: int) -> tuple[FloatArray, ...]:
        """Return the point and its derivatives in t up to `order`, each (n, 2) [chords]."""
        t = np.asarray(t, dtype=np.float64)
        is_upper = np.asarray(t < 0.0, dtype=np.float64)
        y = self.ordinates.derivatives(np.abs(t), is_upper, order)
        if order > 0:
            y[1] = y[1] * (1.0 - 2.0 * is_upper)  # du/dt is -1 on the upper side
        return square_abscissa(t, y)


@dataclass(frozen=True)
class Bezier(Parameterisation):
    """Bezier sides with a fixed edge gap.

    Attributes
    ----------
    upper, lower : int
        Number of free ordinates of each side, 4 to 13, of which the first is common to both; the
        degree of the side is one more.
    gap : float
        Edge gap [chords].
    """

    upper: int = 6
    lower: int = 6
    gap: float = 0.0

    def __post_init__(self) -> None:
        check_range("The number of upper coefficients", self.upper, COEFFICIENTS)
        check_range("The number of lower coefficients", self.lower, COEFFICIENTS)
        check_range("The edge gap in chords", self.gap, (0.0, LARGEST_GAP))

    @property
    def names(self) -> tuple[str, ...]:
        """nose, upper_2, ... lower_2, ...: the slope at the nose and the control ordinates."""
        upper = tuple(f"upper_{i}" for i in range(2, self.upper + 1))
        lower = tuple(f"lower_{i}" for i in range(2, self.lower + 1))
        return ("nose", *upper, *lower)

    @property
    def reach(self) -> FloatArray:
        """Step of each variable that shapes a side like a unit of a CST coefficient does [chords].

        For the slope at the nose that is one; for a control ordinate it is the class function
        sqrt(x) (1 - x) at u = i / n, because y there is that times the CST coefficients.
        """
        sides = []
        for free in (self.upper, self.lower):
            u = np.arange(2, free + 1) / (free + 1)
            sides.append(u * (1.0 - u**2))
        return np.concatenate([[1.0], *sides])

    def section(self, design: FloatArray) -> Section:
        """Return the section of a design."""
        d = self.checked(design)
        half = 0.5 * self.gap
        upper = np.concatenate([[0.0, d[0] / (self.upper + 1)], d[1 : self.upper], [half]])
        lower = np.concatenate([[0.0, -d[0] / (self.lower + 1)], d[self.upper :], [-half]])
        return Section(name="bezier", curve=BezierCurve(bernstein.TwoSides(upper, lower)))

    def basis(self, t: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the ordinate at `t` as offset (n,) and matrix (n, n_variables)."""
        u, is_upper = np.abs(t), t < 0.0
        upper = np.where(is_upper[:, None], bernstein.evaluate(self.upper + 1, u), 0.0)
        lower = np.where(is_upper[:, None], 0.0, bernstein.evaluate(self.lower + 1, u))
        nose = upper[:, 1] / (self.upper + 1) - lower[:, 1] / (self.lower + 1)
        offset = 0.5 * self.gap * (upper[:, -1] - lower[:, -1])
        return offset, np.column_stack([nose, upper[:, 2:-1], lower[:, 2:-1]])
