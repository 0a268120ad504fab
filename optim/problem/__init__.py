"""SectionFlow -> objectives and constraints: what a study wants, asked of one design at a time.

`problem` is the door: ``Problem.from_study(study).evaluate(design)``. Behind it `conditions` turns
flight states into operating points, `design_space` the baseline into variables and bounds,
`quantities` flows into numbers, `judge` numbers into objectives, margins and what a search is told,
and `grading` failures into something a search can follow. `pareto` and `reachable` stand beside.
"""
