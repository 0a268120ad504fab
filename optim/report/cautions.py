"""What is said beside every result: how far to trust it, and what no computed flow replaces."""

from __future__ import annotations

CAUTION = (
    "Caution: computed flow about a section, no substitute for tunnel and flight test, "
    "certification or a licensed engineer; section data are not wing data."
)
"""Printed with every result that a person reads."""

CAUTION_LIFT = (
    "Least certain are maximum lift and what is past it, long bubbles and very low Reynolds "
    "numbers; the order of maximum lifts is more trustworthy than their values."
)
"""Printed where maximum lift is shown."""

CAUTION_FRONT = (
    "An optimiser exploits the errors of its model: a design better than every measured section "
    "is a warning. Roughness, gaps, ice and three-dimensional effects are not modelled."
)
"""Printed with every front."""

NOT_MODELLED = "Not modelled: roughness, gaps, rain, ice, unsteady and three-dimensional effects."
"""Printed with every analysis."""

BANDS = (
    "Behind ± stands the band that holds about four in five of the published measurements of "
    "sections left out of its fit; a section unlike all of those may be further off."
)
"""Printed wherever bands are shown."""

SECOND_SOLUTION = (
    "second_solution: the equations have another solution at that condition, whose drag differs by "
    "more than 0.5 %; which of the two a real flow takes depends on how it gets there."
)
"""Printed where an analysis found a second solution."""
