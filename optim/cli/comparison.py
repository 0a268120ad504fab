"""The command that sets things side by side: compare."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from optim.cli.comparison_text import LETTERS, comparison_text
from optim.cli.console import misuse, prepare_kernels, say, show
from optim.cli.output import write_json
from optim.cli.section_argument import design_named, record_of, section_of
from optim.cli.studies import AsJson, Plot

if TYPE_CHECKING:
    from optim.aerodynamics.evaluator import SectionEvaluator
    from optim.arrays import FloatArray
    from optim.problem.problem import Problem
    from optim.report.comparison import Compared


def compare(
    words: Annotated[
        list[str],
        typer.Argument(
            metavar="A B [C ...]",
            help="RUN.h5, RUN.h5#ID, naca:2412, a coordinate file, or a measured polar: a .csv "
            "with columns alpha,cl,cd,cm after lines such as # reynolds: 2e5.",
        ),
    ],
    *,
    as_json: AsJson = False,
    plot: Plot = None,
) -> None:
    """Set runs, designs, sections and measured polars side by side."""
    if not 2 <= len(words) <= len(LETTERS):
        raise misuse(f"found {len(words)} to compare; accepted are 2 to {len(LETTERS)}.")
    from optim.report.comparison import compare as compared  # noqa: PLC0415

    columns = [_column(word) for word in words]
    if not any(one.run or one.section for one in columns):
        raise misuse("measurements alone; accepted is a section or a design beside them.")
    problems = _problems(columns)
    if not problems and not any(one.polar for one in columns):
        say(
            "only shapes are compared: name a run, a design or a measured polar to fly them at "
            "its conditions, or use sectionwright analyse."
        )
    found = compared(columns, problems, _evaluator)
    document = found.document()
    if plot is not None:
        from optim.report.comparison_figure import comparison_figure  # noqa: PLC0415
        from optim.report.figures import save  # noqa: PLC0415

        save(comparison_figure(found), plot)
        say(f"{plot} is drawn.")
    if as_json:
        write_json(document)
    else:
        show(comparison_text(document))


def _column(word: str) -> Compared:
    """Return what a word names."""
    from optim.report.comparison import Compared  # noqa: PLC0415

    path = Path(word)
    if design_named(word) is not None:
        record = record_of(word)
        return Compared(word, section=record.section, record=record)
    if path.suffix == ".h5" or word.endswith(".h5.journal"):
        from optim.archive.reader import open_run  # noqa: PLC0415
        from optim.report.fronts import run_front  # noqa: PLC0415

        with open_run(path) as run:
            return Compared(word, run=run_front(run))
    if path.suffix.lower() == ".csv":
        from optim.study.polar_file import is_polar, read_polar  # noqa: PLC0415

        if is_polar(path):
            return Compared(word, polar=read_polar(path))
    return Compared(word, section=section_of(word))


def _problems(columns: list[Compared]) -> list[Problem]:
    """Return the problem of every run and design named, each study once."""
    from optim.problem.problem import Problem  # noqa: PLC0415
    from optim.report.comparison import flown_alike  # noqa: PLC0415

    found: list[Problem] = []
    for one in columns:
        if one.record is not None:
            problem = one.record.problem
        elif one.run is not None:
            problem = Problem.from_study(one.run.study)
        else:
            continue
        if not any(flown_alike(problem, known) for known in found):
            found.append(problem)
    return found


def _evaluator(nodes: FloatArray) -> SectionEvaluator:
    """Return the coupled evaluator, which is loaded where something has to be flown."""
    prepare_kernels()
    from optim.aerodynamics.evaluator import SectionEvaluator  # noqa: PLC0415

    return SectionEvaluator(nodes)


COMMANDS: tuple[Callable[..., None], ...] = (compare,)
