"""The page as one text: sections from the templates, plots, document, scripts and style.

Every name from a study passes through the templates, which escape it, or travels in the document,
whose script writes text and never markup.
"""

from __future__ import annotations

import json
from importlib.resources import files
from pathlib import Path

from bokeh.embed import file_html
from bokeh.resources import Resources
from jinja2 import Environment, PackageLoader, StrictUndefined

from optim.errors import Fault, InputError
from optim.report.fields import Document
from optim.report.page.document import plain_data
from optim.report.page.plots import later_plots, plots

SCRIPTS = (
    "unpack", "state", "numbers", "elements", "designs", "axes", "limits", "visible", "selection",
    "table", "marks", "tray", "looks", "curves", "differences", "shortlist", "later", "begin",
)  # fmt: skip
"""What the browser runs, one job a file, in this order."""


def page_html(document: Document) -> str:
    """Return the page.

    Parameters
    ----------
    document : dict
        As `optim.report.page.document.page_document` returns it.
    """
    environment = Environment(
        loader=PackageLoader("optim.report.page", "template"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters |= {"per_cent": _per_cent, "short": _short, "duration": _duration}
    stated = plain_data(document)
    text: str = file_html(
        plots(len(document["bounds"])),
        Resources(mode="inline", log_level="error"),
        title=f"{document['study']} - Sectionwright",
        template=environment.get_template("page.html"),
        template_variables={
            "page": stated,
            "data": _embedded(stated),
            "later": _embedded(later_plots()),
            "style": _part("style", "page.css"),
            "script": "\n".join(_part("script", f"{name}.js") for name in SCRIPTS),
        },
    )
    return text


def write_page(document: Document, path: Path) -> int:
    """Write the page and return its size [bytes].

    Raises
    ------
    InputError
        If the file cannot be written.
    """
    text = page_html(document).encode("utf-8")
    try:
        path.write_bytes(text)
    except OSError as error:
        message = f"the page cannot be written ({error.strerror}); accepted is another --output."
        raise InputError([Fault(message, file=str(path))]) from error
    return len(text)


def _part(folder: str, name: str) -> str:
    return files("optim.report.page").joinpath(folder, name).read_text(encoding="utf-8")


def _embedded(stated: Document) -> str:
    """Return a document as JSON that cannot end the script element it stands in."""
    text = json.dumps(stated, allow_nan=False, separators=(",", ":"))
    for sign in "<>&":
        text = text.replace(sign, f"\\u{ord(sign):04x}")
    return text


def _per_cent(share: float | None) -> str:
    return "-" if share is None else f"{100.0 * share:.3g} %"


def _short(value: float | None, digits: int = 4) -> str:
    return "-" if value is None else f"{value:.{digits}g}"


def _duration(seconds: float) -> str:
    minutes = round(seconds / 60.0)
    if minutes < 1:
        return f"{seconds:.0f} s"
    return f"{minutes} min" if minutes < 60 else f"{minutes // 60} h {minutes % 60} min"
