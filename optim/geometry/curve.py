"""The contour as one exact curve in a parameter that is smooth around the nose.

The parameter t runs from -1 at the upper trailing edge through 0 at the nose to +1 at the lower
trailing edge, and x is about t**2. A round nose, where y grows like the square root of x, is then
an ordinary smooth point: dx/dt vanishes there and dy/dt does not. The contour runs
anticlockwise, so a convex surface has positive curvature.
"""

from __future__ import annotations

from abc import ABC, abstractmethod

import numpy as np

from optim.arrays import FloatArray


class Curve(ABC):
    """A plane curve with its first and second derivatives in closed form.

    Attributes
    ----------
    abscissa_is_square : bool
        Whether x equals t**2 exactly, so that the points at one x need no search.
    """

    abscissa_is_square: bool = False

    @property
    def breaks(self) -> tuple[float, ...]:
        """Parameters between which the curve is analytic, from -1 to 1 in rising order."""
        return (-1.0, 0.0, 1.0)

    @abstractmethod
    def derivatives(self, t: FloatArray, order: int) -> tuple[FloatArray, ...]:
        """Return the point and its derivatives in t up to `order`.

        Parameters
        ----------
        t : (n,) array
            Parameter, -1 to 1 [-].
        order : int
            0, 1 or 2.

        Returns
        -------
        tuple of (n, 2) array
            Points, first and second derivatives, `order` + 1 of them [chords].
        """

    def point(self, t: FloatArray) -> FloatArray:
        """Return the points at `t`, (n, 2) [chords]."""
        return self.derivatives(t, 0)[0]

    def first(self, t: FloatArray) -> FloatArray:
        """Return the first derivatives in t, (n, 2) [chords]."""
        return self.derivatives(t, 1)[1]

    def second(self, t: FloatArray) -> FloatArray:
        """Return the second derivatives in t, (n, 2) [chords]."""
        return self.derivatives(t, 2)[2]


def cosine_parameters(panels: int) -> FloatArray:
    """Return the parameters of full cosine spacing around the contour, (panels + 1,).

    With t = -cos(phi / 2) and phi uniform over 0 to 2 pi, x = t**2 = (1 + cos(phi)) / 2 is
    clustered at the nose and at the edge on both sides.
    """
    t = -np.cos(np.linspace(0.0, np.pi, panels + 1))
    t[0], t[-1] = -1.0, 1.0
    if panels % 2 == 0:
        t[panels // 2] = 0.0  # pi / 2 is not exact
    return t
