"""All faults of a study at once, each with its place; files that hold no study; a good study."""

from __future__ import annotations

import pickle
import time
from pathlib import Path

import pydantic
import pytest

from optim.errors import Fault, StudyError
from optim.study.composite import Extent
from optim.study.load import load_study, parse_study
from optim.study.yaml_text import MOST_BYTES

SIX_FAULTS = """\
study: six
section:
  shape: cst
  baseline: naca:2412
  freedm: 0.1
chord: 212 kg
air: {altitude: 500 m}
chord: 0.2
conditions:
  cruise: {speed: 18 m/s, lift: 0.5}
  slow: {speed: 12.5, lift: maximum}
objectives:
  - {maximise: lift_to_drag, at: cruse}
  - {minimise: nose_down_momnt, at: cruise}
constraints:
  - {quantity: depth, min: 17 mm}
search: {population: 80}
"""


def test_six_faults_of_different_kinds_are_six_lines(tmp_path, monkeypatch) -> None:
    """An unknown key, a wrong unit, a key given twice, two unknown names and a missing place."""
    monkeypatch.chdir(tmp_path)
    Path("six.yaml").write_text(SIX_FAULTS, encoding="utf-8")
    with pytest.raises(StudyError) as caught:
        load_study("six.yaml")
    lines = str(caught.value).split("\n")
    starts = ["5:3", "6:8", "8:1", "13:34", "14:16", "16:5"]
    assert [":".join(line.split(":")[:3]) for line in lines] == [f"six.yaml:{s}" for s in starts]
    assert "section.freedm: there is no such key" in lines[0]
    assert lines[0].endswith("; did you mean freedom?")
    assert '"212 kg" is a mass; accepted is a length' in lines[1]
    assert "given twice, first at line 6" in lines[2]
    assert lines[3].endswith('no condition "cruse"; accepted is cruise, slow; did you mean cruise?')
    assert lines[4].endswith("; did you mean nose_down_moment?")
    assert lines[5].endswith("depth takes a place x/c, such as at: 30 %.")


def test_every_kind_of_fault_is_told_in_one_go(faults) -> None:
    """A fault in one place hides none in another, whatever their kinds."""
    lines = faults(
        "study: ../escape\n"
        "section: {shape: cts, baseline: naca:2, bounds: {lower_1: [1, 0], upper_1: [a, 1]}}\n"
        "chord: true\n"
        "air: {altitude: 99 km}\n"
        "water: {temperature: 15}\n"
        "craft:\n"
        "n_factor: 9\n"
        "turbulence: 0.07 %\n"
        "conditions:\n"
        "  survey: {speed: fast, sped: 3}\n"
        "  1st: {reynolds: 1e6, lift: levl}\n"
        "objectives: {}\n"
        "constraints:\n"
        "  - {quantity: cl_mx, condition: slw, min: 1.4}\n"
        "  - !!python/name:os.system\n"
        "search: {seed: 1.5, until: 25:00}\n"
        "evaluator: 160\n"
        "colour: red\n"
    )
    places = [tuple(map(int, line.split(":")[1:3])) for line in lines]
    assert places == sorted(places)
    assert [line for line, _ in places] == [
        1, 2, 2, 2, 2, 3, 4, 5, 5, 6, 8, 10, 10, 11, 11, 12, 14, 14, 15, 16, 16, 17, 18,
    ]  # fmt: skip


