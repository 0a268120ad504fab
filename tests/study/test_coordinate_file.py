"""Coordinate files in every usual arrangement give one contour; what is none gives one line."""

from __future__ import annotations

import time
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from shapely.geometry import Polygon

from optim.errors import SectionError
from optim.study.coordinate_file import (
    MOST_POINTS,
    coordinate_text,
    parse_coordinates,
    read_coordinates,
)

X = np.array([0.0, 0.01, 0.05, 0.1, 0.2, 0.3, 0.4, 0.55, 0.7, 0.85, 1.0])
UPPER = np.column_stack([X, 0.25 * np.sqrt(X) * (1.0 - X) + 0.003 * X])
LOWER = np.column_stack([X, -0.1 * np.sqrt(X) * (1.0 - X) - 0.002 * X])
LOOP = np.concatenate([UPPER[::-1], LOWER[1:]])
"""From the upper side of an open edge around the nose: what every arrangement must give."""


def lines(points, separator: str = " ") -> str:
    return "".join(f"{float(x)!r}{separator}{float(y)!r}\n" for x, y in points)


ARRANGEMENTS = {
    "bare": lines(LOOP),
    "title": "My section, 12 % thick\n" + lines(LOOP),
    "comments": "# one\n! two\n; three\n% four\n\n" + lines(LOOP[:9]) + "#\n" + lines(LOOP[9:]),
    "headed": "x y\n" + lines(LOOP),
    "commas": lines(LOOP, ","),
    "commas and blanks": lines(LOOP, " , "),
    "semicolons": lines(LOOP, ";"),
    "tabs": lines(LOOP, "\t"),
    "windows": lines(LOOP).replace("\n", "\r\n"),
    "indented": "".join(f"   {line}\n" for line in lines(LOOP).splitlines()),
    "lower side first": lines(LOOP[::-1]),
    "y before x": lines(LOOP[:, ::-1]),
    "y before x, lower side first": lines(LOOP[::-1, ::-1]),
    "two blocks": "title\n" + lines(UPPER) + "\n" + lines(LOWER),
    "two blocks, lower first": lines(LOWER) + lines(UPPER),
    "two blocks with counts": "title\n 11. 11.\n\n" + lines(UPPER) + "\n" + lines(LOWER),
    "two blocks from the edge": lines(UPPER[::-1]) + lines(LOWER[::-1]),
    "repeated point": lines(np.insert(LOOP, 5, LOOP[5], axis=0)),
}


@pytest.mark.parametrize("name", list(ARRANGEMENTS))
def test_every_arrangement_gives_the_same_contour(name, tmp_path) -> None:
    path = tmp_path / "section.dat"
    path.write_bytes(ARRANGEMENTS[name].encode())
    points, _, notes = read_coordinates(path)
    np.testing.assert_array_equal(points, LOOP)
    changed = name.startswith(("lower", "y", "two", "repeated"))
    assert bool(notes) == changed, notes


def test_the_contour_is_a_simple_one_of_the_right_sense() -> None:
    """Shapely judges: a valid polygon that runs counter-clockwise, upper side first."""
    for text in ARRANGEMENTS.values():
        polygon = Polygon(parse_coordinates(text).points)
        assert polygon.is_valid
        assert polygon.exterior.is_ccw


def test_a_closed_edge_stays_closed() -> None:
    closed = np.concatenate([[[1.0, 0.0]], LOOP[1:-1], [[1.0, 0.0]]])
    points = parse_coordinates(lines(closed)).points
    np.testing.assert_array_equal(points, closed)


def test_units_of_the_file_are_left_to_geometry() -> None:
    points = parse_coordinates(lines(250.0 * LOOP)).points
    np.testing.assert_array_equal(points, 250.0 * LOOP)


def test_the_title_is_the_first_line_that_is_no_comment() -> None:
    assert parse_coordinates("# c\n  NACA 2412 \nx y\n" + lines(LOOP)).title == "NACA 2412"
    assert parse_coordinates(lines(LOOP)).title == ""


