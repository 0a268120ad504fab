"""What is varied: the parameterisation of a study, its fitted baseline and the bounds about it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from optim.arrays import FloatArray, frozen
from optim.errors import Fault, SectionError, StudyError
from optim.geometry.bezier import Bezier
from optim.geometry.cst import Cst
from optim.geometry.fitting import Fit, fit
from optim.geometry.naca import naca_section
from optim.geometry.parameterisation import Parameterisation
from optim.geometry.section import Section, section_from_coordinates
from optim.geometry.validity import faults
from optim.study.schema import SectionSettings, Study

NACA_PREFIX = "naca:"
"""What a baseline named by its digits starts with."""


@dataclass(frozen=True)
class DesignSpace:
    """Design variables with their bounds.

    Attributes
    ----------
    parameterisation : Parameterisation
        Design -> section.
    baseline : Section
        The section that the study names.
    fit : Fit
        The parameterisation's nearest section to it.
    lower, upper : (n_variables,) array
        Bounds of the search.
    """

    parameterisation: Parameterisation
    baseline: Section
    fit: Fit
    lower: FloatArray
    upper: FloatArray

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the variables."""
        return self.parameterisation.names

    def distance(self, design: FloatArray) -> float:
        """Return the mean distance from the fitted baseline, as a share of the bounds [-]."""
        return float(np.mean(np.abs(design - self.fit.design) / (self.upper - self.lower)))


def design_space(study: Study) -> DesignSpace:
    """Return what a study varies.

    Parameters
    ----------
    study : Study
        A study whose keys fit together.

    Returns
    -------
    DesignSpace
        With the baseline fitted and inside the bounds.

    Raises
    ------
    StudyError
        If the baseline is no section, the parameterisation does not take the settings, or bounds
        leave the baseline out.
    """
    settings = study.section
    section = baseline_section(study)
    parameterisation = _parameterisation(study)
    fitted = fit(parameterisation, section)
    _check_sound(parameterisation.section(fitted.design))
    lower, upper = parameterisation.bounds(fitted.design, settings.freedom)
    lower, upper = _with_given_bounds(settings, parameterisation.names, fitted, lower, upper)
    return DesignSpace(parameterisation, section, fitted, frozen(lower), frozen(upper))


def baseline_section(study: Study) -> Section:
    """Return the section that a study names as its baseline.

    Parameters
    ----------
    study : Study
        A loaded study: the coordinates of a file have been read into it.

    Returns
    -------
    Section
        Normalised to its chord line.

    Raises
    ------
    StudyError
        If it is no section.
    """
    settings = study.section
    try:
        points = study.baseline_points()
        if points is not None:
            return section_from_coordinates(points, settings.baseline)[0]
        return naca_section(settings.baseline.removeprefix(NACA_PREFIX))
    except SectionError as error:
        raise StudyError(
            [Fault(fault.message, ("section", "baseline")) for fault in error.faults]
        ) from error


def _parameterisation(study: Study) -> Parameterisation:
    """Return the parameterisation with the study's edge gap."""
    settings = study.section
    count = settings.coefficients
    try:
        if settings.shape == "cst":
            return Cst(
                upper=count.upper,
                lower=count.lower,
                gap=study.trailing_edge_gap,
                leading_edge_term=settings.leading_edge_term,
                exponents=settings.class_exponents,
            )
        return Bezier(upper=count.upper, lower=count.lower, gap=study.trailing_edge_gap)
    except ValueError as error:
        raise StudyError([Fault(str(error), ("section",))]) from error


def _check_sound(section: Section) -> None:
    found = faults(section)
    if found:
        message = (
            f"the fit of the baseline is no section: {found[0].sentence} Accepted is a baseline "
            f"that this shape, its coefficients and the trailing edge can follow."
        )
        raise StudyError([Fault(message, ("section", "baseline"))])


def _with_given_bounds(
    settings: SectionSettings,
    names: tuple[str, ...],
    fitted: Fit,
    lower: FloatArray,
    upper: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Return the bounds with those that the study gives one by one in their places."""
    wrong = []
    for name, (low, high) in settings.bounds.items():
        k = names.index(name)
        if not low <= fitted.design[k] <= high:
            message = (
                f"the bounds {low:g} to {high:g} leave out the baseline's own {name} of "
                f"{fitted.design[k]:.4f}; accepted are bounds on both sides of it."
            )
            wrong.append(Fault(message, ("section", "bounds", name)))
        lower[k], upper[k] = low, high
    if wrong:
        raise StudyError(wrong)
    return lower, upper
