"""The commands that hand a design over to whoever builds it: export, sheet."""

from __future__ import annotations

import math
from collections.abc import Callable
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from optim.cli.console import misuse, prepare_kernels, say
from optim.cli.section_argument import record_of
from optim.errors import Fault, InputError
from optim.report.cautions import CAUTION, CAUTION_FRONT, CAUTION_LIFT, NOT_MODELLED

if TYPE_CHECKING:
    from optim.report.design_record import DesignRecord
    from optim.report.export import Written

Design = Annotated[str, typer.Argument(metavar="RUN.h5#ID", help="A design of a run.")]

FEWEST_POINTS, MOST_POINTS = 20, 2000
"""Points of a side that may be asked for."""

PROMISED = 1e-6
"""Largest distance of a spline from the exact curve [chords]."""


class Spread(StrEnum):
    """How points are spread along the contour."""

    COSINE = "cosine"
    NOSE = "nose"
    EVEN = "even"


def _export_file(path: Path) -> Path:
    """Return the path of an export if its form is known, before anything is read for it."""
    from optim.report.export_forms import check_form  # noqa: PLC0415

    check_form(path)
    return path


def export(
    word: Design,
    output: Annotated[
        Path,
        typer.Option(
            metavar="FILE",
            callback=_export_file,
            help=".csv: points in mm; .txt: points in chords; .dxf: a spline in mm; .svg: at "
            "scale; .json: everything.",
        ),
    ],
    chord: Annotated[
        str | None, typer.Option(metavar="LENGTH", help="Such as 240mm; the study's unless given.")
    ] = None,
    points: Annotated[
        int | None,
        typer.Option(
            min=FEWEST_POINTS,
            max=MOST_POINTS,
            help="Points on each side, nose and edge included; as many as the curve needs.",
        ),
    ] = None,
    spacing: Annotated[
        Spread,
        typer.Option(
            help="cosine: dense at nose and edge; nose: denser yet at the nose; even: along the "
            "contour."
        ),
    ] = Spread.COSINE,
) -> None:
    """Write a design as it is built, read the file back and say how true it is."""
    from optim.report.export import Density, write_section  # noqa: PLC0415
    from optim.report.export_forms import Label  # noqa: PLC0415

    record = record_of(word)
    built = record.study.chord if chord is None else _length(chord)
    gap = record.section.trailing_edge_gap
    if abs(built / record.study.chord - 1.0) > 1e-9:
        say(
            f"warning: at a chord of {1e3 * built:g} mm the trailing edge is "
            f"{1e3 * built * gap:.3f} mm thick, not the {1e3 * record.study.chord * gap:.3f} mm of "
            f"the study's {1e3 * record.study.chord:g} mm, and the Reynolds numbers are others; "
            f"for another chord, run the study with it."
        )
    label = Label(record.title, _facts(record, built), record.document())
    written = write_section(record.section, built, output, label, Density(points, spacing.value))
    say(f"{output}: {_how_true(written, built)}")
    if written.smooth and written.deviation > PROMISED * built:
        say(
            f"warning: {points} points a side are few for a spline; without --points it stays "
            f"within {_micrometres(PROMISED * built)}."
        )
    say(CAUTION)


def _facts(record: DesignRecord, chord: float) -> dict[str, str]:
    """Return what stands beside the contour in the file."""
    edge = chord * record.section.trailing_edge_gap
    return {
        "design": record.name,
        "chord": f"{1e3 * chord:g} mm",
        "trailing edge": f"{1e3 * edge:.3f} mm",
        "order": "from the upper trailing edge around the nose to the lower one, x from the nose "
        "along the chord line, y up",
        "run": record.run_digest,
        "caution": CAUTION.removeprefix("Caution: "),
    }


def _how_true(written: Written, chord: float) -> str:
    at = f"at a chord of {1e3 * chord:g} mm; read back, "
    if written.smooth:
        return (
            f"a spline through {written.points} points {at}it stays within "
            f"{_micrometres(written.deviation)} of the exact curve."
        )
    return (
        f"{written.points} points {at}they lie within {_micrometres(written.of_points)} of the "
        f"exact curve, straight lines between them within {_micrometres(written.deviation)}."
    )


def _micrometres(length: float) -> str:
    """Return a length in micrometres, rounded up in its second figure: it is a bound.

    >>> _micrometres(1.801e-7), _micrometres(4.7e-4), _micrometres(2e-10)
    ('0.19 micrometres', '470 micrometres', '0.0002 micrometres')
    """
    size = 1e6 * length
    step = 10.0 ** (math.floor(math.log10(size)) - 1) if size > 0.0 else 1.0
    return f"{step * math.ceil(size / step * (1.0 - 1e-12)):.6g} micrometres"


def _length(text: str) -> float:
    from optim.study.schema import CHORD  # noqa: PLC0415
    from optim.study.units import UnitError  # noqa: PLC0415

    try:
        return CHORD.read(text)
    except UnitError as error:
        raise misuse(f"--chord: {error}") from error


def sheet(
    word: Design,
    output: Annotated[
        Path | None,
        typer.Option(metavar="SHEET.pdf", help="RUN-ID.pdf beside the run unless given."),
    ] = None,
) -> None:
    """Print a design on two A4 pages: dimensions, performance, loads, cautions."""
    if output is not None and output.suffix.lower() != ".pdf":
        raise InputError([Fault("accepted is a file name that ends in .pdf.", file=str(output))])
    from optim.report.design_sheet import design_sheet  # noqa: PLC0415
    from optim.report.off_design import off_design  # noqa: PLC0415
    from optim.report.paper import print_pages  # noqa: PLC0415

    record = record_of(word)
    prepare_kernels()
    from optim.aerodynamics.evaluator import SectionEvaluator  # noqa: PLC0415

    problem = record.problem
    series = off_design(record.section, problem.conditions, problem.panels, SectionEvaluator)
    pages = design_sheet(record, series, (CAUTION, CAUTION_LIFT, CAUTION_FRONT, NOT_MODELLED))
    path = output or record.run.with_name(f"{record.run.stem}-{record.entry['id']}.pdf")
    print_pages(pages, path, record.title)
    say(f"{path}: two A4 pages about {record.title}.")
    say(CAUTION)


COMMANDS: tuple[Callable[..., None], ...] = (export, sheet)
