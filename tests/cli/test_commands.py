"""Each command: what it writes where, and the exit code."""

import csv
import io
import json
import math
from dataclasses import replace

import numpy as np
import pypdfium2
import pytest

from optim.archive.reader import equality_digest, open_run
from optim.geometry.curve import cosine_parameters
from optim.geometry.naca import naca_section
from optim.problem.problem import Problem
from optim.study.load import load_study, parse_study
from optim.study.template import template_text


@pytest.fixture
def study_file(recorded_run, tmp_path):
    """A valid study."""
    path = tmp_path / "study.yaml"
    path.write_text(recorded_run.STUDY)
    return path


class TestTemplate:
    def test_written_file_is_a_study_without_faults(self, command, tmp_path):
        path = tmp_path / "mine.yaml"
        assert command("template", path).code == 0
        assert load_study(path).study == "first-look"

    def test_without_a_file_it_is_shown(self, command):
        assert command("template").out == template_text()

    def test_existing_file_is_never_overwritten(self, command, study_file):
        before = study_file.read_text()
        done = command("template", study_file)
        assert done.code == 2
        assert done.err == f"{study_file}: the file exists; accepted is a new name.\n"
        assert study_file.read_text() == before


class TestCheck:
    def test_states_conditions_bounds_shapes_and_cost(self, command, study_file):
        done = command("check", study_file, "--json")
        document = json.loads(done.out)
        assert done.code == 0
        survey = document["conditions"]["survey"]
        assert survey["reynolds"] == pytest.approx(18.0 * 0.212 / 1.615e-5, rel=2e-3)
        assert survey["cl"] == pytest.approx(0.59, abs=0.005)
        assert document["conditions"]["slow"]["cl"] is None
        assert {"speed", "density", "viscosity", "chord", "mach", "n_factor"} <= survey.keys()
        assert len(document["variables"]) == 10
        assert all(one["low"] < one["high"] for one in document["variables"])
        assert document["reachable"]["designs"] == 500
        thickness = document["reachable"]["thickness"]
        assert 0.05 < thickness["p5"] < thickness["p50"] < thickness["p95"] < 0.25
        assert document["estimate"]["evaluations"] == 24 * 3
        assert document["estimate"]["points"] > 24 * 3 * 3
        assert document["warnings"] == []

    def test_text_names_the_same_things(self, command, study_file):
        done = command("check", study_file)
        assert "paper-plane: no fault." in done.out
        assert "2.362e+05" in done.out
        assert "upper_1" in done.out


class TestSchema:
    def test_is_one_json_document(self, command):
        assert json.loads(command("schema").out)["title"] == "Sectionwright study"


class TestStatus:
    def test_of_a_finished_run(self, command, run_file):
        document = json.loads(command("status", run_file, "--json").out)
        assert document["state"] == "finished"
        assert (document["generation"], document["evaluated"]) == (3, 72)
        assert document["elapsed_s"] == 12.0
        assert document["remaining_s"] is None
        assert 0.0 < document["feasible_share"] < 1.0

    def test_of_a_killed_run_says_how_to_go_on(self, command, recorded_run, tmp_path):
        path = tmp_path / "killed.h5"
        recorded_run.record(path, finished=False)
        done = command("status", path)
        assert done.code == 0
        assert "interrupted" in done.out
        assert f"sectionwright resume {path}" in done.out


