"""What a design must keep to, each limit measured by its own size.

A constraint's margin is its distance from the limit over its scale, negative where it is violated.
The scale is the study's, or the size of the limit itself, so that a shortfall of a tenth of a
millimetre in an edge and one of a tenth in a maximum lift weigh what they mean. A limit near zero,
such as a moment, is measured by the least scale of its quantity instead. Without scaling, the sum
of violations that search algorithms rank by would see the largest number only.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Literal

Kind = Literal["min", "max"]

LEAST_SCALES: Mapping[str, float] = MappingProxyType(
    {
        "alpha": 0.02,
        "cl": 0.1,
        "cl_max": 0.1,
        "cd": 0.001,
        "cd_friction": 0.001,
        "cd_pressure": 0.001,
        "cm_quarter": 0.02,
        "nose_down_moment": 0.02,
        "lift_to_drag": 10.0,
        "cp_min": 0.2,
        "trailing_edge_gap": 0.001,
        "area": 0.01,
        "nose_radius": 0.002,
    }
)
"""Least scale of a quantity, in its own unit: about a tenth of how far it ranges over common
sections (common practice). It matters only for limits closer to zero than this."""

LEAST_SCALE = 0.01
"""Least scale of every other quantity: a hundredth of a chord."""


@dataclass(frozen=True, slots=True)
class ConstraintSpec:
    """One limit.

    Attributes
    ----------
    name : str
        Unique name, such as ``cl_max@slow`` or ``depth@30%``.
    limit : float
        The limit, in `unit`.
    unit : str
        Unit of the limit and the value; empty for a plain number.
    kind : {"min", "max"}
        Whether the limit is the least or the largest value allowed.
    scale : float
        What a margin of one means, in `unit`.
    quantity : str
        The quantity's name.
    condition : str or None
        Where it is looked at; None for a quantity of the section.
    at : float or None
        Place along the chord of a quantity that needs one [x/c].
    """

    name: str
    limit: float
    unit: str
    kind: Kind
    scale: float
    quantity: str
    condition: str | None = None
    at: float | None = None

    def margin(self, value: float) -> float:
        """Return the scaled distance from the limit: negative is a violation."""
        distance = value - self.limit if self.kind == "min" else self.limit - value
        return distance / self.scale


def scale_of(quantity: str, limit: float, given: float | None, unit_size: float = 1.0) -> float:
    """Return what a margin of one means.

    Parameters
    ----------
    quantity : str
        The quantity's name.
    limit : float
        The limit.
    given : float or None
        The scale of the study, which goes before all else.
    unit_size : float
        How much one chord is in the unit of the limit: 1, or the chord [m] of a limit in metres.

    Returns
    -------
    float
        The given scale, or the size of the limit, but no less than the quantity's least scale.
    """
    if given is not None:
        return given
    return max(abs(limit), LEAST_SCALES.get(quantity, LEAST_SCALE) * unit_size)


def shortfall(margin: float) -> float:
    """Return how much a limit is missed by, scaled: zero if it is kept or cannot be judged."""
    return max(0.0, -margin) if not math.isnan(margin) else 0.0
