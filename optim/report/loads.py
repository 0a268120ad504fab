"""What the air does to a metre of span at a recorded condition: elementary mechanics.

With the dynamic pressure q = rho V^2 / 2 and the chord c, the lift is q c cl and the moment about
the quarter chord, which twists the wing, q c^2 cm, nose-up positive; both a metre of span.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from optim.report.fields import Document


@dataclass(frozen=True)
class Load:
    """Loads of a metre of span; not-a-number where the flow has no answer.

    Attributes
    ----------
    condition : str
        Name.
    speed : float
        True speed [m/s].
    pressure : float
        Dynamic pressure [Pa].
    lift : float
        [N/m]
    moment : float
        About the quarter chord, nose-up positive [N m/m].
    centre : float
        Centre of pressure from the nose [m].
    """

    condition: str
    speed: float
    pressure: float
    lift: float
    moment: float
    centre: float


def loads(
    flown: Mapping[str, Mapping[str, Any]], found: Mapping[str, Document], chord: float
) -> list[Load]:
    """Return the loads at every condition with a speed, the fastest (by pressure) first.

    Parameters
    ----------
    flown : mapping
        Condition -> what was flown: speed [m/s] and density [kg/m3], None without a medium.
    found : mapping
        Condition -> fields of its flow.
    chord : float
        As built [m].
    """
    rows = []
    for name, flow in found.items():
        speed, density = flown[name]["speed"], flown[name]["density"]
        if speed is None or density is None:
            continue
        pressure = 0.5 * density * speed**2
        rows.append(
            Load(
                condition=name,
                speed=speed,
                pressure=pressure,
                lift=pressure * chord * flow["cl"],
                moment=pressure * chord**2 * flow["cm_quarter"],
                centre=chord * flow["x_cp"],
            )
        )
    return sorted(rows, key=lambda load: -load.pressure)
