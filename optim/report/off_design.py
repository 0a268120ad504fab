"""What a design does away from its conditions: sweeps of the angle, clean and contaminated.

The first condition that is flown at a given lift or angle is swept as it is and with a contaminated
nose; the conditions of the lowest and the highest Reynolds number are swept as well where they
differ. Contaminated is transition forced at 5 % of the chord on both sides (common practice),
which is milder than real roughness: it thickens no layer.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.arrays import FloatArray
from optim.geometry.section import Section
from optim.geometry.spacing import panel_nodes
from optim.problem.conditions import Condition

if TYPE_CHECKING:
    from optim.aerodynamics.evaluator import SectionEvaluator

ANGLES = tuple(math.radians(degrees) for degrees in range(-6, 19))
"""Angles of attack that are swept [rad]: from below zero lift to past most stalls."""

CONTAMINATED = 0.05
"""Forced transition of a contaminated nose [x/c]."""

ALIKE = 0.05
"""Reynolds numbers that differ by less are one curve."""


@dataclass(frozen=True)
class Series:
    """One sweep.

    Attributes
    ----------
    name : str
        Which condition, Reynolds number, and whether contaminated.
    flows : tuple of SectionFlow
        One an angle.
    """

    name: str
    flows: tuple[SectionFlow, ...]


def off_design(
    section: Section,
    conditions: Sequence[Condition],
    panels: int,
    make: Callable[[FloatArray], SectionEvaluator],
) -> list[Series]:
    """Return the sweeps of a section.

    Parameters
    ----------
    section : Section
        A contour without faults.
    conditions : sequence of Condition
        Of the study.
    panels : int
        Panels around the section.
    make : callable
        Makes the evaluator of a section from its nodes.
    """
    from optim.aerodynamics.sweep import sweep  # noqa: PLC0415  a door that loads nothing

    evaluator = make(panel_nodes(section, panels))
    return [
        Series(name, tuple(sweep(evaluator, point, ANGLES)[0]))
        for name, point in _points(conditions)
    ]


def _points(conditions: Sequence[Condition]) -> list[tuple[str, OperatingPoint]]:
    first = next((one for one in conditions if not one.maximum), conditions[0])
    point = first.point
    dirty = replace(
        point,
        trip_upper=min(CONTAMINATED, point.trip_upper),
        trip_lower=min(CONTAMINATED, point.trip_lower),
    )
    found = [(_name(first), point), (f"{_name(first)}, contaminated", dirty)]
    for choose in (min, max):
        other = choose(conditions, key=lambda one: one.reynolds)
        if abs(other.reynolds / first.reynolds - 1.0) > ALIKE:
            found.append((_name(other), other.point))
    return found


def _name(condition: Condition) -> str:
    return f"{condition.name}, Re {condition.reynolds:.3g}"