WRONG_VALUES = [
    ("mass: 6.0 kg, ", "", "10:1", ["craft.mass: the key is missing; it gives mass in flight"]),
    ("chord: 212 mm\n", "", "1:1", ["chord: the key is missing", "chord of the section"]),
    ("chord: 212 mm", "^chord: [1, 2]", "", ["a list is not accepted", "a length"]),
    ("chord: 212 mm", "chord: ^0 mm", "", ["out of range", "more than 0 m"]),
    ("chord: 212 mm", "chord: ^212", "", ["212 (taken in m) is out of range"]),
    ("chord: 212 mm", "chord: ^.nan", "", ["nan is not finite"]),
    ("chord: 212 mm", "chord: ^off", "", ['"off" is not accepted']),
    ("upper: 6,", "upper: ^6.0,", "", ["6.0 is not accepted", "whole number from 4 to 13"]),
    ("upper: 6,", "upper: ^true,", "", ["true is not accepted"]),
    ("upper: 6,", "upper: ^14,", "", ["14 is not accepted"]),
    ("shape: cst", "^shape: [cst]", "", ["a list is not accepted", "cst, bezier"]),
    ("n_factor: 9", "n_factor: ^10 %", "", ["a number without unit"]),
    ("n_factor: 9", "n_factor: ^0.5", "", ["at least 1 and at most 20"]),
    ("loiter: {speed: 14.5 m/s}", "loiter: ^18 m/s", "", ["mapping of keys speed, reynolds"]),
    ("survey: {speed", "^spare it: {lift: 1, reynolds: 1e6}\n  survey: {speed", "",
     ["name of 1 to 40 letters"]),
    ("lower: 10 %}", "lower: ^110 %}", "", ["at most 100 %"]),
    ("lift: maximum", "lift: ^maximun", "", ["level, maximum or", "mean maximum?"]),
    ("lift: maximum", "lift: ^50 %", "", ["level, maximum or a lift coefficient"]),
    ("loiter: 0.3}", "loiter: ^-1}", "", ["objectives.0.at.loiter", "more than 0 %"]),
    ("at: 30 %", "at: ^130 %", "", ["at most 100 %"]),
    ("population: 80", "population: ^3", "", ["from 4 to 10000"]),
    ("seed: 7", "seed: ^-7", "", ["whole number from 0"]),
    ("seed: 7", "seed: 7, until: ^8", "", ["a time of day HH:MM"]),
    ("nsga3", "^nsga33", "", ["nsga2, nsga3, sms-emoa", "mean nsga3?"]),
    ("seed: 7", "seed: 7, stall: ^no", "", ['"no" is not accepted']),
    ("seed: 7", "seed: 7, reference_point: [1, ^x]", "", ['reference_point.1: "x"']),
    ("trailing_edge: 0.8 mm", "trailing_edge: ^20 %", "", ["from 0 % to 10 %"]),
    ("trailing_edge: 0.8 mm", "trailing_edge: ^-1 mm", "", ["a length such as"]),
    ("freedom: 0.12", "leading_edge_term: ^1", "", ["true or false"]),
    ("freedom: 0.12", "^class_exponents: [0.5]", "", ["a list of two numbers"]),
    ("freedom: 0.12", "class_exponents: [0.5, ^3]", "", ["at least 1 and at most 2"]),
    ("freedom: 0.12", "bounds: {^upper_1: [2, 1]}", "", ["lower end 2 is not below"]),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "place", "fragments"), WRONG_VALUES)
def test_one_wrong_value_is_one_line_at_its_place(
    old, new, place, fragments, change, mark, faults
) -> None:
    text, place = (change(old, new), place) if place else mark(old, new)
    (line,) = faults(text)
    assert line.startswith(f"s.yaml:{place}: ")
    assert all(fragment in line for fragment in fragments), line


@pytest.mark.parametrize(
    ("old", "new", "home"),
    [
        ("n_factor: 9", "^population: 40", "population belongs in search."),
        ("n_factor: 9", "^load_factor: 2", "load_factor belongs in conditions."),
        ("seed: 7", "^craft: {}", "craft belongs to the study itself, at the left margin."),
    ],
)
def test_a_key_in_the_wrong_block_is_told_where_it_belongs(old, new, home, mark, faults) -> None:
    text, place = mark(old, new)
    (line,) = faults(text)
    assert line.startswith(f"s.yaml:{place}: ")
    assert line.endswith(home)


def test_a_misspelt_key_is_told_beside_the_one_that_is_missing(change, faults) -> None:
    lines = faults(change("study: toll", "studie: toll"))
    assert len(lines) == 2
    assert all(line.startswith("s.yaml:1:1: ") for line in lines)
    assert any("studie: there is no such key" in line for line in lines)
    assert any(line.endswith("did you mean study?") for line in lines)


@pytest.mark.parametrize(
    "name", ["..", ".", "../x", "a/b", "a\\b", "", "con", "nul.x", "-x", "x.", "a b", "é", "x" * 65]
)
def test_a_study_name_cannot_leave_the_folder_of_results(name, change, faults) -> None:
    text = change("study: tollgate-6-wing", f"study: '{name}'")
    assert [line[:12] for line in faults(text)] == ["s.yaml:1:8: "]


@pytest.mark.parametrize("text", ["just words\n", "- a\n- list\n", "12\n"])
def test_yaml_that_is_no_mapping_is_no_study(text, faults) -> None:
    (line,) = faults(text)
    assert "this is no study; accepted is a study in YAML" in line


