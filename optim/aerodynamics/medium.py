"""The fluid a section works in: standard air, fresh water and sea water.

Air is the standard atmosphere of ISO 2533:1975, which the U.S. Standard Atmosphere, 1976 shares up
to 32 km: a hydrostatic perfect gas whose temperature is piecewise linear in geopotential altitude.
A day warmer or colder than standard keeps the pressure of its pressure altitude and takes the
density of the shifted temperature, as altimeters and performance charts do. Water is at
atmospheric pressure; the pressure of a few metres of immersion changes its density by less than
one part in 1e4.

Valid from 5 km below to 32 km above sea level in air, and for water between 0 and 40 degrees
Celsius. The air is dry.

References
----------
.. [1] U.S. Standard Atmosphere, 1976, NOAA-S/T 76-1562: defining constants (table 2), layers
   (table 4), equations 23, 33a, 33b, 42, 50 and 51. Constants and equation numbers from memory;
   the printed table rows are met, see tests/aerodynamics/test_medium.py.
.. [2] M. Tanaka, G. Girard, R. Davis, A. Peuto, N. Bignell, "Recommended table for the density of
   water between 0 C and 40 C based on recent experimental reports", Metrologia 38 (2001)
   301-309, equation 1 (from memory).
.. [3] IAPWS SR6-08(2011), "Revised Supplementary Release on Properties of Liquid Water at
   0.1 MPa", viscosity (from memory).
.. [4] F. J. Millero, A. Poisson, "International one-atmosphere equation of state of seawater",
   Deep-Sea Research 28A (1981) 625-629 (from memory).
.. [5] M. H. Sharqawy, J. H. Lienhard V, S. M. Zubair, "Thermophysical properties of seawater",
   Desalination and Water Treatment 16 (2010) 354-380, equations 22 and 23; the relation of
   ITTC recommended procedure 7.5-02-01-03 (2011) (from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass

STANDARD_GRAVITY = 9.80665
"""Conventional acceleration of free fall [m/s2], 3rd CGPM (1901); [1]_ table 2."""

ZERO_CELSIUS = 273.15
"""0 degrees Celsius [K], by definition of the scale."""

GAS_CONSTANT_OF_AIR = 287.05287
"""Specific gas constant of dry air [J/(kg K)], ISO 2533:1975; 8314.32/28.9644 of [1]_."""

HEAT_CAPACITY_RATIO = 1.4
"""Ratio of specific heats of air [-], [1]_ table 2."""

SUTHERLAND_COEFFICIENT = 1.458e-6
"""Coefficient of Sutherland's law [kg/(s m K^0.5)], [1]_ equation 51."""

SUTHERLAND_TEMPERATURE = 110.4
"""Constant of Sutherland's law [K], [1]_ equation 51."""

LOWEST_ALTITUDE, HIGHEST_ALTITUDE = -5000.0, 32000.0
"""Ends of the layers described here, geopotential [m], [1]_ table 4."""

COLDEST_WATER, WARMEST_WATER = ZERO_CELSIUS, ZERO_CELSIUS + 40.0
"""Ends of the water relations [K]: those of [2]_, within the 0 to 40 C of [4]_."""

STANDARD_SALINITY = 35.0
"""Practical salinity of standard sea water [-]."""

STANDARD_ABSOLUTE_SALINITY = 0.03516504
"""Mass of salt in a mass of standard sea water [kg/kg], reference composition; ITTC (2011)."""


@dataclass(frozen=True, slots=True)
class Medium:
    """What the flow needs to know of its fluid.

    Attributes
    ----------
    temperature : float
        Static temperature [K].
    pressure : float
        Static pressure [Pa].
    density : float
        Density [kg/m3].
    dynamic_viscosity : float
        Dynamic viscosity [Pa s].
    speed_of_sound : float
        Speed of sound [m/s]; infinite for water, which is taken as incompressible.
    """

    temperature: float
    pressure: float
    density: float
    dynamic_viscosity: float
    speed_of_sound: float

    @property
    def kinematic_viscosity(self) -> float:
        """Dynamic viscosity over density [m2/s]."""
        return self.dynamic_viscosity / self.density


