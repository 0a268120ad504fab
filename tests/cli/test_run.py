"""A small study through the real command: run, stop, go on, look, fly again."""

import json
import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest

from optim.archive.reader import run_digests
from optim.cli import app
from optim.errors import StoppedEarlyError

STUDY = """\
study: small
section:
  shape: cst
  coefficients: {upper: 4, lower: 4}
  baseline: naca:2412
  freedom: 0.05
  trailing_edge: 0.2 %
chord: 212 mm
air: {}
conditions:
  survey: {speed: 30 m/s, lift: 0.4}
  slow: {speed: 30 m/s, lift: maximum}
objectives:
  - {maximise: lift_to_drag, at: survey}
  - {maximise: cl_max, at: slow}
constraints:
  - {quantity: thickness, min: 10 %}
search: {algorithm: nsga2, population: 8, generations: 3, seed: 4}
"""


def start(folder, *words):
    """Start the command in a folder, with pipes for its streams."""
    return subprocess.Popen(
        [sys.executable, "-m", "optim", *words],
        cwd=folder,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        env={**os.environ, "PYTHONPATH": str(Path(app.__file__).parents[2])},
    )


def finished(folder, *words):
    """Run the command to its end: code, standard output, standard error."""
    with start(folder, *words) as process:
        out, err = process.communicate(timeout=300)
    return process.returncode, out, err


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """A folder with the study, run once from beginning to end."""
    folder = tmp_path_factory.mktemp("small")
    (folder / "small.yaml").write_text(STUDY)
    code, out, err = finished(folder, "run", "small.yaml", "--workers", "1")
    assert (code, out) == (0, ""), err
    assert sum(line.startswith("generation ") for line in err.splitlines()) == 3
    return folder


def test_run_writes_to_results_by_its_name(folder):
    code, out, _ = finished(folder, "status", "results/small.h5", "--json")
    status = json.loads(out)
    assert code == 0
    assert (status["state"], status["generation"], status["evaluated"]) == ("finished", 3, 24)


def test_recorded_designs_fly_again_to_the_archived_numbers(folder):
    _, out, _ = finished(folder, "front", "results/small.h5", "--json")
    front = json.loads(out)
    assert front["feasible"] > 0
    design = front["designs"][-1]
    for condition, archived in design["conditions"].items():
        name = f"results/small.h5#{design['id']}"
        code, out, err = finished(folder, "analyse", name, "--condition", condition, "--json")
        assert code == 0, err
        assert json.loads(out)["results"][0]["points"] == [archived]


def test_interrupted_run_is_exit_3_and_resumes_to_the_same_archive(folder):
    """Ctrl-C after the first generation; then as many generations as the uninterrupted run."""
    with start(folder, "run", "small.yaml", "--output", "stopped.h5", "--workers", "1") as process:
        for line in process.stderr:
            if line.startswith("generation 1"):
                break
        process.send_signal(signal.SIGINT)
        said = process.stderr.read()
        process.wait(timeout=60)
    assert process.returncode == 3
    assert said.splitlines()[-1].endswith("sectionwright resume stopped.h5")
    code, _, err = finished(folder, "resume", "stopped.h5", "--workers", "2", "--quiet")
    assert (code, err) == (0, "")
    assert run_digests(folder / "stopped.h5") == run_digests(folder / "results" / "small.h5")


@pytest.mark.parametrize("kind", [KeyboardInterrupt, StoppedEarlyError])
def test_whatever_stops_a_run_is_exit_3(command, tmp_path, monkeypatch, kind):
    def stopped(*_):
        raise kind("go on with: sectionwright resume")

    study = tmp_path / "small.yaml"
    study.write_text(STUDY)
    monkeypatch.setattr("optim.runner.start.start_run", stopped)
    done = command("run", study, "--output", tmp_path / "small.h5", "--quiet")
    assert done.code == 3
    assert "sectionwright resume" in done.err


POINT = {
    "alpha_deg", "reynolds", "mach", "n_factor", "panels", "cl", "cd", "cd_friction",
    "cd_pressure", "cm_quarter", "x_cp", "lift_to_drag", "stagnation_x", "stagnation_side",
    "cp_min", "cp_min_x", "transition_upper", "transition_lower", "transition_kind_upper",
    "transition_kind_lower", "separation_upper", "separation_lower", "bubble_upper",
    "bubble_lower", "outcome", "iterations", "residual", "second_solution", "band", "flags",
}  # fmt: skip
DERIVED = {
    "alpha_zero_lift_deg", "lift_slope_per_deg", "slope_range_deg", "cl_max",
    "alpha_cl_max_deg", "aerodynamic_centre_x", "cm_aerodynamic_centre", "cm_zero_lift",
    "stall", "x_cp_range", "low_drag_range", "band",
}  # fmt: skip
SECTION = {
    "name", "thickness", "thickness_x", "camber", "camber_x", "area", "nose_radius",
    "trailing_edge_gap", "trailing_edge_angle_deg", "rotation_deg", "scale",
}  # fmt: skip


def test_sweep_has_both_ends_and_what_it_says_as_a_whole(tmp_path):
    """NACA 0012 is symmetric: no lift at no angle, and equal drag at plus and minus."""
    words = ("analyse", "naca:0012", "--reynolds", "3e6", "--json", "--sweep")
    code, out, err = finished(tmp_path, *words, "-4:4:2")
    assert code == 0, err
    (result,) = json.loads(out)["results"]
    points = result["points"]
    assert [point["alpha_deg"] for point in points] == pytest.approx([-4.0, -2.0, 0.0, 2.0, 4.0])
    assert all(point.keys() == POINT for point in points)
    assert result["section"].keys() == SECTION
    derived = result["derived"]
    assert derived.keys() == DERIVED
    assert derived["alpha_zero_lift_deg"] == pytest.approx(0.0, abs=0.01)
    assert derived["lift_slope_per_deg"] == pytest.approx(0.11, rel=0.1)
    assert derived["cl_max"] is None
    assert derived["stall"] == "not_reached"
    assert points[0]["cd"] == pytest.approx(points[-1]["cd"], rel=1e-3)
    assert points[0]["transition_upper"] == pytest.approx(points[-1]["transition_lower"], abs=1e-3)
    code, out, _ = finished(tmp_path, *words, "4:-4:-2")
    assert json.loads(out)["results"][0]["points"] == points[::-1]


def test_sheet_of_a_recorded_design_is_flown_and_printed(folder):
    code, out, err = finished(folder, "sheet", "results/small.h5#0", "--output", "sheet.pdf")
    assert (code, out) == (0, "")
    assert "two A4 pages about small, design 0" in err
    assert (folder / "sheet.pdf").read_bytes().startswith(b"%PDF")