class TestFront:
    def test_text_has_the_baseline_first_and_the_cautions(self, command, run_file):
        done = command("front", run_file)
        rows = done.out.splitlines()
        first = next(k for k, line in enumerate(rows) if line.strip().startswith("baseline"))
        assert rows[first - 1].strip().startswith("wanted")
        assert rows[first + 1].strip().startswith("#")
        assert "Caution:" in done.out
        assert "Least certain are maximum lift" in done.out

    def test_json_is_one_document_without_words_beside(self, command, run_file):
        done = command("front", run_file, "--json")
        document = json.loads(done.out, parse_constant=pytest.fail)
        assert done.err == ""
        assert len(document["designs"]) > 5
        assert document["designs"][0]["conditions"]["survey"]["separation_upper"] is None

    def test_csv_has_one_row_a_design(self, command, run_file):
        document = json.loads(command("front", run_file, "--json").out)
        rows = list(csv.DictReader(io.StringIO(command("front", run_file, "--csv").out)))
        assert [row["design"] for row in rows] == [
            "baseline", *[f"#{one['id']}" for one in document["designs"]]
        ]  # fmt: skip
        drag = document["designs"][0]["conditions"]["survey"]["cd"]
        assert float(rows[1]["survey:cd"]) == drag

    def test_plot_follows_its_suffix(self, command, run_file, tmp_path):
        for suffix, start in ((".png", b"\x89PNG"), (".svg", b"<?xml"), (".pdf", b"%PDF")):
            path = tmp_path / f"front{suffix}"
            assert command("front", run_file, "--plot", path).code == 0
            assert path.read_bytes().startswith(start)
        done = command("front", run_file, "--plot", tmp_path / "front.gif")
        assert done.code == 2
        assert "accepted is .png, .svg, .pdf" in done.err

    def test_other_study_changes_the_judgement_only(self, command, run_file, tmp_path, study_file):
        other = tmp_path / "other.yaml"
        other.write_text(study_file.read_text().replace("min: 1.40", "min: 1.50"))
        own = json.loads(command("front", run_file, "--json").out)
        found = json.loads(command("front", run_file, "--study", other, "--json").out)
        assert 0 < found["feasible"] < own["feasible"]
        assert all(one["constraints"]["cl_max@slow"]["value"] >= 1.5 for one in found["designs"])

    def test_empty_front_says_which_limit_nothing_keeps(self, command, run_file, tmp_path,
                                                        study_file):  # fmt: skip
        other = tmp_path / "other.yaml"
        other.write_text(study_file.read_text().replace("min: 1.40", "min: 3.00"))
        done = command("front", run_file, "--study", other)
        assert done.code == 0
        assert "No design keeps every limit." in done.out
        assert "cl_max@slow 0 %" in done.out


