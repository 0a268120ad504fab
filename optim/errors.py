"""Misuse and damage are exceptions; how an evaluation ends is a value (see outcomes).

::

    SectionwrightError
    |-- InputError            the input is at fault: exit code 2, one line a fault
    |   |-- StudyError            a study file
    |   |-- SectionError          a section: its name, its file or its contour
    |   `-- ArchiveVersionError   an archive of a newer format
    |-- StoppedEarlyError      the run ended before its end and can be resumed: exit code 3
    `-- ArchiveDamagedError   exit code 4
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace


class SectionwrightError(Exception):
    """Every exception that this package raises on purpose."""


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing that is wrong with an input.

    Attributes
    ----------
    message : str
        What is wrong and what is accepted, in one sentence without a line break.
    path : tuple of str or int
        Where in the study: ("conditions", "slow", "speed"); empty if it has no such place.
    file, line, column
        Where in the file, counted from 1; None until the edge knows.
    """

    message: str
    path: tuple[str | int, ...] = ()
    file: str | None = None
    line: int | None = None
    column: int | None = None

    def __str__(self) -> str:
        """``FILE:LINE:COLUMN: message``, as far as the place is known."""
        place = [str(p) for p in (self.file, self.line, self.column) if p is not None]
        return ": ".join([":".join(place), self.message] if place else [self.message])

    def located(self, file: str, line: int | None = None, column: int | None = None) -> Fault:
        """Return the same fault with its place in a file."""
        return replace(self, file=file, line=line, column=column)


class InputError(SectionwrightError):
    """The input is at fault.

    Parameters
    ----------
    faults : sequence of Fault
        All that was found, in the order of their places.
    """

    def __init__(self, faults: Sequence[Fault]) -> None:
        self.faults: tuple[Fault, ...] = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class StudyError(InputError):
    """A study file that cannot be run."""


class SectionError(InputError):
    """A section name, file or contour that is no section."""


class ArchiveVersionError(InputError):
    """An archive written by a newer version of the format."""


class StoppedEarlyError(SectionwrightError):
    """A run that ended before its end; everything recorded is safe and it can be resumed."""


class ArchiveDamagedError(SectionwrightError):
    """An archive or journal whose content does not match its digests, or that cannot be read."""
