"""The document of the small run, and pages of it as a browser opens them."""

import itertools
import json

import pytest

from optim.archive.reader import open_run
from optim.report.judgement import as_recorded
from optim.report.page.document import page_document, plain_data
from optim.report.page.words import plain


@pytest.fixture(scope="session")
def documented(closed_form):
    """Return what makes the document of a run from closed-form flows."""

    def made(path, **changes):
        with open_run(path) as run:
            return page_document(run, as_recorded(run), solver=closed_form, **changes)

    return made


@pytest.fixture(scope="session")
def document(documented, run_file):
    """The document of the small run."""
    return documented(run_file)


@pytest.fixture(scope="session")
def tight_document(documented, recorder, study_text, tmp_path_factory):
    """A document without a feasible design."""
    path = tmp_path_factory.mktemp("tight") / "tight.h5"
    return documented(recorder(path, study_text.replace("min: 1.40", "min: 4.0"), generations=2))


@pytest.fixture(scope="session")
def large_document(documented, recorder, study_text, tmp_path_factory):
    """A document of as many designs as a page holds, at five conditions, all of them feasible."""
    slow = "  slow: {speed: 12.5 m/s, lift: maximum}\n"
    more = "  dash: {speed: 25 m/s}\n  dirty: {speed: 18 m/s, transition: {upper: 5 %}}\n"
    easy = {slow: slow + more, "1.40": "0.5", "min: 10 %": "min: 7 %", "17 mm": "10 mm"}
    for found, changed in easy.items():
        study_text = study_text.replace(found, changed)
    path = tmp_path_factory.mktemp("large") / "large.h5"
    return documented(recorder(path, study_text, generations=22))


HOSTILE = (
    "<img src=x onerror=window.harmed=1>",
    "</script><script>window.harmed=1</script>",
    '"><svg onload=window.harmed=1>',
    "$$\\href{javascript:window.harmed=1}{x}$$",
    "'-alert(1)-'",
    "{{ 7 * 7 }}",
)


@pytest.fixture(scope="session")
def hostile_names():
    """Names that a careless page would take for markup, script, formula or template."""
    return HOSTILE


@pytest.fixture(scope="session")
def hostile_document(document):
    """A document whose every name is hostile."""
    changed = json.loads(json.dumps(plain_data(document)))
    names = itertools.cycle(HOSTILE)
    changed |= {"study": next(names), "baseline": next(names), "run": next(names)}
    for group in ("columns", "bounds", "limits", "conditions"):
        for one in changed[group]:
            one["label"] = plain(next(names))
    for one in changed["columns"]:
        one["group"] = one["group"] if one["group"][0].isupper() else next(names)
    changed["provenance"]["study_text"] = "\n".join(HOSTILE)
    changed["provenance"]["processor"] = next(names)
    marks = changed["designs"]["marks"]
    changed["designs"]["marks"] = {k: [*words, next(names)] for k, words in marks.items()}
    return changed