@pytest.mark.usefixtures("closed_form")
class TestAnalyse:
    def test_one_entry_a_section_and_reynolds_number(self, command):
        done = command(
            "analyse", "naca:2412", "naca:0012", "--reynolds", "2e5,1e6", "--alpha", "-2,0,4",
            "--json",
        )  # fmt: skip
        results = json.loads(done.out, parse_constant=pytest.fail)["results"]
        assert [(one["section"]["name"], one["points"][0]["reynolds"]) for one in results] == [
            ("NACA 2412", 2e5), ("NACA 2412", 1e6), ("NACA 0012", 2e5), ("NACA 0012", 1e6),
        ]  # fmt: skip
        for one in results:
            assert [p["alpha_deg"] for p in one["points"]] == pytest.approx([-2.0, 0.0, 4.0])
        assert results[0]["section"]["rotation_deg"] == 0.0
        assert results[2]["section"]["camber_x"] is None

    def test_point_without_answer_is_an_answer(self, command):
        done = command("analyse", "naca:2412", "--reynolds", "1e6", "--cl", "0.5,1.9", "--json")
        good, failed = json.loads(done.out)["results"][0]["points"]
        assert done.code == 0
        assert (good["outcome"], failed["outcome"]) == ("converged", "not_converged")
        assert failed["cl"] is None
        assert failed["cd"] is None

    def test_outcomes_are_said_in_words(self, command):
        done = command("analyse", "naca:2412", "--reynolds", "1e6", "--cl", "0.5,1.9")
        assert "not_converged: The coupled equations were not solved" in done.out
        assert "Caution:" in done.out

    def test_surface_lists_have_one_length(self, command):
        done = command(
            "analyse", "naca:2412", "--reynolds", "1e6", "--alpha", "2", "--surface", "--json"
        )
        surface = json.loads(done.out)["results"][0]["points"][0]["surface"]
        assert {len(values) for values in surface.values()} == {161}
        assert surface["n"][0] is None

    def test_inviscid_needs_no_reynolds_number(self, command):
        done = command("analyse", "naca:2412", "--inviscid", "--alpha", "2", "--surface", "--json")
        (point,) = json.loads(done.out)["results"][0]["points"]
        assert point["outcome"] == "converged"
        assert point["reynolds"] is None
        assert point["cd"] is None
        assert point["surface"]["theta"] is None

    def test_grid_check_extrapolates_a_second_order_error_away(self, command):
        """The closed form adds 0.3 / panels**2 to the drag; nothing else depends on the panels."""
        done = command(
            "analyse", "naca:0012", "--reynolds", "1e6", "--cl", "0.5", "--panels", "120",
            "--check-grid", "--json",
        )  # fmt: skip
        result = json.loads(done.out)["results"][0]
        (grid,) = result["grid"]
        drag = grid["quantities"]["cd"]
        assert grid["panels"] == [60, 120, 240]
        assert drag["extrapolated"] == pytest.approx(drag["asked"] - 0.3 / 120**2, abs=2e-7)
        assert drag["estimated_error"] == pytest.approx(0.3 / 120**2, rel=0.01)

    def test_csv_has_a_row_a_point_or_a_station(self, command):
        words = ("analyse", "naca:2412", "--reynolds", "1e6", "--alpha", "0,2", "--csv")
        rows = list(csv.DictReader(io.StringIO(command(*words).out)))
        assert [float(row["alpha_deg"]) for row in rows] == pytest.approx([0.0, 2.0])
        assert rows[0]["separation_upper"] == ""
        stations = list(csv.DictReader(io.StringIO(command(*words, "--surface").out)))
        assert len(stations) == 2 * 161
        assert stations[0]["side"] == "upper"

    def test_plots_are_drawn(self, command, tmp_path):
        words = ("analyse", "naca:2412", "--reynolds", "1e6")
        for points in ("2", "0,2,4", "-4,0,4,8,12"):
            path = tmp_path / "flow.png"
            done = command(*words, "--alpha", points, "--plot", path)
            assert (done.code, done.err) == (0, f"{path} is drawn.\n")

    def test_recorded_condition_gives_the_archived_numbers(self, command, run_file):
        front = json.loads(command("front", run_file, "--json").out)
        for design in (front["designs"][0], front["baseline"]):
            for condition, archived in design["conditions"].items():
                done = command(
                    "analyse", f"{run_file}#{design['id']}", "--condition", condition, "--json"
                )
                (point,) = json.loads(done.out)["results"][0]["points"]
                assert point == archived

    def test_recorded_design_flies_at_other_points_too(self, command, run_file):
        done = command("analyse", f"{run_file}#5", "--reynolds", "3e5", "--alpha", "3", "--json")
        (result,) = json.loads(done.out)["results"]
        with open_run(run_file) as run:
            text, design = run.header.resolved_text, run.designs[5]
        section = Problem.from_study(parse_study(text)).section(design)
        assert result["section"]["thickness"] == section.thickness
        assert result["points"][0]["reynolds"] == 3e5

    def test_what_normalising_a_file_did_is_said(self, command, tmp_path):
        """The points of NACA 0012 doubled in size and turned by three degrees."""
        turn = math.radians(3.0)
        points = naca_section("0012").points(cosine_parameters(160))
        turned = (
            2.0
            * points
            @ np.array([[math.cos(turn), math.sin(turn)], [-math.sin(turn), math.cos(turn)]])
        )
        path = tmp_path / "turned.dat"
        np.savetxt(path, turned, header="a turned section", comments="")
        done = command("analyse", path, "--reynolds", "1e6", "--alpha", "0", "--json")
        section = json.loads(done.out)["results"][0]["section"]
        assert section["name"] == "a turned section"
        assert section["rotation_deg"] == pytest.approx(-3.0, abs=0.01)
        assert section["scale"] == pytest.approx(0.5, rel=1e-4)
        assert str(path) in done.err


class TestFit:
    @pytest.mark.parametrize("shape", ["cst", "bezier"])
    def test_states_variables_and_deviations(self, command, shape):
        done = command("fit", "naca:0012", "--shape", shape, "--order", "6", "--json")
        document = json.loads(done.out)
        assert (document["shape"], document["order"]) == (shape, 6)
        assert 0.0 < document["rms_deviation"] < document["largest_deviation"] < 5e-4
        assert len(document["variables"]) == {"cst": 14, "bezier": 13}[shape]

    def test_more_coefficients_come_closer(self, command):
        off = [
            json.loads(command("fit", "naca:2412", "--shape", "cst", "--order", n, "--json").out)[
                "largest_deviation"
            ]
            for n in (3, 6, 12)
        ]
        assert off[0] > off[1] > off[2]

    def test_plot_is_drawn(self, command, tmp_path):
        path = tmp_path / "fit.svg"
        assert command("fit", "naca:2412", "--shape", "bezier", "--plot", path).code == 0
        assert path.stat().st_size > 1000


