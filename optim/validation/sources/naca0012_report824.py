"""Drag of NACA 0012 with free transition: NACA Report 824."""

from __future__ import annotations

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint
from optim.validation.case import Comparison, Panel, Series, judge
from optim.validation.flight import mean_error, naca, values
from optim.validation.record import Record

POINT = OperatingPoint(6e6, alpha=0.0)


def compare(record: Record) -> Comparison:
    """Compare drag to a lift of one on both sides, and the least drag."""
    table = record.columns()
    low = np.abs(table["cl"]) <= 1.0
    cl, cd = table["cl"][low], table["cd"][low]
    computed = values(naca("0012").lifts(POINT, cl), "cd")
    means = float(np.mean(cd)), float(np.mean(computed))
    cases = (
        judge(record, "drag_to_lift_one", *means, error=mean_error(cd, computed)),
        judge(record, "drag_least", float(cd.min()), float(computed.min())),
    )
    panel = Panel(
        "Does drag agree at equal lift?", "cl", "cd",
        (Series("measured", cl, cd, 0.0003),), (Series("computed", cl, computed),),
    )  # fmt: skip
    return Comparison(record, cases, (panel,))
