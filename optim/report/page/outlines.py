"""Contours of the shown designs, with few points that lie close where they bend."""

from __future__ import annotations

import numpy as np

from optim.arrays import FloatArray
from optim.geometry.curve import cosine_parameters
from optim.geometry.parameterisation import Parameterisation

INTERVALS = 80
"""Straight pieces of an outline: on a screen a chord wide they stray by less than half a pixel
(a test holds it to 0.05 % of the chord)."""


def outlines(parameterisation: Parameterisation, designs: FloatArray) -> FloatArray:
    """Return contours from the upper edge over the nose to the lower edge.

    Parameters
    ----------
    parameterisation : Parameterisation
        Design -> section.
    designs : (n, n_variables) array
        Sections, all of them.

    Returns
    -------
    (n, INTERVALS + 1, 2) array
        x and y [chords].
    """
    t = cosine_parameters(INTERVALS)
    contours = [parameterisation.section(design).points(t) for design in designs]
    return np.array(contours).reshape(len(designs), INTERVALS + 1, 2)
