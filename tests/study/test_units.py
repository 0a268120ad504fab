"""Units, held to pint, whose unit definitions are those of CODATA and NIST SP 811."""

from __future__ import annotations

import math
import subprocess
import sys
import time
from fractions import Fraction

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from optim.study import units
from optim.study.units import UnitError, read

ANY_TABLE = [
    (dimension, unit)
    for dimension in units.DIMENSIONS
    for unit in dimension.units
    if unit not in dimension.offsets and dimension is not units.TEMPERATURE_DIFFERENCE
]


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


@pytest.mark.parametrize(
    ("dimension", "unit"), ANY_TABLE, ids=[f"{d.name}-{u}" for d, u in ANY_TABLE]
)
def test_tables_agree_with_pint(dimension, unit, registry) -> None:
    expected = registry.Quantity(1.0, unit).to("" if dimension.unit == "1" else dimension.unit)
    assert float(dimension.units[unit]) == pytest.approx(expected.magnitude, rel=1e-15)


@pytest.mark.parametrize("text", ["15 degC", "-40 degF", "59 °F", "300 K", "20°C"])
def test_temperatures_agree_with_pint(text, registry) -> None:
    number, unit = text.replace("°", " deg").replace("deg C", "degC").split(maxsplit=1)
    expected = registry.Quantity(float(number), unit.replace(" ", "")).to("K").magnitude
    assert read(text, units.TEMPERATURE) == pytest.approx(expected, rel=1e-15)


def test_a_difference_of_temperature_has_no_offset() -> None:
    assert read("10 degC", units.TEMPERATURE_DIFFERENCE) == 10.0
    assert read("9 degF", units.TEMPERATURE_DIFFERENCE) == 5.0


@pytest.mark.parametrize(
    ("text", "dimension", "expected"),
    [
        ("212 mm", units.LENGTH, 0.212),
        ("0.55 m^2", units.AREA, 0.55),
        ("0.55 m2", units.AREA, 0.55),
        ("0.55 m²", units.AREA, 0.55),
        ("5.5e3 cm**2", units.AREA, 0.55),
        ("90 km/h", units.SPEED, 25.0),
        ("90 km / h", units.SPEED, 25.0),
        ("90km/h", units.SPEED, 25.0),
        ("180 deg", units.ANGLE, math.pi),
        ("180°", units.ANGLE, math.pi),
        ("0.07 %", units.FRACTION, 0.0007),
        ("8 h", units.TIME, 28800.0),
        ("+.5", units.NUMBER, 0.5),
        ("1e-3 km", units.LENGTH, 1.0),
        ("15 degC", units.TEMPERATURE, 288.15),
    ],
)
def test_texts_are_read_to_the_nearest_float(text, dimension, expected) -> None:
    assert read(text, dimension) == expected


@given(st.integers(1, 10**6))
def test_millimetres_are_read_as_the_decimal_is_written(thousandths: int) -> None:
    """ "212 mm" is the same float as 0.212, so that both spellings are the same study."""
    written = float(Fraction(thousandths, 1000))
    assert read(f"{thousandths} mm", units.LENGTH) == written


def test_uncommon_units_go_to_pint() -> None:
    assert read("1 furlong", units.LENGTH) == pytest.approx(201.168, rel=1e-5)  # survey foot
    assert read("2 mile/hour", units.SPEED) == pytest.approx(0.89408, rel=1e-12)
    assert read("1 slug", units.MASS) == pytest.approx(14.5939029, rel=1e-7)


@pytest.mark.parametrize(
    ("value", "dimension", "fragments"),
    [
        ("212 kg", units.LENGTH, ["a mass", "a length in m", '"212 mm"']),
        ("5 rad", units.FRACTION, ["an angle", "a fraction"]),
        ("3 %", units.NUMBER, ["a fraction", "a number without unit"]),
        ("3 hPa", units.LENGTH, ["another dimension", "a length in m"]),
        ("3 count", units.FRACTION, ["another dimension"]),
        ("2 furlogn", units.LENGTH, ["no unit that is known", "a length"]),
        ("twelve", units.SPEED, ['"twelve" is not accepted', "a speed in m/s"]),
        ("1_000 m", units.LENGTH, ["accepted is a length"]),
        ("", units.LENGTH, ['"" is not accepted']),
        (True, units.NUMBER, ["true is not accepted"]),
        (None, units.MASS, ["nothing is not accepted"]),
        ([1.0], units.MASS, ["a list is not accepted"]),
        (math.nan, units.SPEED, ["nan is not finite"]),
        (-math.inf, units.SPEED, ["-inf is not finite"]),
        ("1e999 mm", units.LENGTH, ["not finite"]),
        (10**400, units.LENGTH, ["not finite"]),
        ("x" * 10**6, units.LENGTH, ["accepted is a length"]),
    ],
)
def test_what_is_no_measure_is_refused_in_one_short_sentence(value, dimension, fragments) -> None:
    with pytest.raises(UnitError) as caught:
        read(value, dimension)
    sentence = str(caught.value)
    assert all(fragment in sentence for fragment in fragments), sentence
    assert len(sentence) < 250
    assert "\n" not in sentence


HOSTILE = ["1 m*10**10**10", "1 m**9**9**9", "1 " + "m*" * 28, "2 (m", "1 m^-"]


@pytest.mark.parametrize("text", HOSTILE)
def test_a_hostile_unit_is_refused_at_once(text) -> None:
    read("1 furlong", units.LENGTH)  # the registry is there already
    start = time.perf_counter()
    with pytest.raises(UnitError):
        read(text, units.LENGTH)
    assert time.perf_counter() - start < 0.5


def test_either_of_two_dimensions_is_told_apart() -> None:
    both = (units.FRACTION, units.LENGTH)
    assert units.read_either("0.8 mm", both) == (0.0008, units.LENGTH)
    assert units.read_either("0.4 %", both) == (0.004, units.FRACTION)
    assert units.read_either(0.004, both) == (0.004, units.FRACTION)


def test_common_units_do_not_load_pint() -> None:
    """Workers rebuild a study from its resolved text: that must not cost a unit registry."""
    code = (
        "import sys\n"
        "from optim.study import parse_study, template_text\n"
        "study = parse_study(template_text())\n"
        "again = parse_study(study.resolved_text())\n"
        "assert again == study\n"
        "sys.exit('pint' in sys.modules)\n"
    )
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_importing_the_room_loads_neither_pydantic_nor_yaml() -> None:
    code = (
        "import sys, optim.study, optim.study.vocabulary\n"
        "sys.exit(bool({'pydantic', 'yaml', 'pint', 'numpy'} & set(sys.modules)))\n"
    )
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
