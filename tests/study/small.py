"""A small study of an invented cell: an upper bundle that learns, a lower one that fires it.

One dendrite carries both; the lower bundle also excites a damper that inhibits the soma.
"""

from __future__ import annotations

from plastic.study.file import parse_study
from plastic.study.model import Study

SMALL = """\
title = "Two bundles on a branch"
seed = 3
cells = 4
[cell]
rest = "-68 mV"
threshold = { mean = "-57 mV", sd = "1.5 mV" }
reset = "-74 mV"
refractory = "3 ms"
rest_of_cell = "5 nS"
membrane = { resistance = "15 kohm cm^2", capacitance = "1 uF/cm^2", axial = "150 ohm cm" }
[cell.dendrite.branch]
length = "300 um"
diameter = "2 um"
[input.upper]
location = { on = "branch", at = "240 um" }
baseline_epsp = { target = "8 mV", cv = 0.1 }
release = { sites = 60, probability = 0.5, highest = 0.9, quantum = "0.3 nS", depletion = "200 ms" }
receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }
neck = "100 Mohm"
added_contact = { on = "branch", at = "40 um", delay = "1 ms" }
[input.lower]
location = { on = "branch", at = "60 um" }
baseline_epsp = { target = "18 mV", cv = 0.1 }
release = { sites = 80, probability = 0.4, highest = 0.9, quantum = "0.8 nS" }
receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }
[input.damper]
location = { on = "soma" }
driven_by = [ { input = "lower", delay = "2 ms" } ]
release = { sites = 1, probability = { mean = 1, cv = 0 }, quantum = "10 nS", quantum_cv = 0 }
receptor = { reversal = "-75 mV", rise = "0.5 ms", decay = "7 ms" }
[protocol.pairs]
pattern = { upper = ["0 ms"], lower = ["10 ms"] }
repeat = { times = 12, every = "5 s" }
baseline = "2 min"
follow_up = "6 min"
test = { inputs = ["upper"], every = "20 s" }
[compare]
learns = ["upper"]
rules = ["pair_timing"]
routes = ["quantal_size", "release_probability"]
criterion = { input = "upper", alone_fires = 0.5 }
"""

#: changes that make every cell the nominal one
UNIFORM = (
    ('sd = "1.5 mV"', 'sd = "0 mV"'),
    ('rest_of_cell = "5 nS"', 'rest_of_cell = "5 nS"\ninput_resistance_cv = 0'),
    ('target = "8 mV", cv = 0.1', 'target = "8 mV", cv = 0'),
    ('target = "18 mV", cv = 0.1', 'target = "18 mV", cv = 0'),
    ("probability = 0.5", "probability = { mean = 0.5, cv = 0 }"),
    ("probability = 0.4", "probability = { mean = 0.4, cv = 0 }"),
    ("cells = 4", "cells = 1"),
    ("[compare]", "[compare]\namplitude_cv = 0"),
)
#: the controls of a study, all of them
CONTROLS = (
    "[compare]",
    '[compare]\ncontrols = ["unpaired", "reversed", "test_pulses_only", "inhibition_blocked"]',
)
#: every rule that a spiking cell can be given
RULES = (
    'rules = ["pair_timing"]',
    'rules = ["pair_timing", { use = "triplet_timing", set = "hippocampal_minimal" }, '
    '"sliding_threshold"]',
)


def text(*changes: tuple[str, str]) -> str:
    """Return the text of the study with each old text replaced by a new one."""
    made = SMALL
    for old, new in changes:
        assert old in made, old
        made = made.replace(old, new, 1)
    return made


def study(*changes: tuple[str, str], seed: int | None = None, cells: int | None = None) -> Study:
    """Return the study with each old text replaced by a new one."""
    return parse_study(text(*changes), seed=seed, cells=cells)


def routes(entry: str) -> tuple[str, str]:
    """Return the change that compares these routes, such as ``'"spine_neck"'``."""
    return 'routes = ["quantal_size", "release_probability"]', f"routes = [{entry}]"
