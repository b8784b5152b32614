"""Results made by formulas, in the exact schema, so that reports are tested without a simulation.

The numbers are invented: a factor that grows by a fixed step per repeat, a threshold per cell, a
firing probability that is a logistic function of the EPSP. Nothing here is a claim about synapses.
"""

import numpy as np
import pytest
import xarray as xr

STUDY = """
title = "An invented pair of pathways"
seed = 1
cells = 12
[cell]
spikes = "leaky"
rest = "-68 mV"
threshold = { mean = "-55 mV", sd = "1 mV" }
reset = "-65 mV"
rest_of_cell = "5 nS"
membrane = { resistance = "15 kohm cm^2", capacitance = "1 uF/cm^2", axial = "150 ohm cm" }
[cell.dendrite.apical]
length = "350 um"
diameter = "2 um"
[input.far]
location = { on = "apical", at = "320 um" }
release = { sites = 60, probability = 0.60, highest = 0.90, quantum = "0.275 nS", quantum_cv = 0.3 }
receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }
neck = "100 Mohm"
added_contact = { on = "apical", at = "40 um" }
[input.side]
location = { on = "apical", at = "200 um" }
release = { sites = 60, probability = 0.60, highest = 0.90, quantum = "0.275 nS", quantum_cv = 0.3 }
receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }
neck = "100 Mohm"
added_contact = { on = "apical", at = "40 um" }
[input.near]
location = { on = "apical", at = "60 um" }
release = { sites = 80, probability = 0.36, highest = 0.90, quantum = "0.8 nS", quantum_cv = 0.3 }
receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }
[input.brake]
location = { on = "soma" }
driven_by = [ { input = "near", delay = "2 ms" } ]
release = { sites = 20, probability = 0.60, highest = 0.90, quantum = "0.8 nS", quantum_cv = 0.3 }
receptor = { reversal = "-75 mV", rise = "0.5 ms", decay = "7 ms" }
[protocol.single_pairs]
pattern = { far = ["0 ms"], near = ["10 ms"] }
repeat = { times = 60, every = "10 s" }
test = { inputs = ["far", "side"], every = "30 s" }
[protocol.bursts]
pattern = { far = ["0 ms"], near = ["10 ms", "20 ms", "30 ms"] }
repeat = { times = 60, every = "10 s" }
test = { inputs = ["far", "side"], every = "30 s" }
[compare]
learns = ["far", "side"]
rules = ["pair_timing", "triplet_timing", "sliding_threshold"]
routes = ["release_probability", "quantal_size", "release_sites", "spine_neck", "added_contact",
          "dendrite_width", { dendrite_width = 0.5, release_probability = 0.5 }]
controls = ["unpaired", "reversed", "test_pulses_only", "inhibition_blocked"]
criterion = { input = "far", alone_fires = 0.5 }
"""

RULES = ["pair_timing", "triplet_timing", "sliding_threshold"]
ROUTES = ["release_probability", "quantal_size", "release_sites", "spine_neck", "added_contact",
          "dendrite_width", "dendrite_width+release_probability"]  # fmt: skip
CONTROLS = ["unpaired", "reversed", "test_pulses_only", "inhibition_blocked"]
OWN = ["single_pairs", "bursts"]
PROTOCOLS = [
    label for name in OWN for label in (name, *(f"{name}, {c.replace('_', ' ')}" for c in CONTROLS))
]
VERDICTS = "reached reached_then_lost not_within already_at_baseline depressed partner_failed never"
CAUSES = "release_probability_at_its_limit dendrite_diameter_at_its_limit no_gain_from_the_route"

CELLS, REPEATS = 12, 60
STEP = {"pair_timing": 0.012, "triplet_timing": 0.0085, "sliding_threshold": 0.045}
SIZE = {"single_pairs": 0.55, "bursts": 1.0, "": 1.0, "unpaired": 0.0, "reversed": -0.4,
        "test_pulses_only": 0.0, "inhibition_blocked": 1.3}  # fmt: skip
GAIN = {"added_contact": 2.5}
LIMIT = {"release_probability": (1.5, 0), "dendrite_width": (1.3, 1), "spine_neck": (1.05, 2)}


