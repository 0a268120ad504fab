"""The page in a real browser: every control, from the keyboard where it can be.

The browser is the system's Chromium; `python -m pytest -m browser` runs these. What is expected
is computed from the recorded numbers, not asked of the page.
"""

import json
import re
import shutil
import time

import numpy as np
import pytest
from bokeh.embed import file_html
from bokeh.plotting import figure
from bokeh.resources import INLINE

from optim.report.page.html import write_page
from optim.report.page.packing import unpacked

pytestmark = pytest.mark.browser

LIFT, MOMENT = "objective:lift_to_drag@survey+loiter", "objective:nose_down_moment@survey"
THICKNESS = "limit:thickness"

NAMED = "name => Bokeh.documents.map((one) => one.get_model_by_name(name)).find(Boolean)"

PLACES = """name => {
  const view = Bokeh.index.roots.find((one) => one.model.name === name);
  const box = view.el.getBoundingClientRect();
  const frame = view.frame.bbox;
  const [x, y] = [view.model.x_range, view.model.y_range];
  return {left: box.left + frame.left, top: box.top + frame.top, width: frame.width,
          height: frame.height, x: [x.start, x.end], y: [y.start, y.end]};
}"""


@pytest.fixture(scope="session")
def browser():
    from playwright.sync_api import sync_playwright  # noqa: PLC0415  wanted by these tests only

    names = ("chromium", "chromium-browser", "google-chrome")
    program = next(filter(None, map(shutil.which, names)), None)
    with sync_playwright() as play:
        opened = play.chromium.launch(executable_path=program)
        yield opened
        opened.close()


@pytest.fixture
def opened(browser, tmp_path):
    """Return what opens the page of a document; nothing may be asked of a network or go wrong."""
    context = browser.new_context(viewport={"width": 1280, "height": 1000})
    asked, wrong = [], []
    context.on("request", lambda request: asked.append(request.url))

    def shown(document):
        path = tmp_path / "page.html"
        write_page(document, path)
        page = context.new_page()
        page.on("console", lambda m: wrong.append(m.text) if m.type == "error" else None)
        page.on("pageerror", lambda error: wrong.append(str(error)))
        page.goto(path.as_uri())
        page.wait_for_selector("body[data-complete]")
        return page

    yield shown
    context.close()
    assert wrong == []
    assert [url for url in asked if not url.startswith(("file:", "blob:", "data:"))] == []


@pytest.fixture
def page(opened, document):
    return opened(document)


def values(document, key):
    (found,) = [one for one in document["columns"] if one["key"] == key]
    return dict(zip(document["designs"]["id"], unpacked(found["values"]), strict=True))


def of_kind(document, *kinds):
    pairs = zip(document["designs"]["id"], document["designs"]["kind"], strict=True)
    return {row for row, kind in pairs if kind in kinds}


def listed(page):
    """IDs of the rows that are seen, in their order."""
    return page.eval_on_selector_all(
        "#designs tbody tr:not([hidden])", "all => all.map((row) => Number(row.dataset.id))"
    )


def chosen(page):
    return set(
        page.eval_on_selector_all(
            "#designs tbody tr.chosen", "all => all.map((row) => Number(row.dataset.id))"
        )
    )


def drawn(page, source, column):
    return page.evaluate(f"([s, c]) => Array.from(({NAMED})(s).data[c])", [source, column])


def test_front_is_listed_and_the_rest_on_request(page, document):
    front = of_kind(document, "front")
    assert set(listed(page)) == front | {0}
    page.check("#show-beaten")
    assert set(listed(page)) == front | of_kind(document, "beaten") | {0}
    page.check("#show-missed")
    assert set(listed(page)) == set(document["designs"]["id"])
    assert f"{len(front - {0})} of the front" in page.inner_text("#status")


