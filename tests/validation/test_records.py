"""Every number that travels with the tool says where it is from and that it may travel."""

import math
from importlib import resources

import numpy as np
import pytest

from optim.validation.case import FROM_MEMORY, STATUSES
from optim.validation.record import left_out, read_record
from optim.validation.suite import LONGEST_FIRST, SOURCES

DATA = resources.files("optim.validation") / "data"

FREE = ("United States Government", "expired", "without restriction", "handed on by NASA")
"""Grounds on which a set may travel with the tool; each record names one of them."""

NEVER = ("Notre Dame", "UNDAS", "ICAS", "UIUC", "Frere", "Ohio")
"""Sets whose terms are not established."""


@pytest.mark.parametrize("name", SOURCES)
def test_provenance_is_complete(name):
    record = read_record(name)
    for text in (
        record.title, record.report, record.place, record.read_in, record.section,
        record.conditions, record.scatter,
    ):  # fmt: skip
        assert len(text) > 2
    assert record.status in STATUSES
    assert any(ground in record.terms for ground in FREE)
    assert record.files


@pytest.mark.parametrize("name", SOURCES)
def test_every_allowance_has_its_parts_and_its_reason(name):
    for allowed in read_record(name).allowances.values():
        assert min(allowed.scatter, allowed.reading, allowed.method) >= 0.0
        assert len(allowed.reason) > 15
        assert allowed.measure in {"difference", "relative"}
        # independent parts: at least the greatest of them, at most their sum
        parts = (allowed.scatter, allowed.reading, allowed.method)
        assert max(parts) <= allowed.tolerance * (1 + 1e-12)
        assert allowed.tolerance <= sum(parts) * (1 + 1e-12)


def test_every_data_file_belongs_to_one_record():
    files = [file for name in SOURCES for file in read_record(name).files]
    assert len(files) == len(set(files))
    there = {path.name for path in DATA.iterdir()}
    assert there == {*files, *(f"{name}.toml" for name in SOURCES), "left_out.toml"}


def test_each_source_is_told_once():
    assert len(set(SOURCES)) == len(SOURCES)
    assert set(LONGEST_FIRST) <= set(SOURCES)


def test_sets_without_plain_terms_are_named_only_as_left_out():
    for path in DATA.iterdir():
        if path.name != "left_out.toml":
            text = path.read_text()
            assert not [word for word in NEVER if word in text], path.name
    named = " ".join(f"{one['name']} {one['report']}" for one in left_out())
    assert "Notre Dame" in named
    assert all(len(one["why"]) > 20 for one in left_out())


def test_numbers_are_as_the_reports_print_them():
    """Spot checks: TM-4074 first row and greatest lift, Report 824 row 2412, TM-4062 table B1."""
    ladson = read_record("naca0012_tm4074").columns()
    assert [ladson[n][0] for n in ("trip_grit", "alpha_deg", "cl", "cd")] == [
        80, -4.04, -0.4417, 0.00871,
    ]  # fmt: skip
    assert np.max(ladson["cl"]) == 1.6347
    record = read_record("handbook_report824")
    row = record.words("section").index("2412")
    assert record.columns()["cl_alpha_per_deg"][row] == 0.105
    e387 = read_record("e387").columns("reynolds")
    assert e387["cd"][e387["Re"] == 4.6e5] == [0.0093]


def test_an_empty_cell_is_not_a_number():
    brackets = read_record("nlf0416").columns("transition")
    assert math.isnan(brackets["x_last_laminar"].min())
    assert np.nanmin(brackets["x_last_laminar"]) > 0.0


def test_memory_is_marked_row_by_row():
    statuses = read_record("minimum_drag").words("status")
    assert statuses.count(FROM_MEMORY) == 5
    assert set(statuses) <= set(STATUSES)


def test_digitising_error_of_the_pressures_follows_from_its_parts():
    """0.05 in cp and 0.002 c in x times the slope, averaged behind x/c 0.02, as the record says."""
    record = read_record("naca0012_rm3726")
    table = record.columns()
    for angle in (0, 10, 15):
        here = table["alpha_deg"] == angle
        order = np.argsort(table["x_c"][here])
        x, cp = table["x_c"][here][order], table["cp"][here][order]
        size = np.hypot(0.05, 0.002 * np.gradient(cp, x))[x >= 0.02]
        allowed = record.allowances[f"pressure_{angle}"]
        assert allowed.reading == pytest.approx(np.mean(size), abs=2e-4)
        assert allowed.method == allowed.scatter == 0.0
