"""The starter study that `sectionwright template` writes: it loads as it stands."""

from __future__ import annotations

SCHEMA_FILE = "study.schema.json"
"""What the first lines of a starter study tell an editor to look for beside it."""

_TEMPLATE = f"""\
# yaml-language-server: $schema={SCHEMA_FILE}
# $schema={SCHEMA_FILE}
# An editor completes and checks this file with: sectionwright schema > {SCHEMA_FILE}
#
# A study: a section for a small survey aircraft at its three flight states, efficient at the
# slower two and with little nose-down moment. Every number takes a unit, or is in SI units
# without one. studies/README.md lists every key.

study: first-look                # also the name of the archive: results/first-look.h5

section:
  shape: cst                     # or bezier
  coefficients: {{upper: 6, lower: 6}}     # 4 to 13 a side
  baseline: naca:2412            # or a file of x y coordinates; the search starts around it
  freedom: 0.12                  # how far each coefficient may move from the baseline's fit
  # bounds: {{upper_1: [0.12, 0.25]}}      # single coefficients in place of freedom
  trailing_edge: 0.8 mm          # as built; a fraction of the chord works too: 0.4 %

chord: 212 mm

air: {{altitude: 500 m, warmer_than_standard: 10 K}}
# water: {{temperature: 15 degC, salt: true}}      # in place of air

craft: {{mass: 6.0 kg, wing_area: 0.55 m^2}}       # turns a speed into a lift coefficient

n_factor: 9                      # when laminar flow becomes turbulent; or turbulence: 0.07 %

conditions:                      # as many flight states as matter, by names of your own
  survey: {{speed: 18 m/s}}        # level flight; or lift: 0.6, or alpha: 4 deg
  loiter: {{speed: 14.5 m/s}}
  slow: {{speed: 12.5 m/s, lift: maximum}}         # the peak of the lift curve
  # dirty: {{speed: 18 m/s, transition: {{upper: 5 %, lower: 10 %}}}}      # tripped by insects

objectives:                      # two or more; the result is the trade between them
  - maximise: lift_to_drag
    at: {{survey: 0.7, loiter: 0.3}}       # weights that add up to 1, or one condition
  - minimise: nose_down_moment
    at: survey

constraints:                     # what every design of the front keeps
  - {{quantity: thickness, min: 10 %}}
  - {{quantity: depth, at: 30 %, min: 17 mm}}      # room for a spar, at the real chord
  - {{quantity: cl_max, condition: slow, min: 1.20}}

search:
  algorithm: nsga3               # or nsga2, sms-emoa
  population: 40
  generations: 30
  seed: 1                        # the same seed gives the same archive, bit for bit
"""


def template_text() -> str:
    """Return a commented study that loads and runs as it stands."""
    return _TEMPLATE
