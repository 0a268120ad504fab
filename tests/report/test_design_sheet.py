"""The design sheet: its numbers against the archive, its pages read by pypdfium2, no overlaps.

Overlaps are looked for in the drawn pages: the boxes of all texts that are drawn, as the renderer
measures them, and not as the layout reckons with them.
"""

import itertools
import math
import re

import matplotlib as mpl
import numpy as np
import pypdfium2
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.text import Text

from optim.aerodynamics.operating_point import OperatingPoint
from optim.archive.reader import open_run
from optim.errors import InputError
from optim.geometry.spacing import panel_nodes
from optim.problem.conditions import resolve
from optim.report.design_record import design_record
from optim.report.design_sheet import STATIONS, design_sheet
from optim.report.loads import loads
from optim.report.off_design import ANGLES, CONTAMINATED, Series, off_design
from optim.report.paper import print_pages, spread, text_width, wrapped
from optim.report.sheet_outline import MOST_DEPTHS, places_of_depths
from optim.study.load import parse_study

CAUTIONS = ("Caution: no substitute for a test.", "Least certain is the maximum lift. " * 6)


def crowded(text):
    """A study with long names, every place taken, and more of everything than there is room for."""
    name = "a-condition-with-a-name-of-forty-letters"
    states = "".join(f"  {name[:-2]}{k:02d}: {{speed: {15 + k} m/s}}\n" for k in range(12))
    limits = "".join(
        f"  - {{quantity: depth, at: {31 + k} %, min: {10 + 0.1 * k} mm}}\n" for k in range(14)
    )
    limits += f"  - {{quantity: cm_quarter, condition: {name[:-2]}03, min: -0.9}}\n" + "".join(
        f"  - {{quantity: cd, condition: {name[:-2]}{k:02d}, max: 0.9}}\n" for k in range(6)
    )
    text = text.replace("  survey: {speed: 18 m/s}\n", "  survey: {speed: 18 m/s}\n" + states)
    text = text.replace(
        "coefficients: {upper: 5, lower: 5}", "coefficients: {upper: 13, lower: 13}"
    )
    return text.replace("constraints:\n", "constraints:\n" + limits)


def without_medium(text):
    """A study by Reynolds numbers alone: there is no speed, so there are no loads."""
    text = text.replace("air: {altitude: 500 m, warmer_than_standard: 10 K}\n", "")
    text = text.replace("craft: {mass: 6.0 kg, wing_area: 0.55 m^2}\n", "")
    text = text.replace("{speed: 18 m/s}", "{reynolds: 2.4e5, lift: 0.6}")
    text = text.replace("{speed: 14.5 m/s}", "{reynolds: 1.9e5, lift: 0.9}")
    return text.replace("{speed: 12.5 m/s, lift: maximum}", "{reynolds: 1.6e5, lift: maximum}")


@pytest.fixture
def record(run):
    return design_record(run, 5)


def sweeps(record, closed_form, count=2):
    evaluator = closed_form(panel_nodes(record.section, record.problem.panels))
    points = [OperatingPoint(2e5, alpha=alpha) for alpha in ANGLES]
    return [
        Series(f"survey, Re {k}e5", tuple(evaluator.flows(points))) for k in range(1, count + 1)
    ]


@pytest.fixture
def texts(monkeypatch):
    """Return what draws a page and returns every text that is drawn with its box in dots."""
    drawn = []
    draw = Text.draw

    def noted(text, renderer, *more):
        if text.get_visible() and text.get_text().strip():
            drawn.append((text.get_text(), text.get_window_extent(renderer)))
        draw(text, renderer, *more)

    monkeypatch.setattr(Text, "draw", noted)

    def on(page):
        drawn.clear()
        with mpl.rc_context({"text.hinting": "no_hinting"}):  # paper has no dots to round to
            FigureCanvasAgg(page.figure).draw()
        return list(drawn)

    return on


def overlapping(boxes):
    """Return pairs of texts whose boxes share more than a hair."""
    hair = 0.5
    return [
        (a, b)
        for (a, p), (b, q) in itertools.combinations(boxes, 2)
        if min(p.x1, q.x1) - max(p.x0, q.x0) > hair and min(p.y1, q.y1) - max(p.y0, q.y0) > hair
    ]


@pytest.mark.parametrize("change", [str, crowded, without_medium])
def test_no_text_overlaps_another_or_leaves_the_page(
    tmp_path, recorder, study_text, closed_form, texts, change
):
    with open_run(recorder(tmp_path / "run.h5", change(study_text), generations=1)) as run:
        record = design_record(run, 0)
    for page in design_sheet(record, sweeps(record, closed_form, 4), CAUTIONS):
        found, paper = texts(page), page.figure.bbox
        assert overlapping(found) == []
        for words, box in found:
            assert paper.x0 < box.x0 < box.x1 < paper.x1, words
            assert paper.y0 < box.y0 < box.y1 < paper.y1, words


def test_overlap_would_be_seen(record, closed_form, texts):
    page, _ = design_sheet(record, sweeps(record, closed_form), CAUTIONS)
    page.text(12.0, 15.0, "stamped over the title")
    assert len(overlapping(texts(page))) == 1


