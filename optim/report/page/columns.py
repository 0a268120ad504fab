"""Every quantity of the shown designs as a column: what axes, colours and limits may name."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from optim.archive.reader import Run
from optim.arrays import FloatArray
from optim.report.archived import picked
from optim.report.judgement import DEGREE, RADIAN, Judgement
from optim.report.page.packing import Packed, packed
from optim.report.page.words import plain, readable, unit_as_read
from optim.report.units import factor_and_sign
from optim.study.vocabulary import QUANTITIES

OBJECTIVE, LIMIT, MARGIN, SECTION = "Objectives", "Limits", "Margins", "Section"
"""Groups of columns; each condition is one more."""


VIOLATION = "violation"
"""Key of the column of what is missed in all."""


@dataclass(frozen=True)
class Column:
    """One quantity of all shown designs.

    Attributes
    ----------
    key : str
        Unique: ``objective:lift_to_drag@survey``, ``margin:thickness``, ``survey:cd``.
    label, unit : str
        As they are read; the unit may be empty.
    group : str
        Under which heading it is found.
    values : (n,) array
        In `unit`; not-a-number where absent.
    """

    key: str
    label: str
    unit: str
    group: str
    values: FloatArray

    def document(self) -> dict[str, str | Packed]:
        """Return it as plain data."""
        return {
            "key": self.key,
            "label": self.label,
            "unit": self.unit,
            "group": self.group,
            "values": packed(self.values),
        }

    @property
    def varies(self) -> bool:
        """Whether two designs differ in it: what is equal for all tells none from another."""
        known = self.values[np.isfinite(self.values)]
        return bool(len(known)) and bool(known.max() > known.min())


def columns(run: Run, judgement: Judgement, rows: list[int]) -> list[Column]:
    """Return all columns of some evaluations.

    Parameters
    ----------
    run : Run
        Open.
    judgement : Judgement
        Of its evaluations.
    rows : list of int
        Evaluations.

    Returns
    -------
    list of Column
        Objectives and limits with their margins in any case; of the others those that vary.
    """
    if not rows:
        return []
    found = picked(run, rows, "quantities", "section_quantities")
    header = run.header
    others = _recorded(
        header.section_quantity_names,
        header.section_quantity_units,
        found["section_quantities"],
        SECTION,
        "section",
    )
    for k, name in enumerate(header.condition_names):
        if name in judgement.conditions:
            others += _recorded(
                header.condition_quantity_names,
                header.condition_quantity_units,
                found["quantities"][:, k],
                plain(name),
                name,
            )
    others.append(_violation(judgement, rows))
    return _judged(judgement, rows) + [one for one in others if one.varies]


def _judged(judgement: Judgement, rows: list[int]) -> list[Column]:
    aims = [
        _column(f"objective:{aim.name}", readable(aim.name), aim.unit, OBJECTIVE, values)
        for aim, values in zip(judgement.aims, judgement.objectives[rows].T, strict=True)
    ]
    limits = [
        _column(f"limit:{one.name}", readable(one.name), one.unit, LIMIT, values)
        for one, values in zip(judgement.limits, judgement.values[rows].T, strict=True)
    ]
    margins = [
        _column(f"margin:{one.name}", f"margin of {readable(one.name)}", "1", MARGIN, values)
        for one, values in zip(judgement.limits, judgement.margins[rows].T, strict=True)
    ]
    return aims + limits + margins


def _violation(judgement: Judgement, rows: list[int]) -> Column:
    """Return the sum of what is missed of all limits over their scales."""
    missed = judgement.violation[rows]
    known = np.where(np.isfinite(missed), missed, np.nan)
    return Column(VIOLATION, "sum of what is missed", "", MARGIN, known)


def _recorded(
    names: tuple[str, ...], units: tuple[str, ...], values: FloatArray, group: str, prefix: str
) -> list[Column]:
    """Return recorded quantities of the vocabulary; codes and counts of the solver are none."""
    return [
        _column(f"{prefix}:{name}", readable(name), unit, group, column)
        for name, unit, column in zip(names, units, values.T, strict=True)
        if name.partition("@")[0] in QUANTITIES
    ]


def _column(key: str, label: str, unit: str, group: str, values: FloatArray) -> Column:
    if unit == RADIAN:
        return Column(key, label, DEGREE, group, np.degrees(values))
    factor, _ = factor_and_sign(unit)
    return Column(key, label, unit_as_read(unit), group, values * factor)
