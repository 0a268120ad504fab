"""The command that shows where the tool is right, and by how much it errs: validate."""

from __future__ import annotations

import time
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from optim.cli.console import duration, prepare_kernels, say, show
from optim.cli.output import write_json
from optim.cli.studies import AsJson
from optim.cli.validation_text import validation_text

if TYPE_CHECKING:
    from optim.validation.case import Comparison


def validate(
    *,
    as_json: AsJson = False,
    plot: Annotated[
        Path | None, typer.Option(metavar="FOLDER", help="One figure a source, into this folder.")
    ] = None,
) -> None:
    """Compute the published measurements that ship with the tool; measured beside computed."""
    if plot is not None:
        from optim.report.validation_figure import make_folder  # noqa: PLC0415

        make_folder(plot)
    comparisons = _compared()
    if plot is not None:
        from optim.report.validation_figure import draw_all  # noqa: PLC0415

        drawn = draw_all(comparisons, plot)
        say(f"{len(drawn)} figures are drawn in {plot}.")
    from optim.report.validation import validation_document  # noqa: PLC0415

    document = validation_document(comparisons)
    if as_json:
        write_json(document)
    else:
        show(validation_text(document))


def _compared() -> list[Comparison]:
    """Return the comparisons, saying on standard error how far it is."""
    prepare_kernels()
    from optim.runner.executors import processors  # noqa: PLC0415
    from optim.validation.suite import SOURCES, run  # noqa: PLC0415

    began = time.monotonic()
    workers = processors()
    say(f"computing {len(SOURCES)} sources with {workers} processes ...")
    comparisons = list(run(workers))
    count = sum(len(one.cases) for one in comparisons)
    say(f"{count} cases in {duration(time.monotonic() - began)}.")
    return comparisons


COMMANDS: tuple[Callable[..., None], ...] = (validate,)
