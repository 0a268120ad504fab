"""What two keys can disagree about: one change of a good study, one line."""

from __future__ import annotations

import pytest

from optim.study.load import parse_study

CRAFT = "craft: {mass: 6.0 kg, wing_area: 0.55 m2}\n"
SECOND = "  - minimise: nose_down_moment\n    at: survey\n"
WEIGHTS = "at: {survey: 0.7, loiter: 0.3}"

DISAGREEMENTS = [
    ("air: {", "^water: {}\nair: {", "the study gives air and water"),
    ("n_factor: 9", "n_factor: 9\nturbulence: ^0.07 %", "say the same thing"),
    ("survey: {speed: 18 m/s}", "^survey: {lift: 0.5}", "neither speed nor reynolds"),
    ("survey: {speed: 18 m/s}", "survey: {speed: 18, lift: 1, alpha: ^0}", "both set the flow"),
    (WEIGHTS, "at: ^srvey", "did you mean survey?"),
    (WEIGHTS, "at: {srvey: ^1}", 'no condition "srvey"'),
    (WEIGHTS, "^at: {}", "no weight is given"),
    (WEIGHTS, "at: ^30 %", "belongs to a condition"),
    (f"- maximise: lift_to_drag\n    {WEIGHTS}", "- ^maximise: cd", "with at: survey, loiter"),
    ("minimise: nose_down_moment\n    at: ", "maximise: cl_max\n    at: ^", "lift: maximum only"),
    ("minimise: nose_down_moment\n    at: ", "maximise: area\n    at: ^", "leave at out"),
    ("minimise: nose_down_moment\n    at: ", "maximise: depth\n    at: ^", "takes a place x/c"),
    (SECOND, "  - ^maximise: depth\n", "takes a place x/c"),
    (SECOND, "  - {maximise: depth, at: ^130 %}\n", "is not accepted"),
    (SECOND, "  - ^minimise: cd\n    maximise: cd\n    at: survey\n", "one of maximise"),
    (SECOND, "  - ^at: survey\n", "one of maximise"),
    (
        SECOND,
        "  - ^maximise: lift_to_drag\n    at: {survey: 1, loiter: 2}\n",
        "is objectives.0 already",
    ),
    ("{quantity: thickness, min: 10 %}", "^{quantity: thickness}", "limits nothing"),
    ("min: 10 %", "min: 10 %, max: ^9 %", "below the least one"),
    ("min: 10 %", "min: ^10", "cannot be limited to 1000 %; accepted is 0 % to 100 %"),
    ("min: 10 %", "min: ^300 mm", "accepted is 0 m to 0.212 m"),
    ("min: 10 %", "min: 10 %, max: ^40 mm", "or all limits of the constraint as a length"),
    ("min: 10 %", "min: 10 %, scale: ^0 %", "measures nothing"),
    ("min: 10 %", "min: 10, unit: ^rad", "not in rad; accepted is chord or m"),
    ("min: 10 %", "min: 10 %, condition: ^slow", "leave condition out"),
    ("min: 10 %", "min: 10 %, at: ^30 %", "takes no place"),
    ("- {quantity: depth, at: 30 %", "- ^{quantity: depth", "takes a place x/c"),
    ("condition: slow, min", "condition: ^slo, min", "did you mean slow?"),
    ("condition: slow, min", "condition: ^loiter, min", "lift: maximum only"),
    ("{quantity: cl_max, condition: slow", "^{quantity: cl_max", "give condition: survey"),
    ("min: 1.40", "min: ^140 %", "a number without unit"),
    (
        "{quantity: cl_max, condition: slow, min: 1.40}",
        "^{quantity: thickness, max: 20 %}",
        "constraints.0 limits thickness already",
    ),
    ("baseline: naca:2412", "baseline: ^naca:241", "4 digits (2412)"),
    ("baseline: naca:2412", "baseline: ^NACA 2412", "did you mean naca:2412?"),
    ("baseline: naca:2412", "baseline: ^missing.dat", 'no file "missing.dat"'),
    (
        "baseline: naca:2412",
        "baseline: naca:2412\n  baseline_coordinates: ^0 1",
        "holds only one point",
    ),
    ("freedom: 0.12", "bounds: {^uper_1: [0, 1]}", "did you mean upper_1?"),
    ("freedom: 0.12", "bounds: {^upper_7: [0, 1]}", 'no coefficient "upper_7"'),
    ("freedom: 0.12", "bounds: {^leading_edge: [0, 1]}", "no coefficient"),
    ("trailing_edge: 0.8 mm", "trailing_edge: ^80 mm", "38% of the chord thick"),
    ("seed: 7", "seed: 7, ^reference_point: [1]", "has 1 values for 2 objectives"),
    (SECOND, "", "give at least 2"),
    ("maximise: lift_to_drag", "maximise: ^lift_to", "did you mean lift_to_drag?"),
    (CRAFT, "", "level flight takes a craft"),
]