class TestExport:
    def test_takes_the_chord_of_the_study(self, command, run_file, tmp_path):
        path = tmp_path / "section.csv"
        done = command("export", f"{run_file}#3", "--output", path)
        points = np.loadtxt(path, delimiter=",", skiprows=1)
        assert done.code == 0
        assert points[:, 0].max() == pytest.approx(212.0, abs=1e-6)
        assert "micrometres of the exact curve" in done.err
        assert "Caution:" in done.err
        assert "warning" not in done.err
        assert done.out == ""

    def test_other_chord_changes_the_edge_and_says_so(self, command, run_file, tmp_path):
        path = tmp_path / "section.csv"
        done = command("export", f"{run_file}#3", "--output", path, "--chord", "240mm")
        assert "0.906 mm thick, not the 0.800 mm" in done.err
        points = np.loadtxt(path, delimiter=",", skiprows=1)
        assert points[0, 1] - points[-1, 1] == pytest.approx(0.8 * 240.0 / 212.0, abs=1e-5)

    def test_json_has_what_the_archive_holds(self, command, run_file, tmp_path):
        path = tmp_path / "section.json"
        assert command("export", f"{run_file}#3", "--output", path).code == 0
        document = json.loads(path.read_text(), parse_constant=pytest.fail)
        with open_run(run_file) as run:
            recorded, header = run.evaluation(3), run.header
            assert document["digests"]["datasets"] == run.digests()
        assert document["digests"]["run"] == equality_digest(run_file)
        assert list(document["curve"]["variables"].values()) == recorded["designs"].tolist()
        assert document["study"]["text"] == header.study_text
        assert document["provenance"] == dict(header.provenance)
        margins = [one["margin"] for one in document["constraints"].values()]
        assert margins == recorded["margins"].tolist()
        survey = document["conditions"]["survey"]
        assert survey["flown"]["speed"] == 18.0
        names = header.condition_quantity_names
        assert survey["found"]["cd"] == recorded["quantities"][0][names.index("cd")]

    def test_points_and_spacing_are_those_asked_for(self, command, run_file, tmp_path):
        path = tmp_path / "section.csv"
        words = ("export", f"{run_file}#3", "--output", path, "--points", "40", "--spacing", "even")
        assert command(*words).code == 0
        assert len(path.read_text().splitlines()) == 1 + 79

    def test_few_points_for_a_spline_are_warned_of(self, command, run_file, tmp_path):
        path = tmp_path / "section.dxf"
        done = command("export", f"{run_file}#3", "--output", path, "--points", "20")
        assert "warning: 20 points a side are few" in done.err
        assert "warning" not in command("export", f"{run_file}#3", "--output", path).err


@pytest.mark.usefixtures("closed_form")
class TestSheet:
    @pytest.fixture(autouse=True)
    def swept(self, monkeypatch):
        """Let sweeps fly the closed-form flows."""

        def sweep(evaluator, point, angles):
            return evaluator.flows([replace(point, alpha=a, cl=None) for a in angles]), None

        monkeypatch.setattr("optim.aerodynamics.sweep.sweep", sweep)
        monkeypatch.setattr("optim.cli.handover.prepare_kernels", lambda: None)

    def test_is_two_pages_where_it_is_asked_for(self, command, run_file, tmp_path):
        path = tmp_path / "design.pdf"
        done = command("sheet", f"{run_file}#3", "--output", path)
        printed = pypdfium2.PdfDocument(path)
        pages = [page.get_textpage().get_text_bounded() for page in printed]
        printed.close()
        assert done.code == 0
        assert done.out == ""
        assert "Caution:" in done.err
        assert len(pages) == 2
        assert all("no substitute for tunnel and flight test" in page for page in pages)
        assert "the order of maximum lifts is more trustworthy" in " ".join(pages[1].split())

    def test_is_beside_the_run_under_its_name_unless_told(self, command, recorded_run, tmp_path):
        run_file = recorded_run.record(tmp_path / "glider.h5", generations=1)
        done = command("sheet", f"{run_file}#3")
        assert str(tmp_path / "glider-3.pdf") in done.err
        assert (tmp_path / "glider-3.pdf").read_bytes().startswith(b"%PDF")

    def test_dollars_and_brackets_in_a_name_are_text(self, command, recorded_run, tmp_path):
        run_file = recorded_run.record(tmp_path / "a$x_{$b^.h5", generations=1)
        assert command("sheet", f"{run_file}#3").code == 0


