"""What a run finds: controls, matched routes, verdicts that change when their cause is lifted."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import xarray as xr

import plastic
from plastic.errors import Misfit
from tests.study.small import CONTROLS, RULES, UNIFORM, routes, study

#: enough repeats to see a change, far enough from threshold that test pulses teach nothing
LONG = ('times = 12, every = "5 s"', 'times = 60, every = "5 s"')
QUIET = ('target = "8 mV"', 'target = "4 mV"')


@pytest.fixture(scope="module")
def controls() -> xr.Dataset:
    """Every rule with every control, in cells that no test pulse fires."""
    return plastic.run(study(RULES, CONTROLS, LONG, QUIET, routes('"quantal_size"')))


def percent(
    results: xr.Dataset, rule: str, control: str, route: str = "quantal_size"
) -> np.ndarray:
    """Return the EPSP of the upper bundle at the end, percent of baseline, per cell."""
    name = f"pairs, {control}" if control else "pairs"
    arm = results.sel(rule=rule, route=route, protocol=name, input="upper")
    return np.asarray(arm["epsp_percent_of_baseline"].dropna("reading").isel(reading=-1))


@pytest.mark.parametrize("rule", ["pair_timing", "triplet_timing", "sliding_threshold"])
@pytest.mark.parametrize("control", ["unpaired", "test pulses only"])
def test_what_is_not_paired_does_not_change(controls: xr.Dataset, rule: str, control: str) -> None:
    assert np.all(np.abs(percent(controls, rule, control) - 100) < 3)


@pytest.mark.parametrize("rule", ["pair_timing", "triplet_timing"])
def test_pairs_strengthen_and_reversed_pairs_depress_under_the_timing_rules(
    controls: xr.Dataset, rule: str
) -> None:
    assert np.all(percent(controls, rule, "") > 103)
    assert np.all(percent(controls, rule, "reversed") < 97)


def test_blocked_inhibition_is_told_apart_from_the_protocol(controls: xr.Dataset) -> None:
    blocked = controls.sel(protocol="pairs, inhibition blocked", route="quantal_size")
    plain = controls.sel(protocol="pairs", route="quantal_size")
    assert str(blocked["control"].values) == "inhibition_blocked"
    assert float(blocked["spikes"].sum()) >= float(plain["spikes"].sum())


def test_matched_routes_change_the_epsp_alike_and_unmatched_ones_do_not() -> None:
    """Small changes, expressed at once: what is matched is the slope at baseline."""
    told = 'expression = "immediate"'
    made = (routes('"quantal_size", "added_contact"'), QUIET)
    plain = plastic.run(study(*made, ("[compare]", f"[compare]\n{told}")))
    fair = plastic.run(study(*made, ("[compare]", f'[compare]\nmatch = "sensitivity"\n{told}')))
    assert (plain.attrs["match"], fair.attrs["match"]) == ("same_factor", "sensitivity")
    changes = [
        percent(r, "pair_timing", "", route).mean() - 100
        for r in (plain, fair)
        for route in ("quantal_size", "added_contact")
    ]
    assert abs(changes[1] / changes[0] - 1) > 0.3
    assert changes[3] / changes[2] == pytest.approx(1.0, abs=0.1)


def test_a_route_that_cannot_be_matched_ends_the_run_before_it_starts(tmp_path: Path) -> None:
    weak = study(
        ("[compare]", '[compare]\nmatch = "sensitivity"'), routes('"dendrite_width"'),
        ('at = "240 um"', 'at = "300 um"'), ('target = "8 mV"', 'target = "0.5 mV"'),
        ('rest_of_cell = "5 nS"', 'rest_of_cell = "2 nS"'),
    )  # fmt: skip
    with pytest.raises(Misfit, match="a channel that strengthens the input"):
        plastic.run(weak, out=tmp_path / "run")
    assert not (tmp_path / "run").exists()


def verdicts(results: xr.Dataset) -> tuple[list[str], list[str]]:
    """Return verdict and cause of every cell of the only arm, in words ("" for no cause)."""
    words = results["verdict_induced"].attrs["flag_meanings"].split()
    causes = [*results["never_cause"].attrs["flag_meanings"].split(), ""]
    return (
        [words[v] for v in results["verdict_induced"].values.ravel()],
        [causes[c] for c in results["never_cause"].values.ravel()],
    )


@pytest.mark.parametrize(
    ("entry", "cause", "lift"),
    [
        ("release_probability", "release_probability_at_its_limit",
         ("highest = 0.9, quantum", "highest = 1.0, quantum")),
        ("quantal_size", "rule_at_its_own_bound", ("w_max = 1.05", "w_max = 6")),
    ],
)  # fmt: skip
def test_never_ends_when_its_cause_is_lifted(entry: str, cause: str, lift: tuple[str, str]) -> None:
    """From the file to the word in the results; a strong rule takes few repeats."""
    bound = "1.05" if cause.startswith("rule") else "50"
    stuck = (
        *UNIFORM, routes(f'"{entry}"'), ('mean = "-57 mV"', 'mean = "-56 mV"'),
        ('rules = ["pair_timing"]',
         f'rules = [{{ use = "pair_timing", a_plus = 0.3, w_max = {bound} }}]'),
    )  # fmt: skip
    assert verdicts(plastic.run(study(*stuck))) == (["never"], [cause])
    assert verdicts(plastic.run(study(*stuck, lift))) == (["reached"], [""])


def test_what_could_not_be_recruited_is_told(tmp_path: Path) -> None:
    found = plastic.run(study(('target = "8 mV"', 'target = "60 mV"')))
    assert found.attrs["baseline_epsp_not_recruited"] == "upper: 4 cells"
    assert plastic.run(study()).attrs["baseline_epsp_not_recruited"] == ""