def _readings() -> tuple[np.ndarray, np.ndarray]:
    before = np.arange(-10.0, 0.1, 2.0)
    during = np.arange(1, REPEATS + 1) / 6.0
    after = np.arange(12.0, 40.1, 2.0)
    repeats = np.r_[np.zeros(len(before)), np.arange(1, REPEATS + 1), np.full(len(after), REPEATS)]
    return np.r_[before, during, after], repeats


def _expressed(time: np.ndarray, induced: np.ndarray, tau: float) -> np.ndarray:
    out = np.array(induced)
    out[..., 0] = 1.0
    for k in range(1, len(time)):
        keep = np.exp(-(time[k] - time[k - 1]) / tau)
        out[..., k] = induced[..., k - 1] + (out[..., k - 1] - induced[..., k - 1]) * keep
    return out


def _arm(rule: str, route: str, own: str, control: str, cell: np.ndarray, time: np.ndarray,
         repeats: np.ndarray) -> dict[str, np.ndarray]:  # fmt: skip
    """Return the readings (cell, input, reading) of one arm, and its verdicts (cell)."""
    jitter = 1 + 0.2 * np.sin(1.7 * cell)
    grown = STEP[rule] * SIZE[own] * SIZE[control] * jitter[:, None] * repeats
    paired = np.maximum(1 + grown, 0.3)
    induced = np.stack([paired, 1 + 0.02 * np.sin(cell)[:, None] + 0 * paired], axis=1)
    expressed = _expressed(time, induced, 3.0 if "width" not in route else 30.0)
    top, cause = LIMIT.get(route, (1e6, -1))
    gain = GAIN.get(route, 1.0)
    base = 9.0 * (1 + 0.1 * np.cos(2.3 * cell))[:, None, None]
    needed = 13.0 + 0.8 * np.sin(3.1 * cell)[:, None, None]
    size = base * np.minimum(1 + gain * (expressed - 1), top)
    size_induced = base * np.minimum(1 + gain * (induced - 1), top)
    fires = 1 / (1 + np.exp(-3 * (size - needed)))
    fires_induced = 1 / (1 + np.exp(-3 * (size_induced - needed)))
    out = {
        "factor": induced, "factor_expressed": expressed, "weight": induced, "epsp_peak": size,
        "epsp_percent_of_baseline": 100 * size / size[..., :1], "fires_alone": fires,
        "fires_alone_induced": fires_induced, "epsp_rise": 2.1 + 0.02 * size,
        "epsp_half_width": 18.0 + 0.1 * size, "paired_pulse_ratio": 1.2 - 0.2 * expressed**0.5,
        "inverse_cv2": 50.0 * expressed, "failure_rate": 0.02 / expressed**2,
    }  # fmt: skip
    for kind, p in (("", fires), ("_induced", fires_induced)):
        out |= _verdicts(kind, p[:, 0], repeats, expressed[:, 0], top, cause, base, needed)
    out["minutes_to_criterion"] = out["repeats_to_criterion"] / 6
    late = np.nan_to_num(out["repeats_to_criterion"]) > (40 if rule == "triplet_timing" else 60)
    out["extrapolated"] = late.astype(np.int8)
    return out


def _verdicts(kind, fires, repeats, expressed, top, cause, base, needed):
    there = fires >= 0.5
    first = np.where(there.any(axis=1), repeats[np.argmax(there, axis=1)], np.nan)
    stuck = (base * top < needed)[:, 0, 0]
    verdict = np.where(there.any(axis=1), np.where(there[:, -1], 0, 1), np.where(stuck, 6, 2))
    verdict = np.where(~there.any(axis=1) & (expressed[:, -1] < 0.9), 4, verdict)
    found = {f"repeats_to_criterion{kind}": first, f"verdict{kind}": verdict.astype(np.int8)}
    if not kind:
        found["never_cause"] = np.where(verdict == 6, cause, -1).astype(np.int8)
    return found


UNITS = {"epsp_peak": "mV", "epsp_rise": "ms", "epsp_half_width": "ms",
         "epsp_percent_of_baseline": "%", "minutes_to_criterion": "min",
         "realised_lag": "ms"}  # fmt: skip
PER_CELL = {"repeats_to_criterion", "repeats_to_criterion_induced", "minutes_to_criterion",
            "verdict", "verdict_induced", "never_cause", "extrapolated"}  # fmt: skip


