"""The page as text: what it weighs, what it fetches, what becomes of hostile names."""

import json
import re
from html.parser import HTMLParser

import pytest

from optim.errors import InputError
from optim.report.page.html import SCRIPTS, page_html, write_page
from optim.report.page.shown import MOST


class Elements(HTMLParser):
    """Collects every element with its attributes, and the text of scripts."""

    def __init__(self, text):
        super().__init__()
        self.found, self.texts = [], []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.found.append((tag, dict(attrs)))

    def handle_data(self, data):
        self.texts.append(data)


@pytest.fixture(scope="module")
def text(document):
    return page_html(document)


def test_every_script_is_taken_up(text):
    assert len(set(SCRIPTS)) == len(SCRIPTS)
    assert text.count("window.sectionwright = { begin }") == 1


def test_page_fetches_nothing(text):
    for tag, attributes in Elements(text).found:
        assert "src" not in attributes, (tag, attributes)
        assert tag != "link"
        if tag == "a":
            assert attributes["href"].startswith("#")


def test_page_forbids_the_browser_to_fetch(text):
    (policy,) = [
        attributes["content"]
        for tag, attributes in Elements(text).found
        if tag == "meta" and attributes.get("http-equiv") == "Content-Security-Policy"
    ]
    assert "default-src 'none'" in policy
    assert "http" not in policy


def test_document_travels_whole(text, document):
    found = re.search(
        r'<script type="application/json" id="document">(.*?)</script>', text, re.DOTALL
    )
    assert json.loads(found[1])["designs"]["id"] == document["designs"]["id"]


def test_hostile_names_make_no_element(text, hostile_document, hostile_names):
    harmless, harmed = Elements(text), Elements(page_html(hostile_document))
    kinds = [[tag for tag, _ in one.found if tag != "option"] for one in (harmless, harmed)]
    assert kinds[0] == kinds[1]
    assert hostile_names[0] in "".join(harmed.texts)
    assert not [a for _, attributes in harmed.found for a in attributes if a.startswith("on")]


def test_page_of_four_hundred_designs_is_small(large_document, tmp_path):
    """400 designs at five conditions, with the layers of nine."""
    assert len(large_document["designs"]["id"]) == MOST
    assert len(large_document["conditions"]) == 5
    assert len(large_document["flown"]) >= 8
    assert write_page(large_document, tmp_path / "large.html") < 6_000_000


def test_page_that_cannot_be_written_is_refused(document, tmp_path):
    with pytest.raises(InputError, match="another --output"):
        write_page(document, tmp_path / "no" / "page.html")
