"""One good study and what it takes to change it in a place."""

from __future__ import annotations

import pytest

from optim.errors import StudyError
from optim.study.load import parse_study

GOOD = """\
study: tollgate-6-wing
section:
  shape: cst
  coefficients: {upper: 6, lower: 6}
  baseline: naca:2412
  freedom: 0.12
  trailing_edge: 0.8 mm
chord: 212 mm
air: {altitude: 500 m, warmer_than_standard: 10 K}
craft: {mass: 6.0 kg, wing_area: 0.55 m2}
n_factor: 9
conditions:
  survey: {speed: 18 m/s}
  loiter: {speed: 14.5 m/s}
  dirty: {speed: 18 m/s, transition: {upper: 5 %, lower: 10 %}}
  slow: {speed: 12.5 m/s, lift: maximum}
objectives:
  - maximise: lift_to_drag
    at: {survey: 0.7, loiter: 0.3}
  - minimise: nose_down_moment
    at: survey
constraints:
  - {quantity: thickness, min: 10 %}
  - {quantity: depth, at: 30 %, min: 17 mm}
  - {quantity: cl_max, condition: slow, min: 1.40}
  - {quantity: cd, condition: dirty, max: 0.03}
search: {algorithm: nsga3, population: 80, generations: 150, seed: 7}
"""
"""The study of the contract, with its dirty condition limited so that every condition is read."""


@pytest.fixture
def good() -> str:
    """Text of a study without faults or warnings."""
    return GOOD


MARK = "^"
"""Stands before the place, in a changed text, that a fault is expected at."""


def changed(old: str, new: str, text: str = GOOD) -> str:
    """Return a study text with one place written otherwise."""
    assert text.count(old) == 1, f"{old!r} must stand once in the study"
    return text.replace(old, new)


def marked(old: str, new: str) -> tuple[str, str]:
    """Return a changed study text without its mark, and LINE:COLUMN of the mark."""
    text = changed(old, new)
    before, after = text.split(MARK)
    lines = before.split("\n")
    return before + after, f"{len(lines)}:{len(lines[-1]) + 1}"


@pytest.fixture
def change():
    """The function `changed`."""
    return changed


@pytest.fixture
def mark():
    """The function `marked`."""
    return marked


def faults_of(text: str, folder=None) -> list[str]:
    """Return the lines that a study text is refused with."""
    with pytest.raises(StudyError) as caught:
        parse_study(text, "s.yaml", folder)
    lines = str(caught.value).split("\n")
    assert len(lines) == len(caught.value.faults), "a fault must be one line"
    return lines


@pytest.fixture
def faults():
    """The function `faults_of`."""
    return faults_of
