"""Flight states to operating points: what the study says of a condition, resolved to numbers.

A condition is given by its speed or its Reynolds number, in standard air or in water, at the real
chord. Level flight turns the craft's weight into a lift coefficient, cl = 2 m g n / (rho V^2 S).
What is given twice must agree; what disagrees is a fault of the study, and all faults are told at
once.

References
----------
.. [1] L. M. Mack, "Transition prediction and linear stability theory", AGARD CP-224 (1977),
   paper 1: N = -8.43 - 2.4 ln(Tu) for 0.1 to 2 % turbulence (from memory).
"""

from __future__ import annotations

import math
from dataclasses import asdict, dataclass

from optim.aerodynamics.medium import STANDARD_GRAVITY, Medium, air, water
from optim.aerodynamics.operating_point import OperatingPoint
from optim.errors import Fault, StudyError
from optim.study.schema import DEFAULT_N_FACTOR, Study
from optim.study.schema import Condition as FlightState

Path = tuple[str | int, ...]

REYNOLDS_TOLERANCE = 0.01
"""How far a given Reynolds number may be from speed times chord over viscosity, relative: what
rounding to three figures leaves, with room for another choice of standard air."""

MACH_TOLERANCE = 0.005
"""How far a given Mach number may be from speed over the speed of sound [-]."""

LEAST_REYNOLDS, MOST_REYNOLDS = 1e4, 1e8
"""Range in which the closures of the boundary layer are used [-]."""

MOST_MACH = 0.9
"""Beyond this no section here stays subsonic [-]; the evaluator refuses earlier where it must."""

MOST_LIFT = 5.0
"""Lift coefficients beyond this are a slip in mass, area or speed [-]."""

MACK_INTERCEPT, MACK_SLOPE = -8.43, -2.4
"""Mack's fit of the critical amplification exponent, [1]_."""

LEAST_N_FACTOR = 1.0
"""Below this transition is a bypass and e^N says nothing [-]."""


@dataclass(frozen=True, slots=True)
class Condition:
    """One condition of a study, resolved.

    Attributes
    ----------
    name : str
        As in the study.
    speed : float
        True speed [m/s]; not-a-number where the study gives no medium to tell it by.
    density : float
        Density of the medium [kg/m3]; not-a-number without a medium.
    viscosity : float
        Dynamic viscosity of the medium [Pa s]; not-a-number without a medium.
    chord : float
        Chord [m].
    reynolds, mach : float
        Reynolds number on the chord and Mach number [-].
    cl : float
        Lift coefficient to be met [-]; not-a-number where the angle is given or the peak sought.
    alpha : float
        Angle of attack [rad]; not-a-number unless given.
    n_factor : float
        Critical amplification exponent [-].
    trip_upper, trip_lower : float
        Forced transition [x/c]; 1 is free.
    maximum : bool
        Whether the peak of the lift is sought.
    """

    name: str
    speed: float
    density: float
    viscosity: float
    chord: float
    reynolds: float
    mach: float
    cl: float
    alpha: float
    n_factor: float
    trip_upper: float
    trip_lower: float
    maximum: bool

    def stated(self) -> dict[str, str | float | bool | None]:
        """Return everything by name in SI units, None where there is nothing."""
        return {
            key: None if isinstance(value, float) and math.isnan(value) else value
            for key, value in asdict(self).items()
        }

    @property
    def point(self) -> OperatingPoint:
        """The operating point; a search for the peak starts at no angle."""
        angle = 0.0 if self.maximum else self.alpha
        return OperatingPoint(
            reynolds=self.reynolds,
            alpha=None if math.isnan(angle) else angle,
            cl=None if math.isnan(self.cl) else self.cl,
            mach=self.mach,
            n_factor=self.n_factor,
            trip_upper=self.trip_upper,
            trip_lower=self.trip_lower,
        )


def mack_n_factor(turbulence: float) -> float:
    """Return the critical amplification exponent of a turbulent stream.

    Parameters
    ----------
    turbulence : float
        Root mean square of the fluctuations over the speed, 0.001 to 0.02 [-].

    Returns
    -------
    float
        Critical exponent N [-]; [1]_, a fit to wind-tunnel transition on flat plates.
    """
    return MACK_INTERCEPT + MACK_SLOPE * math.log(turbulence)


def resolve(study: Study) -> tuple[Condition, ...]:
    """Return all conditions of a study, resolved.

    Parameters
    ----------
    study : Study
        A study whose keys fit together.

    Returns
    -------
    tuple of Condition
        In the order of the study.

    Raises
    ------
    StudyError
        With every disagreement, each with its path: a Reynolds or Mach number that does not fit
        the speed, or a state outside the range of the method.
    """
    faults: list[Fault] = []
    n_factor = _study_n_factor(study, faults)
    states = study.conditions.items()
    resolved = tuple(
        _Resolver(study, name, state, n_factor, faults).run() for name, state in states
    )
    if faults:
        raise StudyError(faults)
    return resolved


