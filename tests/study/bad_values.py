"""Bad input, part 1: keys, numbers, types.

Every case is a small edit of the starter study and what the refusal must say: old text, new
text, and parts of the message (key path, value, what is allowed).
"""

from __future__ import annotations

Case = tuple[str, str, list[str]]

VALUES: dict[str, Case] = {
    # keys
    "unknown key at the top": (
        "cells = 20", "cels = 20",
        ["study.toml: no key is called 'cels'", "did you mean 'cells'?", "compare"],
    ),
    "unknown key in a table": (
        'rest = "-68 mV"', 'rests = "-68 mV"',
        ["study.toml: cell: no key is called 'rests'; did you mean 'rest'?", "refractory"],
    ),
    "unknown key in a dendrite": (
        'diameter = "2 um"', 'diamter = "2 um"',
        ["cell.dendrite.apical: no key", "'diamter'; did you mean 'diameter'?"],
    ),
    "unknown key in a protocol": (
        "repeat = {", "repeats = {",
        ["protocol.bursts: no key is called 'repeats'; did you mean 'repeat'?"],
    ),
    "missing key": (
        'rest = "-68 mV"', "",
        ["study.toml: cell.rest: missing; a potential such as '-68 mV'"],
    ),
    "missing table": ("[compare]", "[compared]", ["no key is called 'compared'", "'compare'"]),
    "missing kinetics": (
        'rise = "0.5 ms", decay = "7 ms"', 'rise = "0.5 ms"',
        ["input.brake.receptor.decay: missing; a time such as '10 ms'"],
    ),
    # units and numbers
    "wrong dimension": (
        'refractory = "3 ms"', 'refractory = "2 mV"',
        ["study.toml: cell.refractory = '2 mV': in mV, not a time (write it like '10 ms')"],
    ),
    "no unit": ('rest = "-68 mV"', "rest = -68", ["cell.rest = -68: without a unit", "'-68 mV'"]),
    "unknown unit": ('rest = "-68 mV"', 'rest = "-68 mW"', ["cell.rest = '-68 mW': in mW, not"]),
    "no quantity": ('rest = "-68 mV"', 'rest = "low"', ["cell.rest = 'low': no quantity"]),
    "decimal comma": (
        'refractory = "3 ms"', 'refractory = "2,5 ms"', ["cell.refractory = '2,5 ms': no quantity"],
    ),
    "NaN": ('rest = "-68 mV"', 'rest = "nan mV"', ["cell.rest = 'nan mV': not a finite number"]),
    "NaN as a number": (
        "quantum_cv = 0 }", "quantum_cv = nan }",
        ["input.brake.release.quantum_cv = nan: not a finite number"],
    ),
    "infinite": (
        'length = "350 um"', 'length = "inf um"', ["apical.length = 'inf um': not a finite"],
    ),
    "true is no number": (
        "input_resistance_cv = 0.3", "input_resistance_cv = true",
        ["cell.input_resistance_cv = True: no quantity"],
    ),
    # ranges
    "negative diameter": (
        'diameter = "2 um"', 'diameter = "-2 um"',
        ["cell.dendrite.apical.diameter = '-2 um': must be above 0 um and at most 100 um; 0.2 to"],
    ),
    "probability above 1": (
        "probability = 0.4      ", "probability = 1.4      ",
        ["input.weak.release.probability = 1.4: must be above 0 and at most 1"],
    ),
    "probability above its highest": (
        "probability = 0.4      ", "probability = 0.95     ",
        ["input.weak.release.probability = 0.95: must be at most release.highest, 0.9"],
    ),
    "negative spread": (
        'sd = "3 mV"', 'sd = "-3 mV"', ["cell.threshold.sd = '-3 mV': must be at least 0 mV"],
    ),
    "no cells": ("cells = 20", "cells = 0", ["cells = 0: must be a whole number from 1"]),
    "half a cell": ("cells = 20", "cells = 20.5", ["cells = 20.5: must be a whole number"]),
    "negative seed": ("seed = 1", "seed = -1", ["seed = -1: must be a whole number from 0"]),
    "too many sites": (
        "sites = 50", "sites = 5000",
        ["input.weak.release.sites = 5000: must be above 0 and at most 2000"],
    ),
    "rest above threshold": (
        'rest = "-68 mV"', 'rest = "-50 mV"',
        ["cell.rest = '-50 mV': must be below the threshold, -55 mV"],
    ),
    "reset above threshold": (
        'reset = "-75 mV"', 'reset = "-55 mV"', ["cell.reset = '-55 mV': must be below"],
    ),
    "rise as long as the decay": (
        'rise = "0.5 ms", decay = "3 ms" }', 'rise = "3 ms", decay = "3 ms" }',
        ["input.weak.receptor.rise = '3 ms': must be shorter than the decay, 3 ms"],
    ),
    "rise longer than the decay": (
        'rise = "0.5 ms", decay = "3 ms" }', 'rise = "3.001 ms", decay = "3 ms" }',
        ["input.weak.receptor.rise = '3.001 ms': must be shorter than the decay, 3 ms"],
    ),
    "step of a picosecond": (
        'dt = "0.1 ms"', 'dt = "1e-9 ms"', ["dt = '1e-09 ms': must be at least 0.001 ms"],
    ),
    "added contact farther out": (
        "baseline_epsp = {", 'added_contact = { on = "apical", at = "340 um" }\nbaseline_epsp = {',
        ["weak.added_contact.at = '340 um': must be nearer to the soma than the input itself, 250"],
    ),
    "EPSP beyond the driving force": (
        'target = "7 mV"', 'target = "70 mV"',
        ["weak.baseline_epsp.target = '70 mV': must be below the driving force at rest, 68 mV"],
    ),
    "share of trials": (
        "alone_fires = 0.5", "alone_fires = 1",
        ["compare.criterion.alone_fires = 1: must be above 0 and below 1"],
    ),
    # where a receptor reverses
    "no reversal": (
        'reversal = "-75 mV", ', "",
        ["study.toml: input.brake.receptor: needs exactly one of reversal, chloride, potassium, "
         "shunt; it has none"],
    ),
    "two reversals": (
        'reversal = "-75 mV"', 'reversal = "-75 mV", shunt = true',
        ["input.brake.receptor: needs exactly one of", "shunt; it has reversal and shunt"],
    ),
    "a shunt that is none": (
        'reversal = "-75 mV"', "shunt = false", ["input.brake.receptor: needs", "it has none"],
    ),
    "a shunt in words": (
        'reversal = "-75 mV"', 'shunt = "yes"',
        ["input.brake.receptor.shunt = 'yes': must be true or false"],
    ),
    "concentrations without a temperature": (
        'reversal = "-75 mV"', 'potassium = { inside = "140 mM", outside = "3 mM" }',
        ["brake.receptor.temperature: missing; potassium needs a temperature such as '32 degC'"],
    ),
    "a temperature for nothing": (
        'reversal = "-75 mV"', 'reversal = "-75 mV", temperature = "32 degC"',
        ["input.brake.receptor.temperature = '32 degC': goes with chloride or potassium; "
         "with reversal, leave it out"],
    ),
    "a temperature of no cell": (
        'reversal = "-75 mV"',
        'potassium = { inside = "140 mM", outside = "3 mM" }, temperature = "46 degC"',
        ["receptor.temperature = '46 degC': must be at least 0 degC and at most 45 degC"],
    ),
    "missing concentration": (
        'reversal = "-75 mV"', 'chloride = { outside = "130 mM" }, temperature = "32 degC"',
        ["brake.receptor.chloride.inside: missing; a concentration such as '130 mM'"],
    ),
    "no chloride": (
        'reversal = "-75 mV"',
        'chloride = { inside = "0 mM", outside = "130 mM" }, temperature = "32 degC"',
        ["brake.receptor.chloride.inside = '0 mM': must be above 0 mM and at most 1000 mM; 3 to"],
    ),
    "chloride in millivolts": (
        'reversal = "-75 mV"',
        'chloride = { inside = "7 mV", outside = "130 mM" }, temperature = "32 degC"',
        ["chloride.inside = '7 mV': in mV, not a concentration (write it like '130 mM')"],
    ),
    "half of bicarbonate": (
        'reversal = "-75 mV"',
        'chloride = { inside = "7 mM", outside = "130 mM", permeability_ratio = 0.25 }, '
        'temperature = "32 degC"',
        ["receptor.chloride.bicarbonate_inside: missing; it goes with permeability_ratio"],
    ),
    "a ratio in per cent": (
        'reversal = "-75 mV"',
        'chloride = { inside = "7 mM", outside = "130 mM", bicarbonate_inside = "16 mM", '
        'bicarbonate_outside = "26 mM", permeability_ratio = 25 }, temperature = "32 degC"',
        ["receptor.chloride.permeability_ratio = 25: must be above 0 and at most 1"],
    ),
    "unknown ion": (
        'reversal = "-75 mV"', 'clorid = { inside = "7 mM", outside = "130 mM" }',
        ["input.brake.receptor: no key is called 'clorid'; did you mean 'chloride'?"],
    ),
    "concentrations of no cell": (
        'reversal = "-75 mV"',
        'potassium = { inside = "140 mM", outside = "1e-6 mM" }, temperature = "32 degC"',
        # 26.2964 mV x ln(1e-6/140)
        ["receptor.potassium: gives a reversal of -493.2 mV, which must be at least -200 mV and"],
    ),
    # types
    "text for a list": (
        'learns = ["weak"]', 'learns = "weak"',
        ["compare.learns = 'weak': must be a list in square brackets"],
    ),
    "number for a table": (
        "membrane = {", "membrane = 3 #", ["cell.membrane = 3: must be a table of keys"],
    ),
    "number for text": (
        'title = "A first study"', "title = 3", ["title = 3: must be text in quotes"],
    ),
    "text for a flag": (
        "seed = 1", 'deterministic = "yes"', ["deterministic = 'yes': must be true or false"],
    ),
    "no rules": ("rules = [", "rules = [] #", ["compare.rules = []: must not be empty"]),
    # one of several words
    "unknown spike mechanism": (
        'spikes = "leaky"', 'spikes = "bursting"', ["cell.spikes = 'bursting': must be 'leaky'"],
    ),
    "unknown match": (
        'match = "same_factor"', 'match = "fair"',
        ["compare.match = 'fair': must be 'same_factor' or 'sensitivity'"],
    ),
    "unknown ceiling": (
        'at_ceiling = "stop"', 'at_ceiling = "hide"',
        ["compare.at_ceiling = 'hide': must be 'stop' or 'hidden'"],
    ),
}  # fmt: skip
