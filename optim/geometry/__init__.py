"""Design variables, a NACA number or the points of a file -> Section.

Chord 1, x in chords from the nose, y up, angles in radians. A contour runs from the upper trailing
edge around the nose to the lower one, and is one exact curve in a parameter t from -1 to 1 with x
about t**2; every measure is taken on that curve.

section.Section, section.section_from_coordinates
    The contour with its measures; points of a file -> a contour on its chord line.
naca.naca_section
    "2412", "0012-64", "23012", "23112" as published.
cst.Cst, bezier.Bezier
    The parameterisations, behind parameterisation.Parameterisation: names, bounds, section.
fitting.fit
    The design closest to a section, with its normal deviations.
validity.faults
    Why a contour is no section, and where.
spacing.panel_nodes
    Cosine-spaced ends of panels on the exact curve.
"""
