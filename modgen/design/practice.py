"""Design practice as named figures, each with where it comes from.

These are limits and preferences of the design method, not part values: values come from the catalogue.
"""

from __future__ import annotations

#: Headroom that must be left between the signal and what the amplifier guarantees [V]. Common practice, no source.
LEAST_HEADROOM = 0.25
#: Share of its power rating that a resistor may take while an output is shorted: a fault that lasts as long as
#: the plug is in, yet no normal state. Common practice, no source.
SHORT_DERATING = 0.65
#: What an electrolytic stands in reverse [V]: Vishay 038 RSU, document 28309.
MOST_REVERSE = 1.0
#: What a shorted output should not exceed where there is a choice: every plug shorts the socket on its way in, and
#: more than this heats the package and pulls at the rail [A]. Common practice, no source.
MOST_SHORT = 25e-3
#: Least rating of a diode in a supply lead: reservoirs charging and a shorted ribbon pass through it [A].
#: Common practice, no source.
LEAST_RECTIFIER = 0.5
#: Steps in which candidates are told apart before the next criterion decides: finer differences than these
#: are not worth a dearer part. Error in cents, cost in the catalogue's currency, area in mm2. Our choice.
ERROR_STEP, COST_STEP, AREA_STEP = 0.1, 0.001, 1.0
#: Share of a current or power rating that a design uses. Common practice, no source.
CURRENT_DERATING = 0.5
#: Isolating resistor ahead of a microfarad load: no amplifier datasheet supports the bare load [ohm].
#: Common practice, no source.
LEAST_ISOLATING = 100.0
MOST_ISOLATING = 100e3
#: Greatest series resistance at a signal input or in a feedback path; beyond it noise and stray
#: capacitance count, below it a JFET's bias does not [ohm]. Common practice, no source.
MOST_SERIES = 10e3
#: Share of the offset budget that bias through one such resistor may take. Our allocation.
BIAS_SHARE = 0.1
#: Shares of the scale budget that loading of the source may take, each a candidate; the last only when a quarter
#: cannot be had, as with many chained inputs. Our allocation.
SOURCE_SHARES = (0.25, 0.125, 0.0625)
MOST_SOURCE_SHARE = 0.6
#: Terminators [ohm]: below, sources are loaded; above, dirt on the board counts. Common practice, no source.
LEAST_TERMINATOR = 100e3
MOST_TERMINATOR = 10e6
#: Output resistors [ohm]: enough to isolate a cable, little enough to drive one. Common practice, no source.
LEAST_OUTPUT = 100.0
MOST_OUTPUT = 1e3
#: Cable and input capacitance an output must stay stable into: 20 m of patch cable at 100 pF/m [F].
#: Common practice, no source.
CABLE_CAPACITANCE = 2e-9
#: Factor between the feedback time constant and the output's own. Common practice, no source.
COMPENSATION_FACTOR = 2.0
#: Forward drop of a junction that clamps [V]. Common practice, no source.
JUNCTION = 0.6
#: Reservoir on each rail: this much, and as much again for every so many packages [F]. Common practice, no source.
RESERVOIR = 10e-6
RESERVOIR_PACKAGES = 8
#: Decoupling of each supply pin [F]. Common practice, no source.
DECOUPLING = 100e-9
#: Guaranteed longest glide over what was asked: beyond this the rest of the travel is wasted. Our choice.
OVERSIZE = 1.5
#: Dielectrics fit for a glide capacitor, best first: insulation and absorption decide (see the catalogue's
#: sources). Class 2 ceramic is not in it: piezoelectric and voltage dependent.
GLIDE_DIELECTRICS = ("film-pp", "film-pps", "film-pet", "c0g")
#: Taken only when none of the above reaches the range, and never for pitch: their leakage is an offset.
GLIDE_LEAKY = ("electrolytic", "bipolar-electrolytic")
