"""The command report: one page about a run, for a browser and for paper."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Annotated

import typer

from optim.cli.console import misuse, prepare_kernels, say
from optim.cli.runs import Quiet, RunFile


def _rows(text: str | None) -> tuple[int, ...]:
    """Return the IDs of a list such as 7,112."""
    words = [] if text is None else [word.strip().removeprefix("#") for word in text.split(",")]
    if not all(word.isdecimal() for word in words):
        raise misuse("--finalists: accepted are the IDs of designs, such as 7,112.")
    return tuple(dict.fromkeys(int(word) for word in words))


def report(
    run_file: RunFile,
    output: Annotated[
        Path | None, typer.Option(metavar="PAGE.html", help="The page; RUN.html unless given.")
    ] = None,
    finalists: Annotated[
        str | None,
        typer.Option(
            metavar="ID[,ID...]", help="Designs to be flown for the page, in place of the rule's."
        ),
    ] = None,
    *,
    quiet: Quiet = False,
) -> None:
    """Write one page about a run: how it went, the trade, a closer look, what it is worth."""
    from optim.archive.reader import open_run  # noqa: PLC0415
    from optim.report.judgement import as_recorded  # noqa: PLC0415
    from optim.report.page.document import page_document  # noqa: PLC0415
    from optim.report.page.html import write_page  # noqa: PLC0415

    asked = _rows(finalists)
    prepare_kernels()
    page = run_file.with_name(run_file.name.removesuffix(".journal")).with_suffix(".html")
    page = page if output is None else output
    with open_run(run_file) as opened:
        judgement = as_recorded(opened)
        document = page_document(
            opened, judgement, finalists=asked, listener=_silent if quiet else _flown
        )
    size = write_page(document, page)
    if not quiet:
        say(f"{page} holds everything ({size / 1e6:.1f} MB); open it in a browser.")


def _flown(done: int, of: int) -> None:
    if not done:
        say(f"Flying {of} designs again, about two seconds each ...")


def _silent(_done: int, _of: int) -> None:
    """Say nothing."""


COMMANDS: tuple[Callable[..., None], ...] = (report,)
"""The commands of this module."""