def test_a_title_in_an_old_encoding_does_not_matter(tmp_path) -> None:
    path = tmp_path / "section.dat"
    path.write_bytes("Flügel\n".encode("latin-1") + lines(LOOP).encode())
    np.testing.assert_array_equal(read_coordinates(path).points, LOOP)


@given(st.lists(st.tuples(*[st.floats(-1, 1, allow_subnormal=False)] * 2), min_size=3))
def test_written_coordinates_are_the_same_floats(points) -> None:
    read = [tuple(map(float, line.split())) for line in coordinate_text(points).splitlines()]
    assert read == points


def test_points_cannot_be_changed_by_their_reader() -> None:
    points = parse_coordinates(lines(LOOP)).points
    with pytest.raises(ValueError, match="read-only"):
        points[0, 0] = 2.0


GOOD = lines(LOOP)
WRONG = {
    "empty": (b"", None, "the file is empty"),
    "blank": (b" \n\n", None, "the file is empty"),
    "text": (b"Dear colleague,\nplease find attached\nthe section.\n", None, "no points"),
    "one point": (b"title\n0.5 0.1\n", None, "only one point"),
    "few points": (lines(LOOP[:5]).encode(), None, "only 5 points"),
    "not a number": ((GOOD + "0.9 nan\n").encode(), 22, '"0.9 nan"'),
    "infinite": ((GOOD + "inf 0\n").encode(), 22, '"inf 0"'),
    "a text among points": ((GOOD + "end of section\n").encode(), 22, '"end of section"'),
    "three columns": (b"t\n" + GOOD.encode() + b"1 2 3\n", 23, '"1 2 3"'),
    "decimal commas": ((GOOD + "0,5 0,1\n").encode(), 22, '"0,5 0,1"'),
    "binary": (b"\x89PNG\x00\x1a", None, "binary"),
    "utf-16": (GOOD.encode("utf-16"), None, "binary, or text in an encoding other than UTF-8"),
    "one place": (b"0.5 0.5\n" * 40, None, "all points are the same"),
    "a line": (lines(np.column_stack([X, X / 9])).encode() * 2, None, "enclose no area"),
    "from the nose": (lines(np.roll(LOOP, 11, axis=0)[:14]).encode(), None, "start at the nose"),
    "a million points": (b"0.12345 0.12345\n" * 1_000_000, None, "larger than 1 MB"),
    "too many points": (b"0.5 0.1\n" * (MOST_POINTS + 1), MOST_POINTS + 1, "more than 10000"),
}


@pytest.mark.parametrize("name", list(WRONG))
def test_a_file_that_holds_no_section_is_one_line(name, tmp_path, monkeypatch) -> None:
    monkeypatch.chdir(tmp_path)
    content, line, fragment = WRONG[name]
    Path("section.dat").write_bytes(content)
    start = time.perf_counter()
    with pytest.raises(SectionError) as caught:
        read_coordinates("section.dat")
    assert time.perf_counter() - start < 2.0
    sentence = str(caught.value)
    assert sentence.startswith("section.dat: " if line is None else f"section.dat:{line}: ")
    assert fragment in sentence
    assert "accepted are lines of two numbers x y" in sentence
    assert "\n" not in sentence


def test_more_than_two_blocks_are_no_section() -> None:
    with pytest.raises(SectionError, match="jump along the chord 2 times"):
        parse_coordinates(lines(UPPER) + lines(LOWER) + lines(UPPER))


def test_a_file_that_cannot_be_read_is_one_line(tmp_path, monkeypatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("folder").mkdir()
    for name, fragment in (("absent.dat", "no such file"), ("folder", "this is no file")):
        with pytest.raises(SectionError, match=fragment) as caught:
            read_coordinates(name)
        assert str(caught.value).startswith(f"{name}: ")
