"""Units of the archive as a person reads them: fractions of the chord in per cent, metres in mm."""

from __future__ import annotations

import math

_AS_READ = {
    "1": (1.0, ""),
    "chord": (100.0, " %"),
    "chord^2": (100.0, " % of chord^2"),
    "m": (1e3, " mm"),
    "m^2": (1e4, " cm2"),
    "deg": (1.0, " deg"),
}
"""Unit -> factor and sign."""


def factor_and_sign(unit: str) -> tuple[float, str]:
    """Return what a value is multiplied by to be read, and what is written behind it.

    An unknown unit, of a later archive, is left as it is.
    """
    return _AS_READ.get(unit, (1.0, f" {unit}"))


def as_read(value: float | None, unit: str) -> str:
    """Return a value with its unit, a dash where there is none.

    >>> as_read(0.017, "m"), as_read(0.1, "chord"), as_read(float("nan"), "1")
    ('17 mm', '10 %', '-')
    """
    if value is None or math.isnan(value):
        return "-"
    factor, sign = factor_and_sign(unit)
    return f"{factor * value:.4g}{sign}"
