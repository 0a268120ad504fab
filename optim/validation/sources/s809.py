"""S809 with free transition: the tables of NREL/TP-500-29955."""

from __future__ import annotations

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint
from optim.validation.case import Comparison, Panel, Series, judge
from optim.validation.flight import mean_error, model, values
from optim.validation.record import Record

POINT = OperatingPoint(1e6, alpha=0.0)

LAST = 9.0
"""Greatest angle at which drag is compared [deg]."""

ATTACHED = 6.2
"""Greatest angle of the straight part of the lift [deg]."""


def compare(record: Record) -> Comparison:
    """Compare drag to 9 degrees; slope, zero-lift angle and moment of the attached part."""
    table = record.columns("polar")
    here = table["alpha_deg"] < LAST
    alpha, cl, cd, cm = (table[name][here] for name in ("alpha_deg", "cl", "cd_wake", "cm_c4"))
    section = model(record.sides())
    flows = section.angles(POINT, alpha.tolist())
    drag, lift = values(flows, "cd"), values(flows, "cl")
    straight = alpha < ATTACHED
    slope, offset = np.polyfit(alpha[straight], cl[straight], 1)
    ours, at_zero = np.polyfit(alpha[straight], lift[straight], 1)
    moment = values(flows, "cm_quarter")[straight]
    cases = (
        judge(
            record, "drag", float(np.mean(cd)), float(np.mean(drag)), error=mean_error(cd, drag)
        ),
        judge(record, "slope", float(slope), float(ours)),
        judge(record, "alpha_zero", float(-offset / slope), float(-at_zero / ours)),
        judge(
            record, "moment", float(np.mean(cm[straight])), float(np.mean(moment)),
            error=float(np.mean(np.abs(moment - cm[straight]))),
        ),
    )  # fmt: skip
    panels = (
        Panel(
            "Does drag agree over the angle?", "alpha deg", "cd",
            (Series("measured", alpha, cd, 0.0002),), (Series("computed", alpha, drag),),
        ),
        Panel(
            "Does lift agree over the angle?", "alpha deg", "cl",
            (Series("measured", alpha, cl, 0.01),), (Series("computed", alpha, lift),),
        ),
    )  # fmt: skip
    return Comparison(record, cases, panels)
