"""What is wrong with an input is one line each on standard error, exit code 2, no traceback."""

import numpy as np
import pytest

from optim.geometry.curve import cosine_parameters
from optim.geometry.naca import naca_section

pytestmark = pytest.mark.usefixtures("closed_form")

SIX_FAULTS = """\
study: six-faults
section:
  shape: cst
  coefficients: {upper: 5, lower: 5}
  baseline: naca:2412
  fredom: 0.12
chord: 212 kg
air: {altitude: 500 m}
craft: {mass: 6.0 kg, wing_area: 0.55 m^2}
conditions:
  survey: {speed: 18 m/s}
  survey: {speed: 19 m/s}
objectives:
  - maximise: lift_to_darg
    at: survey
  - minimise: nose_down_moment
    at: surveying
constraints:
  - {quantity: thickness, min: 10 %}
search: {population: 2}
"""

PLACES = {
    6: "fredom",
    7: "chord",
    12: "survey",
    14: "lift_to_darg",
    17: "surveying",
    20: "population",
}
"""Line of the file -> a word that its fault names."""


def test_six_faults_are_six_lines_with_their_places(process, tmp_path):
    path = tmp_path / "faulty.yaml"
    path.write_text(SIX_FAULTS)
    for words in (("check",), ("check", "--json"), ("run",)):
        done = process(words[0], path.name, *words[1:])
        lines = done.stderr.splitlines()
        assert done.returncode == 2
        assert done.stdout == ""
        assert len(lines) == 6
        for line, (number, word) in zip(lines, PLACES.items(), strict=True):
            assert line.startswith(f"faulty.yaml:{number}:")
            assert word in line


def loop(count=61):
    points = naca_section("2412").points(cosine_parameters(count - 1))
    return "".join(f"{x:.6f} {y:.6f}\n" for x, y in points)


def crossing():
    points = naca_section("2412").points(cosine_parameters(60))
    upper = slice(0, 30)
    points[upper, 1] -= 0.2 * points[upper, 0] ** 2
    return "".join(f"{x:.6f} {y:.6f}\n" for x, y in points)


WRONG_FILES = {
    "empty": "",
    "text": "Dear sir,\nplease find the section\nattached.\n",
    "one-point": "0.0 0.0\n",
    "crossing": crossing(),
    "nan": loop().replace("0.000000 0.000000", "nan 0.0"),
    "million": "0.500000 0.100000\n" * 1_000_000,
}


@pytest.mark.parametrize("kind", WRONG_FILES)
def test_wrong_section_file_is_one_clear_line(command, tmp_path, kind):
    path = tmp_path / f"{kind}.dat"
    path.write_text(WRONG_FILES[kind])
    for words in (
        ("analyse", path, "--reynolds", "1e6", "--alpha", "2"),
        ("fit", path, "--shape", "cst"),
    ):
        done = command(*words)
        assert done.code == 2
        assert done.out == ""
        (line,) = done.err.splitlines()
        assert line.startswith(f"{path}:")


