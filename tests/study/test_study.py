"""The resolved text and the fingerprint: the same study, whatever file or process reads it."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from optim.errors import StudyError
from optim.study.load import load_study, parse_study
from optim.study.schema import Study
from optim.study.vocabulary import CONDITION_QUANTITIES, QUANTITIES, SECTION_QUANTITIES
from optim.study.yaml_text import dump, parse

NAMES = st.from_regex(r"[A-Za-z][A-Za-z0-9_-]{0,12}", fullmatch=True)


def numbers(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_subnormal=False)


def optional(**keys: st.SearchStrategy[Any]) -> dict[str, st.SearchStrategy[Any]]:
    return keys


AIR = st.fixed_dictionaries(
    {}, optional=optional(altitude=numbers(-5000, 32000), warmer_than_standard=numbers(-80, 80))
)
CONDITION = st.fixed_dictionaries(
    {"speed": numbers(1, 300)},
    optional=optional(
        lift=st.sampled_from(["level", "maximum", 0.5, "0.25"]),
        load_factor=numbers(0.1, 9),
        n_factor=numbers(1, 20),
        transition=st.fixed_dictionaries({}, optional=optional(upper=numbers(0.01, 1))),
        air=AIR,
    ),
)
SECTION = st.fixed_dictionaries(
    {
        "shape": st.sampled_from(["cst", "bezier"]),
        "baseline": st.sampled_from(["naca:2412", "naca:0012-64", "naca:23012"]),
    },
    optional=optional(
        coefficients=st.fixed_dictionaries({}, optional=optional(upper=st.integers(4, 13))),
        freedom=numbers(0.001, 1),
        bounds=st.just({"upper_2": [-0.1, 0.3]}),
        trailing_edge=st.sampled_from(["0.3 mm", 0.002, "0.1 %", 0.0]),
    ),
)
PLAIN_FLOW = [q for q in CONDITION_QUANTITIES if not QUANTITIES[q].maximum_only]
PLAIN_SECTION = [q for q in SECTION_QUANTITIES if not QUANTITIES[q].needs_at]


@st.composite
def studies(draw: st.DrawFn) -> dict[str, Any]:
    """Random studies without faults, as plain data."""
    conditions = draw(st.dictionaries(NAMES, CONDITION, min_size=1, max_size=3))
    first = next(iter(conditions))
    flow, other = draw(st.lists(st.sampled_from(PLAIN_FLOW), min_size=2, max_size=2, unique=True))
    limited = draw(st.sampled_from(PLAIN_SECTION))
    weights = {name: draw(numbers(0.1, 5)) for name in conditions}
    return {
        "study": draw(st.from_regex(r"[a-z0-9]{1,8}-[a-z0-9]{1,8}", fullmatch=True)),
        "section": draw(SECTION),
        "chord": draw(numbers(0.01, 10)),
        "air": draw(AIR),
        "craft": {"mass": draw(numbers(0.1, 1e5)), "wing_area": draw(numbers(0.01, 1e3))},
        "conditions": conditions,
        "objectives": [
            {"minimise": flow, "at": draw(st.sampled_from([first, weights]))},
            {"maximise": other, "at": first},
            {"maximise": "depth", "at": draw(numbers(0, 1))},
        ],
        "constraints": [{"quantity": limited, "max": draw(numbers(0, 1))}],
        "search": {"seed": draw(st.integers(0, 2**63 - 1))},
    }


@given(studies())
def test_a_resolved_text_loads_to_its_equal_and_is_a_fixed_point(data) -> None:
    study = parse_study(dump(data))
    resolved = study.resolved_text()
    again = parse_study(resolved)
    assert again == study
    assert hash(again) == hash(study)
    assert again.fingerprint() == study.fingerprint()
    assert again.resolved_text() == resolved


@given(studies())
def test_a_resolved_text_is_plain_si_data(data) -> None:
    """No unit is left but that of an edge given as a length."""
    study = parse_study(dump(data))
    tree = parse(study.resolved_text(), "s.yaml").data
    assert tree["chord"] == study.chord == data["chord"]
    for name, condition in data["conditions"].items():
        assert tree["conditions"][name]["speed"] == condition["speed"]
    assert json.loads(json.dumps(tree)) == tree


@given(studies(), st.randoms(use_true_random=False))
def test_the_order_of_keys_has_no_meaning(data, random) -> None:
    keys = list(data)
    random.shuffle(keys)
    shuffled = {key: data[key] for key in keys}
    assert parse_study(dump(shuffled)).fingerprint() == parse_study(dump(data)).fingerprint()


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("chord: 212 mm", "chord: 0.212 # m"),
        ("speed: 18 m/s}\n  loiter", "speed: 64.8 km/h}\n  loiter"),
        ("n_factor: 9", "n_factor: 9.0\n\n# a comment"),
        ("at: {survey: 0.7, loiter: 0.3}", "at: {loiter: 30 %, survey: 70 %}"),
        ("{upper: 6, lower: 6}", "{lower: 6}"),
        ("min: 10 %", "min: 0.1, unit: chord"),
        ("seed: 7}", "seed: 7}\nevaluator: {panels: 160}"),
        ("survey: {speed: 18 m/s}", "survey: {speed: 18 m/s, transition: {upper: 1}}"),
    ],
)
def test_spelling_units_comments_and_defaults_are_the_same_study(old, new, good, change) -> None:
    assert parse_study(change(old, new)).fingerprint() == parse_study(good).fingerprint()
    assert parse_study(change(old, new)) == parse_study(good)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("chord: 212 mm", "chord: 213 mm"),
        ("seed: 7", "seed: 8"),
        ("tollgate-6-wing", "tollgate-7-wing"),
        ("min: 17 mm", "min: 8 %"),
        ("trailing_edge: 0.8 mm", "trailing_edge: 0.4 %"),
        (
            "  survey: {speed: 18 m/s}\n  loiter: {speed: 14.5 m/s}\n",
            "  loiter: {speed: 14.5 m/s}\n  survey: {speed: 18 m/s}\n",
        ),
    ],
)
def test_another_setting_is_another_study(old, new, good, change) -> None:
    """The order of conditions counts: flows are started one from another, in this order."""
    other = parse_study(change(old, new))
    assert other.fingerprint() != parse_study(good).fingerprint()


def test_a_fingerprint_is_the_same_in_every_process_and_version(good) -> None:
    """Archives are compared by it: a change of this value is a change of the format."""
    code = (
        "import sys\nfrom optim.study import parse_study\n"
        "sys.stdout.write(parse_study(sys.stdin.read()).fingerprint())"
    )
    run = subprocess.run(
        [sys.executable, "-c", code], input=good, capture_output=True, text=True, check=True
    )
    assert run.stdout == parse_study(good).fingerprint()


SQUARE_ROOT_SECTION = "".join(
    f"{x:.6f} {0.3 * x**0.5 * (1 - x):.6f}\n" for x in np.linspace(1.0, 0.0, 12)
) + "".join(f"{x:.6f} {-0.1 * x**0.5 * (1 - x):.6f}\n" for x in np.linspace(0.0, 1.0, 12)[1:])


def test_a_baseline_from_a_file_goes_along_in_the_resolved_text(tmp_path, change) -> None:
    folder = tmp_path / "sections"
    folder.mkdir()
    (folder / "mine.dat").write_text("my section\n" + SQUARE_ROOT_SECTION, encoding="utf-8")
    path = tmp_path / "study.yaml"
    path.write_text(change("naca:2412", "sections/mine.dat"), encoding="utf-8")
    study = load_study(path)
    points = study.baseline_points()
    assert points is not None
    np.testing.assert_array_equal(
        points, [[float(v) for v in line.split()] for line in SQUARE_ROOT_SECTION.splitlines()]
    )
    again = parse_study(study.resolved_text())  # no folder, no file
    assert again == study
    np.testing.assert_array_equal(again.baseline_points(), points)
    assert again.section.baseline == "sections/mine.dat"


def test_another_baseline_file_is_another_study(tmp_path, change) -> None:
    path = tmp_path / "study.yaml"
    path.write_text(change("naca:2412", "mine.dat"), encoding="utf-8")
    (tmp_path / "mine.dat").write_text(SQUARE_ROOT_SECTION, encoding="utf-8")
    first = load_study(path)
    (tmp_path / "mine.dat").write_text(SQUARE_ROOT_SECTION.replace("0.0", "0.1", 1))
    assert load_study(path) != first
    assert load_study(path).fingerprint() != first.fingerprint()


def test_a_fault_of_the_baseline_file_has_its_own_place(tmp_path, monkeypatch, change) -> None:
    """It comes beside the faults of the study, after them."""
    monkeypatch.chdir(tmp_path)
    Path("mine.dat").write_text(SQUARE_ROOT_SECTION + "0.5 nan\n", encoding="utf-8")
    text = change("naca:2412", "mine.dat").replace("n_factor: 9", "n_factor: 99")
    Path("s.yaml").write_text(text, encoding="utf-8")
    with pytest.raises(StudyError, match="pair of finite numbers") as caught:
        load_study("s.yaml")
    first, second = str(caught.value).split("\n")
    assert first.startswith("s.yaml:11:11: ")
    assert second.startswith("mine.dat:24: ")


def test_a_baseline_without_file_is_a_naca_section(good) -> None:
    assert parse_study(good).baseline_points() is None


def test_weights_stand_in_the_order_of_the_conditions(good, change) -> None:
    """Equal studies have equal names and add up in one order, to the last bit."""
    turned = parse_study(change("at: {survey: 0.7, loiter: 0.3}", "at: {loiter: 0.3, survey: 0.7}"))
    assert turned.objectives[0].name == "lift_to_drag@survey+loiter"
    assert turned.resolved_text() == parse_study(good).resolved_text()


def test_weights_are_shares(change) -> None:
    text = change("at: {survey: 0.7, loiter: 0.3}", "at: {survey: 2, loiter: 3, dirty: 5}")
    weights = parse_study(text).objectives[0].weights
    assert weights == pytest.approx({"survey": 0.2, "loiter": 0.3, "dirty": 0.5}, rel=1e-15)


def test_every_default_of_a_study_is_accepted_by_its_own_reader(good) -> None:
    """A default is written out in the resolved text, so it has to be in range itself."""
    text = good[good.index("study:") : good.index("search:")]
    study = parse_study(text)
    assert isinstance(study, Study)
    assert parse_study(study.resolved_text()) == study
