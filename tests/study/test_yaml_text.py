"""The YAML dialect: the core schema of YAML 1.2.2, checked with its rules and JSON's reader."""

from __future__ import annotations

import json
import math
import time

import pytest
from hypothesis import given
from hypothesis import strategies as st

from optim.errors import StudyError
from optim.study.yaml_text import MOST_ALIASES, dump, parse


def value_of(text: str):
    tree = parse(f"key: {text}\n", "s.yaml")
    assert tree.faults == []
    return tree.data["key"]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        # YAML 1.2.2, section 10.3.2 "Core Schema", tag resolution (https://yaml.org/spec/1.2.2/).
        ("1e6", 1e6),
        ("1.0e6", 1e6),
        ("1e-3", 1e-3),
        ("12e03", 12000.0),
        ("-.5E+2", -50.0),
        ("2.", 2.0),
        ("0", 0),
        ("-19", -19),
        ("+12", 12),
        ("010", 10),
        ("true", True),
        ("False", False),
        # Not of that schema: YAML 1.1 made booleans, sexagesimals, dates and octals of these.
        ("NO", "NO"),
        ("off", "off"),
        ("yes", "yes"),
        ("y", "y"),
        ("1:30", "1:30"),
        ("06:30", "06:30"),
        ("2024-01-01", "2024-01-01"),
        ("1_000", "1_000"),
        ("0x1F", "0x1F"),
        ("0o17", "0o17"),
        ("1e", "1e"),
        ("+", "+"),
        ("'1e6'", "1e6"),
        ('"true"', "true"),
        ("212 mm", "212 mm"),
        ("!!str 12", "12"),
    ],
)
def test_scalars_follow_yaml_1_2(text, expected) -> None:
    found = value_of(text)
    assert found == expected
    assert type(found) is type(expected)


def test_infinity_and_not_a_number_are_read_as_such() -> None:
    assert value_of("-.inf") == -math.inf
    assert math.isnan(value_of(".NaN"))


LETTERS = st.text(
    st.characters(codec="utf-8", exclude_categories=("C", "Zl", "Zp")), min_size=1, max_size=20
)
DATA = st.recursive(
    st.booleans() | st.integers(-(10**15), 10**15) | LETTERS
    | st.floats(allow_nan=False, allow_infinity=False),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(LETTERS, inner, max_size=4),
    max_leaves=12,
)  # fmt: skip


@given(st.dictionaries(LETTERS, DATA, max_size=5))
def test_json_is_read_as_the_standard_library_reads_it(data) -> None:
    """JSON is YAML 1.2: an independent reader must agree on every document."""
    text = json.dumps(data, ensure_ascii=False)
    tree = parse(text, "s.yaml")
    assert tree.faults == []
    assert tree.data == json.loads(text)


@given(st.dictionaries(LETTERS, DATA, min_size=1, max_size=5))
def test_what_is_written_is_read_back(data) -> None:
    found = parse(dump(data), "s.yaml")
    assert found.faults == []
    assert found.data == data
    assert repr(found.data) == repr(data)  # 1 and 1.0 and True are not the same


def test_places_are_those_of_values_and_keys() -> None:
    text = "# note\na: 1\nblock:\n  b: two words\n  list: [x, {c: 3}]\nitems:\n  - one\n  - d: 4\n"
    places = parse(text, "s.yaml").places
    assert places.of(("a",)) == (2, 4)
    assert places.of(("block",)) == (3, 1)  # a block stands where its key stands
    assert places.of(("block", "b")) == (4, 6)
    assert places.of(("block", "list", 1, "c")) == (5, 17)
    assert places.of(("items", 0)) == (7, 5)
    assert places.of(("items", 1, "d")) == (8, 8)
    assert places.of(("block", "missing", "deeper")) == (3, 1)
    assert places.of(("missing",)) == (2, 1)  # the study itself starts at its first key
    assert places.keys[("block", "b")] == (4, 3)


def test_columns_count_characters_behind_a_byte_order_mark_and_wide_letters() -> None:
    tree = parse("\ufeffé: {ü: 1, x: oops}\n", "s.yaml")
    assert tree.places.of(("é", "x")) == (1, 14)


def faults_of(text: str) -> list[str]:
    try:
        return [str(fault) for fault in parse(text, "s.yaml").faults]
    except StudyError as error:
        return [str(fault) for fault in error.faults]


def test_a_key_given_twice_names_both_lines() -> None:
    assert faults_of("a: 1\nb:\n  c: 1\n  d: 2\n  c: 3\na: 2\n") == [
        "s.yaml:5:3: b.c: the key is given twice, first at line 3; keep one of the two.",
        "s.yaml:6:1: a: the key is given twice, first at line 1; keep one of the two.",
    ]


def test_keys_are_texts_as_written() -> None:
    assert parse("NO: 1\n1: 2\n1.50: 3\n", "s").data == {"NO": 1, "1": 2, "1.50": 3}
    assert faults_of("? [a, b]\n: 1\n") == ["s.yaml:1:3: a key is a text, such as chord: 212 mm."]


