"""What a section is asked to fly at, and what the evaluator answers.

Angles are in radians, lengths in chords, speeds in free-stream speeds; y is up and the pitching
moment is nose-up positive about x = 0.25.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from optim.arrays import FloatArray
from optim.outcomes import Outcome

TransitionKind = Literal["natural", "forced", "bubble", "none"]
Side = Literal["upper", "lower"]

QUARTER_CHORD = 0.25
"""Where the pitching moment is taken [x/c]."""

LEAST_LIFT_FOR_CENTRE_OF_PRESSURE = 0.05
"""Below this |cl| the centre of pressure runs to infinity and is not stated."""


@dataclass(frozen=True, slots=True)
class OperatingPoint:
    """One condition of the flow about a section: either the angle or the lift is given.

    Attributes
    ----------
    reynolds : float
        Reynolds number on the chord [-].
    alpha : float or None
        Angle of attack from the chord line [rad].
    cl : float or None
        Lift coefficient to be met [-].
    mach : float
        Free-stream Mach number [-].
    n_factor : float
        Critical amplification exponent of e^N transition [-].
    trip_upper, trip_lower : float
        Forced transition on each side [x/c]; 1 is free.
    """

    reynolds: float
    alpha: float | None = None
    cl: float | None = None
    mach: float = 0.0
    n_factor: float = 9.0
    trip_upper: float = 1.0
    trip_lower: float = 1.0

    def __post_init__(self) -> None:
        if (self.alpha is None) == (self.cl is None):
            raise ValueError("Give either the angle of attack or the lift coefficient.")


@dataclass(frozen=True, slots=True)
class Surface:
    """Distributions along the section and its wake, flat arrays of one length, side by side.

    Attributes
    ----------
    side : tuple of str
        "upper", "lower" or "wake"; the sides meet at the stagnation point.
    x, y : (n,) array
        Place [chords].
    s : (n,) array
        Length along the surface from the stagnation point, in the wake from the edge [chords].
    cp, speed : (n,) array
        Pressure coefficient and unsigned speed [-], compressible where the Mach number is not zero.
    theta, delta_star, shape_factor, skin_friction, n : (n,) array or None
        Momentum and displacement thickness [chords], H [-], friction on the free-stream dynamic
        pressure [-], amplification exponent [-] (not-a-number after transition). None if inviscid.
    """

    side: tuple[str, ...]
    x: FloatArray
    y: FloatArray
    s: FloatArray
    cp: FloatArray
    speed: FloatArray
    theta: FloatArray | None = None
    delta_star: FloatArray | None = None
    shape_factor: FloatArray | None = None
    skin_friction: FloatArray | None = None
    n: FloatArray | None = None


@dataclass(frozen=True, slots=True)
class SideState:
    """What the layer of one side does: places are x/c, not-a-number where there is none."""

    transition: float = math.nan
    transition_kind: TransitionKind = "none"
    separation: float = math.nan
    bubble: tuple[float, float] | None = None


@dataclass(frozen=True, slots=True)
class SectionFlow:
    """The answer at one operating point.

    Forces are not-a-number and `surface` is None unless `outcome` is CONVERGED.

    Attributes
    ----------
    alpha : float
        Angle of attack [rad].
    cl, cd, cd_friction, cd_pressure, cm_quarter : float
        Coefficients on the chord [-].
    x_cp : float
        Centre of pressure 0.25 - cm_quarter/cn [x/c]; not-a-number for |cl| < 0.05.
    stagnation_x : float
        Stagnation point [x/c], on `stagnation_side`.
    cp_min, cp_min_x : float
        Suction peak and its place [-, x/c].
    iterations : int
        Newton iterations of all attempts.
    residual : float
        Largest residual of the boundary-layer equations at the end [-]; not-a-number if unknown.
    """

    point: OperatingPoint
    outcome: Outcome
    panels: int
    alpha: float = math.nan
    cl: float = math.nan
    cd: float = math.nan
    cd_friction: float = math.nan
    cd_pressure: float = math.nan
    cm_quarter: float = math.nan
    x_cp: float = math.nan
    stagnation_x: float = math.nan
    stagnation_side: Side = "lower"
    cp_min: float = math.nan
    cp_min_x: float = math.nan
    upper: SideState = SideState()
    lower: SideState = SideState()
    iterations: int = 0
    residual: float = math.nan
    surface: Surface | None = None

    @property
    def converged(self) -> bool:
        """Whether the forces may be used."""
        return self.outcome is Outcome.CONVERGED

    @property
    def lift_to_drag(self) -> float:
        """Lift over drag, cl / cd [-]; not-a-number without drag."""
        return self.cl / self.cd if self.cd > 0.0 else math.nan