class TestCompare:
    @pytest.fixture(autouse=True)
    def flown(self, closed_form, monkeypatch):
        """Let comparisons fly the closed-form flows."""

        def sweep(evaluator, point, angles):
            return evaluator.flows([replace(point, alpha=a, cl=None) for a in angles]), None

        monkeypatch.setattr("optim.validation.flight.sweep", sweep)
        monkeypatch.setattr("optim.cli.comparison.prepare_kernels", lambda: None)
        return closed_form

    def test_json_has_a_value_a_column_in_every_row(self, command, run_file, tmp_path):
        path = tmp_path / "tunnel.csv"
        path.write_text("# reynolds: 2e5\nalpha,cl,cd\n0,0.25,0.01\n4,0.6,0.011\n")
        words = (run_file, f"{run_file}#3", "naca:2412", path)
        done = command("compare", *words, "--json", "--plot", tmp_path / "all.png")
        document = json.loads(done.out, parse_constant=pytest.fail)
        assert done.code == 0
        kinds = [one["kind"] for one in document["columns"]]
        assert kinds == ["run", "design", "section", "measurement"]
        assert all(len(row["values"]) == 4 for row in document["rows"])
        assert len(document["residuals"]) == 2 * 2
        with open_run(run_file) as run:
            assert document["hypervolume"]["union"] == run.read("hypervolume")[-1]
        assert (tmp_path / "all.png").stat().st_size > 1000

    def test_text_names_what_each_letter_is_and_has_the_cautions(self, command, run_file):
        done = command("compare", run_file, "naca:2412")
        assert done.out.splitlines()[:2] == [f"A  run {run_file}", "B  section naca:2412"]
        assert "at survey" in done.out
        assert "hypervolume of all fronts together" in done.out
        assert "Caution:" in done.out

    def test_shapes_alone_say_how_to_fly_them(self, command):
        done = command("compare", "naca:2412", "naca:4412")
        assert done.code == 0
        assert "only shapes are compared" in done.err
        assert "thickness" in done.out

    def test_measurements_alone_are_refused(self, command, tmp_path):
        path = tmp_path / "tunnel.csv"
        path.write_text("# reynolds: 2e5\nalpha,cl\n0,0.25\n4,0.6\n")
        done = command("compare", path, path)
        assert done.code == 2
        assert "accepted is a section or a design" in done.err

    def test_exported_points_are_a_section_and_no_polar(self, command, run_file, tmp_path):
        """Read back, they are turned to the chord line of the point farthest from the edge."""
        path = tmp_path / "section.csv"
        command("export", f"{run_file}#3", "--output", path)
        done = command("compare", f"{run_file}#3", path, "--json")
        measures = {row["quantity"]: row["values"] for row in json.loads(done.out)["rows"]}
        kept, read = measures["thickness"]
        assert read == pytest.approx(kept, abs=1e-5)

    def test_fault_of_a_polar_has_its_place(self, command, tmp_path):
        path = tmp_path / "tunnel.csv"
        path.write_text("# reynolds: 2e5\nalpha,cl\n0,0.25\n4,much\n")
        done = command("compare", "naca:2412", path)
        assert done.code == 2
        assert done.err.startswith(f"{path}:4:2: cl:")

    def test_damaged_archive_is_exit_4(self, command, run_file, tmp_path):
        path = tmp_path / "damaged.h5"
        path.write_bytes(run_file.read_bytes()[:-4096])
        assert command("compare", path, run_file).code == 4
