"""The command: what it prints, what it draws, its JSON, its exit codes, its time."""

import json
import os
import subprocess
import sys
import time
from pathlib import Path

import matplotlib as mpl
import pytest

from optim.cli import app
from optim.report.cautions import CAUTION
from optim.report.validation_figure import source_figure
from optim.validation import suite

QUICK = ("naca0012_rm3726", "wieghardt", "samuel_joubert")

CONTRACT = ("source", "status", "quantity", "measured", "computed", "error", "scatter", "tolerance")


@pytest.fixture
def quick(monkeypatch):
    """Let the command know of three quick sources only, and work in this process."""
    monkeypatch.setattr("optim.validation.suite.SOURCES", QUICK)
    monkeypatch.setattr("optim.runner.executors.processors", lambda: 1)
    monkeypatch.setattr("optim.cli.validation.prepare_kernels", lambda: None)


@pytest.mark.usefixtures("quick")
class TestValidate:
    def test_json_has_the_fields_of_the_contract(self, command):
        done = command("validate", "--json")
        document = json.loads(done.out)
        assert done.code == 0
        assert [one["name"] for one in document["sources"]] == list(QUICK)
        assert sum(document["summary"].values()) == len(document["cases"]) == 8
        for case in document["cases"]:
            assert {*CONTRACT, "verdict", "reason", "conditions", "half"} <= case.keys()
            assert case["verdict"] in document["summary"]
        assert all(one["terms"] and one["status"] for one in document["sources"])
        assert len(document["left_out"]) >= 5

    def test_text_shows_measured_beside_computed_with_the_caution(self, command):
        done = command("validate")
        assert done.code == 0
        assert "Gregory and O'Reilly" in done.out
        assert "  reproduced" in done.out
        assert "Not reproduced, and why:" in done.out
        assert CAUTION in done.out
        assert "tunnel and flight test" in done.out
        assert "8 cases in" in done.err

    def test_plot_draws_one_figure_a_source(self, command, tmp_path):
        folder = tmp_path / "figures" / "new"
        done = command("validate", "--json", "--plot", folder)
        assert done.code == 0
        json.loads(done.out)
        assert {path.stem for path in folder.iterdir()} == set(QUICK)

    def test_folder_that_cannot_be_made_is_refused_before_anything_is_computed(
        self, command, tmp_path
    ):
        (tmp_path / "file").write_text("")
        done = command("validate", "--plot", tmp_path / "file")
        assert done.code == 2
        assert "accepted is another place" in done.err
        assert "computing" not in done.err

    def test_unknown_words_are_misuse(self, command):
        assert command("validate", "--plots").code == 2


def test_processes_give_what_one_gives_in_the_same_order(monkeypatch):
    monkeypatch.setattr(suite, "SOURCES", QUICK)
    alone, together = list(suite.run(1)), list(suite.run(2))
    assert [one.record.name for one in together] == list(QUICK)
    for a, b in zip(alone, together, strict=True):
        assert [repr(case) for case in a.cases] == [repr(case) for case in b.cases]


def test_figure_has_the_scatter_as_bars_and_the_computed_line(comparison):
    found = comparison("naca0012_rm3726")
    figure = source_figure(found)
    axes = figure.axes[1]
    (bars,) = [one for one in axes.containers if isinstance(one, mpl.container.ErrorbarContainer)]
    assert bars.has_yerr
    half = found.record.allowances["pressure_10"].reading
    segment = bars.lines[2][0].get_segments()[3]
    assert (segment[1, 1] - segment[0, 1]) / 2 == pytest.approx(half)
    assert axes.yaxis_inverted()
    assert found.record.report in figure.get_suptitle()


@pytest.mark.slow
def test_all_of_it_takes_less_than_two_minutes(tmp_path):
    began = time.monotonic()
    done = subprocess.run(
        [sys.executable, "-m", "optim", "validate", "--json", "--plot", "figures"],
        cwd=tmp_path, capture_output=True, text=True, check=False, timeout=300,
        env={**os.environ, "PYTHONPATH": str(Path(app.__file__).parents[2])},
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    assert time.monotonic() - began < 120.0
    document = json.loads(done.stdout)
    assert [one["name"] for one in document["sources"]] == list(suite.SOURCES)
    assert len(list((tmp_path / "figures").iterdir())) == len(suite.SOURCES)