@dataclass(frozen=True, slots=True)
class _Layer:
    """One layer of the standard atmosphere: its base [m, K, Pa] and its lapse rate [K/m]."""

    altitude: float
    temperature: float
    pressure: float
    lapse: float

    def temperature_at(self, altitude: float) -> float:
        """Temperature [K] at a geopotential altitude [m]; [1]_ equation 23."""
        return self.temperature + self.lapse * (altitude - self.altitude)

    def pressure_at(self, altitude: float) -> float:
        """Pressure [Pa] at a geopotential altitude [m]; [1]_ equations 33a and 33b."""
        exponent = STANDARD_GRAVITY / GAS_CONSTANT_OF_AIR
        if self.lapse == 0.0:
            height = altitude - self.altitude
            return self.pressure * math.exp(-exponent * height / self.temperature)
        ratio = self.temperature / self.temperature_at(altitude)
        return self.pressure * math.pow(ratio, exponent / self.lapse)

    def followed_by(self, altitude: float, lapse: float) -> _Layer:
        """Return the layer that starts at `altitude` [m]."""
        return _Layer(altitude, self.temperature_at(altitude), self.pressure_at(altitude), lapse)


def _standard_layers() -> tuple[_Layer, ...]:
    """Layers up to 32 km from the sea-level values and lapse rates of [1]_ tables 2 and 4."""
    troposphere = _Layer(0.0, 288.15, 101325.0, -0.0065)
    tropopause = troposphere.followed_by(11000.0, 0.0)
    return troposphere, tropopause, tropopause.followed_by(20000.0, 0.001)


_LAYERS = _standard_layers()


def sutherland_viscosity(temperature: float) -> float:
    """Return the dynamic viscosity of air by Sutherland's law.

    Parameters
    ----------
    temperature : float
        Static temperature [K], about 100 to 1900 K.

    Returns
    -------
    float
        Dynamic viscosity [Pa s]; [1]_ equation 51.
    """
    root = math.sqrt(temperature)
    return SUTHERLAND_COEFFICIENT * temperature * root / (temperature + SUTHERLAND_TEMPERATURE)


def air(altitude: float, warmer_than_standard: float = 0.0) -> Medium:
    """Return the standard atmosphere at a pressure altitude.

    Parameters
    ----------
    altitude : float
        Pressure altitude, geopotential, -5 to 32 km [m].
    warmer_than_standard : float
        How much warmer than standard the air is at this pressure altitude [K].

    Returns
    -------
    Medium
        Dry air.

    Raises
    ------
    ValueError
        If the altitude is outside the layers, or the offset leaves no positive temperature.
    """
    if not LOWEST_ALTITUDE <= altitude <= HIGHEST_ALTITUDE:
        raise ValueError(
            f"the altitude must lie between {LOWEST_ALTITUDE:g} m and {HIGHEST_ALTITUDE:g} m; "
            f"found {altitude:g} m."
        )
    layer = next((up for up in reversed(_LAYERS) if altitude >= up.altitude), _LAYERS[0])
    temperature = layer.temperature_at(altitude) + warmer_than_standard
    if not temperature > 0.0:
        raise ValueError(
            f"the air must be warmer than absolute zero; found an offset of "
            f"{warmer_than_standard:g} K at {layer.temperature_at(altitude):.2f} K."
        )
    pressure = layer.pressure_at(altitude)
    return Medium(
        temperature=temperature,
        pressure=pressure,
        density=pressure / (GAS_CONSTANT_OF_AIR * temperature),
        dynamic_viscosity=sutherland_viscosity(temperature),
        speed_of_sound=math.sqrt(HEAT_CAPACITY_RATIO * GAS_CONSTANT_OF_AIR * temperature),
    )


