import csv
import io
import math
import re

import numpy as np
import pytest

import plastic
from plastic.report.comparison import compare
from tests.report.conftest import CELLS, CONTROLS, PROTOCOLS, ROUTES, RULES


@pytest.fixture(scope="module")
def comparison(fake_results):
    return compare(fake_results)


@pytest.fixture(scope="module")
def text(comparison):
    return str(comparison)


def changed(dataset, name, values, **where):
    """Return a copy in which one arm of one variable is set to `values`."""
    copy = dataset.copy(deep=True)
    copy[name].loc[{"rule": RULES[0], "route": ROUTES[1], "protocol": "bursts", **where}] = values
    return copy


def arm(dataset):
    return compare(dataset).arm(RULES[0], ROUTES[1], "bursts")


def test_the_public_door_leads_here():
    assert plastic.compare is compare


def test_there_is_one_arm_for_each_rule_route_and_protocol(comparison):
    assert [a.key for a in comparison.arms] == [
        (rule, route, protocol) for protocol in PROTOCOLS for rule in RULES for route in ROUTES
    ]
    assert comparison.own_protocols == ("single_pairs", "bursts")


def test_medians_and_shares_are_those_of_the_cells(fake_results):
    counts = np.array([10, 20, 30, 40, 50, 60, 5, 15, 25, 35, 45, 55.0])
    found = arm(changed(fake_results, "repeats_to_criterion", counts)).expressed
    assert (found.repeats.median, found.repeats.low, found.repeats.high) == (32.5, 18.75, 46.25)
    assert found.reached == 1.0


def test_cells_that_never_get_there_push_the_quartile_beyond_the_protocol(fake_results):
    counts = np.array([10, 20, 30, 40, 50, 60, 12] + [np.nan] * 5)
    found = arm(changed(fake_results, "repeats_to_criterion", counts)).expressed
    assert str(found.repeats) == "55 (28 to > 60)"
    assert found.reached == pytest.approx(7 / 12)


def test_cells_already_there_at_baseline_are_told_apart(fake_results):
    there = np.array([3] * 4 + [0] * 8, dtype=np.int8)
    counts = np.array([0.0] * 4 + [20.0] * 8)
    data = changed(changed(fake_results, "verdict", there), "repeats_to_criterion", counts)
    found = arm(data).expressed
    assert found.repeats.median == 20  # and not drawn down by the four zeros
    assert found.reached == pytest.approx(8 / 12)
    assert found.verdicts == {"reached": pytest.approx(8 / 12), "already at baseline": 1 / 3}


def test_when_every_cell_was_there_already_there_is_no_count(fake_results):
    data = changed(fake_results, "verdict", np.full(CELLS, 3, dtype=np.int8))
    found = arm(data)
    assert math.isnan(found.expressed.repeats.median)
    assert found.headline() == "already at baseline"


def test_expressed_and_induced_are_read_from_their_own_variables(fake_results):
    data = changed(fake_results, "repeats_to_criterion_induced", np.full(CELLS, 7.0))
    found = arm(data)
    assert found.induced.repeats.median == 7
    assert found.expressed.repeats.median != 7


def test_verdict_shares_sum_to_one_in_every_arm(comparison):
    done = [a for a in comparison.arms if a.expressed]
    assert len(done) > 40
    for one in done:
        assert sum(one.expressed.verdicts.values()) == pytest.approx(1)
        assert sum(one.never_causes.values()) == pytest.approx(
            one.expressed.verdicts.get("never", 0.0)
        )


def test_never_is_told_per_cell_with_its_cause(fake_results):
    verdict = np.array([6] * 7 + [0] * 5, dtype=np.int8)
    cause = np.array([1] * 4 + [0] * 3 + [-1] * 5, dtype=np.int8)
    data = changed(changed(fake_results, "verdict", verdict), "never_cause", cause)
    data = changed(data, "repeats_to_criterion", np.array([np.nan] * 7 + [30.0] * 5))
    found = arm(data)
    assert found.headline() == "never"
    assert found.cause == "dendrite diameter at its limit"
    assert found.never_causes == {
        "dendrite diameter at its limit": pytest.approx(4 / 12),
        "release probability at its limit": pytest.approx(3 / 12),
    }
    assert re.search(r"never 58 % \[[a-z]\], 42 % reached", str(compare(data)))