def fake_dataset() -> xr.Dataset:
    """Return the synthetic results: 3 rules x 7 routes x 2 protocols and 4 controls, 12 cells."""
    time, repeats = _readings()
    cell = np.arange(CELLS)
    shape = (len(RULES), len(ROUTES), len(PROTOCOLS))
    status = np.zeros(shape, dtype=np.int8)
    full: dict[str, np.ndarray] = {}
    for at in np.ndindex(*shape):
        rule, route, label = RULES[at[0]], ROUTES[at[1]], PROTOCOLS[at[2]]
        own, _, control = label.replace(" ", "_").partition(",_")
        if control and at[1] > 0:
            status[at] = 3
            continue
        if (rule, route) == ("sliding_threshold", "spine_neck"):
            status[at] = 1
            continue
        for name, values in _arm(rule, route, own, control, cell, time, repeats).items():
            whole = values.dtype == np.int8
            start = np.int8(-1 if "ver" in name else 0) if whole else np.float32(np.nan)
            full.setdefault(name, np.full(shape + values.shape, start))[at] = values
    full["partner_fired"] = np.where(status[..., None] == 0, 0.97 + 0.0 * cell, np.nan)
    full["realised_lag"] = np.where(status[..., None] == 0, 10.0 + 0.1 * cell, np.nan)
    return _labelled(full, status, time, repeats)


def _labelled(full, status, time, repeats) -> xr.Dataset:
    arm = ("rule", "route", "protocol")
    data = {"status": (arm, status, {
        "units": "1", "long_name": "status", "flag_values": np.arange(4, dtype=np.int8),
        "flag_meanings": "complete not_applicable stopped not_run"})}  # fmt: skip
    for name, values in full.items():
        dims = (*arm, "cell") if values.ndim == 4 else (*arm, "cell", "input", "reading")
        attrs = {"units": UNITS.get(name, "1"), "long_name": name.replace("_", " ")}
        words = CAUSES if name == "never_cause" else VERDICTS if "verdict" in name else ""
        if words:
            attrs["flag_meanings"] = words
            attrs["flag_values"] = np.arange(len(words.split()), dtype=np.int8)
        data[name] = (dims, values, attrs)
    n = len(PROTOCOLS)
    every = {"units": "min", "long_name": "time from the start of the induction"}
    coords = {
        "rule": RULES, "route": ROUTES, "protocol": PROTOCOLS, "cell": np.arange(CELLS),
        "input": ["far", "side"], "reading": np.arange(len(time)),
        "epoch": ["baseline", "induction", "follow_up"],
                "repeats": (("protocol", "reading"), np.tile(repeats, (n, 1)),
                    {"units": "1", "long_name": "repeats completed"}),
        "time": (("protocol", "reading"), np.tile(time, (n, 1)), every),
        "epoch_start": (("protocol", "epoch"), np.tile([-10.0, 0.0, 10.0], (n, 1)), every),
        "epoch_end": (("protocol", "epoch"), np.tile([0.0, 10.0, 40.0], (n, 1)), every),
    }  # fmt: skip
    data["control"] = ("protocol", ["", *CONTROLS, "", *CONTROLS])
    threshold = -55 + 0.8 * np.sin(3.1 * np.arange(CELLS))
    data["threshold"] = ("cell", threshold, {"units": "mV", "long_name": "spike threshold"})
    attrs = {
        "title": "An invented pair of pathways", "study": STUDY, "study_hash": "invented",
        "seed": 1, "plastic_version": "0", "versions": "{}", "dt": 0.1, "solver": "formulas",
        "criterion": "far alone fires the cell with probability >= 0.5", "at_ceiling": "stop",
        "match": "same_factor", "learns": "far, side", "rest": -68.0,
        "criterion_input": "far", "alone_fires": 0.5,
    }  # fmt: skip
    return xr.Dataset(data, coords=coords, attrs=attrs)


@pytest.fixture(scope="session")
def fake_results() -> xr.Dataset:
    return fake_dataset()


def changed(dataset: xr.Dataset, name: str, values: np.ndarray) -> xr.Dataset:
    """Return a copy in which one variable of one arm is set: first rule, second route, bursts."""
    copy = dataset.copy(deep=True)
    copy[name].loc[{"rule": RULES[0], "route": ROUTES[1], "protocol": "bursts"}] = values
    return copy
