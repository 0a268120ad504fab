"""Points of a file -> a section on its chord line, whatever way round they come."""

import numpy as np
import pytest
import shapely

from optim.errors import SectionError
from optim.geometry.graduation import CUTOFF, graduated
from optim.geometry.naca import naca_section
from optim.geometry.section import section_from_coordinates
from optim.geometry.validity import faults

TABULATED = ["naca63_415", "e387", "s809", "nlf0416"]


@pytest.fixture(scope="module")
def points():
    """NACA 2412 at 101 points from the upper edge around the nose, edge open."""
    return naca_section("2412").points(-np.cos(np.linspace(0, np.pi, 101)))


@pytest.fixture(scope="module")
def plain(points):
    return section_from_coordinates(points, "plain")


def rearranged(points):
    nose = 50
    return {
        "lower side first": (points[::-1], "lower side first"),
        "two sides from the nose": (
            np.concatenate([points[nose::-1], points[nose:]]),
            "two sides from the nose",
        ),
        "two sides from the nose, lower first": (
            np.concatenate([points[nose:], points[nose::-1]]),
            "two sides from the nose",
        ),
        "two sides from the edge": (
            np.concatenate([points[: nose + 1], points[: nose - 1 : -1]]),
            "two sides from the edge",
        ),
        "from the nose": (
            np.concatenate([points[nose:], points[: nose + 1]]),
            "did not start at the edge",
        ),
        "from the nose, the other way": (
            np.concatenate([points[nose::-1], points[: nose - 1 : -1]]),
            "did not start at the edge",
        ),
        "from a station of a side": (np.roll(points, 30, axis=0), "did not start at the edge"),
        "closed by its first point": (np.concatenate([points, points[:1]]), "base"),
        "base with a middle": (np.concatenate([[[1, 0]], points, [[1, 0]]]), "base"),
        "points repeated": (np.repeat(points, 2, axis=0), "Repeated points were left out: 101"),
    }


WAYS = list(rearranged(np.zeros((101, 2))))


@pytest.mark.parametrize("way", WAYS)
def test_every_order_gives_the_same_section_and_says_what_was_done(way, points, plain):
    arranged, said = rearranged(points)[way]
    kept = arranged.copy()
    section, notes = section_from_coordinates(arranged, way)
    t = np.linspace(-1, 1, 201)
    assert section.points(t) == pytest.approx(plain[0].points(t), abs=1e-12)
    assert any(said in note for note in notes)
    assert not any(said in note for note in plain[1])
    assert np.array_equal(arranged, kept)


@pytest.mark.parametrize("edge", [0.0, 0.01])
def test_edge_stays_open_or_closed(edge):
    points = naca_section("0012").points(-np.cos(np.linspace(0, np.pi, 101)))
    points[:, 1] += np.sign(points[:, 1]) * points[:, 0] * (edge - 0.00252) / 2
    section, _ = section_from_coordinates(points, "edge")
    assert section.trailing_edge_gap == pytest.approx(edge, abs=1e-8)


def test_points_are_turned_scaled_and_moved_onto_the_chord_line(points, plain):
    angle, size, shift = 0.2, 212.0, np.array([30.0, -4.0])
    c, s = np.cos(angle), np.sin(angle)
    moved = size * points @ np.array([[c, s], [-s, c]]) + shift  # anticlockwise
    section, notes = section_from_coordinates(moved, "moved")
    assert section.rotation == pytest.approx(plain[0].rotation - angle, abs=1e-9)
    assert section.scale == pytest.approx(plain[0].scale / size, rel=1e-9)
    t = np.linspace(-1, 1, 101)
    assert section.points(t) == pytest.approx(plain[0].points(t), abs=1e-9)
    assert " ".join(notes).count("degrees") == 1
    assert any("factor" in note for note in notes)
    assert any("moved to the origin" in note for note in notes)


def test_chord_line_runs_from_the_farthest_point_to_the_middle_of_the_edge(plain):
    section = plain[0]
    edge = section.points(np.array([-1.0, 1.0])).mean(axis=0)
    assert edge == pytest.approx([1.0, 0.0], abs=1e-12)
    reach = np.hypot(*(section.points(np.linspace(-1, 1, 20001)) - edge).T)
    assert reach.max() == pytest.approx(1.0, abs=1e-12)
    assert section.points(np.array([0.0]))[0] == pytest.approx([0.0, 0.0], abs=1e-8)


