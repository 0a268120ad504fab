"""An archive, or flows asked for by hand -> what the designer sees: documents, figures, files.

``front.py`` has the non-dominated designs of a run, ``rejudged.py`` the same run by the limits of
another study; ``analysis.py`` flies sections that are asked for by hand; ``preview.py`` says what a
study comes to before it is run; ``design_record.py`` has all that is recorded of one design,
``export.py`` writes its section as built and ``design_sheet.py`` prints it; ``comparison.py`` sets
runs, designs, sections and measurements side by side; ``figures.py`` and ``front_figure.py`` draw.
A document is plain data with the field names of the command's JSON: angles in degrees, lengths in
chords, not-a-number where something is absent.

Import the modules by name: this door loads nothing.
"""
