"""Where the panels end: cosine spacing in the parameter of the curve, denser yet at the nose.

The nodes lie on the exact curve. Full cosine spacing, common practice for panel methods, resolves
the Kutta condition at the edge and the suction peak of a round nose. The laminar bubble behind the
nose of a thin section is shorter than its panels; it gets NOSE_DENSITY times as many.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from optim.arrays import FloatArray, frozen
from optim.geometry.section import Section

NOSE_DENSITY = 2.5
"""Nodes at the nose beside those of full cosine spacing [-]; the edges keep that spacing, and the
panels between are up to 1.3 times as long. Bubbles of 1e-3 chords are then some stations long."""

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
    return section.points(nose_parameters(panels))


@lru_cache(maxsize=32)
def nose_parameters(panels: int) -> FloatArray:
    """Return the parameters of the ends of the panels, (panels + 1,); see `panel_nodes`."""
    if panels < LEAST_PANELS:
        raise ValueError(f"A contour needs at least {LEAST_PANELS} panels; found {panels}.")
    xi = np.linspace(0.0, 2.0 * np.pi, panels + 1)
    a = (1.0 - 1.0 / NOSE_DENSITY) / 4.0
    phi = xi + 2.0 * a * np.sin(xi) - a * np.sin(2.0 * xi)  # density 1 at both ends
    t = -np.cos(phi / 2.0)
    return frozen((t - t[::-1]) / 2.0)  # the rounding of pi mirrors too