@pytest.mark.parametrize("share", [0.45, 1.0])
def test_brush_chooses_in_plot_and_table(page, document, share):
    page.check("#show-beaten")
    page.locator("#plot-trade").scroll_into_view_if_needed()
    page.wait_for_timeout(300)
    place = page.evaluate(PLACES, "trade")
    edge = place["left"] + share * (place["width"] - 2)
    page.mouse.move(place["left"] + 1, place["top"] + 1)
    page.mouse.down()
    page.mouse.move(edge, place["top"] + place["height"] - 1, steps=6)
    page.mouse.up()
    page.wait_for_timeout(200)
    low, high = place["x"]
    bound = low + (high - low) * (edge - place["left"]) / place["width"]
    lift = values(document, LIFT)
    assert chosen(page) == {row for row in listed(page) if lift[row] <= bound}
    assert chosen(page)
    assert len(
        page.evaluate(
            "Array.from(Bokeh.documents[0].get_model_by_name('designs').selected.indices)"
        )
    ) == len(chosen(page))
    assert f"Chosen: {len(chosen(page))}." in page.inner_text("#status")


def test_row_chooses_in_the_plots(page):
    row = listed(page)[2]
    page.locator(f'#designs tr[data-id="{row}"] input').focus()
    page.keyboard.press("Space")
    indices = page.evaluate(
        "Array.from(Bokeh.documents[0].get_model_by_name('designs').selected.indices)"
    )
    ids = drawn(page, "designs", "id")
    assert [ids[k] for k in indices] == [row]
    page.check("#only-chosen")
    assert set(listed(page)) == {0, row}
    page.click("#choose-none")
    assert listed(page) == [0]


def test_slider_and_number_box_set_one_limit(page, document):
    page.check("#show-beaten")
    before = set(listed(page))
    slider = page.locator('input[aria-label="thickness, least, slider"]').first
    slider.focus()
    for _ in range(3):
        page.keyboard.press("PageUp")
    bound = float(page.locator('input[aria-label="thickness, least"]').first.input_value())
    thickness = values(document, THICKNESS)
    step = (max(thickness.values()) - min(thickness.values())) / 1000
    kept = set(listed(page)) - {0}
    assert kept < before
    assert all(thickness[row] >= bound - step for row in kept)
    assert all(thickness[row] <= bound + step for row in before - kept - {0})
    box = page.locator('input[aria-label="thickness, least"]').first
    box.fill("13.25")
    box.press("Enter")
    expected = {row for row in before if thickness[row] >= 13.25} | {0}
    assert set(listed(page)) == expected
    booleans = page.evaluate("Bokeh.documents[0].get_model_by_name('visible').booleans")
    assert sum(booleans) == len(expected)
    page.click("#limits-clear")
    assert set(listed(page)) == before


def test_greatest_of_a_condition_is_limited_too(page, document):
    page.locator("summary", has_text=re.compile("^loiter$")).click()
    box = page.locator('input[aria-label="cd, greatest"]').first
    drag = values(document, "loiter:cd")
    bound = float(np.median([drag[row] for row in listed(page)]))
    box.fill(repr(bound))
    box.press("Enter")
    front = of_kind(document, "front")
    assert set(listed(page)) == {row for row in front if drag[row] <= bound} | {0}


def test_axes_and_colour_take_any_quantity(page, document):
    page.select_option("#across", "survey:cd")
    page.select_option("#up", "margin:thickness")
    page.select_option("#colour", MOMENT)
    ids = drawn(page, "designs", "id")
    for column, key in (("x", "survey:cd"), ("y", "margin:thickness"), ("c", MOMENT)):
        known = values(document, key)
        found = [np.nan if v is None else v for v in drawn(page, "designs", column)]
        np.testing.assert_allclose(found, [known[row] for row in ids], rtol=1e-6)
    labels = page.evaluate(
        "(({below, left}) => [below[0].axis_label, left[0].axis_label])"
        "(Bokeh.documents[0].get_model_by_name('trade'))"
    )
    assert labels == ["cd", "margin of thickness"]
    span = page.evaluate(
        "(({low, high}) => [low, high])(Bokeh.documents[0].get_model_by_name('colour'))"
    )
    seen = [values(document, MOMENT)[row] for row in listed(page)]
    assert span == pytest.approx([min(seen), max(seen)])


