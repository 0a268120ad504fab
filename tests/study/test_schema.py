"""Schema, guide and vocabulary: judged by jsonschema, and in step with files and other rooms."""

from __future__ import annotations

import inspect
import json
from pathlib import Path

import jsonschema
import pytest

from optim.aerodynamics import medium
from optim.geometry import bezier, cst
from optim.search.algorithm import ALGORITHMS, SMALLEST_POPULATION
from optim.study import schema
from optim.study.guide import guide_text
from optim.study.json_schema import DIALECT, json_schema
from optim.study.load import load_study, parse_study
from optim.study.template import template_text
from optim.study.values import Value
from optim.study.vocabulary import (
    CONDITION_QUANTITIES,
    QUANTITIES,
    SECTION_QUANTITIES,
    coefficient_names,
)
from optim.study.yaml_text import parse

STUDIES = Path(__file__).parents[2] / "studies"


@pytest.fixture(scope="module")
def validator() -> jsonschema.Draft202012Validator:
    return jsonschema.Draft202012Validator(json.loads(json.dumps(json_schema())))


def test_the_schema_is_one_of_its_dialect() -> None:
    document = json_schema()
    assert document["$schema"] == DIALECT
    jsonschema.Draft202012Validator.check_schema(document)


def test_the_schema_accepts_every_study_that_loads(validator, good) -> None:
    texts = [good, template_text(), parse_study(good).resolved_text()]
    texts += [path.read_text(encoding="utf-8") for path in sorted(STUDIES.glob("*.yaml"))]
    for text in texts:
        tree = parse(text, "s.yaml")
        assert tree.faults == []
        assert list(validator.iter_errors(tree.data)) == []


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("chord: 212 mm\n", ""),
        ("freedom: 0.12", "freedm: 0.12"),
        ("chord: 212 mm", "chord: wide"),
        ("chord: 212 mm", "chord: -1"),
        ("chord: 212 mm", "chord: ~"),
        ("shape: cst", "shape: spline"),
        ("upper: 6,", "upper: 66,"),
        ("upper: 6,", "upper: 6.5,"),
        ("maximise: lift_to_drag", "maximise: beauty"),
        ("maximise: lift_to_drag", "maximise: cd\n    minimise: cd"),
        ("maximise: lift_to_drag\n    at", "at"),
        (", min: 10 %", ""),
        ("survey: {speed: 18 m/s}", "survey: {lift: 1}"),
        ("lift: maximum", "lift: max"),
        ("seed: 7", "seed: seven"),
        ("  - minimise: nose_down_moment\n    at: survey\n", ""),
    ],
)
def test_the_schema_refuses_what_the_tool_refuses(old, new, validator, change) -> None:
    data = parse(change(old, new), "s.yaml").data
    assert list(validator.iter_errors(data)) != []


def test_every_key_has_a_meaning_of_one_sentence() -> None:
    for name, block in inspect.getmembers(schema, inspect.isclass):
        if not issubclass(block, schema.Block):
            continue
        for key, field in block.model_fields.items():
            sentence = field.description or ""
            assert sentence.endswith("."), (name, key)
            assert sentence.count(". ") <= 1, (name, key)


def test_every_value_of_the_schema_says_what_it_accepts() -> None:
    for _, block in inspect.getmembers(schema, inspect.isclass):
        if issubclass(block, schema.Block):
            for field in block.model_fields.values():
                for value in field.metadata:
                    assert not isinstance(value, Value) or value.accepted


def test_the_guide_is_in_step() -> None:
    """Write it with: python -m optim.study.guide > studies/README.md."""
    assert (STUDIES / "README.md").read_text(encoding="utf-8") == guide_text()


def test_the_guide_names_every_key_and_quantity() -> None:
    text = guide_text()
    for _, block in inspect.getmembers(schema, inspect.isclass):
        if issubclass(block, schema.Block):
            assert all(f"| `{key}` |" in text for key in block.model_fields)
    assert all(f"| `{name}` |" in text for name in QUANTITIES)


def test_the_starter_study_loads_without_a_warning() -> None:
    study = parse_study(template_text())
    assert study.warnings == ()
    assert study.study == "first-look"


def test_what_the_starter_study_keeps_in_comments_is_accepted_too() -> None:
    text = template_text()
    for line in ("bounds: {upper_1", "dirty: {speed"):
        assert text.count(f"# {line}") == 1
        text = text.replace(f"# {line}", line)
    study = parse_study(text)
    assert "upper_1" in study.section.bounds
    assert study.conditions["dirty"].transition.lower == 0.1


def test_every_shipped_study_loads_without_a_warning() -> None:
    for path in sorted(STUDIES.glob("*.yaml")):
        assert load_study(path).warnings == (), path


def test_the_quantities_owed_have_their_words() -> None:
    """The list of the first version; the archive and the front are read by these names."""
    owed = {
        "lift_to_drag", "cd", "cl", "cm_quarter", "nose_down_moment", "cl_max",
        "transition_upper", "transition_lower",
    }  # fmt: skip
    assert owed <= set(CONDITION_QUANTITIES)
    contour = {
        "thickness", "depth", "area", "nose_radius", "trailing_edge_gap", "trailing_edge_angle",
        "camber",
    }  # fmt: skip
    assert contour <= set(SECTION_QUANTITIES)
    assert set(CONDITION_QUANTITIES) | set(SECTION_QUANTITIES) == set(QUANTITIES)


@pytest.mark.parametrize("counts", [(4, 4), (6, 8), (13, 5)])
@pytest.mark.parametrize("term", [False, True])
def test_coefficients_have_the_names_of_geometry(counts, term) -> None:
    upper, lower = counts
    parameterisation = cst.Cst(upper=upper, lower=lower, leading_edge_term=term)
    names = coefficient_names("cst", upper, lower, leading_edge_term=term)
    assert names == parameterisation.names
    assert coefficient_names("bezier", upper, lower) == bezier.Bezier(upper, lower).names


def test_ranges_are_those_of_the_rooms_that_compute() -> None:
    def ends(block: type[schema.Block], key: str) -> tuple[float, float]:
        (measure,) = [v for v in block.model_fields[key].metadata if isinstance(v, Value)]
        return measure.at_least, measure.at_most

    assert ends(schema.Air, "altitude") == (medium.LOWEST_ALTITUDE, medium.HIGHEST_ALTITUDE)
    water = (medium.COLDEST_WATER, medium.WARMEST_WATER)
    assert ends(schema.Water, "temperature") == water
    assert ends(schema.Coefficients, "upper") == cst.COEFFICIENTS
    assert ends(schema.SearchSettings, "population")[0] == SMALLEST_POPULATION
    assert schema.LARGEST_GAP == cst.LARGEST_GAP
    (pair,) = [
        v for v in schema.SectionSettings.model_fields["class_exponents"].metadata
        if isinstance(v, Value)
    ]  # fmt: skip
    assert (pair.first.at_least, pair.first.at_most) == cst.NOSE_EXPONENTS
    assert (pair.second.at_least, pair.second.at_most) == cst.EDGE_EXPONENTS


def test_algorithms_are_those_of_the_search() -> None:
    (choice,) = [
        v for v in schema.SearchSettings.model_fields["algorithm"].metadata if isinstance(v, Value)
    ]
    assert choice.words == ALGORITHMS
