"""What makes a contour no section, each fault with its place."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, Protocol

import numpy as np

from optim.arrays import FloatArray
from optim.geometry import polygon
from optim.geometry.curve import Curve
from optim.geometry.measures import Samples

FaultKind = Literal["not_finite", "fold", "crossing", "inside_out", "no_thickness", "spike"]

LEAST_THICKNESS = 1e-3
"""A section thinner than this everywhere is a plate [chords]; rule of thumb."""

LEAST_DEPTH = 2e-4
"""Sides closer than this between the stations below touch [chords]; rule of thumb: a hundredth of
a panel's length on 160 panels, below which the panels of the two sides are one."""

TOUCHING = (0.02, 0.90)
"""Stations between which the sides must stand apart [chords]; a cusped edge is thin behind."""

NEGLIGIBLE = 1e-9
"""Crossings and folds smaller than this are rounding [chords]."""


@dataclass(frozen=True, slots=True)
class SectionFault:
    """One reason why a contour is no section.

    Attributes
    ----------
    kind : str
        not_finite, fold, crossing, inside_out, no_thickness or spike.
    x : float
        Where [chords].
    sentence : str
        What is wrong there, for the screen.
    """

    kind: FaultKind
    x: float
    sentence: str


class Contour(Protocol):
    """What is looked at: a Section, which may not be imported here, as it asks for its faults."""

    @property
    def curve(self) -> Curve:
        """The exact contour."""

    @property
    def samples(self) -> Samples:
        """The curve at full cosine spacing."""

    @property
    def sampled_sides(self) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Parameters of the two sides at equal stations, and those stations."""

    @property
    def sampled_ordinates(self) -> tuple[FloatArray, FloatArray]:
        """Ordinates of the two sides at those stations [chords]."""


def faults(section: Contour) -> tuple[SectionFault, ...]:
    """Return the faults of a contour in the order of their kinds, none if it is a section."""
    samples = section.samples
    finite = np.isfinite(samples.point).all(axis=1)
    if not finite.all():
        place = float(samples.t[int(np.argmin(finite))] ** 2)
        return (
            SectionFault("not_finite", place, f"The contour is not finite at x = {place:.4f}."),
        )
    folded = [] if section.curve.abscissa_is_square else _folds(samples.point)
    # Where the sides run back there may be three ordinates at one x, and depth means nothing.
    apart = _crossings(samples.point) if folded else _depths(section)
    return (*folded, *apart, *_spikes(samples.point, samples.first))


def _folds(point: FloatArray) -> list[SectionFault]:
    """Return where a side runs back towards its start."""
    nose = int(np.argmin(point[:, 0]))
    steps = np.diff(point[:, 0])
    steps[:nose] *= -1.0  # the upper side runs forward
    found = []
    for side, part in (("upper", slice(0, nose)), ("lower", slice(nose, None))):
        back = np.flatnonzero(steps[part] < -NEGLIGIBLE)
        if back.size:
            x = float(point[part][back[0], 0])
            found.append(
                SectionFault("fold", x, f"The {side} side runs back on itself at x = {x:.4f}.")
            )
    return found


def _crossings(point: FloatArray) -> list[SectionFault]:
    return [_crossing(x) for x in sorted(polygon.crossings(point)[:, 0].tolist())]


def _crossing(x: float) -> SectionFault:
    return SectionFault("crossing", x, f"The contour crosses itself at x = {x:.4f}.")


def _depths(section: Contour) -> list[SectionFault]:
    """Return the faults that show in the depth, for sides with one ordinate at each x."""
    x = section.sampled_sides[2]
    upper, lower = section.sampled_ordinates
    depth = upper - lower
    if np.abs(depth).max() < LEAST_THICKNESS:
        place = float(x[int(np.argmax(np.abs(depth)))])
        sentence = f"The section has no thickness: {depth.max():.5f} chords at most."
        return [SectionFault("no_thickness", place, sentence)]
    if depth.max() <= NEGLIGIBLE:
        place = float(x[int(np.argmin(depth))])
        sentence = "The section is inside out: the lower side lies above the upper one."
        return [SectionFault("inside_out", place, sentence)]
    negative = depth < -NEGLIGIBLE
    changes = np.flatnonzero(negative[1:] != negative[:-1])
    share = depth[changes] / (depth[changes] - depth[changes + 1])
    found = [_crossing(float(c)) for c in x[changes] + share * (x[changes + 1] - x[changes])]
    if negative[0]:
        found.insert(0, _crossing(float(x[0])))
    between = (x > TOUCHING[0]) & (x < TOUCHING[1])
    closest = int(np.argmin(np.where(between, depth, np.inf)))
    if not found and depth[closest] < LEAST_DEPTH:
        place = float(x[closest])
        sentence = f"The sides touch at x = {place:.4f}: {depth[closest]:.5f} chords apart."
        found.append(SectionFault("no_thickness", place, sentence))
    return found


def _spikes(point: FloatArray, first: FloatArray) -> list[SectionFault]:
    found = []
    for k in polygon.spikes(polygon.turns(first)):
        x = float(point[k, 0])
        found.append(SectionFault("spike", x, f"The contour has a spike at x = {x:.4f}."))
    return found
