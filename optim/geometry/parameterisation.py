"""What every parameterisation answers: names, a section for a design and bounds.

Every parameterisation here is linear in its design: the curve at a parameter t is a fixed point
plus a sum of fixed vectors times the variables. Sections are then made by one product of
matrices, a fit is a linear least-squares problem for given foot points, and a step of every
variable has the same reach at every design.
"""

from __future__ import annotations

from abc import ABC, abstractmethod

from optim.arrays import FloatArray, check_finite, check_shape
from optim.geometry.section import Section


class Parameterisation(ABC):
    """Design variables -> Section."""

    @property
    @abstractmethod
    def names(self) -> tuple[str, ...]:
        """Name of each variable, in the order of a design."""

    @abstractmethod
    def section(self, design: FloatArray) -> Section:
        """Return the section of a design.

        Parameters
        ----------
        design : (n,) array
            One value for each of `names` [chords].

        Returns
        -------
        Section
            Its contour may have faults, which `validity.faults` names.

        Raises
        ------
        ValueError
            If the design has another length or is not finite.
        """

    @abstractmethod
    def basis(self, t: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the ordinate at `t` as a linear function of the design.

        Parameters
        ----------
        t : (n,) array
            Parameter of the curve, -1 to 1 [-]; x is t**2.

        Returns
        -------
        offset : (n,) array
            Ordinates of the design of zeros [chords].
        matrix : (n, n_variables) array
            Ordinates that a unit of each variable adds [-].
        """

    @property
    @abstractmethod
    def reach(self) -> FloatArray:
        """Step of each variable that counts as one unit of freedom, (n_variables,) [chords]."""

    def bounds(self, design: FloatArray, freedom: float) -> tuple[FloatArray, FloatArray]:
        """Return the lower and upper bounds of a search about a design.

        Parameters
        ----------
        design : (n,) array
            The middle, such as the fit of a baseline.
        freedom : float
            How far each variable may move to either side, in units of `reach`; positive.

        Raises
        ------
        ValueError
            If the freedom is not positive or the design does not fit.
        """
        if not freedom > 0.0:
            raise ValueError(f"The freedom must be positive; found {freedom}.")
        checked = self.checked(design)
        return checked - freedom * self.reach, checked + freedom * self.reach

    def checked(self, design: FloatArray) -> FloatArray:
        """Return the design after a look at its length and content."""
        check_shape("design", design, {"variables": len(self.names)})
        check_finite("design", design)
        return design
