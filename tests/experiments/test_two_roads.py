"""The experiment on two roads: in a few cells, everything its README tells in kind."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import xarray as xr

import plastic

FOLDER = Path(__file__).parents[2] / "experiments" / "two_roads"
CELLS = 12
RULES = ["pair_timing", "triplet_timing", "sliding_threshold"]
TIMING = RULES[:2]
MIXTURE = "dendrite_width+release_probability"


@pytest.fixture(scope="module")
def ordinary() -> xr.Dataset:
    return plastic.run(FOLDER / "study.toml", cells=CELLS)


@pytest.fixture(scope="module")
def low() -> xr.Dataset:
    return plastic.run(FOLDER / "low_release.toml", cells=CELLS)


def verdicts(results: xr.Dataset, name: str = "verdict_induced", **arm: str) -> np.ndarray:
    """Return the verdicts in words, over the dimensions that are left."""
    words = np.array(results[name].attrs["flag_meanings"].split())
    return np.asarray(words[results[name].sel(arm).values.astype(int)])


def causes(results: xr.Dataset, **arm: str) -> set[str]:
    words = results["never_cause"].attrs["flag_meanings"].split()
    return {words[int(k)] for k in results["never_cause"].sel(arm).values.ravel() if k >= 0}


def never(results: xr.Dataset, route: str) -> np.ndarray:
    """Return which cells never get there by a route, whatever the rule."""
    found = verdicts(results, route=route, protocol="bursts") == "never"
    return np.asarray(found.any(axis=0))


def end(results: xr.Dataset, name: str, **arm: str) -> np.ndarray:
    """Return the last reading of the far bundle."""
    chosen = {"input": "far", **arm}
    return np.asarray(results[name].sel(chosen).isel(reading=-1).values)


def test_every_arm_was_run_or_is_a_control_on_another_route(ordinary: xr.Dataset) -> None:
    """3 rules x (7 routes x 2 protocols + 1 route x 2 x 4 controls)."""
    assert int((ordinary["status"] == 0).sum()) == 3 * (7 * 2 + 8)
    assert not np.any(ordinary["status"] == 2)


def test_cells_get_there_after_different_numbers_of_pairings_and_some_not_in_time(
    ordinary: xr.Dataset,
) -> None:
    counts = ordinary["repeats_to_criterion_induced"].sel(protocol="bursts", route="added_contact")
    for rule in RULES:
        found = counts.sel(rule=rule).values
        taught = found[np.isfinite(found) & (found > 0)]  # 0: by test pulses, in the baseline
        assert len(set(taught.tolist())) >= 3
        assert 1 <= taught.min() < taught.max() <= 60
    assert "not_within" in verdicts(ordinary, protocol="bursts", route="quantal_size")


def test_never_has_different_reasons_on_different_routes(ordinary: xr.Dataset) -> None:
    told = {
        route: causes(ordinary, route=route, protocol="bursts")
        for route in ("release_probability", "quantal_size", "spine_neck", "dendrite_width")
    }
    assert "release_certain_and_still_too_small" in told["release_probability"]
    assert "quantal_size_at_its_limit" in told["quantal_size"]
    assert "without_a_neck_and_still_too_small" in told["spine_neck"]
    assert "beyond_the_best_diameter" in told["dendrite_width"]


def test_whether_a_cell_can_ever_get_there_is_no_matter_of_the_rule(ordinary: xr.Dataset) -> None:
    """Each of the three goes up to ten times the baseline."""
    found = verdicts(ordinary, protocol="bursts") == "never"
    started = (verdicts(ordinary, protocol="bursts") == "already_at_baseline").any(axis=0)
    assert np.all((found == found[:1]) | started)
    assert found.any()


def test_the_mixture_gets_cells_there_that_neither_of_its_routes_can(
    ordinary: xr.Dataset, low: xr.Dataset
) -> None:
    for results in (ordinary, low):
        alone = never(results, "release_probability") & never(results, "dendrite_width")
        assert np.any(alone & ~never(results, MIXTURE))
    got = (verdicts(low, route=MIXTURE, protocol="bursts") == "reached").any(axis=0)
    assert np.any(got & never(low, "release_probability") & never(low, "dendrite_width"))


def test_with_low_release_fewer_cells_are_stuck_by_release_and_as_many_by_the_rest(
    ordinary: xr.Dataset, low: xr.Dataset
) -> None:
    stuck = {
        route: (never(ordinary, route).sum(), never(low, route).sum())
        for route in ("release_probability", "quantal_size", "dendrite_width", MIXTURE)
    }
    for route in ("release_probability", MIXTURE):
        assert stuck[route][1] < stuck[route][0], route
    for route in ("quantal_size", "dendrite_width"):
        assert abs(stuck[route][1] - stuck[route][0]) <= 1, route


def percent(results: xr.Dataset, rule: str, control: str = "", own: str = "bursts") -> float:
    """Return the EPSP at the end in percent of baseline, the median over cells."""
    protocol = f"{own}, {control}" if control else own
    arm = {"rule": rule, "route": "quantal_size", "protocol": protocol}
    return float(np.median(end(results, "epsp_percent_of_baseline", **arm)))


@pytest.mark.parametrize("rule", RULES)
def test_controls_that_pair_nothing_change_nothing(ordinary: xr.Dataset, rule: str) -> None:
    assert percent(ordinary, rule) > 115
    for control in ("unpaired", "test pulses only"):
        assert percent(ordinary, rule, control) == pytest.approx(100, abs=1)


def test_reversed_order_depresses_under_timing_rules_and_not_under_the_rate_rule(
    ordinary: xr.Dataset,
) -> None:
    assert all(percent(ordinary, rule, "reversed") < 90 for rule in TIMING)
    assert percent(ordinary, "sliding_threshold", "reversed") > 115


@pytest.mark.parametrize("rule", RULES)
def test_blocking_inhibition_teaches_more(ordinary: xr.Dataset, rule: str) -> None:
    assert percent(ordinary, rule, "inhibition blocked") > percent(ordinary, rule)


@pytest.mark.parametrize("rule", RULES)
def test_a_burst_teaches_more_than_a_single_spike(ordinary: xr.Dataset, rule: str) -> None:
    assert percent(ordinary, rule) > percent(ordinary, rule, own="single_pairs")


def test_an_added_contact_is_induced_during_the_pairing_and_expressed_only_afterwards(
    ordinary: xr.Dataset,
) -> None:
    arm = ordinary.sel(route="added_contact", protocol="bursts")
    late = arm["minutes_to_criterion"].values
    induction = float(arm["epoch_end"].sel(epoch="induction"))
    assert np.isfinite(arm["repeats_to_criterion_induced"]).sum() > np.isfinite(late).sum() > 0
    assert np.nanmin(late) > induction


def test_the_near_pathway_changes_by_widening_only(ordinary: xr.Dataset) -> None:
    for route in ordinary["route"].values:
        arm = {"route": route, "protocol": "bursts", "input": "near"}
        found = ordinary["epsp_percent_of_baseline"].sel(arm).isel(reading=-1)
        moved = float(np.abs(found - 100).max())
        widens = "dendrite_width" in str(route)
        assert (moved > 1) if widens else (moved < 1e-3), route


#: what a rig would see: direction of the change of each measure, from quantal analysis
SEEN = {
    "release_probability": {"paired_pulse_ratio": -1, "inverse_cv2": +1},
    "quantal_size": {"paired_pulse_ratio": 0, "inverse_cv2": 0},
    "release_sites": {"paired_pulse_ratio": 0, "inverse_cv2": +1},
    "added_contact": {"paired_pulse_ratio": 0, "epsp_rise": -1},
    "dendrite_width": {"paired_pulse_ratio": 0, "inverse_cv2": 0, "epsp_rise": -1},
}


@pytest.mark.parametrize("route", SEEN)
def test_a_rig_would_tell_the_routes_apart(ordinary: xr.Dataset, route: str) -> None:
    """Textbook quantal analysis: CV^-2 = N p / (1 - p + cv^2), blind to the quantum; PPR to p."""
    for name, direction in SEEN[route].items():
        arm = {"rule": "pair_timing", "route": route, "protocol": "bursts", "input": "far"}
        course = ordinary[name].sel(arm).isel(reading=[0, -1]).median("cell").values
        change = float(course[1] / course[0] - 1)
        assert abs(change) < 0.005 if direction == 0 else direction * change > 0.01, name


def test_bundles_start_with_the_same_epsp_in_both_studies(
    ordinary: xr.Dataset, low: xr.Dataset
) -> None:
    start = [
        r["epsp_peak"].sel(route="quantal_size", protocol="bursts", input="far").isel(reading=0)
        for r in (ordinary, low)
    ]
    np.testing.assert_allclose(start[1], start[0], rtol=0.02)


def test_the_command_of_the_readme_names_the_study() -> None:
    text = (FOLDER / "README.md").read_text()
    assert "plastic run experiments/two_roads/study.toml --out two_roads-results" in text
