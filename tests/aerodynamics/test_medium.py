"""Air and water against printed tables.

Sources: U.S. Standard Atmosphere, 1976, NOAA-S/T 76-1562, main table at geopotential altitudes
(the same numbers as ISO 2533:1975); rows FROM MEMORY. Sea-level values 288.15 K, 101325 Pa,
1.225 kg/m3, 1.460e-5 m2/s also READ (secondary) in a public altitude table. Fresh water: IAPWS
values at 0.1 MPa and ITTC 7.5-02-01-03 (2011) at 15 C, FROM MEMORY. Sea water: ITTC (2011) at
15 C and the check values of the UNESCO 1983 algorithms for sea water, FROM MEMORY.
"""

from __future__ import annotations

import math

import pytest

from optim.aerodynamics.medium import (
    ZERO_CELSIUS,
    air,
    fresh_water_density,
    fresh_water_viscosity,
    sea_water_density,
    water,
)

# altitude [m], temperature [K], pressure [Pa], density [kg/m3], sound [m/s], viscosity [Pa s]
STANDARD_ROWS = [
    (0.0, 288.150, 101325.0, 1.22500, 340.294, 1.7894e-5),
    (1000.0, 281.650, 89874.6, 1.11164, 336.434, 1.7578e-5),
    (2000.0, 275.150, 79495.2, 1.00649, 332.529, 1.7260e-5),
    (5000.0, 255.650, 54019.9, 0.736116, 320.529, 1.6281e-5),
    (10000.0, 223.150, 26436.2, 0.412706, 299.463, 1.4571e-5),
    (11000.0, 216.650, 22632.0, 0.363918, 295.069, 1.4216e-5),
    (15000.0, 216.650, 12044.6, 0.193673, 295.069, 1.4216e-5),
    (20000.0, 216.650, 5474.87, 0.0880345, 295.069, 1.4216e-5),
    (25000.0, 221.650, 2511.01, 0.0394657, 298.455, 1.4490e-5),
]


@pytest.mark.published
@pytest.mark.parametrize("row", STANDARD_ROWS, ids=lambda row: f"{row[0]:g} m")
def test_standard_atmosphere_meets_the_printed_rows(row):
    """Every figure within a unit of its last printed place."""
    altitude, temperature, pressure, density, sound, viscosity = row
    found = air(altitude)
    assert found.temperature == pytest.approx(temperature, abs=5e-4)
    assert found.pressure == pytest.approx(pressure, rel=5e-6)
    assert found.density == pytest.approx(density, rel=5e-6)
    assert found.speed_of_sound == pytest.approx(sound, abs=1e-3)
    assert found.dynamic_viscosity == pytest.approx(viscosity, abs=1e-9)


@pytest.mark.published
def test_kinematic_viscosity_at_sea_level():
    assert air(0.0).kinematic_viscosity == pytest.approx(1.4607e-5, abs=1e-9)


@pytest.mark.parametrize("base", [11000.0, 20000.0])
def test_layers_meet(base):
    below, above = air(base - 1e-6), air(base)
    assert below.pressure == pytest.approx(above.pressure, rel=1e-9)
    assert below.temperature == pytest.approx(above.temperature, rel=1e-9)


@pytest.mark.parametrize("altitude", [-3000.0, 500.0, 12000.0, 26000.0])
def test_pressure_is_hydrostatic(altitude):
    """dp/dh = -rho g0, from central differences."""
    step = 1.0
    slope = (air(altitude + step).pressure - air(altitude - step).pressure) / (2.0 * step)
    assert slope == pytest.approx(-air(altitude).density * 9.80665, rel=1e-6)


def test_a_warm_day_keeps_the_pressure_and_thins_the_air():
    """500 m, 10 K warmer: density 1.128 kg/m3, kinematic viscosity 1.615e-5 m2/s (by hand)."""
    standard, warm = air(500.0), air(500.0, 10.0)
    assert warm.pressure == standard.pressure
    ratio = standard.temperature / warm.temperature
    assert warm.density == pytest.approx(standard.density * ratio, rel=1e-12)
    assert warm.density == pytest.approx(1.128, abs=5e-4)
    assert warm.kinematic_viscosity == pytest.approx(1.615e-5, abs=5e-9)


# temperature [degrees C], density [kg/m3], dynamic viscosity [Pa s]
FRESH_ROWS = [
    (5.0, 999.967, 1.5182e-3),
    (15.0, 999.1026, 1.1376e-3),
    (20.0, 998.2067, 1.0016e-3),
    (25.0, 997.0470, 0.8900e-3),
    (30.0, 995.6488, 0.7972e-3),
]


@pytest.mark.published
@pytest.mark.parametrize("row", FRESH_ROWS, ids=lambda row: f"{row[0]:g} C")
def test_fresh_water_meets_the_recommended_values(row):
    celsius, density, viscosity = row
    assert fresh_water_density(celsius) == pytest.approx(density, abs=1e-3)
    assert fresh_water_viscosity(celsius) == pytest.approx(viscosity, rel=2e-4)


@pytest.mark.published
def test_water_at_15_degrees_as_the_towing_tanks_use_it():
    """ITTC (2011) at 15 C: fresh 1.1386e-6 m2/s; sea 1026.02 kg/m3, 1.220e-3 Pa s, 1.1892e-6."""
    fresh, sea = (water(ZERO_CELSIUS + 15.0, salt=salt) for salt in (False, True))
    assert fresh.kinematic_viscosity == pytest.approx(1.1386e-6, rel=2e-4)
    # ITTC's sea density comes from another equation of state, 0.05 kg/m3 away.
    assert sea.density == pytest.approx(1026.02, abs=0.06)
    assert sea.dynamic_viscosity == pytest.approx(1.220e-3, rel=5e-4)
    assert sea.kinematic_viscosity == pytest.approx(1.1892e-6, rel=5e-4)
    assert math.isinf(sea.speed_of_sound)


@pytest.mark.published
@pytest.mark.parametrize(("celsius", "density"), [(5.0, 1027.67547), (25.0, 1023.34306)])
def test_sea_water_density_meets_the_check_values(celsius, density):
    """Within what the newer density of pure water differs from the one used in 1981."""
    assert sea_water_density(celsius) == pytest.approx(density, abs=5e-3)


@pytest.mark.parametrize("altitude", [-5001.0, 32001.0, math.nan])
def test_altitudes_outside_the_layers_are_refused(altitude):
    with pytest.raises(ValueError, match="altitude must lie between"):
        air(altitude)


@pytest.mark.parametrize("celsius", [-0.1, 40.1, math.nan])
def test_water_outside_the_relations_is_refused(celsius):
    with pytest.raises(ValueError, match="between 0 and 40 degrees"):
        water(ZERO_CELSIUS + celsius, salt=False)


def test_air_below_absolute_zero_is_refused():
    with pytest.raises(ValueError, match="absolute zero"):
        air(0.0, -300.0)