def test_table_is_sorted_by_any_column(page, document):
    thickness = values(document, THICKNESS)
    button = page.locator(f'#designs th[data-key="{THICKNESS}"] button')
    front = [row for row in listed(page) if row]
    button.click()
    assert listed(page) == [0, *sorted(front, key=lambda row: -thickness[row])]
    button.focus()
    page.keyboard.press("Enter")
    assert listed(page) == [0, *sorted(front, key=lambda row: thickness[row])]
    assert page.get_attribute(f'#designs th[data-key="{THICKNESS}"]', "aria-sort") == "ascending"


def test_tray_holds_six_beside_the_baseline(page, document):
    page.check("#show-beaten")
    page.click("#tray-clear")
    rows = [row for row in listed(page) if row][:7]
    for row in rows:
        page.locator(f'#designs tr[data-id="{row}"] button').click()
    cards = page.eval_on_selector_all("#tray .card", "all => all.map((c) => Number(c.dataset.id))")
    assert cards == [0, *rows[:6]]
    assert "holds 6 designs" in page.inner_text("#status")
    assert len(drawn(page, "outline_lines", "xs")) == 7
    looks = list(
        zip(
            drawn(page, "outline_lines", "color"), drawn(page, "outline_lines", "dash"), strict=True
        )
    )
    assert len({color for color, _ in looks}) == len({dash for _, dash in looks}) == 7
    flown = {document["designs"]["id"][int(k)] for k in document["flown"]}
    assert len(drawn(page, "pressure_upper_lines", "xs")) == len(flown & set(cards))
    heads = page.locator("#differences thead th").all_inner_texts()
    assert [int(re.search(r"#(\d+)", head)[1]) for head in heads[2:]] == rows[:6]


def test_differences_are_those_of_the_recorded_numbers(page, document):
    page.click("#tray-clear")
    row = min(of_kind(document, "front") - {0})
    page.locator(f'#designs tr[data-id="{row}"] button').click()
    cells = page.locator("#differences tbody tr").nth(1).locator("td").all_inner_texts()
    lift = values(document, LIFT)
    assert float(cells[0]) == pytest.approx(lift[0], rel=1e-3)
    here, step, *_ = cells[1].replace("\u2212", "-").replace(",", "").split()
    assert float(here) == pytest.approx(lift[row], rel=1e-3)
    assert float(step) == pytest.approx(lift[row] - lift[0], rel=1e-2)


def test_curves_follow_condition_layer_and_nose(page, document):
    flown = document["flown"]["0"]
    page.select_option("#condition", "loiter")
    layer = unpacked(flown["loiter"]["upper"])
    x = page.evaluate(f"Array.from(({NAMED})('pressure_upper_lines').data.xs[0])")
    np.testing.assert_allclose(x, layer[document["layer_columns"].index("x")], rtol=1e-6)
    page.select_option("#layer", "theta")
    theta = page.evaluate(f"Array.from(({NAMED})('layer_upper_lines').data.ys[0])")
    np.testing.assert_allclose(theta, layer[document["layer_columns"].index("theta")], rtol=1e-6)
    page.select_option("#nose", "contaminated")
    swept = unpacked(flown["loiter"]["contaminated"])
    lift = page.evaluate(f"Array.from(({NAMED})('lift_lines').data.ys[0])")
    found = np.array([np.nan if v is None else v for v in lift], dtype=float)
    np.testing.assert_allclose(found, swept[1], rtol=1e-6)