@pytest.mark.parametrize("seed", range(40))
def test_any_points_are_a_section_or_refused(seed):
    """Noise, rounding and missing points: a finite answer or SectionError, never another end."""
    rng = np.random.default_rng(seed)
    points = naca_section("4412").points(-np.cos(np.linspace(0, np.pi, int(rng.integers(9, 150)))))
    points = points + rng.normal(0, 10.0 ** rng.uniform(-7, -1), points.shape)
    points = points[rng.random(len(points)) > rng.choice([0, 0.3])]
    points = np.round(points, int(rng.integers(2, 9)))
    points = np.roll(points, int(rng.choice([0, rng.integers(0, 50)])), axis=0)
    try:
        section, _ = section_from_coordinates(points, "any")
    except SectionError:
        return
    assert faults(section) == ()
    values = (section.thickness, section.camber, section.area, section.trailing_edge_gap)
    assert np.isfinite(values).all()


def test_nothing_is_said_where_nothing_was_changed():
    points = naca_section("0012").points(-np.cos(np.linspace(0, np.pi, 101)))
    section, notes = section_from_coordinates(points, "symmetric")
    assert notes == ()
    assert section.thickness == pytest.approx(0.1200345, abs=1e-6)


@pytest.mark.parametrize("name", TABULATED)
def test_curve_goes_along_the_tabulated_points(name, ordinates):
    """Off them by no more than the slips of the table: four nose points of one, up to 7e-5."""
    points = ordinates(name)
    section, _ = section_from_coordinates(points, name)
    outline = shapely.LineString(section.points(np.linspace(-1, 1, 20001)))
    c, s = np.cos(section.rotation), np.sin(section.rotation)
    turned = section.scale * points @ np.array([[c, s], [-s, c]])
    middle = turned[points[:, 0] > 0.999].mean(axis=0)
    distances = [outline.distance(shapely.Point(p - middle + np.array([1, 0]))) for p in turned]
    assert max(distances) < (7e-5 if name == "nlf0416" else 1e-5)


@pytest.mark.parametrize("name", TABULATED)
def test_nose_of_a_sparse_table_is_smooth(name, ordinates):
    """Curvature rises to one peak at the nose and falls, without a second peak of 2 %."""
    section, _ = section_from_coordinates(ordinates(name), name)
    t = np.linspace(-0.3, 0.3, 2001)
    bend = section.curvature(t)
    top = int(np.argmax(bend))
    assert abs(t[top]) < 0.05
    assert np.all(bend > 0)
    for side in (bend[: top + 1], bend[: top - 1 : -1]):
        highest = np.maximum.accumulate(side)
        assert np.all(side > 0.98 * highest)


@pytest.mark.published
@pytest.mark.parametrize(
    ("name", "thickness", "reading"),
    [
        ("naca63_415", 0.15, 1e-4),
        ("s809", 0.21, 2e-4),
        ("e387", 0.0907, 1e-4),
        ("nlf0416", 0.1597, 1e-4),
    ],
)
def test_thickness_is_the_published_one(name, thickness, reading, ordinates):
    """Named in the title of each section, or computed from the table apart from this code."""
    section, _ = section_from_coordinates(ordinates(name), name)
    assert section.thickness == pytest.approx(thickness, abs=reading)


@pytest.mark.parametrize("decimals", [6, 5, 4])
def test_rounded_tables_keep_their_nose(decimals):
    """Within what rounding can do to the curvature: half a unit of alternating sign makes a second
    difference of two units, and a cubic spline through it bends three times as much."""
    exact = naca_section("0015")
    points = np.round(exact.points(-np.cos(np.linspace(0, np.pi, 121))), decimals)
    section, _ = section_from_coordinates(points, "rounded")
    apart = np.hypot(*(points[61] - points[60]))
    largest = 3 * 2 * 10.0**-decimals / apart**2 * exact.nose_radius
    assert section.nose_radius == pytest.approx(exact.nose_radius, rel=largest)
    assert section.thickness == pytest.approx(exact.thickness, abs=10.0**-decimals)
    assert np.all(section.curvature(np.linspace(-0.5, 0.5, 1001)) > 0)


