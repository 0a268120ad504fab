"""What is said beside the results: lines on standard error, cautions, the warning of a library."""

from __future__ import annotations

import os
import sys
from typing import TextIO

from optim.errors import Fault, InputError

CAUTION = (
    "Caution: computed flow about a section, no substitute for tunnel and flight test, "
    "certification or a licensed engineer; section data are not wing data."
)
"""Printed with every result that a person reads."""

CAUTION_LIFT = (
    "Least certain are maximum lift and what is past it, long bubbles and very low Reynolds "
    "numbers; the order of maximum lifts is more trustworthy than their values."
)
"""Printed where maximum lift is shown."""

CAUTION_FRONT = (
    "An optimiser exploits the errors of its model: a design better than every measured section "
    "is a warning. Roughness, gaps, ice and three-dimensional effects are not modelled."
)
"""Printed with every front."""

BANDS = (
    "Behind ± stands the band that holds about four in five of the published measurements of "
    "sections left out of its fit; a section unlike all of those may be further off."
)
"""Printed wherever bands are shown."""

SECOND_SOLUTION = (
    "second_solution: the equations have another solution at that condition, whose drag differs by "
    "more than 0.5 %; which of the two a real flow takes depends on how it gets there."
)
"""Printed where an analysis found a second solution."""

NOT_MODELLED = "Not modelled: roughness, gaps, rain, ice, unsteady and three-dimensional effects."
"""Printed with every analysis."""


def say(line: str) -> None:
    """Write one line to standard error."""
    sys.stderr.write(f"{line}\n")
    sys.stderr.flush()


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
        sys.stdout.write(text if text.endswith("\n") else f"{text}\n")
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
