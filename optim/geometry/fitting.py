"""Least-squares fit of a parameterisation to a section, by its normal deviations.

The section is sampled, each sample is given a foot point on the fitted curve, and the sum of the
squared distances along the normals at the foot points is minimised. With the foot points held the
problem is linear in the design; the foot points then move to the nearest points of the new curve,
and so on until the design stays (tangent-distance minimisation, which converges quadratically for
small deviations). Samples are cosine-spaced, so that the nose and the edge count more than their
length.

The section is first placed on its chord line, and the fit says how. A section from a file lies on
it already; a cambered NACA section, whose nose by definition stands off the x axis, is turned by
about a tenth of a degree (2412: -0.09). In its published frame its nose would be out of reach: a
contour whose nose is at the origin with a vertical tangent misses that of 23012 by 0.0014 chords
at any order, and on the chord line by a tenth of that.

References
----------
Wang, Pottmann, Liu, "Fitting B-spline curves to point clouds by curvature-based squared distance
minimization", ACM Trans. Graphics 25 (2), 2006: tangent-distance minimisation and its order.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from optim.arrays import FloatArray, frozen
from optim.geometry.chordline import ChordLine, chord_line
from optim.geometry.curve import Curve, cosine_parameters
from optim.geometry.parameterisation import Parameterisation
from optim.geometry.section import Section

FITTED = 240
"""Intervals of full cosine spacing between the fitted samples."""

MEASURED = 4 * FITTED
"""Intervals of full cosine spacing between the samples at which the deviation is measured."""

ROUNDS = 60
"""Budget of the rounds; a dozen are usual, three for a shape that the design can meet exactly."""

STILL = 1e-10
"""Change of the ordinates in a round at which the fit is done [chords]."""

FOOT_STEPS = 4
"""Newton steps of the foot points a round; each round starts from the last one's feet."""


@dataclass(frozen=True, slots=True, eq=False)
class Fit:
    """A design fitted to a section and how far it is off.

    Attributes
    ----------
    parameterisation : Parameterisation
        Whose design it is.
    design : (n_variables,) array
        The fitted design.
    largest_deviation : float
        Largest distance of the section from the fit along the normal [chords].
    rms_deviation : float
        Root of the mean square of the distances, over the length of the contour [chords].
    where : (float, float)
        The point of the placed section that is farthest from the fit [chords].
    rotation : float
        Angle by which the section was turned onto its chord line, anticlockwise [rad].
    scale : float
        Factor by which it was then stretched [-].
    """

    parameterisation: Parameterisation
    design: FloatArray
    largest_deviation: float
    rms_deviation: float
    where: tuple[float, float]
    rotation: float
    scale: float


def fit(parameterisation: Parameterisation, section: Section) -> Fit:
    """Return the design whose contour is closest to a section.

    Parameters
    ----------
    parameterisation : Parameterisation
        What to fit; its edge gap is its own and is not fitted.
    section : Section
        What is fitted; its own frame does not matter.
    """
    line = chord_line(section.curve, 0.0)
    wanted, feet, normals = _samples(section, line, FITTED)
    ordinates = np.full(feet.size, np.inf)
    for _ in range(ROUNDS):
        offset, matrix = parameterisation.basis(feet)
        off = normals[:, 0] * (wanted[:, 0] - feet**2) + normals[:, 1] * (wanted[:, 1] - offset)
        rows = normals[:, 1:] * matrix
        design = np.asarray(np.linalg.lstsq(rows, off, rcond=None)[0])
        curve = parameterisation.section(design).curve
        at_feet = matrix @ design + offset
        if np.abs(at_feet - ordinates).max() < STILL:
            break
        feet, normals = _nearest(curve, wanted, feet)
        ordinates = curve.point(feet)[:, 1]
    return _measured(parameterisation, design, section, line)


def _samples(
    section: Section, line: ChordLine, intervals: int
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return points on the chord line, their first foot points and normals."""
    t = cosine_parameters(intervals)
    wanted = line.placed(section.points(t))
    root = np.sqrt(np.clip(wanted[:, 0], 0.0, 1.0))
    feet = np.asarray(np.where(t < line.t, -root, root), dtype=np.float64)
    return wanted, feet, line.turned(_normals(section.curve, t))


def _lengths(points: FloatArray) -> FloatArray:
    """Return the length of contour that each sample stands for, (n,) [chords]."""
    pieces = np.hypot(*np.diff(points, axis=0).T)
    ahead, behind = np.concatenate([[0.0], pieces]), np.concatenate([pieces, [0.0]])
    return np.asarray(0.5 * (ahead + behind), dtype=np.float64)


def _nearest(curve: Curve, wanted: FloatArray, feet: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the nearest points of a curve, as parameters, and the unit normals there."""
    t = feet
    for _ in range(FOOT_STEPS):
        point, first, second = curve.derivatives(t, 2)
        gap = point - wanted
        slope = (gap * first).sum(axis=1)
        stretch = (first * first).sum(axis=1)
        bend = stretch + (gap * second).sum(axis=1)
        # On the wrong side of the centre of curvature the full step would lead away.
        t = np.clip(t - slope / np.where(bend > 0.1 * stretch, bend, stretch), -1.0, 1.0)
    return t, _normals(curve, t)


def _normals(curve: Curve, t: FloatArray) -> FloatArray:
    """Return the outward unit normals, (n, 2) [-]."""
    first = curve.first(t)
    normals = np.column_stack([first[:, 1], -first[:, 0]])
    return np.asarray(normals / np.hypot(normals[:, 0], normals[:, 1])[:, None])


def _measured(
    parameterisation: Parameterisation, design: FloatArray, section: Section, line: ChordLine
) -> Fit:
    """Return the fit with its deviations, measured more finely than it was fitted."""
    wanted, feet, _ = _samples(section, line, MEASURED)
    curve = parameterisation.section(design).curve
    for _ in range(3):
        feet, _ = _nearest(curve, wanted, feet)
    distances = np.hypot(*(curve.point(feet) - wanted).T)
    farthest = int(np.argmax(distances))
    lengths = _lengths(wanted)
    return Fit(
        parameterisation=parameterisation,
        design=frozen(design),
        largest_deviation=float(distances[farthest]),
        rms_deviation=float(np.sqrt(lengths @ distances**2 / lengths.sum())),
        where=(float(wanted[farthest, 0]), float(wanted[farthest, 1])),
        rotation=line.rotation,
        scale=line.scale,
    )
