"""How the constants of optim/aerodynamics/accuracy.py were made; not a test, runs a few minutes.

Every measured lift, drag, moment and maximum lift of the package's records is set beside the value
computed at the same condition, as `sectionwright validate` flies it: lift and moment at the angle,
drag at the lift. Recalled values, stalled ones, drag of S809 past the first fall of its lift and
E387 at Re 6e4, where it is bistable, are left out; so is lift of NACA 2412 at Re 3e6 and 6e6, where
hidden points shift it. What has no computed answer has no residual. The handbook's rows stand for
straight lines of lift and moment.

Usage::

    python tests/derivations/error_bands.py FOLDER

writes FOLDER/error_residuals.csv (a copy belongs into tests/data) and FOLDER/bands.txt (the lines
as they stand in accuracy.py). `python tests/derivations/error_bands.py FOLDER --again` distils the
residuals that are in FOLDER already.
"""

from __future__ import annotations

import csv
import math
import sys
from dataclasses import asdict, dataclass, fields
from pathlib import Path

import numpy as np

from optim.aerodynamics.accuracy import LOW_REYNOLDS, SPREADS, near_stall
from optim.aerodynamics.operating_point import OperatingPoint
from optim.geometry.section import section_from_coordinates
from optim.validation.case import FROM_MEMORY
from optim.validation.flight import model, naca
from optim.validation.record import read_record
from optim.validation.sources.naca4412_cr152263 import ANGLE as TEST_ANGLE
from optim.validation.sources.naca4412_cr152263 import POINT as TEST_POINT
from optim.validation.sources.naca4412_cr152263 import _lift as measured_lift

STALLED = 17.5
"""NACA 0012 tripped is stalled past this angle [deg]."""

LEAST_REYNOLDS = 1e5
"""Below it E387 is bistable and the measurements themselves do not agree."""


@dataclass(frozen=True)
class Residual:
    """One measured value beside the computed one, and what the flow looked like."""

    source: str
    section: str
    reynolds: float
    mach: float
    forced: bool
    quantity: str
    alpha_deg: float
    cl: float
    measured: float
    computed: float
    separation: float
    cp_min: float


def separation(flow):
    """Separation furthest forward of both sides [x/c]; 1 if there is none."""
    return min(1.0 if math.isnan(s.separation) else s.separation for s in (flow.upper, flow.lower))


def residual(source, section, flow, quantity, measured, computed=None):
    """One row, or none where either value is missing."""
    value = getattr(flow, quantity) if computed is None else computed
    if not (flow.converged and math.isfinite(measured + value)):
        return []
    point = flow.point
    forced = point.trip_upper < 1.0 or point.trip_lower < 1.0
    return [
        Residual(
            source, section, point.reynolds, point.mach, forced, quantity,
            math.degrees(flow.alpha), flow.cl, float(measured), float(value),
            separation(flow), flow.cp_min,
        )
    ]  # fmt: skip


def at_angles(source, name, flown, point, degrees, **measured):
    """Residuals at ascending angles of each quantity's column."""
    once, which = np.unique(degrees, return_inverse=True)
    flows = flown.angles(point, once.tolist())
    return [
        row
        for quantity, column in measured.items()
        for i, value in zip(which, column, strict=True)
        for row in residual(source, name, flows[i], quantity, value)
    ]


def at_lifts(source, name, flown, point, lifts, drags):
    """Residuals of drag at equal lift."""
    flows = flown.lifts(point, np.asarray(lifts))
    return [
        row
        for flow, cd in zip(flows, drags, strict=True)
        for row in residual(source, name, flow, "cd", cd)
    ]


def peak(source, name, flown, point, measured):
    """Residual of maximum lift."""
    flow = flown.evaluator.maximum_lift(point)
    return residual(source, name, flow, "cl_max", measured, flow.cl)


def naca_0012():
    """Tripped (NASA TM-4074) and free (NACA Report 824)."""
    flown, source = naca("0012"), "naca0012_tm4074"
    table = read_record(source).columns()
    kept = np.abs(table["alpha_deg"]) < STALLED
    alpha, cl, cd = (table[name][kept] for name in ("alpha_deg", "cl", "cd"))
    point = OperatingPoint(6e6, alpha=0.0, mach=0.15, trip_upper=0.05, trip_lower=0.05)
    yield from at_angles(source, "NACA 0012", flown, point, alpha, cl=cl)
    yield from at_lifts(source, "NACA 0012", flown, point, cl, cd)
    grits = table["trip_grit"]
    tops = [np.max(table["cl"][grits == grit]) for grit in np.unique(grits)]
    yield from peak(source, "NACA 0012", flown, point, np.mean(tops))
    source = "naca0012_report824"
    table = read_record(source).columns()
    free = OperatingPoint(6e6, alpha=0.0)
    yield from at_lifts(source, "NACA 0012", flown, free, table["cl"], table["cd"])


