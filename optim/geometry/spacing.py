"""Where the panels end: full cosine spacing in the parameter of the curve.

The nodes lie on the exact curve. Clustering at the nose resolves the suction peak and at the edge
the Kutta condition; the rule is common practice for panel methods.
"""

from __future__ import annotations

from functools import lru_cache

from optim.arrays import FloatArray, frozen
from optim.geometry.curve import cosine_parameters
from optim.geometry.section import Section

LEAST_PANELS = 10
"""Below this the two sides of a section cannot be told apart; rule of thumb."""


def panel_nodes(section: Section, panels: int) -> FloatArray:
    """Return the ends of the panels, from the upper edge around the nose to the lower edge.

    Parameters
    ----------
    section : Section
        The contour.
    panels : int
        Number of panels [-]; with an even number a node lies on the nose.

    Returns
    -------
    (panels + 1, 2) array
        Nodes [chords].

    Raises
    ------
    ValueError
        If there are fewer than ten panels.
    """
    return section.points(_parameters(panels))


@lru_cache(maxsize=32)
def _parameters(panels: int) -> FloatArray:
    if panels < LEAST_PANELS:
        raise ValueError(f"A contour needs at least {LEAST_PANELS} panels; found {panels}.")
    return frozen(cosine_parameters(panels))
