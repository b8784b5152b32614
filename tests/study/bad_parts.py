"""Bad input, part 2: names, places, times, what does not fit.

Every case is a small edit of the starter study and what the refusal must say: old text, new
text, and parts of the message (key path, value, what is allowed).
"""

from __future__ import annotations

Case = tuple[str, str, list[str]]

PARTS: dict[str, Case] = {
    # names
    "unknown rule": (
        '"pair_timing"', '"pair_timng"',
        ["compare.rules[0]: no rule is called 'pair_timng'; did you mean 'pair_timing'?",
         "triplet_timing"],
    ),
    "unknown rule in a table": (
        'use = "triplet_timing"', 'use = "triple_timing"',
        ["compare.rules[1].use: no rule", "did you mean 'triplet_timing'?"],
    ),
    "unknown parameter set": (
        "hippocampal_minimal", "hippocampal",
        ["compare.rules[1].set: no parameter set is called 'hippocampal'", "hippocampal_full"],
    ),
    "a parameter set that is no name": (
        '"hippocampal_minimal"', "[1]", ["compare.rules[1].set = [1]: must be a name in quotes"],
    ),
    "unknown parameter": (
        'set = "hippocampal_minimal"', "a3_pluss = 0.008",
        ["compare.rules[1]: no parameter is called 'a3_pluss'; did you mean 'a3_plus'?"],
    ),
    "parameter out of range": (
        'set = "hippocampal_minimal"', "a3_plus = 8",
        ["compare.rules[1].a3_plus = 8: must be in [0, 1]"],
    ),
    "parameter in a wrong unit": (
        'set = "hippocampal_minimal"', 'tau_y = "40 mV"',
        ["compare.rules[1].tau_y = '40 mV': in mV, not a time"],
    ),
    "unknown route": (
        '"quantal_size"', '"quantal_sise"',
        ["compare.routes[1]: no route is called 'quantal_sise'; did you mean 'quantal_size'?"],
    ),
    "unknown route in a mixture": (
        '"quantal_size"', "{ quantal_siz = 0.5, dendrite_width = 0.5 }",
        ["compare.routes[1]: no route is called 'quantal_siz'; did you mean 'quantal_size'?"],
    ),
    "shares that do not sum to 1": (
        '"quantal_size"', "{ quantal_size = 0.5, dendrite_width = 0.4 }",
        ["compare.routes[1]: shares that sum to 0.9; must be a sum of 1"],
    ),
    "share above 1": (
        '"quantal_size"', "{ quantal_size = 1.5 }",
        ["compare.routes[1].quantal_size = 1.5: must be a share from 0 to 1"],
    ),
    "unknown control": (
        '"test_pulses_only"', '"test_pulse_only"',
        ["compare.controls[1]: no control is called", "did you mean 'test_pulses_only'?"],
    ),
    "unknown route for the controls": (
        'match = "same_factor"', 'controls_on = "quantal"',
        ["compare.controls_on: no route is called 'quantal'", "quantal_size"],
    ),
    "unknown protocol": (
        'use = "pairing"', 'use = "paring"',
        ["protocol.bursts.use: no protocol is called 'paring'; did you mean 'pairing'?"],
    ),
    "unknown dendrite": (
        'location = { on = "apical", at = "250 um" }', 'location = { on = "apicl", at = "250 um" }',
        ["input.weak.location.on: no dendrite is called 'apicl'; did you mean 'apical'?", "soma"],
    ),
    "unknown driver": (
        'input = "strong", delay', 'input = "stron", delay',
        ["input.brake.driven_by[0].input: no input is called 'stron'; did you mean 'strong'?"],
    ),
    "unknown learner": (
        'learns = ["weak"]', 'learns = ["week"]',
        ["compare.learns[0]: no input is called 'week'; did you mean 'weak'?"],
    ),
    "unknown input of the criterion": (
        'input = "weak", alone', 'input = "week", alone', ["compare.criterion.input: no input"],
    ),
    "protocol of an unknown input": (
        'strong = ["10 ms"', 'strung = ["10 ms"',
        ["protocol.bursts.pattern.strung: no input is called 'strung'; did you mean 'strong'?"],
    ),
    "test pulses on an unknown input": (
        'inputs = ["weak"]', 'inputs = ["week"]',
        ["protocol.bursts.test.inputs[0]: no input is called 'week'"],
    ),
    "partner outside the pattern": (
        'follow_up = "30 min"', 'partner = ["brake"]',
        ["protocol.bursts.partner = 'brake': must be among strong, weak"],
    ),
    # duplicates
    "a key twice": (
        "seed = 1", "seed = 1\nseed = 2",
        ["study.toml: line 7 = 'seed = 2': is not TOML: the key", "twice"],
    ),
    "a table twice": (
        "[input.strong]", "[input.weak]",
        ["= '[input.weak]': is not TOML: the key or table stands there twice"],
    ),
    "a rule twice": (
        '{ use = "triplet_timing", set = "hippocampal_minimal" }', '{ use = "pair_timing" }',
        ["compare.rules[1] = 'pair_timing': is the label of two entries", "label = '...'"],
    ),
    "a route twice": (
        '"dendrite_width"', '"quantal_size"',
        ["compare.routes[2] = 'quantal_size': is the label of two entries"],
    ),
    "a learner twice": (
        'learns = ["weak"]', 'learns = ["weak", "weak"]',
        ["compare.learns[1] = 'weak': stands there twice"],
    ),
    "a driver twice": (
        '{ input = "strong", delay = "2 ms" }',
        '{ input = "strong", delay = "2 ms" }, { input = "strong", delay = "3 ms" }',
        ["input.brake.driven_by[1].input = 'strong': drives this input twice"],
    ),
    # places
    "beyond the dendrite": (
        'at = "250 um"', 'at = "400 um"',
        ["input.weak.location.at = '400 um': must be above 0 um and at most 350 um, the length of"],
    ),
    "on a dendrite but nowhere": (
        'on = "apical", at = "250 um"', 'on = "apical"',
        ["input.weak.location.at = '0 um': must be above 0 um"],
    ),
    "away from the soma on the soma": (
        'on = "soma"', 'on = "soma", at = "3 um"',
        ["input.brake.location.at = '3 um': must be 0 um on the soma"],
    ),
    "no place": (
        'location = { on = "soma" }', "", ["input.brake: needs either location", "contacts ="],
    ),
    "shares of contacts": (
        'location = { on = "soma" }',
        'contacts = [ { on = "soma", share = 0.5 }, { on = "apical", at = "9 um", share = 0.4 } ]',
        ["input.brake.contacts = 'shares [0.5, 0.4]': every contact needs a share", "sum to 1"],
    ),
    "added contact beyond the dendrite": (
        'location = { on = "apical", at = "250 um" }',
        'location = { on = "apical", at = "250 um" }\n'
        'added_contact = { on = "apical", at = "351 um" }',
        ["input.weak.added_contact.at = '351 um': must be above 0 um and at most 350 um"],
    ),
    # time
    "step too coarse": (
        'dt = "0.1 ms"', 'dt = "0.2 ms"',
        ["dt = '0.2 ms': must be at most 0.1 ms, a fifth of the fastest time constant",
         "input.weak.receptor.rise, 0.5 ms"],
    ),
    "step too coarse for one receptor": (
        'rise = "0.5 ms", decay = "7 ms"', 'rise = "0.2 ms", decay = "7 ms"',
        ["dt = '0.1 ms': must be at most 0.04 ms", "input.brake.receptor.rise, 0.2 ms"],
    ),
    "no step": ('dt = "0.1 ms"', 'dt = "0 ms"', ["dt = '0 ms': must be above 0 ms"]),
    "overlapping repeats": (
        'every = "10 s"', 'every = "20 ms"',
        ["protocol.bursts.pattern.strong = '30 ms': overlaps the next repeat, which starts after"],
    ),
    "no repeats": (
        "times = 60", "times = 0", ["protocol.bursts.repeat.times = 0: must be a whole number"],
    ),
    "events out of order": (
        '["10 ms", "20 ms", "30 ms"]', '["10 ms", "30 ms", "20 ms"]',
        ["protocol.bursts.pattern.strong[2] = '20 ms': must be at least 0.1 ms after the one"],
    ),
    "an event twice": (
        'weak = ["0 ms"]', 'weak = ["0 ms", "0 ms"]',
        ["protocol.bursts.pattern.weak[1] = '0 ms': must be at least 0.1 ms after"],
    ),
    "an event before the start": (
        'weak = ["0 ms"]', 'weak = ["-5 ms"]',
        ["protocol.bursts.pattern.weak[0] = '-5 ms': must be at least 0 ms"],
    ),
    "an empty list of events": (
        'weak = ["0 ms"]', "weak = []", ["protocol.bursts.pattern.weak = []: needs at least one"],
    ),
    "a test pulse on an event": (
        'baseline = "10 min"', 'baseline = "15.00005 s"',
        ["protocol.bursts: events of weak at 15000", "at least 0.1 ms apart"],
    ),
    "more events than fit": (
        'every = "30 s"', 'every = "1 us"',
        ["protocol.bursts: 2,400,000,300 events; must be at most 2,000,000"],
    ),
    "longer than any recording": (
        'baseline = "10 min"', 'baseline = "1e300 min"',
        ["protocol.bursts.baseline = '1e300 min': must be at least 0 ms and at most 1e+09 ms"],
    ),
    # what may learn
    "inhibition that learns": (
        'learns = ["weak"]', 'learns = ["brake"]',
        ["compare.learns[0] = 'brake': must be an excitatory input; this one is inhibitory"],
    ),
    "a criterion that does not learn": (
        'input = "weak", alone', 'input = "strong", alone',
        ["compare.criterion.input = 'strong': must be an input that learns: weak"],
    ),
    "recruited inhibition": (
        "driven_by = [", 'baseline_epsp = "3 mV"\ndriven_by = [',
        ["input.brake.baseline_epsp = '3 mV': is for excitatory inputs"],
    ),
    "driven by a driven input": (
        'location = { on = "apical", at = "60 um" }',
        'location = { on = "apical", at = "60 um" }\n'
        'driven_by = [ { input = "brake", delay = "1 ms" } ]',
        ["input.strong.driven_by[0].input = 'brake': must be an input that is not driven itself"],
    ),
    "a name that means something else": (
        "[input.strong]", "[input.injected]", ["input.injected: the name stands for spikes forced"],
    ),
    "a dendrite called soma": (
        "[cell.dendrite.apical]", "[cell.dendrite.soma]",
        ["cell.dendrite.soma: the soma is no dendrite"],
    ),
    # routes that lack their place
    "added contact without a place": (
        '"quantal_size"', '"added_contact"',
        ["input.weak.added_contact: missing; write { on = 'NAME'", "compare.routes[1]"],
    ),
    "neck without a resistance": (
        '"quantal_size"', '"spine_neck"',
        ["input.weak.neck: missing; write a resistance such as '100 Mohm'"],
    ),
    "widening of the soma": (
        'location = { on = "apical", at = "250 um" }', 'location = { on = "soma" }',
        ["input.weak.location: must be on a dendrite to be widened", "(dendrite_width)"],
    ),
    # controls that cannot be
    "nothing to unpair": (
        'pattern = { weak = ["0 ms"], strong = ["10 ms", "20 ms", "30 ms"] }',
        'pattern = { weak = ["0 ms"] }',
        ["compare.controls[0] = 'unpaired': no protocol leaves room for it", "a partner"],
    ),
    # syntax
    "broken text": (
        'rest = "-68 mV"', "rest = -68 mV",
        ["line 12 = 'rest = -68 mV': is not TOML: Expected newline"],
    ),
    "unclosed at the end": ("alone_fires = 0.5 }", "alone_fires = 0.5", ["is not TOML"]),
}  # fmt: skip
