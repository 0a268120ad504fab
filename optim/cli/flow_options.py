"""The options of ``analyse`` that say at which points a section is flown."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields
from typing import TYPE_CHECKING

from optim.cli.console import misuse

if TYPE_CHECKING:
    from optim.report.analysis import Asked
    from optim.study.values import Value

PANELS = 160
"""Panels unless asked otherwise: the number of the studies."""

LONGEST_SWEEP = 1000
"""More angles than this are a slip of the step."""


@dataclass(frozen=True)
class FlowOptions:
    """What was written on the command line, None where nothing was.

    Attributes
    ----------
    reynolds, alpha, cl : str or None
        Numbers with commas between; angles in degrees.
    sweep : str or None
        ``FIRST:LAST:STEP`` in degrees.
    mach, n_factor, trip_upper, trip_lower : str or None
        Numbers.
    panels : int or None
        Panels around the section.
    inviscid, check_grid : bool
        Flags.
    """

    reynolds: str | None = None
    alpha: str | None = None
    cl: str | None = None
    sweep: str | None = None
    mach: str | None = None
    n_factor: str | None = None
    trip_upper: str | None = None
    trip_lower: str | None = None
    panels: int | None = None
    inviscid: bool = False
    check_grid: bool = False

    def written(self) -> list[str]:
        """Return the options that were written, as they are written."""
        return [
            f"--{one.name.replace('_', '-')}"
            for one in fields(self)
            if getattr(self, one.name) not in (None, False)
        ]

    def asked(self) -> Asked:
        """Return what is asked of every section.

        Raises
        ------
        InputError
            If something is missing, out of range or given twice.
        """
        from optim.aerodynamics.operating_point import OperatingPoint  # noqa: PLC0415
        from optim.report.analysis import Asked  # noqa: PLC0415
        from optim.study.schema import N_FACTOR  # noqa: PLC0415

        common = {
            "mach": _one("--mach", self.mach, _mach_range(), 0.0),
            "n_factor": _one("--n-factor", self.n_factor, N_FACTOR, 9.0),
            "trip_upper": _one("--trip-upper", self.trip_upper, _place_range(), 1.0),
            "trip_lower": _one("--trip-lower", self.trip_lower, _place_range(), 1.0),
        }
        reynolds = self._reynolds()
        points = [
            OperatingPoint(reynolds=reynolds[0], alpha=alpha, cl=cl, **common)
            for alpha, cl in self._attitudes()
        ]
        return Asked(
            points=tuple(points),
            reynolds=reynolds,
            panels=PANELS if self.panels is None else self.panels,
            swept=self.sweep is not None,
            inviscid=self.inviscid,
            check_grid=self.check_grid,
        )

    def _reynolds(self) -> tuple[float, ...]:
        if self.inviscid:
            self._refuse_viscous()
            return (math.nan,)
        if self.reynolds is None:
            raise misuse("give --reynolds R[,R...], or --inviscid.")
        return _several("--reynolds", self.reynolds, _reynolds_range())

    def _refuse_viscous(self) -> None:
        viscous = ("--reynolds", "--n-factor", "--trip-upper", "--trip-lower")
        without_effect = [name for name in self.written() if name in viscous]
        if without_effect:
            raise misuse(
                f"{', '.join(without_effect)} has no effect with --inviscid; leave it out."
            )

    def _attitudes(self) -> list[tuple[float | None, float | None]]:
        """Return angle [rad] and lift of each point, one of them None."""
        given = [name for name in ("alpha", "cl", "sweep") if getattr(self, name) is not None]
        if len(given) != 1:
            found = " and ".join(f"--{name}" for name in given) or "none of them"
            raise misuse(
                f"found {found}; accepted is one of --alpha A[,A...], --cl C[,C...] and "
                f"--sweep FIRST:LAST:STEP."
            )
        if self.cl is not None:
            return [(None, cl) for cl in _several("--cl", self.cl, _lift_range())]
        if self.alpha is not None:
            words = self.alpha.split(",")
        else:
            words = [repr(angle) for angle in _sweep_degrees(self.sweep or "")]
        name = "--alpha" if self.alpha is not None else "--sweep"
        from optim.study.schema import ALPHA  # noqa: PLC0415

        return [(_read(name, f"{word} deg", ALPHA), None) for word in words]


def _sweep_degrees(text: str) -> list[float]:
    from optim.report.analysis import sweep_angles  # noqa: PLC0415

    words = text.split(":")
    try:
        first, last, step = (float(word) for word in words)
        possible = (last - first) / step >= 0.0 and (last - first) / step <= LONGEST_SWEEP
    except (ValueError, ZeroDivisionError):
        possible = False
    if not possible:
        raise misuse(
            f"--sweep {text!r} is no sweep; accepted is FIRST:LAST:STEP in degrees, such as "
            f"-4:14:1, with a step that leads from the first to the last in at most "
            f"{LONGEST_SWEEP} steps."
        )
    return sweep_angles(first, last, step)


def _several(name: str, text: str, accepted: Value) -> tuple[float, ...]:
    return tuple(_read(name, word, accepted) for word in text.split(","))


def _one(name: str, text: str | None, accepted: Value, default: float) -> float:
    return default if text is None else _read(name, text, accepted)


def _read(name: str, text: str, accepted: Value) -> float:
    from optim.study.units import UnitError  # noqa: PLC0415

    try:
        return float(accepted.read(text))
    except UnitError as error:
        raise misuse(f"{name}: {error}") from error


def _reynolds_range() -> Value:
    from optim.problem.conditions import LEAST_REYNOLDS, MOST_REYNOLDS  # noqa: PLC0415
    from optim.study.values import Measure  # noqa: PLC0415

    return Measure(at_least=LEAST_REYNOLDS, at_most=MOST_REYNOLDS)


def _mach_range() -> Value:
    from optim.problem.conditions import MOST_MACH  # noqa: PLC0415
    from optim.study.values import Measure  # noqa: PLC0415

    return Measure(at_least=0.0, at_most=MOST_MACH)


def _lift_range() -> Value:
    from optim.problem.conditions import MOST_LIFT  # noqa: PLC0415
    from optim.study.values import Measure  # noqa: PLC0415

    return Measure(at_least=-MOST_LIFT, at_most=MOST_LIFT)


def _place_range() -> Value:
    from optim.study.units import FRACTION  # noqa: PLC0415
    from optim.study.values import Measure  # noqa: PLC0415

    return Measure(FRACTION, more_than=0.0, at_most=1.0)
