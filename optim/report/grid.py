"""How much of an answer is the panels': the same points on half and on double the panels.

With values at N/2, N and 2N panels and a method of second order, Richardson's extrapolation gives
the value at infinitely many panels, f(2N) + (f(2N) - f(N)) / 3. The error stated for N is its
distance from there. Where the two steps do not shrink as second order would have it, the
extrapolation means little, and the larger step is stated instead (the spirit of Roache 1994).

References
----------
.. [1] P. J. Roache, "Perspective: a method for uniform reporting of grid refinement studies",
   Journal of Fluids Engineering 116(3) (1994) 405-413 (from memory).
"""

from __future__ import annotations

import math

from optim.report.fields import Document

LEAST_RATIO = 2.0
"""Ratio of the steps from which they are taken to converge: first order at the least."""

COMPARED = ("alpha_deg", "cl", "cd", "cm_quarter", "cp_min", "transition_upper", "transition_lower")
"""What is compared."""


def grid_fields(half: Document, asked: Document, double: Document) -> Document:
    """Return the comparison of one point, three documents of `fields.point_fields`.

    Returns
    -------
    dict
        ``panels`` and ``outcomes`` of the three; then quantity -> ``half``, ``asked``, ``double``,
        ``extrapolated`` and ``estimated_error``, not-a-number where one of the three is absent.
    """
    three = (half, asked, double)
    return {
        "panels": [one["panels"] for one in three],
        "outcomes": [one["outcome"] for one in three],
        "quantities": {name: _quantity(*[float(one[name]) for one in three]) for name in COMPARED},
    }


def _quantity(half: float, asked: float, double: float) -> Document:
    coarse, fine = asked - half, double - asked
    extrapolated = double + fine / 3.0
    converging = fine == 0.0 or coarse / fine >= LEAST_RATIO
    error = abs(asked - extrapolated) if converging else max(abs(coarse), abs(fine))
    return {
        "half": half,
        "asked": asked,
        "double": double,
        "extrapolated": extrapolated if converging else math.nan,
        "estimated_error": error if math.isfinite(double) else math.nan,
    }


def panel_counts(panels: int) -> tuple[int, int]:
    """Return half and double the panels; half is even, so that a node stays on the nose."""
    return 2 * (panels // 4), 2 * panels