def test_shortlist_is_exported_with_notes_and_read_again(opened, document, tmp_path):
    page = opened(document)
    page.click("#tray-clear")
    rows = sorted(of_kind(document, "front") - {0})[:2]
    for row in rows:
        page.locator(f'#designs tr[data-id="{row}"] button').click()
    page.locator(f'.card[data-id="{rows[1]}"] textarea').fill("<b>thick</b> enough?")
    box = page.locator('input[aria-label="thickness, least"]').first
    box.fill("10.5")
    box.press("Enter")
    with page.expect_download() as download:
        page.click("#export")
    path = tmp_path / download.value.suggested_filename
    download.value.save_as(path)
    found = json.loads(path.read_text())
    assert path.name == "paper-plane-shortlist.json"
    assert [one["id"] for one in found["designs"]] == rows
    assert found["designs"][1]["note"] == "<b>thick</b> enough?"
    assert found["digest"] == document["digest"]
    assert found["limits"] == [{"key": THICKNESS, "low": 10.5, "high": None}]
    lift = values(document, LIFT)
    assert found["designs"][0]["objectives"][LIFT] == pytest.approx(lift[rows[0]], rel=1e-6)
    page.click("#tray-clear")
    page.set_input_files("#import", path)
    page.wait_for_selector(f'.card[data-id="{rows[1]}"]')
    assert page.input_value(f'.card[data-id="{rows[1]}"] textarea') == "<b>thick</b> enough?"
    other = tmp_path / "other.json"
    other.write_text(json.dumps(found | {"digest": "0"}))
    page.set_input_files("#import", other)
    page.wait_for_function("document.getElementById('status').textContent.includes('another run')")


def test_hostile_names_do_nothing(opened, document, hostile_document):
    page = opened(hostile_document)
    assert page.evaluate("window.harmed") is None
    assert page.inner_text("h1") == hostile_document["study"]
    assert len(listed(page)) == len(of_kind(document, "front") | {0})


def test_nothing_feasible_shows_the_least_violated(opened, tight_document):
    page = opened(tight_document)
    assert page.is_checked("#show-missed")
    violation = dict(
        zip(tight_document["designs"]["id"], tight_document["designs"]["violation"], strict=True)
    )
    rows = listed(page)
    assert rows[0] == 0
    assert len(rows) > 3
    assert [violation[row] for row in rows[1:]] == sorted(violation[row] for row in rows[1:])
    assert "No design keeps: cl max, slow." in page.inner_text("#how")


def test_empty_run_has_a_page(opened, documented, recorder, tmp_path):
    page = opened(documented(recorder(tmp_path / "nothing.h5", generations=0)))
    assert "Nothing has been evaluated yet." in page.inner_text("#how")
    assert page.is_hidden("#trade")


def test_three_designs_are_shown_as_well(opened, documented, recorder, tmp_path, monkeypatch):
    monkeypatch.setattr("recorded_run.POPULATION", 3)
    page = opened(documented(recorder(tmp_path / "tiny.h5", generations=1)))
    for kind in ("beaten", "missed"):
        if page.is_enabled(f"#show-{kind}"):
            page.check(f"#show-{kind}")
    assert len(listed(page)) == 3
    others = [row for row in listed(page) if row]
    for row in others:
        button = page.locator(f'#designs tr[data-id="{row}"] button')
        if "out" not in button.inner_text():
            button.click()
    assert len(drawn(page, "outline_lines", "xs")) == 3


def test_page_is_usable_within_three_times_an_empty_plot(browser, large_document, tmp_path):
    """400 designs against one line: time until both can be used, in turns; the least of each."""
    pages = {"empty": tmp_path / "empty.html", "ours": tmp_path / "page.html"}
    plot = figure()
    plot.line([0, 1], [0, 1])
    pages["empty"].write_text(file_html(plot, INLINE, "empty"))
    write_page(large_document, pages["ours"])
    there = {
        "empty": "window.Bokeh?.documents[0]?.is_idle",
        "ours": "document.body?.dataset.ready",
    }
    times = {"empty": [], "ours": []}
    for _ in range(5):
        for name, path in pages.items():
            page = browser.new_page()
            started = time.perf_counter()
            page.goto(path.as_uri(), wait_until="commit")
            page.wait_for_function(there[name])
            times[name].append(time.perf_counter() - started)
            page.close()
    assert min(times["ours"]) < 3.0 * min(times["empty"]), times