@pytest.mark.parametrize(("old", "new", "fragment"), DISAGREEMENTS)
def test_a_disagreement_is_one_line_at_its_place(old, new, fragment, mark, faults) -> None:
    """One line each, but for a craft that three conditions miss."""
    text, place = mark(old, new) if new else mark(old, "^")
    lines = faults(text)
    assert len(lines) == (3 if "takes a craft" in fragment else 1), lines
    assert fragment in lines[0]
    assert not new or lines[0].startswith(f"s.yaml:{place}: ")


def test_too_few_objectives_are_told_at_their_key(change, faults) -> None:
    assert faults(change(SECOND, ""))[0].startswith("s.yaml:17:1: objectives: ")


def test_a_craft_that_is_missing_is_told_at_each_condition(change, faults) -> None:
    lines = faults(change(CRAFT, ""))
    assert [line.split(": ")[:2] for line in lines] == [
        [f"s.yaml:{line}:3", f"conditions.{name}"]
        for line, name in ((12, "survey"), (13, "loiter"), (14, "dirty"))
    ]


def test_a_speed_takes_a_medium(change, faults) -> None:
    text = change("air: {altitude: 500 m, warmer_than_standard: 10 K}\n", "")
    lines = faults(text)
    assert len(lines) == 4
    assert all("makes no Reynolds number without a medium" in line for line in lines)


def test_a_reynolds_number_takes_a_medium_for_level_flight_only(change, faults) -> None:
    text = (
        change("air: {altitude: 500 m, warmer_than_standard: 10 K}\n", "")
        .replace("speed: 18 m/s", "reynolds: 2.4e5, lift: 0.6")
        .replace("speed: 14.5 m/s", "reynolds: 2e5")
        .replace("speed: 12.5 m/s", "reynolds: 2e5")
    )
    lines = faults(text)
    assert ["level flight takes a medium" in line for line in lines] == [True]
    parse_study(text.replace("reynolds: 2e5}", "reynolds: 2e5, alpha: 2 deg}"))


def test_a_quantity_at_the_peak_other_than_its_lift_is_accepted(change) -> None:
    parse_study(change("quantity: cl_max, condition: slow, min: 1.40",
                       "quantity: cm_quarter, condition: slow, min: -0.1"))  # fmt: skip


def test_a_depth_may_be_an_objective(change) -> None:
    study = parse_study(change("minimise: nose_down_moment\n    at: survey",
                               "maximise: depth\n    at: 30 %"))  # fmt: skip
    objective = study.objectives[1]
    assert (objective.name, objective.place, objective.weights) == ("depth@30%", 0.3, {})


@pytest.mark.parametrize(
    ("limits", "expected"),
    [
        ("min: 10 %", ("chord", 0.1, None)),
        ("min: 0.1, max: 12 %", ("chord", 0.1, 0.12)),
        ("min: 20 mm, max: 3 cm", ("m", 0.02, 0.03)),
        ("min: 0.02, max: 0.03, unit: m", ("m", 0.02, 0.03)),
    ],
)
def test_limits_are_in_one_unit(limits, expected, change) -> None:
    constraint = parse_study(change("min: 10 %", limits)).constraints[0]
    assert (constraint.unit, constraint.min, constraint.max) == expected


