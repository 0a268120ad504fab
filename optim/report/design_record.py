"""One design of a run with everything that the archive holds of it, for whoever builds it."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from optim.archive.digest import combined_digest
from optim.archive.reader import Run
from optim.arrays import FloatArray
from optim.errors import Fault, SectionError
from optim.geometry.section import Section
from optim.geometry.validity import faults
from optim.problem.problem import Problem
from optim.report.fields import Document, section_fields
from optim.report.front import BASELINE, design_entries, wanted
from optim.report.judgement import as_recorded
from optim.study.load import parse_study
from optim.study.schema import Study


@dataclass(frozen=True)
class DesignRecord:
    """One design of a run.

    Attributes
    ----------
    run : Path
        RUN.h5.
    name : str
        ``RUN.h5#ID``.
    section : Section
        Its contour, under that name.
    study : Study
        The study of the run, resolved.
    problem : Problem
        That of the study.
    entry, baseline : dict
        What is recorded of the design and of the baseline, as in ``front --json``.
    wanted : mapping
        ``objectives`` and ``constraints`` of the study, a list each.
    conditions : mapping
        Condition -> what was flown, as in ``check --json``.
    study_text, resolved_text : str
        The study as it was written, and resolved.
    provenance : mapping
        What computed the run.
    digests : mapping
        Dataset -> SHA-256.
    """

    run: Path
    name: str
    section: Section
    study: Study
    problem: Problem
    entry: Document
    baseline: Document
    wanted: Mapping[str, list[Document]]
    conditions: Mapping[str, Document]
    study_text: str
    resolved_text: str
    provenance: Mapping[str, Any]
    digests: Mapping[str, str]

    @property
    def title(self) -> str:
        """Which design of which study it is."""
        return f"{self.study.study}, design {self.entry['id']}"

    @property
    def run_digest(self) -> str:
        """One digest of the run's results."""
        return combined_digest(self.digests.items())

    def document(self) -> Document:
        """Return all of it as plain data, for export as JSON."""
        form = self.study.section
        return {
            "section": section_fields(self.section),
            "curve": {
                "shape": form.shape,
                "coefficients": form.coefficients.model_dump(),
                "leading_edge_term": form.leading_edge_term,
                "class_exponents": list(form.class_exponents),
                "trailing_edge_gap": self.section.trailing_edge_gap,
                "variables": self.entry["variables"],
            },
            "design": {name: self.entry[name] for name in ("id", "generation")},
            "objectives": self._stated("objectives"),
            "constraints": self._stated("constraints"),
            "outcomes": self.entry["outcomes"],
            "conditions": {
                name: {"flown": self.conditions[name], "found": found}
                for name, found in self.entry["conditions"].items()
            },
            "study": {
                "name": self.study.study, "text": self.study_text, "resolved": self.resolved_text,
            },
            "provenance": dict(self.provenance),
            "digests": {"run": self.run_digest, "datasets": dict(self.digests)},
        }  # fmt: skip

    def _stated(self, what: str) -> Document:
        """Return objectives or constraints, what is wanted beside what was found."""
        found = self.entry[what]
        return {
            one["name"]: {k: v for k, v in one.items() if k != "name"}
            | (found[one["name"]] if what == "constraints" else {"value": found[one["name"]]})
            for one in self.wanted[what]
        }


def recorded_section(problem: Problem, design: FloatArray, name: str) -> Section:
    """Return the section of a recorded design, under its name.

    Raises
    ------
    SectionError
        If the design is no section.
    """
    section = replace(problem.section(design), name=name)
    found = faults(section)
    if found:
        raise SectionError([Fault(fault.sentence, file=name) for fault in found])
    return section


def design_record(run: Run, row: int) -> DesignRecord:
    """Return what a run holds of one design.

    Parameters
    ----------
    run : Run
        Open.
    row : int
        The evaluation.

    Raises
    ------
    InputError
        If there is no such evaluation.
    SectionError
        If the design is no section.
    """
    design = run.evaluation(row)["designs"]
    name, header = f"{run.path}#{row}", run.header
    study = parse_study(header.resolved_text)
    problem = Problem.from_study(study)
    judgement = as_recorded(run)
    entry, baseline = design_entries(run, judgement, [row, BASELINE])
    return DesignRecord(
        run=run.path,
        name=name,
        section=recorded_section(problem, design, name),
        study=study,
        problem=problem,
        entry=entry,
        baseline=baseline,
        wanted=wanted(judgement),
        conditions={one["name"]: one for one in json.loads(header.conditions_table)},
        study_text=header.study_text,
        resolved_text=header.resolved_text,
        provenance=header.provenance,
        digests=run.digests(),
    )
