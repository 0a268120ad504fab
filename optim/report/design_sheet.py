"""One design on paper, two A4 pages: what it is and what it keeps; how it flies and what it bears.

What is archived is shown as archived. Only the curves away from the conditions are flown for the
sheet (`off_design`).
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

import matplotlib as mpl
import numpy as np

from optim.report.built_curve import MILLIMETRE
from optim.report.design_record import DesignRecord
from optim.report.fields import Document
from optim.report.loads import Load, loads
from optim.report.off_design import CONTAMINATED, Series
from optim.report.paper import HEIGHT, MARGIN, PRINT, SMALL, TITLE, WIDTH, Page
from optim.report.sheet_curves import draw_curves
from optim.report.sheet_outline import draw_outline
from optim.report.units import as_read

ROOM = WIDTH - 2.0 * MARGIN
"""Width between the margins [mm]."""

GUTTER, LEFT = 8.0, 78.0
"""Between two blocks beside each other, and width of the left one [mm]."""

GAP = 4.0
"""Between two blocks one below the other [mm]."""

FOOT = HEIGHT - MARGIN - 7.0
"""Where the caution at the foot of a page begins [mm]."""

STATIONS = (
    0.0, 0.5, 0.75, 1.25, 2.5, 5.0, 7.5, 10.0, 15.0, 20.0, 25.0, 30.0, 35.0, 40.0, 45.0, 50.0, 55.0,
    60.0, 65.0, 70.0, 75.0, 80.0, 85.0, 90.0, 95.0, 100.0,
)  # fmt: skip
"""Per cent of the chord: the stations of NACA Report 824 (from memory)."""

MOST_CONDITIONS, MOST_LIMITS = 10, 14
"""Rows for which there is room; what is left out is said."""


def design_sheet(
    record: DesignRecord, series: Sequence[Series], cautions: Sequence[str]
) -> list[Page]:
    """Return the two pages of a design.

    Parameters
    ----------
    record : DesignRecord
        What the archive holds of it.
    series : sequence of Series
        Its sweeps.
    cautions : sequence of str
        What is printed with every result, the first one on both pages.
    """
    with mpl.rc_context(PRINT):
        pages = [Page.new(), Page.new()]
        for number, page in enumerate(pages, start=1):
            page.text(MARGIN, MARGIN + 5.0, record.title, TITLE, weight="bold")
            page.text(WIDTH - MARGIN, MARGIN + 5.0, f"page {number} of 2", ha="right")
            page.rule(MARGIN, FOOT, ROOM)
            page.paragraph(MARGIN, FOOT + 0.5, ROOM, cautions[0], SMALL)
        _shape_page(pages[0], record)
        _flight_page(pages[1], record, series, cautions[1:])
    return pages


def _shape_page(page: Page, record: DesignRecord) -> None:
    study = record.study
    named = (
        f"{record.name}, found in generation {record.entry['generation'] + 1}; the baseline is "
        f"{study.section.baseline}. Lengths are in mm at a chord of {1e3 * study.chord:g} mm, "
        f"x from the nose along the chord line, y up."
    )
    y = page.paragraph(MARGIN, MARGIN + 6.5, ROOM, named)
    asked = [one.at for one in study.constraints if isinstance(one.at, float)]
    asked += [one.place for one in study.objectives if one.place is not None]
    y = page.heading(MARGIN, y + GAP, "Outline and depths")
    y = draw_outline(page, y, record.section, study.chord, asked) + GAP
    x, width = MARGIN + LEFT + GUTTER, ROOM - LEFT - GUTTER
    end = _coordinates(page, y, record)
    y = _aims(page, (x, y, width), record)
    y = _limits(page, (x, y + GAP, width), record)
    y = _variables(page, (x, y + GAP, width), record.entry["variables"])
    _identity(page, max(y, end) + GAP, record)


def _coordinates(page: Page, y: float, record: DesignRecord) -> float:
    size = record.study.chord / MILLIMETRE
    upper, lower = record.section.upper_lower(np.array(STATIONS) / 100.0)
    rows = [
        [f"{x:g} %", *[f"{size * one + 0.0:.3f}" for one in (x / 100.0, u, v, u - v)]]
        for x, u, v in zip(STATIONS, upper.tolist(), lower.tolist(), strict=True)
    ]
    y = page.heading(MARGIN, y, "Coordinates")
    return page.table(MARGIN, y, LEFT, ["x/c", "x", "y upper", "y lower", "depth"], rows)


Box = tuple[float, float, float]
"""x, y and width of a block [mm]."""


def _aims(page: Page, box: Box, record: DesignRecord) -> float:
    rows = [
        [
            f"{one['sense']} {one['name']}",
            as_read(record.entry["objectives"][one["name"]], one["unit"]),
            as_read(record.baseline["objectives"][one["name"]], one["unit"]),
        ]
        for one in record.wanted["objectives"]
    ]
    x, y, width = box
    y = page.heading(x, y, "What was wanted")
    return page.table(x, y, width, ["", "this design", "baseline"], rows)


def _limits(page: Page, box: Box, record: DesignRecord) -> float:
    found = record.entry["constraints"]
    limits = record.wanted["constraints"]
    rows = [
        [
            one["name"],
            f"{one['kind']} {as_read(one['limit'], one['unit'])}",
            as_read(found[one["name"]]["value"], one["unit"]),
            _margin(found[one["name"]]),
        ]
        for one in limits[:MOST_LIMITS]
    ]
    x, y, width = box
    y = page.heading(x, y, "What had to be kept")
    if not rows:
        return page.paragraph(x, y, width, "The study has no limits.")
    y = page.table(x, y, width, ["", "limit", "found", "margin"], rows)
    more = len(limits) - len(rows)
    words = f"{more} more limits: sectionwright front --json. " if more else ""
    words += "Margins are over the scale of the limit; * is active, negative is missed."
    return page.paragraph(x, y, width, words, SMALL)


def _margin(found: Document) -> str:
    if math.isnan(found["margin"]):
        return "-"
    return f"{found['margin']:+.2f}{'*' if found['active'] else ''}"


def _variables(page: Page, box: Box, variables: Mapping[str, float]) -> float:
    """Write the design variables, two beside each other."""
    x, y, width = box
    y = page.heading(x, y, "Design variables")
    words = [(name, f"{value:.6f}") for name, value in variables.items()]
    half = math.ceil(len(words) / 2)
    column = 0.5 * (width - GUTTER)
    ends = [
        page.table(x + k * (column + GUTTER), y, column, ["", "value"], part)
        for k, part in enumerate((words[:half], words[half:]))
        if part
    ]
    return max(ends)


def _identity(page: Page, y: float, record: DesignRecord) -> None:
    digests = record.provenance.get("digests", {})
    rows = [
        ["run, every result", record.run_digest],
        *[[name, str(digest)] for name, digest in sorted(digests.items())],
    ]
    y = page.heading(MARGIN, y, "Where it comes from")
    y = page.table(MARGIN, y, ROOM, ["SHA-256 of", ""], rows)
    made = [
        f"{name} {record.provenance[name]}"
        for name in ("sectionwright", "seed", "time", "host")
        if name in record.provenance
    ]
    words = (
        f"Recorded by {', '.join(made) or 'an unnamed version'}. The study, the digest of every "
        f"dataset and the versions of all libraries: sectionwright export {record.name} "
        f"--output FILE.json"
    )
    page.paragraph(MARGIN, y + 1.0, ROOM, words)


def _flight_page(
    page: Page, record: DesignRecord, series: Sequence[Series], cautions: Sequence[str]
) -> None:
    y = _performance(page, MARGIN + 9.0, record)
    y = _loads(page, y + GAP, record)
    texts = _assumptions(record) + list(cautions)
    below = _height_of(texts)
    y = page.heading(MARGIN, y + GAP, "Away from the conditions")
    flows = list(record.entry["conditions"].values())
    draw_curves(page, (y, FOOT - below - GAP - y), series, flows)
    y = page.heading(MARGIN, FOOT - below, "Assumptions and cautions")
    for text in texts:
        y = page.paragraph(MARGIN, y, ROOM, text, SMALL)


def _height_of(texts: Sequence[str]) -> float:
    """Return the height of the paragraphs at the foot, with their heading [mm]."""
    trial = Page.new()
    y = trial.heading(MARGIN, 0.0, "")
    for text in texts:
        y = trial.paragraph(MARGIN, y, ROOM, text, SMALL)
    return y + 2.0


PERFORMANCE = (
    "condition", "m/s", "Re", "M", "N", "trips x/c", "alpha", "cl", "cd", "cl/cd", "cm c/4", "x_cp",
    "cp min", "tr. upper", "tr. lower",
)  # fmt: skip


def _performance(page: Page, y: float, record: DesignRecord) -> float:
    shown = list(record.entry["conditions"].items())[:MOST_CONDITIONS]
    rows = []
    for name, flow in shown:
        rows.append([name, *_state(record.conditions[name]), *_forces(flow)])
        if flow["band"]:
            rows.append(["+/-", *[""] * 5, *_bands(flow["band"])])
    y = page.heading(MARGIN, y, "Performance at the conditions, as recorded")
    y = page.table(MARGIN, y, ROOM, PERFORMANCE, rows)
    words = [
        f"{name} has no answer: {flow['outcome']}."
        for name, flow in shown
        if flow["outcome"] != "converged"
    ]
    if not any(flow["band"] for _, flow in shown):
        words.append("The archive states no error beside these numbers.")
    words.append("tr.: transition, x/c.")
    if len(record.entry["conditions"]) > len(shown):
        words.append(
            f"{len(record.entry['conditions']) - len(shown)} more conditions: "
            f"sectionwright front --json."
        )
    return page.paragraph(MARGIN, y, ROOM, " ".join(words), SMALL)


def _state(flown: Document) -> list[str]:
    trips = [flown["trip_upper"], flown["trip_lower"]]
    return [
        _number(flown["speed"], ".2f"),
        _number(flown["reynolds"], ".3g"),
        _number(flown["mach"], ".3f"),
        _number(flown["n_factor"], "g"),
        "free" if min(trips) >= 1.0 else " ".join(f"{place:.2f}" for place in trips),
    ]


FORCES = (
    ("alpha_deg", ".2f"), ("cl", ".4f"), ("cd", ".5f"), ("lift_to_drag", ".1f"),
    ("cm_quarter", ".4f"), ("x_cp", ".3f"), ("cp_min", ".2f"), ("transition_upper", ".3f"),
    ("transition_lower", ".3f"),
)  # fmt: skip


def _forces(flow: Document) -> list[str]:
    return [_number(flow[name], form) for name, form in FORCES]


def _bands(band: Mapping[str, float]) -> list[str]:
    return [_number(band.get(name), form) for name, form in FORCES]


def _number(value: Any, form: str) -> str:  # noqa: ANN401  a recorded number or nothing
    return "-" if value is None or math.isnan(value) else f"{value:{form}}"


LOADS = (
    "condition", "m/s", "q [Pa]", "lift q c cl [N/m]", "moment q c^2 cm [N m/m]", "x_cp [mm]",
)  # fmt: skip


def _loads(page: Page, y: float, record: DesignRecord) -> float:
    found = loads(record.conditions, record.entry["conditions"], record.study.chord)
    y = page.heading(MARGIN, y, "Loads of a metre of span")
    if not found:
        words = "The study states no medium or no speed, so there are no forces in newtons."
        return page.paragraph(MARGIN, y, ROOM, words)
    head = [
        "condition",
        "m/s",
        "q [Pa]",
        "lift q c cl [N/m]",
        "moment q c^2 cm [N m/m]",
        "x_cp [mm]",
    ]
    y = page.table(MARGIN, y, ROOM, head, [_load_row(one) for one in found[:MOST_CONDITIONS]])
    words = (
        f"The fastest condition is first: {found[0].condition}. Moment about the quarter chord, "
        f"nose-up positive. Air loads of the section at these states only: no gust, no load "
        f"factor beyond the condition's own, no margin of safety. They are not design loads."
    )
    return page.paragraph(MARGIN, y, ROOM, words, SMALL)


def _load_row(load: Load) -> list[str]:
    return [
        load.condition,
        f"{load.speed:.2f}",
        f"{load.pressure:.1f}",
        _number(load.lift, ".2f"),
        _number(load.moment, ".3f"),
        _number(load.centre / MILLIMETRE, ".1f"),
    ]


def _assumptions(record: DesignRecord) -> list[str]:
    study = record.study
    medium = "no medium stated"
    if study.water is not None:
        medium = f"{'sea' if study.water.salt else 'fresh'} water, {study.water.temperature:.1f} K"
    elif study.air is not None:
        warmer = study.air.warmer_than_standard
        medium = (
            f"standard atmosphere at {study.air.altitude:g} m"
            f"{f', {warmer:+g} K' if warmer else ''}, unless a condition has its own"
        )
    return [
        f"Medium: {medium}. {study.evaluator.panels} panels with two-equation boundary layers, "
        f"solved together; transition by the e^N method at the N of the table. Two-dimensional, "
        f"steady, smooth. Contaminated: transition forced at {100.0 * CONTAMINATED:g} % of the "
        f"chord on both sides, which is milder than real roughness. Gaps in a curve are points "
        f"without an answer. To fly a condition again: sectionwright analyse {record.name} "
        f"--condition {next(iter(record.entry['conditions']))}",
    ]
