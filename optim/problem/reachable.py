"""What a search can reach before it has begun: random designs, without any flow.

Bounds decide what an overnight run can find. A glance at the shapes of some hundred random designs
shows bounds that hold no section, or limits on the shape that none of them comes near.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from optim.arrays import FloatArray
from optim.geometry.validity import faults
from optim.problem import judge
from optim.problem.constraints import ConstraintSpec
from optim.problem.problem import Problem
from optim.study.schema import SearchSettings

DESIGNS = 500
"""Random designs that are looked at."""

SEED = 500
"""Seed of their generator: the same study shows the same shares."""

PERCENTILES = (5.0, 50.0, 95.0)
"""Percentiles stated of each measure."""

MEASURES = ("thickness", "camber", "nose_radius")
"""What is stated of the random sections."""

FEW_SECTIONS = 0.5
"""Share of sections below which the bounds are said to be wide; rule of thumb."""

POINTS_OF_A_PEAK = 27
"""Coupled solutions that a search for the peak of the lift attempts, for the estimate: measured as
the mean over random designs of the shipped studies. Most take 5 to 15; one without a peak 100."""


@dataclass(frozen=True, slots=True)
class Reachable:
    """The shapes of random designs.

    Attributes
    ----------
    designs : int
        How many were looked at.
    share : float
        Share of them that are sections.
    percentiles : mapping of str to tuple of float
        Measure -> its values at `PERCENTILES` over the sections; empty if there is none.
    kept : mapping of str to float
        Limit on the shape -> share of the sections that keep it.
    warnings : tuple of str
        What is probably not meant, a sentence each.
    """

    designs: int
    share: float
    percentiles: Mapping[str, tuple[float, ...]]
    kept: Mapping[str, float]
    warnings: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Estimate:
    """What a run will take at most.

    Attributes
    ----------
    evaluations : int
        Designs.
    points : int
        Coupled solutions, every design flown to the end.
    seconds : float
        At the given rate [s].
    """

    evaluations: int
    points: int
    seconds: float


def reachable(problem: Problem, designs: int = DESIGNS, seed: int = SEED) -> Reachable:
    """Return what random designs within the bounds look like.

    Parameters
    ----------
    problem : Problem
        The problem; nothing is flown.
    designs : int
        How many designs to draw, evenly over the bounds.
    seed : int
        Seed of the draw.
    """
    generator = np.random.default_rng(seed)
    drawn = generator.uniform(problem.lower, problem.upper, (designs, len(problem.lower)))
    tables = [table for design in drawn if (table := _measures(problem, design)) is not None]
    share = len(tables) / designs
    limits = [spec for spec in problem.constraints if spec.condition is None]
    kept = {spec.name: _share_kept(spec, tables, problem.chord) for spec in limits}
    return Reachable(
        designs=designs,
        share=share,
        percentiles={name: _percentiles(name, tables) for name in MEASURES} if tables else {},
        kept=kept if tables else {},
        warnings=(*_warnings(share), *_limit_warnings(problem, limits, tables)),
    )


def estimate(problem: Problem, search: SearchSettings, points_per_second: float) -> Estimate:
    """Return what a run takes if every design is flown to the end.

    Parameters
    ----------
    problem : Problem
        The problem.
    search : SearchSettings
        Its population, generations and budget of evaluations.
    points_per_second : float
        Coupled solutions a second of all workers together.

    Raises
    ------
    ValueError
        If the rate is not positive.
    """
    if not points_per_second > 0.0:
        raise ValueError(f"the rate must be positive; found {points_per_second:g} points a second.")
    evaluations = search.population * search.generations
    if search.evaluations is not None:
        evaluations = min(evaluations, search.evaluations)
    each = sum(POINTS_OF_A_PEAK if c.maximum else 1 for c in problem.conditions)
    return Estimate(evaluations, evaluations * each, evaluations * each / points_per_second)


def _measures(problem: Problem, design: FloatArray) -> judge.Table | None:
    """Return what is recorded of a design's section, None if it is no section."""
    section = problem.section(design)
    return None if faults(section) else judge.Table(problem.measures(section), {}, {})


def _percentiles(name: str, tables: list[judge.Table]) -> tuple[float, ...]:
    values = np.array([table.of_section(name) for table in tables])
    return tuple(float(p) for p in np.percentile(values, PERCENTILES))


def _share_kept(spec: ConstraintSpec, tables: list[judge.Table], chord: float) -> float:
    margins = [spec.margin(judge.constraint_value(spec, table, chord)) for table in tables]
    return sum(margin >= 0.0 for margin in margins) / max(1, len(margins))


def _warnings(share: float) -> tuple[str, ...]:
    if share == 0.0:
        return ("no random design is a section: the bounds are far too wide; lower freedom.",)
    if share < FEW_SECTIONS:
        return (
            f"only {100.0 * share:.0f} % of random designs are sections: the bounds are wide; a "
            f"smaller freedom would waste fewer evaluations.",
        )
    return ()


def _limit_warnings(
    problem: Problem, limits: list[ConstraintSpec], tables: list[judge.Table]
) -> tuple[str, ...]:
    """Return a warning for each limit on the shape that no random section comes to keep."""
    found = []
    for spec in limits:
        values = [judge.constraint_value(spec, table, problem.chord) for table in tables]
        if not values or any(spec.margin(value) >= 0.0 for value in values):
            continue
        nearest = max(values) if spec.kind == "min" else min(values)
        word = "least" if spec.kind == "min" else "most"
        unit = "" if spec.unit == "1" else f" {spec.unit}"
        found.append(
            f"no random design keeps {spec.name} at {word} {spec.limit:g}{unit}; the nearest has "
            f"{nearest:.4g}{unit}. The limit may be out of reach, or freedom too small."
        )
    return tuple(found)