@pytest.mark.parametrize(
    "tagged",
    [
        '!!python/object/apply:os.system ["touch owned"]',
        "!!python/name:os.system",
        "!!python/object/new:type {}",
        "!!binary aGVsbG8=",
        "!!timestamp 2024-01-01",
        "!!set {a}",
        "!own 3",
        "!!int twelve",
        "!!bool yes",
    ],
)
def test_every_other_tag_is_refused(tagged, tmp_path, monkeypatch) -> None:
    monkeypatch.chdir(tmp_path)
    lines = faults_of(f"a: 1\nb: {tagged}\n")
    assert len(lines) == 1
    assert lines[0].startswith("s.yaml:2:4: b: ")
    assert "is refused" in lines[0] or "is no number" in lines[0]
    assert list(tmp_path.iterdir()) == []


def test_a_key_without_value_is_a_fault() -> None:
    assert faults_of("a:\nb: ~\nc: [null]\n") == [
        "s.yaml:1:3: a: no value is given; give one, or leave the key out.",
        "s.yaml:2:4: b: no value is given; give one, or leave the key out.",
        "s.yaml:3:5: c.0: no value is given; give one, or leave the key out.",
    ]


def test_anchors_and_merge_keys_save_repeating() -> None:
    tree = parse(
        "base: &base {speed: 18, lift: 1}\nfast:\n  <<: *base\n  speed: 25\nsame: *base\n"
        "both:\n  <<: [{x: 1}, {x: 2, y: 3}]\n",
        "s.yaml",
    )
    assert tree.faults == []
    assert tree.data["fast"] == {"speed": 25, "lift": 1}
    assert tree.data["same"] == tree.data["base"]
    assert tree.data["both"] == {"x": 1, "y": 3}
    assert tree.places.of(("fast", "lift")) == (1, 31)
    assert tree.places.of(("fast", "speed")) == (4, 10)


def bomb(levels: int) -> str:
    """Nine aliases of nine aliases of ...: 9 to the power of `levels` values."""
    lines = ["a0: &a0 [x, x, x, x, x, x, x, x, x]"]
    lines += [f"a{i}: &a{i} [{', '.join([f'*a{i - 1}'] * 9)}]" for i in range(1, levels)]
    return "\n".join(lines) + "\n"


def merge_bomb(levels: int) -> str:
    """Mappings that each merge the one before twice: few keys, 2 to the power of `levels` looks."""
    lines = ["m0: &m0 {k: 1}"]
    lines += [f"m{i}: &m{i} {{<<: [*m{i - 1}, *m{i - 1}]}}" for i in range(1, levels)]
    return "\n".join(lines) + "\n"


@pytest.mark.parametrize(
    ("text", "fragment"),
    [
        (bomb(9), "more than 5000 values"),
        ("a: &a x\nb: [" + "*a, " * (MOST_ALIASES + 1) + "]\n", "more than 100 aliases"),
        ("a: " + "[" * 500 + "]" * 500 + "\n", "more than 20 levels of nesting"),
        ("a: &a [*a]\n", "holds itself"),
        (merge_bomb(40), "more than 5000 values"),
        ("a: &a {<<: *a}\n", "merges mappings"),
        ("a: [" + "x, " * 30_000 + "]\n", "more than 10000 keys and values"),
    ],
    ids=["bomb", "aliases", "depth", "itself", "merge-bomb", "merged-itself", "many"],
)
def test_no_text_can_take_the_machine(text, fragment) -> None:
    start = time.perf_counter()
    lines = faults_of(text)
    assert time.perf_counter() - start < 10.0
    assert len(lines) == 1
    assert fragment in lines[0]
    assert lines[0].startswith("s.yaml:")


@pytest.mark.parametrize(
    ("text", "start", "fragment"),
    [
        ("a: 1\n\tb: 2\n", "s.yaml:2:1: ", "a tab stands where spaces are needed"),
        ("a: [1, 2\nb: 3\n", "s.yaml:2:", "this is not YAML"),
        ("a: 'open\n", "s.yaml:2:1: ", "this is not YAML"),
        ("a: 1\n b: 2\n", "s.yaml:2:3: ", "this is not YAML"),
        ("a: *nowhere\n", "s.yaml:1:4: ", "nowhere"),
        ("a: 1\n---\nb: 2\n", "s.yaml:2:1: ", "this is not YAML"),
        ("a: 1\nb: \x07\n", "s.yaml:2:4: ", "U+0007"),
        ("", "s.yaml: ", "the file is empty"),
        ("# only a comment\n", "s.yaml: ", "the file is empty"),
    ],
)
def test_what_is_not_yaml_is_one_line_with_its_place(text, start, fragment) -> None:
    lines = faults_of(text)
    assert len(lines) == 1
    assert lines[0].startswith(start)
    assert fragment in lines[0]
    assert "\n" not in lines[0]