def naca_2412():
    """Free transition at three Reynolds numbers (NACA Report 824)."""
    flown, source = naca("2412"), "naca2412"
    record = read_record(source)
    drag, lift, moment = (record.columns(name) for name in ("drag", "lift", "moment"))
    for reynolds in (3e6, 6e6, 9e6):
        point = OperatingPoint(reynolds, alpha=0.0)
        here = drag["re"] == reynolds
        yield from at_lifts(source, "NACA 2412", flown, point, drag["cl"][here], drag["cd"][here])
        here = lift["re"] == reynolds
        top = int(np.argmax(np.where(here, lift["cl"], -9.0)))
        yield from peak(source, "NACA 2412", flown, point, lift["cl"][top])
        if reynolds < 9e6:
            continue
        here &= lift["alpha_deg"] <= lift["alpha_deg"][top]
        at = lift["alpha_deg"][here]
        yield from at_angles(source, "NACA 2412", flown, point, at, cl=lift["cl"][here])
        here = moment["re"] == reynolds
        here &= moment["alpha_deg"] <= lift["alpha_deg"][top]
        cm = moment["cm_c4"][here]
        yield from at_angles(
            source, "NACA 2412", flown, point, moment["alpha_deg"][here], cm_quarter=cm
        )


def e387():
    """Free transition from Re 1e5 (NASA TM-4062)."""
    source = "e387"
    record = read_record(source)
    at = record.columns("ordinates")
    flown = model(section_from_coordinates(np.column_stack([at["x_c"], at["y_c"]]), "E387")[0])
    polar, table = record.columns("polar"), record.columns("reynolds")
    point = OperatingPoint(2e5, alpha=0.0, mach=0.06)
    yield from at_lifts(source, "E387", flown, point, polar["cl"], polar["cd"])
    for reynolds in np.unique(table["Re"]):
        if reynolds < LEAST_REYNOLDS:
            continue
        here = table["Re"] == reynolds
        mach = float(table["mach"][here][0])
        point = OperatingPoint(float(reynolds), alpha=0.0, mach=mach)
        columns = {"cl": table["cl"][here], "cm_quarter": table["cm_c4"][here]}
        yield from at_angles(source, "E387", flown, point, table["alpha_deg"][here], **columns)
        yield from at_lifts(source, "E387", flown, point, table["cl"][here], table["cd"][here])


def nlf_0416():
    """Free transition at Re 4e6 (NASA TP-1861)."""
    source = "nlf0416"
    record = read_record(source)
    flown = model(record.sides())
    drag, lift = record.columns("drag"), record.columns("lift")
    point = OperatingPoint(4e6, alpha=0.0, mach=0.10)
    yield from at_lifts(source, record.section, flown, point, drag["cl"], drag["cd"])
    top, bottom = int(np.argmax(lift["cl"])), int(np.argmin(lift["cl"]))
    here = (lift["alpha_deg"] <= lift["alpha_deg"][top]) & (
        lift["alpha_deg"] >= lift["alpha_deg"][bottom]
    )
    cl = lift["cl"][here]
    yield from at_angles(source, record.section, flown, point, lift["alpha_deg"][here], cl=cl)
    yield from peak(source, record.section, flown, point, lift["cl"][top])


def s809():
    """Free transition at Re 1e6 (NREL/TP-500-29955)."""
    source = "s809"
    record = read_record(source)
    flown, table = model(record.sides()), record.columns("polar")
    point = OperatingPoint(1e6, alpha=0.0)
    top = int(np.argmax(table["cl"]))
    here = table["alpha_deg"] <= table["alpha_deg"][top]
    columns = {"cl": table["cl"][here], "cm_quarter": table["cm_c4"][here]}
    yield from at_angles(source, "S809", flown, point, table["alpha_deg"][here], **columns)
    rises = int(np.argmax(np.diff(table["cl"]) < 0.0))
    lifts, drags = table["cl"][: rises + 1], table["cd_wake"][: rises + 1]
    yield from at_lifts(source, "S809", flown, point, lifts, drags)
    yield from peak(source, "S809", flown, point, table["cl"][top])