def test_nan_is_told_with_its_line(command, tmp_path):
    path = tmp_path / "nan.dat"
    path.write_text(WRONG_FILES["nan"])
    assert "nan 0.0" in WRONG_FILES["nan"]
    number = WRONG_FILES["nan"].splitlines().index("nan 0.0") + 1
    done = command("fit", path, "--shape", "cst")
    assert done.err.startswith(f"{path}:{number}:")


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("analyse", "2412", "--reynolds", "1e6", "--alpha", "2"), "did you mean naca:2412?"),
        (("analyse", "naca:29912", "--reynolds", "1e6", "--alpha", "2"), "not a section"),
        (("analyse", "no.dat", "--reynolds", "1e6", "--alpha", "2"), "accepted is naca:2412"),
        (("analyse", "naca:2412", "--alpha", "2"), "give --reynolds"),
        (("analyse", "naca:2412", "--reynolds", "1e6"), "accepted is one of --alpha"),
        (("analyse", "naca:2412", "--reynolds", "1e6", "--alpha", "1", "--cl", "1"), "--alpha and"),
        (("analyse", "naca:2412", "--reynolds", "fast", "--alpha", "2"), "--reynolds"),
        (("analyse", "naca:2412", "--reynolds", "10", "--alpha", "2"), "out of range"),
        (("analyse", "naca:2412", "--reynolds", "1e6", "--alpha", "80"), "out of range"),
        (("analyse", "naca:2412", "--reynolds", "1e6", "--sweep", "0:10:-1"), "FIRST:LAST:STEP"),
        (("analyse", "naca:2412", "--reynolds", "1e6", "--alpha", "2", "--panels", "7"), "60"),
        (("analyse", "naca:2412", "--inviscid", "--alpha", "2", "--n-factor", "9"), "no effect"),
        (("analyse", "naca:2412", "--condition", "survey"), "accepted is RUN.h5#ID"),
        (("fit", "naca:2412"), "shape"),
        (("fit", "naca:2412", "--shape", "spline"), "bezier"),
        (("fit", "naca:2412", "--shape", "cst", "--order", "40"), "12"),
        (("export", "naca:2412", "--output", "a.csv"), "RUN.h5#ID"),
        (("export", "nowhere.h5#3", "--output", "a.stp"), "accepted is .csv, .txt, .dxf"),
        (("export", "nowhere.h5#3", "--output", "a.dxf"), "no such run"),
        (("export", "nowhere.h5#3", "--output", "a.dxf", "--points", "5"), "20"),
        (("export", "nowhere.h5#3", "--output", "a.dxf", "--spacing", "dense"), "cosine"),
        (("sheet", "naca:2412"), "RUN.h5#ID"),
        (("compare", "naca:2412"), "accepted are 2 to 6"),
        (("compare", "naca:2412", "nowhere.h5"), "no such run"),
        (("compare", "naca:2412", "nowhere.csv"), "accepted is naca:2412"),
        (("sheet", "nowhere.h5#3", "--output", "a.png"), ".pdf"),
        (("front", "nowhere.h5"), "no such run"),
        (("status", "nowhere.h5"), "no such run"),
        (("resume", "nowhere.h5"), "no such run"),
        (("run", "nowhere.yaml"), "there is no such file"),
        (("run", "nowhere.yaml", "--until", "25:00"), "HH:MM"),
        (("run", "nowhere.yaml", "--workers", "0"), "workers"),
        (("fly", "naca:2412"), "fly"),
        (("front", "nowhere.h5", "--json", "--csv"), "one of --json and --csv"),
    ],
    ids=lambda value: " ".join(value) if isinstance(value, tuple) else "",
)
def test_misuse_is_one_line(command, words, said):
    done = command(*words)
    assert done.code == 2
    assert done.out == ""
    (line,) = done.err.splitlines()
    assert said in line


@pytest.mark.parametrize(
    ("suffix", "words", "said"),
    [
        ("#999", ("--condition", "survey"), "has no evaluation 999; it holds 0 to 71"),
        ("#5", ("--condition", "cruise"), "accepted is survey, loiter, slow"),
        ("#5", ("--condition", "survey", "--reynolds", "1e6"), "leave out --reynolds"),
        ("", ("--reynolds", "1e6", "--alpha", "2"), "name one of its designs"),
    ],
)
def test_misuse_of_a_recorded_design_is_one_line(command, run_file, suffix, words, said):
    done = command("analyse", f"{run_file}{suffix}", *words)
    assert done.code == 2
    (line,) = done.err.splitlines()
    assert said in line


def test_run_is_never_overwritten(command, run_file, tmp_path, recorded_run):
    study = tmp_path / "study.yaml"
    study.write_text(recorded_run.STUDY)
    before = run_file.read_bytes()
    done = command("run", study, "--output", run_file)
    assert done.code == 2
    assert f"sectionwright resume {run_file}" in done.err
    assert "--output" in done.err
    assert run_file.read_bytes() == before


def test_disagreement_found_by_the_problem_has_its_place(command, tmp_path, recorded_run):
    study = tmp_path / "study.yaml"
    text = recorded_run.STUDY.replace("{speed: 18 m/s}", "{speed: 18 m/s, reynolds: 1e6}")
    study.write_text(text)
    for verb in ("check", "run"):
        done = command(verb, study)
        (line,) = done.err.splitlines()
        assert done.code == 2
        assert line.startswith(f"{study}:12:")
        assert "disagrees" in line


def test_damaged_archive_is_exit_4_and_says_what_is_left(command, run_file, tmp_path):
    path = tmp_path / "damaged.h5"
    data = bytearray(run_file.read_bytes())
    middle = len(data) // 2
    data[middle : middle + 4096] = np.random.default_rng(3).bytes(4096)
    path.write_bytes(data)
    done = command("front", path)
    assert done.code == 4
    assert str(path) in done.err


def test_newer_format_is_exit_2(command, tmp_path, recorded_run, monkeypatch):
    path = tmp_path / "future.h5"
    recorded_run.record(path, generations=1)
    monkeypatch.setattr("optim.archive.hdf5_file.FORMAT_VERSION", 0)
    done = command("front", path)
    assert done.code == 2
    assert "newer" in done.err