def test_an_area_may_be_limited_at_the_real_chord(change) -> None:
    text = change("quantity: thickness, min: 10 %", "quantity: area, min: 30 cm2")
    constraint = parse_study(text).constraints[0]
    assert (constraint.unit, constraint.min) == ("m^2", 0.003)


WITHOUT_EFFECT = [
    ("dirty: {speed", "^spare: {speed: 20}\n  dirty: {speed", "reads spare"),
    ("loiter: {speed", "loiter: {load_factor: ^2, lift: 1, speed", "load_factor has no effect"),
    ("shape: cst", "shape: bezier\n  leading_edge_term: ^true", "has no leading_edge_term"),
    ("shape: cst", "shape: bezier\n  ^class_exponents: [0.6, 1]", "has no class_exponents"),
    ("maximise: lift_to_drag", "minimise: ^lift_to_drag", "usual is maximise"),
    (WEIGHTS, "^at: {survey: 0.7, loiter: 0.7}", "add up to 1.4"),
    ("minimise: nose_down_moment", "^maximise: cl", "every design has the same"),
    ("seed: 7", "seed: 7, evaluations: ^12000", "the generations end first"),
]


@pytest.mark.parametrize(("old", "new", "fragment"), WITHOUT_EFFECT)
def test_what_has_no_effect_is_a_warning(old, new, fragment, mark) -> None:
    text, place = mark(old, new)
    (warning,) = map(str, parse_study(text, "s.yaml").warnings)
    assert warning.startswith(f"s.yaml:{place}: ")
    assert fragment in warning


def test_a_craft_without_level_flight_is_a_warning(good) -> None:
    text = good.replace("18 m/s", "18 m/s, lift: 0.5").replace("14.5 m/s", "14.5 m/s, lift: 1")
    assert [w.path for w in parse_study(text).warnings] == [("craft",)]


def test_an_n_factor_that_every_condition_has_is_a_warning(good) -> None:
    study = parse_study(good.replace(" m/s", " m/s, n_factor: 7"))
    assert [w.path for w in study.warnings] == [("n_factor",)]


def test_air_that_every_condition_has_is_a_warning(good) -> None:
    study = parse_study(good.replace(" m/s", " m/s, air: {altitude: 1 km}"))
    assert [w.path for w in study.warnings] == [("air",)]


def test_a_medium_that_nothing_flies_in_is_a_warning(good) -> None:
    text = good.replace("speed: ", "reynolds: 2e5, lift: 0.5, n_factor: 8, speed: ")
    for speed in ("18 m/s", "14.5 m/s", "12.5 m/s"):
        text = text.replace(f", speed: {speed}", "")
    text = text.replace("lift: 0.5, n_factor: 8, lift: maximum", "lift: maximum")
    paths = {w.path for w in parse_study(text).warnings}
    assert ("air",) in paths


def test_immersion_is_said_to_have_no_effect(good) -> None:
    text = good.replace("air: {altitude: 500 m, warmer_than_standard: 10 K}",
                        "water: {temperature: 15 degC, salt: true, immersion: 0.5 m}")  # fmt: skip
    study = parse_study(text)
    assert study.water is not None
    assert study.water.temperature == 288.15
    assert [w.path for w in study.warnings] == [("water", "immersion")]


def test_bounds_of_every_coefficient_make_freedom_idle(change) -> None:
    names = [f"{side}_{i}" for side in ("upper", "lower") for i in range(1, 7)]
    bounds = ", ".join(f"{name}: [-1, 1]" for name in names)
    study = parse_study(change("freedom: 0.12", f"freedom: 0.12\n  bounds: {{{bounds}}}"))
    assert [w.path for w in study.warnings] == [("section", "freedom")]
    assert study.section.bounds["upper_3"] == (-1.0, 1.0)
