"""Commands about single sections: analyse, fit."""

from __future__ import annotations

from collections.abc import Callable
from enum import StrEnum
from typing import TYPE_CHECKING, Annotated, Any

import typer

from optim.cli.analysis_text import analysis_rows, analysis_text
from optim.cli.console import misuse, prepare_kernels, say, show
from optim.cli.flow_options import PANELS, FlowOptions
from optim.cli.output import number, table, write_csv, write_json
from optim.cli.section_argument import RecordedDesign, recorded_design, section_of
from optim.cli.studies import AsJson, Plot
from optim.errors import Fault, InputError

if TYPE_CHECKING:
    from optim.aerodynamics.evaluator import SectionEvaluator
    from optim.geometry.parameterisation import Parameterisation
    from optim.report.analysis import Analysed


def analyse(
    words: Annotated[
        list[str],
        typer.Argument(metavar="SECTION...", help="naca:2412, a coordinate file or RUN.h5#ID."),
    ],
    reynolds: Annotated[
        str | None, typer.Option(metavar="R[,R...]", help="Reynolds numbers on the chord.")
    ] = None,
    alpha: Annotated[
        str | None, typer.Option(metavar="A[,A...]", help="Angles of attack [deg].")
    ] = None,
    cl: Annotated[str | None, typer.Option(metavar="C[,C...]", help="Lift coefficients.")] = None,
    sweep: Annotated[
        str | None,
        typer.Option(metavar="A0:A1:STEP", help="Angles, with lift slope, stall and the like."),
    ] = None,
    condition: Annotated[
        str | None,
        typer.Option(metavar="NAME", help="A recorded condition of RUN.h5#ID, in their place."),
    ] = None,
    mach: Annotated[str | None, typer.Option(metavar="M", help="Mach number; 0.")] = None,
    n_factor: Annotated[
        str | None, typer.Option(metavar="N", help="Critical amplification exponent; 9.")
    ] = None,
    trip_upper: Annotated[
        str | None, typer.Option(metavar="XC", help="Forced transition, upper side [x/c].")
    ] = None,
    trip_lower: Annotated[
        str | None, typer.Option(metavar="XC", help="Forced transition, lower side [x/c].")
    ] = None,
    panels: Annotated[
        int | None, typer.Option(min=60, max=600, help=f"Panels around a section; {PANELS}.")
    ] = None,
    *,
    check_grid: Annotated[
        bool, typer.Option("--check-grid", help="The same on half and double the panels.")
    ] = False,
    inviscid: Annotated[bool, typer.Option("--inviscid", help="Without a boundary layer.")] = False,
    surface: Annotated[
        bool, typer.Option("--surface", help="The distributions along the surface, too.")
    ] = False,
    as_json: AsJson = False,
    as_csv: Annotated[bool, typer.Option("--csv", help="Rows on standard output.")] = False,
    plot: Plot = None,
) -> None:
    """Fly sections at given points, or recorded designs at a recorded condition."""
    options = FlowOptions(
        reynolds, alpha, cl, sweep, mach, n_factor, trip_upper, trip_lower, panels,
        inviscid, check_grid,
    )  # fmt: skip
    if as_json and as_csv:
        raise misuse("accepted is one of --json and --csv.")
    if condition is None:
        answers = _at_points(words, options)
    else:
        answers = _at_condition(words, condition, options)
    documents = [one.document(surface=surface) for one in answers]
    if plot is not None:
        from optim.report.figures import save  # noqa: PLC0415
        from optim.report.flow_figures import analysis_figure  # noqa: PLC0415

        save(analysis_figure(answers), plot)
        say(f"{plot} is drawn.")
    if as_json:
        write_json({"results": documents})
    elif as_csv:
        write_csv(analysis_rows(documents, surface=surface))
    else:
        show(analysis_text(documents, surface=surface))


def _at_points(words: list[str], options: FlowOptions) -> list[Analysed]:
    from optim.report.analysis import analyse as flown  # noqa: PLC0415

    asked = options.asked()
    sections = [section_of(word) for word in words]
    make = _evaluator()
    return [one for section in sections for one in flown(section, asked, make)]