HANDBOOK_POINTS = (0.0, 4.0, 8.0)
"""Angles at which the straight lines of the handbook are compared [deg]."""

HANDBOOK_SWEEP = np.arange(-6.0, 9.0)
"""Angles of what is derived of a sweep, as `validate` has them [deg]."""

DERIVED = {
    "alpha_zero_lift_deg": ("alpha_zero_lift_deg", lambda d: math.degrees(d.alpha_zero_lift)),
    "lift_slope_per_deg": ("cl_alpha_per_deg", lambda d: math.radians(d.lift_slope)),
    "aerodynamic_centre_x": ("x_ac", lambda d: d.aerodynamic_centre_x),
    "cm_aerodynamic_centre": ("cm_ac", lambda d: d.cm_aerodynamic_centre),
}
"""Quantity of a sweep -> column of the handbook, and how it is read."""


def handbook():
    """Straight lines of lift and moment, and maximum lift, of 13 sections (NACA Report 824)."""
    source = "handbook_report824"
    record = read_record(source)
    table = record.columns()
    point = OperatingPoint(9e6, alpha=0.0)
    for i, digits in enumerate(record.words("section")):
        row = {name: float(column[i]) for name, column in table.items()}
        name, flown = f"NACA {digits}", naca(digits)
        yield from peak(source, name, flown, point, row["clmax"])
        flows, derived = flown.swept(point, HANDBOOK_SWEEP.tolist())
        for quantity, (column, read) in DERIVED.items():
            (middle,) = (f for f in flows if abs(f.alpha) < 1e-9)
            yield from residual(source, name, middle, quantity, row[column], read(derived))
        here = np.array([a for a in HANDBOOK_POINTS if a <= row["alpha_star_deg"]])
        cl = row["cl_alpha_per_deg"] * (here - row["alpha_zero_lift_deg"])
        cm = row["cm_ac"] + (0.25 - row["x_ac"]) * cl
        yield from at_angles(source, name, flown, point, here, cl=cl, cm_quarter=cm)


def least_drag():
    """Least drags (NACA Report 824)."""
    source = "minimum_drag"
    record = read_record(source)
    lifts = np.linspace(-0.3, 0.8, 12)
    rows = zip(record.words("section"), record.words("status"), strict=True)
    for i, (name, status) in enumerate(rows):
        if status == FROM_MEMORY:
            continue
        table = record.columns()
        at = OperatingPoint(float(table["reynolds"][i]), alpha=0.0)
        flows = naca(name.split()[1]).lifts(at, lifts)
        least = min((flow for flow in flows if flow.converged), key=lambda flow: flow.cd)
        yield from residual(source, name, least, "cd", table["cd_min"][i])


def naca_4412():
    """Lift of the measured pressures near the stall, tripped (NASA CR-152263)."""
    source = "naca4412_cr152263"
    record = read_record(source)
    lift = measured_lift(record.columns(), np.array(record.words("surface")))
    angles = [8.0, 10.0, 12.0, math.degrees(TEST_ANGLE)]
    cl = [math.nan, math.nan, math.nan, lift]
    yield from at_angles(source, record.section, naca("4412"), TEST_POINT, angles, cl=cl)


def collect():
    """All residuals."""
    parts = (naca_0012, naca_2412, naca_4412, e387, nlf_0416, s809, handbook, least_drag)
    return [row for part in parts for row in part()]


# the model


CELLS = ("near_stall", "low_reynolds", "forced")
"""Factors of a band."""

ROUNDS = 8
"""Rounds in which the factors are fitted in turn; they no longer move."""

LEVELS = np.arange(0.60, 0.96, 0.01)
"""Levels of the quantile that are tried."""

HELD = 0.8
"""Share of left-out points that a band is to hold."""

LEAST_WITNESSES = 2
"""Sections that must agree before a regime is called more accurate than the rest."""


@dataclass(frozen=True)
class Point:
    """A residual as the model sees it: its size on the scale of the quantity, and its regime."""

    section: str
    size: float
    regime: tuple[bool, ...]


def seen(rows, quantity):
    """Points of a quantity."""
    found = []
    for row in rows:
        if row.quantity != quantity:
            continue
        size = abs(row.computed - row.measured) / SPREADS[quantity].scale(row.computed)
        near = near_stall(row.separation, row.cp_min, row.reynolds)
        found.append(Point(row.section, size, (near, row.reynolds < LOW_REYNOLDS, row.forced)))
    return found


