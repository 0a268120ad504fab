"""Flows about sections as tables for people and as rows for a spreadsheet."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Any

from optim.cli.front_text import flat_point
from optim.cli.output import banded, number, table
from optim.outcomes import Outcome
from optim.report.cautions import (
    BANDS,
    CAUTION,
    CAUTION_LIFT,
    NOT_MODELLED,
    SECOND_SOLUTION,
)

Document = dict[str, Any]

_HEAD = [
    "alpha deg", "cl", "cd", "cl/cd", "cm c/4", "x_cp", "cp min", "upper x/c", "lower x/c",
    "separated", "outcome or flags",
]  # fmt: skip


def analysis_text(results: list[Document], *, surface: bool) -> str:
    """Return the results as tables, each with its section, and what the outcomes mean."""
    from optim.aerodynamics.coverage import FLAGS  # noqa: PLC0415  --help loads no numpy

    parts = [part for result in results for part in _result(result, surface=surface)]
    outcomes = {point["outcome"] for result in results for point in result["points"]}
    failed = [one for one in Outcome if one.label in outcomes and one is not Outcome.CONVERGED]
    parts += [f"{one.label}: {one.sentence}" for one in failed]
    flagged = {flag for result in results for point in result["points"] for flag in point["flags"]}
    parts += [f"{flag}: {sentence}" for flag, sentence in FLAGS.items() if flag in flagged]
    if any(point["second_solution"] for result in results for point in result["points"]):
        parts.append(SECOND_SOLUTION)
    if any(point["band"] for result in results for point in result["points"]):
        parts.append(BANDS)
    parts += [CAUTION, NOT_MODELLED]
    if any(result.get("derived") for result in results):
        parts.append(CAUTION_LIFT)
    return "\n".join(parts)


def _result(result: Document, *, surface: bool) -> Iterator[str]:
    section, first = result["section"], result["points"][0]
    yield (
        f"{section['name']}: thickness {_percent(section['thickness'])} at "
        f"{_percent(section['thickness_x'])}, camber {_percent(section['camber'])} at "
        f"{_percent(section['camber_x'])}, nose radius {_percent(section['nose_radius'])}, "
        f"trailing edge {_percent(section['trailing_edge_gap'])}"
    )
    yield _state(first)
    yield table(_HEAD, [_point_row(point) for point in result["points"]])
    if "derived" in result:
        yield _derived_table(result["derived"])
    if "grid" in result:
        yield from _grid_tables(result["grid"])
    if surface:
        yield from (_surface_table(one) for one in result["points"] if one["surface"])


def _percent(value: float) -> str:
    return f"{100.0 * value:.2f} %" if math.isfinite(value) else "-"


def _state(point: Document) -> str:
    if not math.isfinite(point["reynolds"]):
        return f"inviscid, M {point['mach']:g}, {point['panels']} panels"
    return (
        f"Re {point['reynolds']:g}, M {point['mach']:g}, N {point['n_factor']:g}, "
        f"{point['panels']} panels"
    )


def _point_row(point: Document) -> list[str]:
    forms = {
        "alpha_deg": ".2f", "cl": ".4f", "cd": ".5f", "lift_to_drag": ".1f", "cm_quarter": ".4f",
    }  # fmt: skip
    band = point["band"] or {}
    return [
        *[banded(point[name], band.get(name), form) for name, form in forms.items()],
        number(point["x_cp"], ".3f"),
        number(point["cp_min"], ".2f"),
        _transition(point, "upper"),
        _transition(point, "lower"),
        _separation(point),
        _last_cell(point),
    ]


def _last_cell(point: Document) -> str:
    """How the flow ended if not well, else in what it is out of the ordinary."""
    if point["outcome"] != Outcome.CONVERGED.label:
        return str(point["outcome"])
    return " ".join([*point["flags"], *(["second_solution"] if point["second_solution"] else [])])


def _transition(point: Document, side: str) -> str:
    """Where the layer turns turbulent; how, unless by itself."""
    kind = point[f"transition_kind_{side}"]
    place = number(point[f"transition_{side}"], ".3f")
    return place if kind in {"natural", "none"} else f"{kind} {place}"


def _separation(point: Document) -> str:
    places = [(side, point[f"separation_{side}"]) for side in ("upper", "lower")]
    found = [f"{side} {place:.3f}" for side, place in places if not math.isnan(place)]
    return " ".join(found) or "-"


_DERIVED = {
    "alpha_zero_lift_deg": "zero-lift angle [deg]",
    "lift_slope_per_deg": "lift slope [1/deg]",
    "slope_range_deg": "  over the angles [deg]",
    "cl_max": "greatest lift coefficient",
    "alpha_cl_max_deg": "  at the angle [deg]",
    "aerodynamic_centre_x": "aerodynamic centre [x/c]",
    "cm_aerodynamic_centre": "moment about it",
    "cm_zero_lift": "moment at zero lift, about c/4",
    "stall": "kind of stall",
    "x_cp_range": "centre of pressure from, to [x/c]",
    "low_drag_range": "low-drag range of cl (cd to 1.2 of the least)",
}


def _derived_table(derived: Document) -> str:
    width = max(len(title) for title in _DERIVED.values())
    return "".join(
        f"{title.ljust(width)}  {_derived_cell(derived[name])}{_width(derived, name)}\n"
        for name, title in _DERIVED.items()
    )


def _width(derived: Document, name: str) -> str:
    width = (derived["band"] or {}).get(name)
    return "" if width is None else f" ±{width:.2g}"


def _derived_cell(value: Any) -> str:  # noqa: ANN401  a word, a number, a range or nothing
    if isinstance(value, str):
        return value.replace("_", " ")
    if value is None:
        return "-"
    if isinstance(value, list | tuple):
        return " to ".join(number(end, ".4g") for end in value)
    return number(value, ".5g")


def _grid_tables(grid: list[Document]) -> Iterator[str]:
    for comparison in grid:
        half, asked, double = comparison["panels"]
        head = ["", f"{half} panels", f"{asked}", f"{double}", "extrapolated", "error"]
        rows = [
            [
                name,
                *[number(one[key], ".5g") for key in ("half", "asked", "double", "extrapolated")],
                number(one["estimated_error"], ".1e"),
            ]
            for name, one in comparison["quantities"].items()
        ]
        yield table(head, rows)


_COLUMNS = (
    "x", "y", "s", "cp", "speed", "theta", "delta_star", "shape_factor", "skin_friction", "n",
)  # fmt: skip


def _surface_table(point: Document) -> str:
    rows = [
        [row["side"], *[number(row[name], ".5f") for name in _COLUMNS]]
        for row in _stations(point["surface"])
    ]
    return f"alpha {number(point['alpha_deg'], '.2f')} deg\n" + table(["side", *_COLUMNS], rows)


def _stations(surface: Document) -> Iterator[Document]:
    """Yield one row a station; a layer's values are absent in an inviscid flow."""
    for k in range(len(surface["x"])):
        yield {name: None if values is None else values[k] for name, values in surface.items()}


def analysis_rows(results: list[Document], *, surface: bool) -> list[Document]:
    """Return one flat row a point, or one a station of its surface."""
    rows = []
    for result in results:
        name = {"section": result["section"]["name"]}
        for point in result["points"]:
            if not surface:
                rows.append(name | flat_point(point))
            elif point["surface"]:
                which = {"reynolds": point["reynolds"], "alpha_deg": point["alpha_deg"]}
                rows += [name | which | row for row in _stations(point["surface"])]
    return rows
