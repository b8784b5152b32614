"""The starter study: what `plastic new` writes, commented, small, and ready to run."""

from __future__ import annotations

STARTER = """\
# A starter study for plastic. Scenario and numbers are invented; change them to your cell.
# Quantities are text with a unit ("10 ms", "0.3 nS"); plain numbers have none.
# Every key is checked: a misspelt one is answered with the nearest that exists.

title = "A first study"        # what tables and figures are headed with
seed = 1                       # fixes the cells and every quantum they release
cells = 20                     # simulated cells, not animals; each differs from the next
dt = "0.1 ms"                  # step: at most a fifth of the fastest time constant

[cell]
spikes = "leaky"               # a spike when the soma reaches threshold, then a reset
rest = "-68 mV"                # resting potential
threshold = { mean = "-55 mV", sd = "3 mV" }  # of the spike; the spread is over cells
reset = "-75 mV"               # where the soma restarts; above rest, the dendrite fires it again
refractory = "3 ms"            # during which it cannot fire again
rest_of_cell = "5 nS"          # conductance of the soma and of all that is not written out
input_resistance_cv = 0.3      # spread of the input resistance over cells
membrane = { resistance = "15 kohm cm^2", capacitance = "1 uF/cm^2", axial = "150 ohm cm" }

[cell.dendrite.apical]         # as many dendrites as you like, or none
length = "350 um"              # path length; the far end is sealed
diameter = "2 um"              # uniform

[input.weak]                   # the pathway that learns
location = { on = "apical", at = "250 um" }    # path distance from the soma
baseline_epsp = { target = "7 mV", cv = 0.3 }  # sites are recruited in each cell to this EPSP
receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }

[input.weak.release]           # binomial; without short-term dynamics paired pulses are equal
sites = 50
probability = 0.4              # may be { mean = 0.4, cv = 0.2 }
highest = 0.9                  # beyond which no learning brings the probability
quantum = "0.3 nS"             # conductance of one quantum at its peak
quantum_cv = 0.3
depletion = "200 ms"           # sites refill with this time constant
facilitation = "50 ms"         # the probability grows with each spike and falls back with this

[input.strong]                 # the pathway that fires the cell
location = { on = "apical", at = "60 um" }
release = { sites = 80, probability = 0.4, highest = 0.9, quantum = "0.8 nS", quantum_cv = 0.3 }
receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }

[input.brake]                  # feed-forward inhibition, driven by the strong pathway
location = { on = "soma" }
driven_by = [ { input = "strong", delay = "2 ms" } ]
release = { sites = 1, probability = { mean = 1, cv = 0 }, quantum = "15 nS", quantum_cv = 0 }
# the reversal may also come from concentrations: chloride = { inside = "7 mM", outside = "130 mM" }
# or potassium = { ... }, with temperature = "32 degC"; or, with shunt = true, from the rest
receptor = { reversal = "-75 mV", rise = "0.5 ms", decay = "7 ms" }

[protocol.bursts]              # one weak volley before a burst of three strong ones
use = "pairing"                # others: train, test_pulses, spike_times
pattern = { weak = ["0 ms"], strong = ["10 ms", "20 ms", "30 ms"] }
repeat = { times = 60, every = "10 s" }        # from the start of one repeat to the next
baseline = "10 min"            # test pulses before
follow_up = "30 min"           # and after
test = { inputs = ["weak"], every = "30 s" }   # test pulses are real events

[compare]
learns = ["weak"]              # inputs that change
rules = ["pair_timing", { use = "triplet_timing", set = "hippocampal_minimal" }]
routes = ["release_probability", "quantal_size", "dendrite_width"]
match = "same_factor"          # or "sensitivity": routes matched by their effect on the EPSP
at_ceiling = "stop"            # or "hidden": the weight goes on while its route is at its limit
controls = ["unpaired", "test_pulses_only"]    # others: reversed, inhibition_blocked
criterion = { input = "weak", alone_fires = 0.5 }  # learned: it fires the cell half the time
"""