def _evaluator() -> type[SectionEvaluator]:
    """Return the coupled evaluator, whose kernels are compiled at first use."""
    prepare_kernels()
    from optim.aerodynamics.evaluator import SectionEvaluator  # noqa: PLC0415

    return SectionEvaluator


def _at_condition(words: list[str], condition: str, options: FlowOptions) -> list[Analysed]:
    if options.written():
        raise misuse(
            f"--condition gives the whole point as it was recorded; leave out "
            f"{', '.join(options.written())}."
        )
    designs = [_recorded(word) for word in words]
    prepare_kernels()
    return [_recorded_flow(design, condition) for design in designs]


def _recorded(word: str) -> RecordedDesign:
    design = recorded_design(word)
    if design is None:
        message = "--condition takes a design of a run; accepted is RUN.h5#ID."
        raise InputError([Fault(message, file=word)])
    return design


def _recorded_flow(design: RecordedDesign, condition: str) -> Analysed:
    from optim.report.analysis import Analysed  # noqa: PLC0415
    from optim.report.archived import peak_sought  # noqa: PLC0415

    _, problem = design.study_and_problem()
    if condition not in problem.condition_names:
        known = ", ".join(problem.condition_names)
        message = f"the run has no condition {condition}; accepted is {known}."
        raise InputError([Fault(message, file=design.name)])
    flow = problem.analyse(design.design, condition)
    if problem.conditions[problem.condition_names.index(condition)].maximum:
        flow = peak_sought(flow)
    return Analysed(design.section(problem), (flow,))


class Shape(StrEnum):
    """How a section is described by coefficients."""

    CST = "cst"
    BEZIER = "bezier"


def fit(
    word: Annotated[
        str, typer.Argument(metavar="SECTION", help="naca:2412, a coordinate file or RUN.h5#ID.")
    ],
    shape: Annotated[Shape, typer.Option(help="How the section is described.")],
    order: Annotated[
        int, typer.Option(min=3, max=12, help="Coefficients of each side, less one.")
    ] = 5,
    *,
    as_json: AsJson = False,
    plot: Plot = None,
) -> None:
    """Fit coefficients to a section and say how far they are off."""
    from optim.geometry.fitting import fit as fitted  # noqa: PLC0415

    section = section_of(word)
    found = fitted(_parameterisation(shape, order, section.trailing_edge_gap), section)
    variables = dict(zip(found.parameterisation.names, found.design.tolist(), strict=True))
    document: dict[str, Any] = {
        "shape": shape.value,
        "order": order,
        "variables": variables,
        "largest_deviation": found.largest_deviation,
        "largest_deviation_at": list(found.where),
        "rms_deviation": found.rms_deviation,
    }
    if plot is not None:
        from optim.report.figures import save  # noqa: PLC0415
        from optim.report.fit_figure import fit_figure  # noqa: PLC0415

        save(fit_figure(section, found), plot)
        say(f"{plot} is drawn.")
    if as_json:
        write_json(document)
        return
    rows = [[name, number(value, ".6f")] for name, value in variables.items()]
    show(
        f"{section.name}: {shape.value}, {order + 1} coefficients a side\n\n"
        f"{table(['variable', 'value'], rows)}\n"
        f"largest deviation {found.largest_deviation:.2e} chords at x/c {found.where[0]:.3f}, "
        f"rms {found.rms_deviation:.2e}"
    )


def _parameterisation(shape: Shape, order: int, gap: float) -> Parameterisation:
    from optim.geometry.bezier import Bezier  # noqa: PLC0415
    from optim.geometry.cst import LARGEST_GAP, Cst  # noqa: PLC0415

    if gap > LARGEST_GAP:
        message = (
            f"the trailing edge is {gap:.3g} chords open; accepted is up to {LARGEST_GAP:g} chords."
        )
        raise InputError([Fault(message)])
    kind: type[Cst | Bezier] = Cst if shape is Shape.CST else Bezier
    return kind(upper=order + 1, lower=order + 1, gap=gap)


COMMANDS: tuple[Callable[..., None], ...] = (analyse, fit)
