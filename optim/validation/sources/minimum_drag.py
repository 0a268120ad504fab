"""Least drags of sections with free transition: NACA Report 824."""

from __future__ import annotations

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint
from optim.validation.case import Comparison, Panel, Series, judge
from optim.validation.flight import naca, values
from optim.validation.record import Record

LIFTS = np.linspace(-0.3, 0.8, 12)
"""Lifts among which the least drag is looked for."""


def compare(record: Record) -> Comparison:
    """Compare the least drag of each row."""
    table = record.columns()
    names, statuses = record.words("section"), record.words("status")
    cases = []
    found = []
    for i, (name, status) in enumerate(zip(names, statuses, strict=True)):
        reynolds = float(table["reynolds"][i])
        point = OperatingPoint(reynolds, alpha=0.0)
        least = float(np.nanmin(values(naca(name.split()[1]).lifts(point, LIFTS), "cd")))
        found.append(least)
        of = f"of {name.split()[1]}, Re {reynolds:.2g}".replace("e+0", "e")
        conditions = f"{of.partition(', ')[2]}, {record.conditions}"
        cases.append(
            judge(
                record, "drag", float(table["cd_min"][i]), least, of=of, section=name,
                status=status, conditions=conditions,
            )
        )  # fmt: skip
    places = np.arange(len(names), dtype=np.float64)
    label = tuple(
        f"{name.split()[1]}, {reynolds / 1e6:g}e6"
        for name, reynolds in zip(names, table["reynolds"], strict=True)
    )
    panel = Panel(
        "Does the least drag agree, section by section?", "section, Re", "cd",
        (Series("measured", places, table["cd_min"], 0.0003),),
        (Series("computed", places, np.array(found)),), names=label,
    )  # fmt: skip
    return Comparison(record, tuple(cases), (panel,))
