"""Measured polars: what is read, and every fault with its line and column."""

import numpy as np
import pytest

from optim.errors import InputError
from optim.study.polar_file import is_polar, read_polar

POLAR = """\
# section: naca:2412
# reynolds: 2.0e5
# trip_upper: 5 %
# measured on a dull day
alpha,cl,cd,cm
0,0.25,0.0095,-0.050
4,0.68,,-0.048
8,1.05,0.0160,
"""


@pytest.fixture
def written(tmp_path):
    def to(text, name="polar.csv"):
        path = tmp_path / name
        path.write_text(text)
        return path

    return to


def test_numbers_conditions_and_gaps_are_read(written):
    polar = read_polar(written(POLAR))
    assert (polar.reynolds, polar.mach, polar.n_factor) == (2e5, 0.0, 9.0)
    assert (polar.trip_upper, polar.trip_lower) == (0.05, 1.0)
    np.testing.assert_array_equal(polar.alpha_deg, [0.0, 4.0, 8.0])
    np.testing.assert_array_equal(polar.cd, [0.0095, np.nan, 0.0160])
    np.testing.assert_array_equal(polar.cm_quarter, [-0.050, -0.048, np.nan])


def test_conditions_may_stand_in_columns_as_analyse_writes_them(written):
    text = "section,alpha_deg,reynolds,mach,n_factor,panels,cl,cd,cm_quarter,outcome\n" + (
        "NACA 2412,0.0,200000.0,0.1,7.0,160,0.25,0.0095,-0.05,converged\n"
        "NACA 2412,4.0,200000.0,0.1,7.0,160,,,,not_converged\n"
    )
    polar = read_polar(written(text))
    assert (polar.reynolds, polar.mach, polar.n_factor) == (2e5, 0.1, 7.0)
    np.testing.assert_array_equal(polar.cl, [0.25, np.nan])


def test_table_of_points_is_no_polar(written):
    assert is_polar(written(POLAR))
    assert not is_polar(written("x_mm,y_mm\n1.0,0.0\n", "section.csv"))
    assert not is_polar(written(POLAR, "polar.txt"))
    assert not is_polar(written("", "empty.csv"))


FAULTS = {
    "no Reynolds number": (POLAR.replace("# reynolds: 2.0e5\n", ""), "", "# reynolds: 2e5"),
    "unknown key": (POLAR.replace("trip_upper", "trip_uper"), "3:", "did you mean trip_upper?"),
    "unit": (POLAR.replace("5 %", "5 kg"), "3:", "trip_upper"),
    "range": (POLAR.replace("2.0e5", "2.0"), "2:", "at least 10000"),
    "counts": (POLAR.replace("0.0095", "95"), "6:3:", "accepted is a number from 0 to 2"),
    "word": (POLAR.replace("1.05", "stall"), "8:2:", "accepted is a number from -5 to 5"),
    "infinity": (POLAR.replace("1.05", "inf"), "8:2:", "cl"),
    "no lift": (POLAR.replace("cl,", "lift,"), "5:", "accepted is a header line"),
    "lift alone": ("# reynolds: 2e5\ncl\n0.1\n0.2\n", "2:", "at least one other"),
    "one row": ("# reynolds: 2e5\nalpha,cl\n1,0.1\n", "", "accepted are 2 or more"),
    "two conditions": ("reynolds,alpha,cl\n1e5,1,0.1\n2e5,2,0.2\n", "2:", "one file a polar"),
    "empty": ("", "", "no table"),
}


@pytest.mark.parametrize("kind", FAULTS)
def test_fault_is_one_line_with_its_place(written, kind):
    text, place, said = FAULTS[kind]
    path = written(text)
    with pytest.raises(InputError) as error:
        read_polar(path)
    (fault,) = error.value.faults
    assert str(fault).startswith(f"{path}:{place}")
    assert said in str(fault)


def test_all_faults_are_told_at_once(written):
    path = written(POLAR.replace("0.0095", "95").replace("1.05", "stall").replace("2.0e5", "fast"))
    with pytest.raises(InputError) as error:
        read_polar(path)
    assert [fault.line for fault in error.value.faults] == [2, 8, 6]


@pytest.mark.parametrize("content", [b"alpha,cl\0,cd\n", b"cl,cd\n" + b"0.1,0.01\n" * 200_000])
def test_binary_and_endless_files_are_refused(tmp_path, content):
    path = tmp_path / "polar.csv"
    path.write_bytes(content)
    with pytest.raises(InputError, match="binary or larger"):
        read_polar(path)
