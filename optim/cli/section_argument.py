"""SECTION on the command line: ``naca:2412``, a coordinate file, or ``RUN.h5#ID``."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from optim.cli.console import say
from optim.errors import Fault, InputError, SectionError

if TYPE_CHECKING:
    from optim.arrays import FloatArray
    from optim.geometry.section import Section
    from optim.problem.problem import Problem
    from optim.report.design_record import DesignRecord
    from optim.study.schema import Study

ACCEPTED = "accepted is naca:2412, a coordinate file, or RUN.h5#ID"

NACA = "naca:"

_RECORDED = re.compile(r"(?P<run>.+)#(?P<row>\d{1,18})")
_DIGITS = re.compile(r"(?i)(?:naca)?[ _-]?(\d{4,5}(?:-\d\d)?)")


@dataclass(frozen=True)
class RecordedDesign:
    """A design of a run.

    Attributes
    ----------
    run : Path
        RUN.h5.
    row : int
        Its evaluation.
    study_text : str
        The study of the run, resolved.
    design : (n_variables,) array
        Design variables.
    """

    run: Path
    row: int
    study_text: str
    design: FloatArray

    @property
    def name(self) -> str:
        """``RUN.h5#ID``."""
        return f"{self.run}#{self.row}"

    def study_and_problem(self) -> tuple[Study, Problem]:
        """Return the study of the run and its problem."""
        from optim.problem.problem import Problem  # noqa: PLC0415
        from optim.study.load import parse_study  # noqa: PLC0415

        study = parse_study(self.study_text)
        return study, Problem.from_study(study)

    def section(self, problem: Problem) -> Section:
        """Return the design's section, under the design's name.

        Raises
        ------
        SectionError
            If the design is no section.
        """
        from optim.report.design_record import recorded_section  # noqa: PLC0415

        return recorded_section(problem, self.design, self.name)


def recorded_design(text: str) -> RecordedDesign | None:
    """Return the design that ``RUN.h5#ID`` names; None if the text has another form.

    Raises
    ------
    InputError
        If there is no such run or evaluation.
    ArchiveDamagedError
        If the run is damaged.
    """
    named = design_named(text)
    if named is None:
        return None
    from optim.archive.reader import open_run  # noqa: PLC0415  others wait for no HDF5

    path, row = named
    with open_run(path) as run:
        design = run.evaluation(row)["designs"]
        return RecordedDesign(path, row, run.header.resolved_text, design)


def design_named(text: str) -> tuple[Path, int] | None:
    """Return run and evaluation that ``RUN.h5#ID`` names; None if the text has another form."""
    matched = _RECORDED.fullmatch(text)
    if matched is None or Path(text).exists():
        return None
    return Path(matched["run"]), int(matched["row"])


def record_of(text: str) -> DesignRecord:
    """Return everything that is recorded of the design that ``RUN.h5#ID`` names.

    Raises
    ------
    InputError
        If it names none, with one line for each reason.
    ArchiveDamagedError
        If the run is damaged.
    """
    from optim.archive.reader import open_run  # noqa: PLC0415
    from optim.report.design_record import design_record  # noqa: PLC0415

    named = design_named(text)
    if named is None:
        raise InputError([Fault("accepted is a design of a run, RUN.h5#ID.", file=text)])
    with open_run(named[0]) as run:
        return design_record(run, named[1])


def section_of(text: str) -> Section:
    """Return the section that a SECTION names; what was changed in a file is said.

    Raises
    ------
    InputError
        If it is none, with one line for each reason.
    """
    if text.startswith(NACA):
        from optim.geometry.naca import naca_section  # noqa: PLC0415

        return naca_section(text.removeprefix(NACA))
    recorded = recorded_design(text)
    if recorded is None:
        return _section_of_file(text)
    _, problem = recorded.study_and_problem()
    return recorded.section(problem)


def _section_of_file(text: str) -> Section:
    from optim.geometry.section import section_from_coordinates  # noqa: PLC0415
    from optim.study.coordinate_file import read_coordinates  # noqa: PLC0415

    path = Path(text)
    if not path.exists():
        raise SectionError([Fault(f"there is no such section; {_hint(text)}", file=text)])
    if path.suffix == ".h5":
        message = f"this is a run; name one of its designs: {text}#ID."
        raise SectionError([Fault(message, file=text)])
    read = read_coordinates(path)
    try:
        section, notes = section_from_coordinates(read.points, read.title or path.stem)
    except SectionError as error:
        raise SectionError([fault.located(text) for fault in error.faults]) from error
    for note in (*read.notes, *notes):
        say(f"{text}: {note.removesuffix('.')}.")
    return section


def _hint(text: str) -> str:
    digits = _DIGITS.fullmatch(text)
    meant = f"; did you mean naca:{digits[1]}?" if digits else "."
    return f"{ACCEPTED}{meant}"