@dataclass(frozen=True)
class Table:
    """The points of a quantity as arrays; the weights of a section add up to one."""

    section: np.ndarray
    size: np.ndarray
    regime: np.ndarray
    weight: np.ndarray

    @classmethod
    def of(cls, points):
        """The table of a list of points."""
        names, which = np.unique([point.section for point in points], return_inverse=True)
        weight = 1.0 / np.bincount(which, minlength=len(names))[which]
        regime = np.array([point.regime for point in points]).reshape(-1, len(CELLS))
        return cls(which, np.array([point.size for point in points]), regime, weight)

    def part(self, mask):
        """Some of it, weighed anew."""
        which = self.section[mask]
        weight = 1.0 / np.bincount(which)[which]
        return Table(which, self.size[mask], self.regime[mask], weight)

    def factors(self, factors):
        """Factor of every point, one column a regime."""
        return np.where(self.regime, factors, 1.0)


def quantile(table, sizes, level):
    """Quantile of the sizes in which every section weighs the same."""
    order = np.argsort(sizes, kind="stable")
    weight = table.weight[order]
    return float(np.interp(level, (np.cumsum(weight) - 0.5 * weight) / weight.sum(), sizes[order]))


def factor(table, sizes, k, level):
    """How much larger errors are inside a regime than outside it."""
    inside = table.regime[:, k]
    if inside.all() or not inside.any():
        return 1.0
    parts = [quantile(table.part(mask), sizes[mask], level) for mask in (inside, ~inside)]
    ratio = parts[0] / parts[1]
    return ratio if len(set(table.section[inside])) >= LEAST_WITNESSES else max(ratio, 1.0)


def spread(table, level):
    """Base and factors at a level of the quantile."""
    factors = np.ones(len(CELLS))
    for _ in range(ROUNDS):
        for k in range(len(CELLS)):
            others = np.delete(table.factors(factors), k, axis=1).prod(axis=1)
            factors[k] = factor(table, table.size / others, k, level)
    return quantile(table, table.size / table.factors(factors).prod(axis=1), level), factors


def left_out(table, level):
    """Whether each point is held by the band fitted without its section."""
    held = np.zeros(len(table.size), dtype=bool)
    for name in set(table.section):
        own = table.section == name
        base, factors = spread(table.part(~own), level)
        held[own] = table.size[own] <= base * table.factors(factors)[own].prod(axis=1)
    return held


def distil(points):
    """Base, factors and the share of left-out points held, at the level that holds four in five."""
    shares = [float(np.mean(left_out(points, level))) for level in LEVELS]
    best = int(np.argmin(np.abs(np.array(shares) - HELD)))
    base, factors = spread(points, float(LEVELS[best]))
    return base, factors, float(LEVELS[best]), shares[best]


def read(path):
    """Residuals of a file that this script wrote."""
    with Path(path).open(encoding="utf-8") as stream:
        return [
            Residual(
                **{
                    f.name: row[f.name] if f.type == "str"
                    else row[f.name] == "True" if f.type == "bool" else float(row[f.name])
                    for f in fields(Residual)
                }
            )
            for row in csv.DictReader(stream)
        ]  # fmt: skip


def main(folder, *, again):
    """Write both files."""
    path = Path(folder, "error_residuals.csv")
    if not again:
        with path.open("w", encoding="utf-8", newline="") as stream:
            writer = csv.DictWriter(stream, [f.name for f in fields(Residual)], lineterminator="\n")
            writer.writeheader()
            for row in collect():
                rounded = {k: f"{v:.6g}" for k, v in asdict(row).items() if isinstance(v, float)}
                writer.writerow(asdict(row) | rounded)
    rows = read(path)
    lines = []
    for quantity, old in SPREADS.items():
        points = Table.of(seen(rows, quantity))
        base, factors, level, share = distil(points)
        near, low, forced = factors
        lines.append(
            f'    "{quantity}": Spread("{old.measure}", {base:.2g}, {near:.2f}, {low:.2f},'
            f" {forced:.2f}),"
        )
        sections = len(set(points.section))
        sys.stderr.write(
            f"{quantity}: {len(points.size)} points of {sections} sections, quantile {level:.2f},"
            f" left-out points held {share:.1%}\n"
        )
    Path(folder, "bands.txt").write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main(sys.argv[1], again="--again" in sys.argv)