@pytest.mark.parametrize(
    ("content", "fragment"),
    [
        (b"", "the file is empty"),
        (b"\x89PNG\r\n\x1a\n\x00\x00", "the file is binary"),
        ("study: x\n".encode("utf-16"), "UTF-16; save it as UTF-8"),
        ("# ok\nstudy: Tür\n".encode("latin-1"), "line 2 is not UTF-8"),
        (b"a: " + b"x" * MOST_BYTES, "larger than 512 kB"),
    ],
)
def test_a_file_that_holds_no_text_is_one_line(content, fragment, tmp_path, monkeypatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("study.yaml").write_bytes(content)
    with pytest.raises(StudyError) as caught:
        load_study("study.yaml")
    line = str(caught.value)
    assert line.startswith("study.yaml: ")
    assert fragment in line
    assert "accepted is a study in YAML" in line
    assert "\n" not in line


def test_a_file_that_cannot_be_read_is_one_line(tmp_path, monkeypatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("folder").mkdir()
    for name, fragment in (("absent.yaml", "no such file"), ("folder", "this is no file")):
        with pytest.raises(StudyError, match=fragment) as caught:
            load_study(name)
        assert str(caught.value).startswith(f"{name}: ")


def test_a_byte_order_mark_and_windows_line_ends_do_not_matter(good, tmp_path) -> None:
    path = tmp_path / "study.yaml"
    path.write_bytes(b"\xef\xbb\xbf" + good.replace("\n", "\r\n").encode())
    assert load_study(path) == parse_study(good)


def test_the_largest_text_is_read_or_refused_in_seconds(faults) -> None:
    start = time.perf_counter()
    faults("a: {" + "b: c, " * (MOST_BYTES // 6 - 10) + "}\n")
    assert time.perf_counter() - start < 20.0


def test_a_good_study_is_plain_si_numbers(good) -> None:
    study = parse_study(good, "s.yaml")
    assert study.warnings == ()
    assert study.text == good
    assert study.chord == 0.212
    assert study.air is not None
    assert (study.air.altitude, study.air.warmer_than_standard) == (500.0, 10.0)
    assert study.craft is not None
    assert (study.craft.mass, study.craft.wing_area) == (6.0, 0.55)
    assert study.section.trailing_edge == Extent(0.0008, "m")
    assert study.trailing_edge_gap == pytest.approx(0.8 / 212, rel=1e-15)
    assert list(study.conditions) == ["survey", "loiter", "dirty", "slow"]
    assert study.conditions["survey"].lift_or_level == "level"
    assert study.conditions["slow"].lift_or_level == "maximum"
    assert study.conditions["dirty"].transition.upper == 0.05
    first, second = study.objectives
    assert (first.name, first.sense) == ("lift_to_drag@survey+loiter", "maximise")
    assert first.weights == {"survey": 0.7, "loiter": 0.3}
    assert (second.name, second.weights) == ("nose_down_moment@survey", {"survey": 1.0})
    names = [constraint.name for constraint in study.constraints]
    assert names == ["thickness", "depth@30%", "cl_max@slow", "cd@dirty"]
    assert (study.constraints[0].min, study.constraints[0].unit) == (0.1, "chord")
    assert (study.constraints[1].min, study.constraints[1].unit) == (0.017, "m")
    assert (study.constraints[2].min, study.constraints[2].unit) == (1.4, "1")
    assert study.search.seed == 7
    assert study.evaluator.panels == 160


def test_a_condition_given_by_its_angle_is_not_level(change) -> None:
    text = change("loiter: {speed: 14.5 m/s}", "loiter: {speed: 14.5 m/s, alpha: 4 deg}")
    condition = parse_study(text).conditions["loiter"]
    assert condition.lift_or_level is None
    assert condition.alpha == pytest.approx(0.06981317007977318, rel=1e-15)


def test_a_study_knows_the_place_of_every_value(good) -> None:
    study = parse_study(good, "s.yaml")
    assert study.place(("conditions", "slow", "speed")) == (16, 17)
    assert study.place(("conditions", "slow")) == (16, 3)
    assert study.place(("conditions", "slow", "reynolds")) == (16, 3)
    located = study.located(Fault("it disagrees.", ("conditions", "slow", "reynolds")))
    assert str(located) == "s.yaml:16:3: conditions.slow.reynolds: it disagrees."


def test_a_study_is_frozen(good) -> None:
    study = parse_study(good)
    with pytest.raises(pydantic.ValidationError):
        study.chord = 1.0
    with pytest.raises(pydantic.ValidationError):
        study.conditions["slow"].speed = 1.0


def test_a_name_that_is_no_line_does_not_break_the_lines(change, faults) -> None:
    text = change("  loiter: {speed: 14.5 m/s}\n", '  "loi\\nter": {speed: 14.5 m/s}\n')
    lines = faults(text.replace("at: survey", 'at: "sur\\nvey"') + '"\\u2028key": 1\n')
    assert len(lines) == 4
    assert all(line.isprintable() for line in lines)


def test_a_study_can_be_sent_to_another_process(good) -> None:
    study = parse_study(good, "s.yaml")
    again = pickle.loads(pickle.dumps(study))  # noqa: S301  our own bytes
    assert again == study
    assert again.place(("chord",)) == (8, 8)