def test_printed_sheet_is_two_pages_of_a4_that_can_be_read(record, closed_form, tmp_path):
    path = tmp_path / "sheet.pdf"
    print_pages(design_sheet(record, sweeps(record, closed_form), CAUTIONS), path, record.title)
    printed = pypdfium2.PdfDocument(path)
    sizes = [page.get_size() for page in printed]
    words = [page.get_textpage().get_text_bounded() for page in printed]
    printed.close()
    np.testing.assert_allclose(sizes, [(595.28, 841.89)] * 2, atol=0.01)
    for page in words:
        assert "paper-plane, design 5" in page
        assert CAUTIONS[0] in page
    assert "chord 212" in words[0]
    assert record.run_digest in words[0]
    assert "Loads of a metre of span" in words[1]


def test_coordinates_on_paper_are_those_of_the_section(record, closed_form, tmp_path):
    path = tmp_path / "sheet.pdf"
    print_pages(design_sheet(record, sweeps(record, closed_form), CAUTIONS), path, record.title)
    printed = pypdfium2.PdfDocument(path)
    words = printed[0].get_textpage().get_text_bounded()
    printed.close()
    rows = re.findall(r"^([\d.]+) % ([-\d.]+) ([-\d.]+) ([-\d.]+) ([-\d.]+)", words, re.MULTILINE)
    found = np.array(rows, dtype=float)
    x = np.array(STATIONS) / 100.0
    upper, lower = record.section.upper_lower(x)
    expected = 212.0 * np.column_stack([x / 2.12, x, upper, lower, upper - lower])
    expected[:, 0] = STATIONS
    np.testing.assert_allclose(found, expected, atol=5.1e-4)


def test_equal_designs_make_equal_files(record, closed_form, tmp_path):
    for name in ("a.pdf", "b.pdf"):
        pages = design_sheet(record, sweeps(record, closed_form), CAUTIONS)
        print_pages(pages, tmp_path / name, record.title)
    assert (tmp_path / "a.pdf").read_bytes() == (tmp_path / "b.pdf").read_bytes()


def test_place_that_cannot_be_written_is_one_line(record, closed_form, tmp_path):
    pages = design_sheet(record, sweeps(record, closed_form), CAUTIONS)
    with pytest.raises(InputError, match="accepted is another place"):
        print_pages(pages, tmp_path / "no" / "sheet.pdf", record.title)


def test_loads_are_those_of_elementary_mechanics():
    """25 m/s in air of 1.2 kg/m3 is 375 Pa; at a chord of 0.4 m, by hand."""
    flown = {
        "slow": {"speed": 10.0, "density": 1.2},
        "fast": {"speed": 25.0, "density": 1.2},
        "tunnel": {"speed": None, "density": None},
    }
    flow = {"cl": 0.5, "cm_quarter": -0.08, "x_cp": 0.41}
    fast, slow = loads(flown, dict.fromkeys(flown, flow), 0.4)
    assert (fast.condition, slow.condition) == ("fast", "slow")
    assert fast.pressure == pytest.approx(375.0)
    assert fast.lift == pytest.approx(75.0)
    assert fast.moment == pytest.approx(-4.8)
    assert fast.centre == pytest.approx(0.164)
    assert slow.moment == pytest.approx(-4.8 * (10.0 / 25.0) ** 2)


def test_level_flight_carries_the_weight(record):
    """Lift a metre of span times the span of that wing area is the craft's weight."""
    found = loads(record.conditions, record.entry["conditions"], record.study.chord)
    survey = next(one for one in found if one.condition == "survey")
    assert survey.lift * 0.55 / 0.212 == pytest.approx(6.0 * 9.80665, rel=1e-9)


def test_sweeps_are_the_first_condition_clean_and_dirty_and_the_ends_of_the_reynolds_numbers(
    record, closed_form, study_text, monkeypatch
):
    flown = []

    def swept(evaluator, point, angles):
        flown.append(point)
        assert angles == ANGLES
        return evaluator.flows([OperatingPoint(point.reynolds, alpha=a) for a in angles]), None

    monkeypatch.setattr("optim.aerodynamics.sweep.sweep", swept)
    conditions = resolve(parse_study(study_text))
    series = off_design(record.section, conditions, 120, closed_form)
    names = [one.name.partition(",")[0] for one in series]
    assert names == ["survey", "survey", "slow"]
    assert "contaminated" in series[1].name
    assert [point.trip_upper for point in flown] == [1.0, CONTAMINATED, 1.0]
    assert flown[2].reynolds == conditions[2].reynolds
    assert all(math.isclose(f.alpha, a) for f, a in zip(series[0].flows[:9], ANGLES, strict=False))


def test_depths_are_where_the_study_asks_and_at_usual_places():
    assert places_of_depths([0.33]) == [0.15, 0.33, 0.45, 0.60, 0.75]
    many = places_of_depths([k / 40 for k in range(5, 35)])
    assert len(many) == MOST_DEPTHS


def test_labels_are_spread_between_their_ends():
    placed = spread([1.0, 1.5, 2.0, 9.9, 10.0], 2.0, 0.0, 10.0)
    assert np.diff(placed).min() >= 2.0 - 1e-12
    assert placed[-1] == 10.0


def test_broken_text_keeps_every_letter_and_the_width():
    words = "lift_to_drag@patrol+wait " + "w" * 90
    lines = wrapped(words, 30.0, 7.0)
    assert "".join(lines) == words.replace(" ", "")
    assert max(text_width(line, 7.0) for line in lines) <= 30.0
