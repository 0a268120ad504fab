"""A run -> one HTML page that needs nothing else: `sectionwright report`.

::

    run, judgement -> shown, choice -> document (plain data) -> plots, template -> page

``document.py`` is everything that the page states, as data that JSON can hold: how the run went
(``health.py``), which designs are shown (``shown.py``), which of them are marked and flown again
(``choice.py``), every quantity of theirs (``columns.py``), their contours (``outlines.py``) and the
flows of the finalists (``flown.py``). ``plots.py`` makes the empty plots, which the browser fills
from the document; ``html.py`` writes the page. The folders beside them hold what the browser
reads: ``template`` the sections of the page, ``style`` its looks, ``script`` one job a file.

Import the modules by name: this door loads nothing.
"""