def fresh_water_density(celsius: float) -> float:
    """Return the density of air-free fresh water at one atmosphere.

    Parameters
    ----------
    celsius : float
        Temperature, 0 to 40 [degrees Celsius].

    Returns
    -------
    float
        Density [kg/m3]; [2]_, stated uncertainty below 0.001 kg/m3.
    """
    a1, a2, a3, a4, a5 = -3.983035, 301.797, 522528.9, 69.34881, 999.974950
    return a5 * (1.0 - (celsius + a1) ** 2 * (celsius + a2) / (a3 * (celsius + a4)))


def fresh_water_viscosity(celsius: float) -> float:
    """Return the dynamic viscosity of fresh water at 0.1 MPa.

    Parameters
    ----------
    celsius : float
        Temperature, 0 to 40 [degrees Celsius]; the release covers -20 to 110.

    Returns
    -------
    float
        Dynamic viscosity [Pa s]; [3]_, within 1 %.
    """
    reduced = (celsius + ZERO_CELSIUS) / 300.0
    terms = ((280.68, -1.9), (511.45, -7.7), (61.131, -19.6), (0.45903, -40.0))
    return 1e-6 * sum(a * math.pow(reduced, b) for a, b in terms)


def sea_water_density(celsius: float) -> float:
    """Return the density of standard sea water (practical salinity 35) at one atmosphere.

    Parameters
    ----------
    celsius : float
        Temperature, 0 to 40 [degrees Celsius].

    Returns
    -------
    float
        Density [kg/m3]; the excess over fresh water of [4]_, within 0.05 kg/m3.
    """
    t, salinity = celsius, STANDARD_SALINITY
    linear = 0.824493 + t * (-4.0899e-3 + t * (7.6438e-5 + t * (-8.2467e-7 + t * 5.3875e-9)))
    three_halves = -5.72466e-3 + t * (1.0227e-4 - t * 1.6546e-6)
    excess = salinity * (linear + math.sqrt(salinity) * three_halves + 4.8314e-4 * salinity)
    return fresh_water_density(t) + excess


def sea_water_viscosity(celsius: float) -> float:
    """Return the dynamic viscosity of standard sea water at 0.1 MPa.

    Parameters
    ----------
    celsius : float
        Temperature, 0 to 40 [degrees Celsius].

    Returns
    -------
    float
        Dynamic viscosity [Pa s]; the ratio to fresh water of [5]_, within 1.5 %.
    """
    t, salinity = celsius, STANDARD_ABSOLUTE_SALINITY
    a = 1.541 + 1.998e-2 * t - 9.52e-5 * t * t
    b = 7.974 - 7.561e-2 * t + 4.724e-4 * t * t
    return fresh_water_viscosity(t) * (1.0 + a * salinity + b * salinity * salinity)


def water(temperature: float, *, salt: bool) -> Medium:
    """Return fresh water or standard sea water at one atmosphere.

    Parameters
    ----------
    temperature : float
        Temperature [K], 273.15 to 313.15.
    salt : bool
        Whether it is sea water of practical salinity 35.

    Returns
    -------
    Medium
        Water, incompressible.

    Raises
    ------
    ValueError
        If the temperature is outside the range of the relations.
    """
    # A reading such as 40 degC is a rounding error away from the end of the range.
    slack = 1e-9
    if not COLDEST_WATER - slack <= temperature <= WARMEST_WATER + slack:
        raise ValueError(
            f"the water must be between 0 and 40 degrees Celsius; "
            f"found {temperature - ZERO_CELSIUS:g} degrees Celsius."
        )
    celsius = temperature - ZERO_CELSIUS
    return Medium(
        temperature=temperature,
        pressure=101325.0,
        density=sea_water_density(celsius) if salt else fresh_water_density(celsius),
        dynamic_viscosity=sea_water_viscosity(celsius) if salt else fresh_water_viscosity(celsius),
        speed_of_sound=math.inf,
    )
