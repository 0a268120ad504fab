"""Commands about a study before it is run: template, check, schema."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from optim.cli.console import duration, say, show
from optim.cli.output import number, table, write_json
from optim.errors import Fault, InputError, StudyError

if TYPE_CHECKING:
    from optim.study.schema import Study

StudyFile = Annotated[Path, typer.Argument(metavar="STUDY.yaml", help="The study.")]
AsJson = Annotated[bool, typer.Option("--json", help="One JSON document on standard output.")]


def _figure_file(path: Path | None) -> Path | None:
    """Return the path of a figure if its form is known, before anything is computed for it."""
    from optim.report.figure_file import check_suffix  # noqa: PLC0415

    if path is not None:
        check_suffix(path)
    return path


Plot = Annotated[
    Path | None,
    typer.Option(metavar="FILE", callback=_figure_file, help="Draw it: .png, .svg or .pdf."),
]


@contextmanager
def faults_located(study: Study) -> Iterator[None]:
    """Give the faults that are found in a loaded study their places in its file."""
    try:
        yield
    except StudyError as error:
        raise StudyError([study.located(fault) for fault in error.faults]) from error


def template(
    file: Annotated[
        Path | None, typer.Argument(metavar="[FILE]", help="Where to write it; else it is shown.")
    ] = None,
) -> None:
    """Write a commented study to start from."""
    from optim.study.template import template_text  # noqa: PLC0415

    if file is None:
        show(template_text())
        return
    write_new(file, template_text())
    say(f"{file} is written; look at it, then: sectionwright check {file}")


def write_new(file: Path, text: str) -> None:
    """Write a text file that must not exist.

    Raises
    ------
    InputError
        If it exists or cannot be written.
    """
    try:
        with file.open("x", encoding="utf-8") as stream:
            stream.write(text)
    except FileExistsError as error:
        raise InputError(
            [Fault("the file exists; accepted is a new name.", file=str(file))]
        ) from error
    except OSError as error:
        message = f"the file cannot be written ({error.strerror}); accepted is another place."
        raise InputError([Fault(message, file=str(file))]) from error


def schema() -> None:
    """Write the JSON Schema of the study file, for editors."""
    from optim.study.json_schema import json_schema  # noqa: PLC0415

    write_json(json_schema())


def check(study_file: StudyFile, *, as_json: AsJson = False) -> None:
    """Tell all that is wrong with a study, or what it comes to."""
    from optim.problem.problem import Problem  # noqa: PLC0415
    from optim.report.preview import preview_document  # noqa: PLC0415
    from optim.runner.executors import processors  # noqa: PLC0415
    from optim.study.load import load_study  # noqa: PLC0415

    study = load_study(study_file)
    with faults_located(study):
        problem = Problem.from_study(study)
    workers = processors()
    document = preview_document(study, problem, workers)
    if as_json:
        write_json(document)
        return
    show(_preview_text(document, workers))
    for warning in document["warnings"]:
        say(f"warning: {warning}")


def _preview_text(document: dict[str, Any], workers: int) -> str:
    from optim.report.units import as_read  # noqa: PLC0415

    reach, cost = document["reachable"], document["estimate"]
    return "\n".join(
        [
            f"{document['study']}: no fault.",
            "",
            _conditions_table(document["conditions"]),
            table(
                ["variable", "low", "high"],
                [
                    [one["name"], number(one["low"], ".4f"), number(one["high"], ".4f")]
                    for one in document["variables"]
                ],
            ),
            f"{100.0 * reach['share']:.0f} % of {reach['designs']} random designs are sections:",
            table(
                ["", "5 %", "median", "95 %"],
                [
                    [name, *[as_read(reach[name][p], "chord") for p in ("p5", "p50", "p95")]]
                    for name in ("thickness", "camber", "nose_radius")
                    if name in reach
                ],
            ),
            *[
                f"{100.0 * share:.0f} % of them keep {name}."
                for name, share in reach["kept"].items()
            ],
            f"A run is at most {cost['evaluations']} designs and {cost['points']} coupled points: "
            f"about {duration(cost['seconds'])} with {workers} workers.",
        ]
    )


def _conditions_table(conditions: dict[str, dict[str, Any]]) -> str:
    head = ["condition", "speed m/s", "Re", "M", "cl", "alpha deg", "N", "trips x/c"]
    return table(
        head,
        [
            [
                name,
                number(row["speed"], ".4g"),
                number(row["reynolds"], ".3e"),
                number(row["mach"], ".3f"),
                "max" if row["maximum"] else number(row["cl"], ".3f"),
                number(row["alpha_deg"], ".2f"),
                number(row["n_factor"], ".2f"),
                _trips(row),
            ]
            for name, row in conditions.items()
        ],
    )


def _trips(row: dict[str, Any]) -> str:
    places = [row["trip_upper"], row["trip_lower"]]
    return "free" if min(places) >= 1.0 else " ".join(f"{place:.2f}" for place in places)


COMMANDS: tuple[Callable[..., None], ...] = (template, check, schema)
