"""The search: an evaluated generation goes in, the next designs to evaluate come out.

``algorithm.Search`` is the ask/tell loop (ask for designs, tell their values), ``sampling`` the
first generation, ``termination`` the ends of a run. Objectives are minimised and constraints are
met at zero or below; both are always finite here. Nothing in this room evaluates, records or
reads a clock, and only ``algorithm`` imports the optimisation library, so import it by name.
"""