def test_an_arm_that_does_not_apply_has_no_counts(comparison):
    found = comparison.arm("sliding_threshold", "spine_neck", "bursts")
    assert (found.status, found.expressed, found.headline()) == (
        "not applicable",
        None,
        "not applicable",
    )


def test_controls_are_shown_beside_their_protocol(text):
    controls = text[text.index("\nControls\n") :]
    for control in CONTROLS:
        assert f"bursts, {control.replace('_', ' ')}" in controls
    unpaired = next(li for li in controls.splitlines() if "bursts, unpaired" in li)
    assert "100 (100 to 100)" in unpaired
    assert " 0 %" in unpaired


def test_paired_and_control_pathways_are_told_apart(comparison):
    roles = {(p.input, p.role) for p in comparison.pathways if not p.control}
    assert roles == {("far", "paired"), ("side", "control pathway")}
    silent = {p.role for p in comparison.pathways if p.control == "test_pulses_only"}
    assert silent == {"control pathway"}


def test_the_last_reading_of_each_cell_is_what_is_compared(fake_results, comparison):
    path = next(
        p for p in comparison.pathways
        if (p.rule, p.route, p.protocol, p.input) == (RULES[0], ROUTES[1], "bursts", "far")
    )  # fmt: skip
    one = fake_results["epsp_percent_of_baseline"].sel(
        rule=RULES[0], route=ROUTES[1], protocol="bursts", input="far"
    )
    assert path.percent == pytest.approx(float(one.isel(reading=-1).median()))
    padded = fake_results.copy(deep=True)
    padded["epsp_percent_of_baseline"][..., -5:] = np.nan
    other = compare(padded).pathways[0]
    same = fake_results["epsp_percent_of_baseline"].isel(reading=-6).sel(
        rule=other.rule, route=other.route, protocol=other.protocol, input=other.input
    )  # fmt: skip
    assert other.percent == pytest.approx(float(same.median()))


def test_extrapolated_and_illustrative_carry_a_sign_and_a_footnote(text):
    assert "† extrapolated: beyond the dose the rule was measured at: triplet_timing (60" in text
    assert "sliding_threshold ‡" in text
    assert "‡ sliding_threshold: illustrative here: no published spiking constants" in text
    lines = [li for li in text.splitlines() if li.startswith("added_contact")]
    assert any("†" in li for li in lines)


def test_nothing_extrapolated_leaves_no_footnote(fake_results):
    data = fake_results.copy(deep=True)
    data["extrapolated"][:] = 0
    assert "†" not in str(compare(data))


def test_simulated_cells_are_never_called_n(text):
    assert "12 simulated cells" in text
    assert " n " not in text
    assert "n =" not in text


def test_a_study_that_cannot_be_rebuilt_is_said_so(fake_results):
    lost = compare(fake_results.assign_attrs(study="not = a study"))
    assert lost.illustrative == {}
    assert {p.role for p in lost.pathways} == {"not told"}
    assert "cannot be rebuilt here" in str(lost)


def test_csv_has_every_arm_in_full_precision(comparison, tmp_path):
    written = comparison.to_csv(tmp_path / "arms.csv")
    assert (tmp_path / "arms.csv").read_text(encoding="utf-8") == written
    rows = list(csv.DictReader(io.StringIO(written)))
    assert len(rows) == len(comparison.arms)
    by_key = {(r["rule"], r["route"], r["protocol"]): r for r in rows}
    for one in comparison.arms:
        row = by_key[one.key]
        assert row["status"] == one.status
        if one.expressed is not None:
            assert float(row["repeats_median_expressed"]) == one.expressed.repeats.median
            assert float(row["share_reached_induced"]) == one.induced.reached
            shares = [float(row[f"{v.replace(' ', '_')}_expressed"]) for v in comparison.verdicts]
            assert sum(shares) == pytest.approx(1)
