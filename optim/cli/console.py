"""What is said beside the results: lines on standard error, cautions, the warning of a library."""

from __future__ import annotations

import os
import sys
from typing import TextIO

from optim.errors import Fault, InputError


def printable(text: str) -> str:
    r"""Return a text in which nothing can steer a terminal, line breaks and tabs kept.

    What a study, a file or its name holds may be written by anyone: characters that do not print
    (control characters, changes of direction, halves of a pair) become ``\uXXXX``, which a JSON
    document reads as the same character.

    >>> print(printable("a \x1b[2J b \u202e c"))
    a \u001b[2J b \u202e c
    """
    if text.isprintable():
        return text
    return "".join(
        letter if letter.isprintable() or letter in "\n\t" else _escaped(letter) for letter in text
    )


def _escaped(letter: str) -> str:
    units = letter.encode("utf-16-be", "surrogatepass").hex()
    return "".join(f"\\u{units[k : k + 4]}" for k in range(0, len(units), 4))


def say(line: str) -> None:
    """Write one line to standard error; if nobody reads it any more, it is lost.

    A run goes on without its listener: the terminal it was started in may be closed.
    """
    try:
        sys.stderr.write(printable(line).replace("\n", "\\n") + "\n")
        sys.stderr.flush()
    except OSError:
        speak_to_nobody()


def speak_to_nobody() -> None:
    """Send standard error nowhere, so that what is still waiting to be written is no fault."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, sys.stderr.fileno())
    os.close(nowhere)


def misuse(message: str) -> InputError:
    """Return the refusal of words on the command line: what is wrong, what is accepted."""
    return InputError([Fault(message, file="sectionwright")])


class ReaderGoneError(Exception):
    """Whoever read standard output has closed it, as ``head`` does; nothing is wrong."""


def show(text: str) -> None:
    """Write text to standard output.

    Raises
    ------
    ReaderGoneError
        If nobody reads it any more.
    """
    try:
        shown = printable(text)
        sys.stdout.write(shown if shown.endswith("\n") else f"{shown}\n")
        sys.stdout.flush()
    except BrokenPipeError as error:
        raise ReaderGoneError from error


def show_warning(
    message: Warning | str,
    category: type[Warning],  # noqa: ARG001  the form is that of warnings.showwarning
    filename: str,  # noqa: ARG001
    lineno: int,  # noqa: ARG001
    file: TextIO | None = None,  # noqa: ARG001
    line: str | None = None,  # noqa: ARG001
) -> None:
    """Say a warning in one line, without the place in the code."""
    say(f"sectionwright: {' '.join(str(message).split())}")


def duration(seconds: float) -> str:
    """Return a time in words of two units at most.

    >>> duration(8.3), duration(200.0), duration(12000.0)
    ('8 s', '3 min 20 s', '3 h 20 min')
    """
    whole = round(seconds)
    if whole < 60:
        return f"{whole} s"
    if whole < 3600:
        return f"{whole // 60} min {whole % 60} s"
    return f"{whole // 3600} h {whole % 3600 // 60} min"


def failures(counts: dict[str, int]) -> str:
    """Return how many failed and why.

    >>> failures({"not_converged": 7, "no_peak": 2}), failures({})
    ('9 failed (7 not_converged, 2 no_peak)', 'none failed')
    """
    if not counts:
        return "none failed"
    parts = ", ".join(f"{count} {name}" for name, count in counts.items())
    return f"{sum(counts.values())} failed ({parts})"


def prepare_kernels() -> None:
    """Say so if the flow kernels are about to be compiled."""
    from optim.aerodynamics.kernels import cache_folder  # noqa: PLC0415  loads the compiler

    folder = cache_folder()
    compiled = os.environ.get("NUMBA_DISABLE_JIT", "0") == "0"
    if compiled and folder is not None and not any(folder.rglob("*.nbi")):
        say("compiling the flow kernels, once per installation; this takes about a minute ...")
