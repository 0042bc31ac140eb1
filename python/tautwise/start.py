"""The commented project file from which a user begins."""

from __future__ import annotations

START_TEXT = """\
# A line over a small inlet, invented. Change every value to your own; run `tautwise window` on it any time.
# Quantities are texts with a unit, SI or US: "16 mm", "0.63 in", "11.9 N/m", "0.815 lbf/ft", "-5 degC", "23 degF".

format = "tautwise 1"
title  = "Inlet crossing"

# rules = ["nesc-250b-heavy"]         # conditions and limits of published rules: `tautwise rules` lists them

[line]                                # bare, per metre of unstretched line
# size = "A475 1/2 in EHS"            # or a size of the catalogue, `tautwise sizes`; what is given here overrides it
name = "19-wire strand, 16 mm"
diameter = "16 mm"
area = "150 mm^2"
weight = "11.9 N/m"                   # or mass = "1.21 kg/m"
modulus = "150 GPa"                   # or stiffness = "22.5 MN" (modulus times area); or a stress-strain curve:
                                      # [line.curve], or [line.core] and [line.outer] (initial, final_modulus, creep)
                                      # Ropes: bedding_in = "0.1 %"; creep_strain = "0.02 %", or creep_law
expansion = "11.5e-6 / K"
breaking_strength = "190 kN"

[ground]                              # station along the route, elevation; or profile = "ground.csv"
points = [
    ["0 m", "6.0 m"],
    ["90 m", "4.0 m"],
    ["120 m", "0.5 m"],
    ["180 m", "0.5 m"],
    ["215 m", "5.0 m"],
    ["300 m", "7.0 m"],
]

[[crossing]]                          # what the line must keep clear of
name = "channel"
from = "120 m"
to = "180 m"
top = "3.0 m"                         # elevation of the highest water

[[support]]                           # at least two, in the order of their stations
name = "West mast"
station = "0 m"                       # on a route that turns: east and north instead, of every support
height = "15 m"                       # above the ground; or elevation = "21 m"
hold = "anchor"                       # anchor: the line ends here; stiffness_along = "500 kN/m" and
                                      # the like, where it yields. In between also: hanger (length, weight;
                                      # form = "V" with its spread), sheave (length, weight, friction),
                                      # post (stiffness_along, stiffness_across)
capacity = { along = "90 kN", down = "30 kN" }

[[support]]
name = "East mast"
station = "300 m"
height = "14 m"
hold = "anchor"

[stringing]
temperature = "15 degC"               # bare line, no wind; the temperature of the natural length
horizontal_tension = "20 kN"          # the pull. Or instead: tension = { support = "West mast", value = "21 kN" },
                                      # sag = { from = "West mast", to = "East mast", value = "6.7 m" },
                                      # natural_length = "300.1 m". `tautwise window` searches the pull by itself.
tolerance = "3 %"                     # how well the crew can keep it
# method = "over sheaves"             # pulled in over sheaves, then clamped; `tautwise sheet` tells the crew where
# clip = "where it lies"              # clamped where the sheaves let it rest; or "plumb", the default
# end_allowance = "2 m"               # added to what is cut, at each end of a section

# [history]                           # what the line has met before a condition in the state final or after creep,
# conditions = ["ice and wind"]       # each met as strung; all of them unless named
# creep_condition = "hot"             # the everyday one; bare, at the stringing temperature, unless named

[[condition]]
name = "hot"
temperature = "60 degC"

[[condition]]
name = "cold"
temperature = "-30 degC"

[[condition]]
name = "ice and wind"
temperature = "-5 degC"                                    # state = "final" | "after creep": after a [history]
                                                           # (default: after every condition, creep as strung)
ice = { thickness = "10 mm", density = "900 kg/m^3" }     # radial thickness
wind = { pressure = "300 Pa", drag = 1.0 }                # or speed = "22 m/s"; square across the line
# load = [ { force = "500 N", at = "150 m" }, { per_length = "20 N/m", from = "40 m", to = "80 m" } ]
# Also: { per_length = "20 N/m", per_length_to = "5 N/m", from = "40 m", to = "80 m" }, a ramp;
# { per_run = "200 N/m", spans = ["West mast"] }, per horizontal metre, on spans named by their first support;
# { force = "2 kN", carriage = "free" }, which rolls to its lowest place, or carriage = "held" with at;
# span = "West mast" beside it names the span where a free one rolls.
# factors = { weight = 1.0, ice = 1.2, wind = 1.5 }        # each action times its factor
# In ice: pattern = [1, 0] for every second span shed, or { beyond = "West mast", share = 0.5 },
# or before = "East mast" instead. In wind: bearing = "225 deg", from where it blows, where supports are given
# by east and north; with speed also altitude = "1200 m", for the density of the air.
# A hanger's wind_area is the drag area of its string.

[[mark]]                              # a place on the line whose position is reported
name = "marker ball"
at = "150 m"

[[limit]]
id = "channel-clearance"
kind = "clearance"
over = "channel"                      # or "ground", the default
least = "6.5 m"

[[limit]]
id = "ground-clearance"
kind = "clearance"
least = "5 m"

[[limit]]
id = "strength"
kind = "tension"
share = 0.4                           # of breaking_strength; or most = "76 kN"

[[limit]]
id = "west-mast"
kind = "support_load"
supports = ["West mast"]
direction = "along"
share = 0.8                           # of capacity; or most = "72 kN"

# Other kinds: uplift (least), swing (most = "35 deg", for hangers), sag (most, least), slope (most = "12 %"),
# catenary_constant (most = "1800 m"), spacing (least = "1.2 m" from the line of other = "upper_wire.taut.toml", a file
# in this folder; other_condition = "iced", or other_conditions = { hot = "iced" }; shift = { offset = "1.5 m" }).
# Limits on spans take spans = ["West mast"], the support where a span starts; every limit takes conditions = ["hot"],
# clause = "...", why = "...".
# include = "conditions.toml", above beside format, reads tables of another file in this folder as if they stood here.
"""


def start_text() -> str:
    """A project file with a comment on each part; it loads as it stands, and its window is open.

    >>> start_text().count("[[support]]")
    2
    """
    return START_TEXT
