"""The command ``sectionwright``: its commands, and what every ending means to the caller.

Exit codes: 0 done; 1 a bug; 2 the input is at fault; 3 stopped early, can be resumed; 4 the archive
is damaged. A Ctrl-C outside a run ends as the shell expects, 130, and a reader that closes the
pipe, 141.
"""

from __future__ import annotations

import os
import sys
import traceback
import warnings
from collections.abc import Sequence
from pathlib import Path
from types import TracebackType
from typing import Annotated

import typer

from optim.cli import comparison, console, handover, page, runs, sections, studies, validation
from optim.errors import ArchiveDamagedError, InputError, StoppedEarlyError

DONE, BUG, INPUT_AT_FAULT, STOPPED_EARLY, ARCHIVE_DAMAGED = range(5)
INTERRUPTED = 130
"""128 + SIGINT, the shell's own."""

READER_GONE = 141
"""128 + SIGPIPE, the shell's own."""

THREADS = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "NUMBA_NUM_THREADS")
"""Set to 1 before numpy is loaded, as in the workers of a run: the last bit of a sum may depend on
the threads, and a recorded design flown again has to give the archived numbers."""

DEBUG = "--debug"

NAME = "sectionwright"

app = typer.Typer(
    name=NAME,
    help="Design wing sections: a study in YAML in, a front of sections out.",
    add_completion=False,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
)

for module in (studies, runs, page, sections, comparison, handover, validation):
    for command in module.COMMANDS:
        app.command()(command)


@app.callback()
def about(
    *,
    debug: Annotated[bool, typer.Option(DEBUG, help="Show the trace of a bug.")] = False,
) -> None:
    """Design wing sections: a study in YAML in, a front of sections out."""
    del debug  # taken by main, wherever it stands in the line


def run(arguments: Sequence[str]) -> int:
    """Run one command line and return its exit code; a bug is an exception that passes through.

    Parameters
    ----------
    arguments : sequence of str
        The words after the command's name.
    """
    try:
        # Not app(...), which would put its own excepthook in the place of ours.
        code = typer.main.get_command(app).main(
            args=list(arguments) or ["--help"], prog_name=NAME, standalone_mode=False
        )
    except typer.TyperException as error:
        return _said(INPUT_AT_FAULT, f"sectionwright: {' '.join(error.format_message().split())}")
    except InputError as error:
        return _said(INPUT_AT_FAULT, *map(str, error.faults))
    except StoppedEarlyError as error:
        return _said(STOPPED_EARLY, str(error))
    except ArchiveDamagedError as error:
        return _said(ARCHIVE_DAMAGED, str(error))
    except (KeyboardInterrupt, typer.Abort):
        return INTERRUPTED
    except console.ReaderGoneError:
        # Python would complain about the closed pipe once more when it flushes at its end.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        code = READER_GONE
    return code if isinstance(code, int) else DONE


def _said(code: int, *lines: str) -> int:
    for line in lines:
        console.say(line)
    return code


def report_bug(
    kind: type[BaseException], error: BaseException, trace: TracebackType | None
) -> None:
    """Say in one line what went wrong inside and how to report it; for ``sys.excepthook``."""
    steps = traceback.extract_tb(trace)
    where = f" ({Path(steps[-1].filename).name}:{steps[-1].lineno})" if steps else ""
    said = " ".join(f"{kind.__name__}: {error}".split())
    console.say(
        f"sectionwright: this is a bug, not your mistake: {said}{where}. Please report it with "
        f"your command, your files and what the same command prints with {DEBUG}."
    )


def main() -> None:
    """Run the command line of this process and end it with the exit code."""
    arguments = sys.argv[1:]
    if DEBUG not in arguments:
        sys.excepthook = report_bug
    os.environ.update(dict.fromkeys(THREADS, "1"))
    warnings.showwarning = console.show_warning
    code = run([word for word in arguments if word != DEBUG])
    sys.exit(code)