def test_graduation_passes_long_waves_and_halves_those_of_its_length():
    theta = np.linspace(0, np.pi, 2001)
    inner = slice(400, -400)  # away from the free ends
    for length, kept in (
        (4 * CUTOFF, 1 / (1 + 4.0**-6)),
        (CUTOFF, 0.5),
        (CUTOFF / 2, 1 / (1 + 2.0**6)),
    ):
        wave = np.column_stack([np.sin(2 * np.pi * theta / length), np.zeros(theta.size)])
        smooth = graduated(theta, wave)
        share = (smooth[inner, 0] @ wave[inner, 0]) / (wave[inner, 0] @ wave[inner, 0])
        assert share == pytest.approx(kept, abs=0.01)
    parabola = np.column_stack([theta**2, 1 - theta])
    assert graduated(theta, parabola) == pytest.approx(parabola, abs=1e-9)


CIRCLE = np.linspace(0, 2 * np.pi, 40)
WRONG = {
    "one point": (np.zeros((1, 2)), "at least 9 points"),
    "no points": (np.zeros((0, 2)), "at least 9 points"),
    "three columns": (np.zeros((20, 3)), "shape"),
    "a million points": (np.zeros((1_000_000, 2)), "At most 5000 points"),
    "all equal": (np.ones((20, 2)), "longer along x than high"),
    "on a line": (np.column_stack([np.linspace(0, 1, 20), np.zeros(20)]), "no thickness"),
    "upright": (np.column_stack([0.1 * np.sin(CIRCLE), np.cos(CIRCLE)]), "longer along x"),
    "many chains": (
        np.column_stack([np.tile([0.0, 0.9], 10), np.linspace(0, 0.1, 20)]),
        "jump by more than half a chord 19 times",
    ),
    "few different points": (np.repeat([[1, 0.1], [0, 0], [1, -0.1]], 5, axis=0), "half a chord"),
}


@pytest.mark.parametrize("what", list(WRONG))
def test_what_is_no_section_is_refused_in_one_line(what):
    points, said = WRONG[what]
    with pytest.raises(SectionError, match=said) as refused:
        section_from_coordinates(points, what)
    assert "\n" not in str(refused.value)


def test_point_that_is_no_number_is_named(points):
    for wrong in (np.nan, np.inf):
        spoilt = points.copy()
        spoilt[17, 1] = wrong
        with pytest.raises(SectionError, match="point 18 is"):
            section_from_coordinates(spoilt, "spoilt")


def test_crossing_is_named_with_its_place(points):
    """The sides change places behind x = 0.6: by construction they meet there."""
    crossed = points * [1, 0]
    crossed[:, 1] = np.where(np.arange(101) < 50, 1, -1) * 0.1 * points[:, 0] * (0.6 - points[:, 0])
    with pytest.raises(SectionError) as refused:
        section_from_coordinates(crossed, "crossed")
    places = [f.message for f in refused.value.faults if "crosses itself" in f.message]
    assert float(places[0].split("=")[1].strip(" .")) == pytest.approx(0.6, abs=1e-3)


def test_spike_is_named_with_its_point(points):
    spoilt = points.copy()
    spoilt[20, 1] += 0.02  # a slip of one digit
    with pytest.raises(SectionError) as refused:
        section_from_coordinates(spoilt, "spoilt")
    (fault,) = refused.value.faults
    assert "spike" in fault.message
    assert f"{spoilt[20, 0]:.6g}, {spoilt[20, 1]:.6g}" in fault.message


def test_section_that_faces_backwards_is_refused(points):
    with pytest.raises(SectionError, match="ahead of its nose"):
        section_from_coordinates([1, 0] - points, "backwards")


def test_closed_chain_without_an_edge_is_refused(points):
    """Backwards and from a side: its round nose lies where the edge should."""
    with pytest.raises(SectionError, match="round where x is largest"):
        section_from_coordinates(np.roll([1, 0] - points, 25, axis=0), "backwards")


def test_points_all_but_on_their_neighbours_are_left_out(points, plain):
    close = np.insert(points, 30, points[29] + 1e-7 * (points[30] - points[29]), axis=0)
    section, notes = section_from_coordinates(close, "close")
    assert any("all but on their neighbours were left out: 1" in note for note in notes)
    assert section.thickness == pytest.approx(plain[0].thickness, abs=1e-6)