def _study_n_factor(study: Study, faults: list[Fault]) -> float:
    """Critical exponent of the study: given, from its turbulence, or the default."""
    if study.n_factor is not None:
        return study.n_factor
    if study.turbulence is None:
        return DEFAULT_N_FACTOR
    n_factor = mack_n_factor(study.turbulence)
    if n_factor < LEAST_N_FACTOR:
        most = math.exp((LEAST_N_FACTOR - MACK_INTERCEPT) / MACK_SLOPE)
        message = (
            f"a turbulence of {100.0 * study.turbulence:.3g} % leaves no growth of waves to "
            f"predict transition by (N = {n_factor:.2f}); accepted is up to {100.0 * most:.3g} %, "
            f"or n_factor."
        )
        faults.append(Fault(message, ("turbulence",)))
    return n_factor


@dataclass(frozen=True, slots=True)
class _Resolver:
    """One condition on its way to numbers; what does not fit goes to `faults`."""

    study: Study
    name: str
    state: FlightState
    n_factor: float
    faults: list[Fault]

    def run(self) -> Condition:
        """Return the condition, complete even where it is at fault."""
        medium = self._medium()
        speed = self._speed(medium)
        maximum = self.state.lift_or_level == "maximum"
        return Condition(
            name=self.name,
            speed=speed,
            density=math.nan if medium is None else medium.density,
            viscosity=math.nan if medium is None else medium.dynamic_viscosity,
            chord=self.study.chord,
            reynolds=self._reynolds(medium, speed),
            mach=self._mach(medium),
            cl=self._lift(medium, speed),
            alpha=math.nan if self.state.alpha is None else self.state.alpha,
            n_factor=self.n_factor if self.state.n_factor is None else self.state.n_factor,
            trip_upper=self.state.transition.upper,
            trip_lower=self.state.transition.lower,
            maximum=maximum,
        )

    def _fault(self, key: str, message: str) -> None:
        self.faults.append(Fault(message, ("conditions", self.name, key)))

    def _medium(self) -> Medium | None:
        """Return the medium: the condition's own air, or the study's air or water."""
        settings = self.state.air or self.study.air
        if settings is not None:
            return air(settings.altitude, settings.warmer_than_standard)
        if self.study.water is not None:
            return water(self.study.water.temperature, salt=self.study.water.salt)
        return None

    def _speed(self, medium: Medium | None) -> float:
        """Speed given, or the one that makes the given Reynolds number [m/s]."""
        if self.state.speed is not None:
            return self.state.speed
        if medium is None or self.state.reynolds is None:
            return math.nan
        return self.state.reynolds * medium.kinematic_viscosity / self.study.chord

    def _reynolds(self, medium: Medium | None, speed: float) -> float:
        """Reynolds number given, which must fit a speed, or the one that the speed makes."""
        given = self.state.reynolds
        if medium is None:
            return math.nan if given is None else given
        computed = speed * self.study.chord / medium.kinematic_viscosity
        if given is not None:
            self._compare_reynolds(given, computed)
            return given
        if not LEAST_REYNOLDS <= computed <= MOST_REYNOLDS:
            message = (
                f"the Reynolds number of {speed:g} m/s on {self.study.chord:g} m is "
                f"{computed:.3g}; accepted is {LEAST_REYNOLDS:g} to {MOST_REYNOLDS:g}."
            )
            self._fault("speed", message)
        return computed

    def _compare_reynolds(self, given: float, computed: float) -> None:
        if abs(given / computed - 1.0) > REYNOLDS_TOLERANCE:
            message = (
                f"the Reynolds number {given:.4g} disagrees with speed times chord over "
                f"viscosity, {computed:.4g}; accepted is within "
                f"{100.0 * REYNOLDS_TOLERANCE:g} % of it, or one of speed and reynolds alone."
            )
            self._fault("reynolds", message)

    def _mach(self, medium: Medium | None) -> float:
        """Mach number given, or of a given speed; 0 where only a Reynolds number is given."""
        given, speed = self.state.mach, self.state.speed
        if medium is None or speed is None:
            return 0.0 if given is None else given
        computed = speed / medium.speed_of_sound
        if given is None:
            if computed > MOST_MACH:
                message = (
                    f"{speed:g} m/s is Mach {computed:.3g}; accepted is a speed below Mach "
                    f"{MOST_MACH:g}."
                )
                self._fault("speed", message)
            return computed
        if abs(given - computed) > MACH_TOLERANCE:
            message = (
                f"the Mach number {given:.4g} disagrees with the speed, which is Mach "
                f"{computed:.4g}; accepted is within {MACH_TOLERANCE:g} of it, or one of speed "
                f"and mach alone."
            )
            self._fault("mach", message)
        return given

    def _lift(self, medium: Medium | None, speed: float) -> float:
        """Lift coefficient given or of level flight; not-a-number with an angle or a peak."""
        lift = self.state.lift_or_level
        if lift is None or lift == "maximum":
            return math.nan
        if lift != "level":
            return lift
        craft = self.study.craft
        if craft is None or medium is None or math.isnan(speed):
            self._fault("lift", "level flight needs a craft, a medium and a speed or reynolds.")
            return math.nan
        load = self.state.load_factor * craft.mass * STANDARD_GRAVITY
        cl = 2.0 * load / (medium.density * speed**2 * craft.wing_area)
        if cl > MOST_LIFT:
            message = (
                f"level flight at {speed:g} m/s needs a lift coefficient of {cl:.3g}; accepted "
                f"is up to {MOST_LIFT:g}: look at mass, wing_area and speed."
            )
            self._fault("speed" if self.state.speed is not None else "reynolds", message)
        return cl
