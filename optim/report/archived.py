"""Archived numbers -> the flows they were recorded from.

A row of the archive becomes a `SectionFlow` again, without its surface, so that what is shown of a
recorded flow and of a computed one goes through the same words.
"""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any, cast

import numpy as np

from optim.aerodynamics.operating_point import (
    OperatingPoint,
    SectionFlow,
    Side,
    SideState,
    TransitionKind,
)
from optim.archive.reader import Run
from optim.archive.records import RunHeader
from optim.arrays import FloatArray
from optim.outcomes import Outcome
from optim.problem.quantities import STAGNATION_SIDES, TRANSITION_KINDS


@dataclass(frozen=True)
class RecordedConditions:
    """How the flows of a run are read: its conditions and the names of its quantities.

    Attributes
    ----------
    points : mapping of str to OperatingPoint
        Condition -> what was flown, in the archive's order.
    stated : mapping of str to mapping
        Condition -> everything that is recorded of it, None where there is nothing.
    quantities : tuple of str
        Names of what is recorded of a flow, in the archive's order.
    panels : int
        Panels around a section.
    """

    points: Mapping[str, OperatingPoint]
    stated: Mapping[str, Mapping[str, Any]]
    quantities: tuple[str, ...]
    panels: int

    @classmethod
    def of_header(cls, header: RunHeader, panels: int) -> RecordedConditions:
        """Return what the header of a run says."""
        stated = {row["name"]: row for row in json.loads(header.conditions_table)}
        points = {name: _point(row) for name, row in stated.items()}
        return cls(points, stated, header.condition_quantity_names, panels)

    def flow(self, condition: str, row: FloatArray, code: int) -> SectionFlow:
        """Return a recorded flow.

        Parameters
        ----------
        condition : str
            Its condition.
        row : (n_condition_quantities,) array
            What is recorded of it.
        code : int
            How it ended.
        """
        values = dict(zip(self.quantities, row.tolist(), strict=True))
        side = _whole(values["stagnation_side"])
        return SectionFlow(
            point=self.points[condition],
            outcome=Outcome(code),
            panels=self.panels,
            alpha=values["alpha"],
            cl=values["cl"],
            cd=values["cd"],
            cd_friction=values["cd_friction"],
            cd_pressure=values["cd_pressure"],
            cm_quarter=values["cm_quarter"],
            x_cp=values["x_cp"],
            stagnation_x=values["stagnation_x"],
            stagnation_side=cast("Side", STAGNATION_SIDES[side]),
            cp_min=values["cp_min"],
            cp_min_x=values["cp_min_x"],
            upper=_side(values, "upper"),
            lower=_side(values, "lower"),
            iterations=_whole(values["iterations"]),
            residual=values["residual"],
        )


def peak_sought(flow: SectionFlow) -> SectionFlow:
    """Return a flow that was sought as the peak of the lift: no angle was asked for."""
    return replace(flow, point=replace(flow.point, alpha=math.nan, cl=None))


def _whole(code: float) -> int:
    """Return a recorded whole number; absent ones, of designs that were lost, are zero."""
    return 0 if math.isnan(code) else int(code)


def _point(row: Mapping[str, Any]) -> OperatingPoint:
    return OperatingPoint(
        reynolds=row["reynolds"],
        alpha=math.nan if row["maximum"] else row["alpha"],
        cl=row["cl"],
        mach=row["mach"],
        n_factor=row["n_factor"],
        trip_upper=row["trip_upper"],
        trip_lower=row["trip_lower"],
    )


def _side(values: Mapping[str, float], side: str) -> SideState:
    kind = TRANSITION_KINDS[_whole(values[f"transition_kind_{side}"])]
    start, end = values[f"bubble_{side}_start"], values[f"bubble_{side}_end"]
    return SideState(
        transition=values[f"transition_{side}"],
        transition_kind=cast("TransitionKind", kind),
        separation=values[f"separation_{side}"],
        bubble=None if math.isnan(start) else (start, end),
    )


def picked(run: Run, rows: list[int], *fields: str) -> dict[str, np.typing.NDArray[Any]]:
    """Return fields of some evaluations, in the order of `rows`, reading the run in blocks.

    Parameters
    ----------
    run : Run
        Open.
    rows : list of int
        Evaluations.
    fields : str
        As `Run.read` takes them.
    """
    found: dict[int, dict[str, Any]] = {}
    wanted = np.unique(np.array(rows, dtype=np.int64))
    start = 0
    for block in run.blocks(*fields):
        stop = start + len(block[fields[0]])
        for row in wanted[(wanted >= start) & (wanted < stop)].tolist():
            found[row] = {name: block[name][row - start] for name in fields}
        start = stop
    return {name: np.array([found[row][name] for row in rows]) for name in fields}
