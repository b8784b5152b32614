import re

import numpy as np
import pytest

from plastic.report.comparison import compare
from plastic.report.matrices import pathway_grid
from plastic.report.pathways import FIXED, PAIRED, TESTED_ONLY, Pathway
from tests.report.conftest import CONTROLS, changed


@pytest.fixture(scope="module")
def text(fake_results):
    return str(compare(fake_results))


def test_controls_are_shown_beside_their_protocol(text):
    controls = text[text.index("\nControls\n") :]
    for control in CONTROLS:
        assert f"bursts, {control.replace('_', ' ')}" in controls
    unpaired = next(li for li in controls.splitlines() if "bursts, unpaired" in li)
    assert "100 (100 to 100)" in unpaired
    assert " 0 %" in unpaired


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


def test_shares_of_one_entry_are_of_all_simulated_cells(fake_results):
    verdict = np.array([6] * 6 + [0] * 4 + [3] * 2, dtype=np.int8)
    counts = np.array([np.nan] * 6 + [30.0] * 4 + [0.0] * 2)
    data = changed(changed(fake_results, "verdict", verdict), "repeats_to_criterion", counts)
    data = changed(data, "never_cause", np.array([1] * 6 + [-1] * 6, dtype=np.int8))
    told = str(compare(data))
    assert re.search(r"never 50 % \[[a-z]\], 33 % reached, already at baseline 17 %", told)
    assert "cells already at baseline are left out of the counts" in told


def test_every_cause_in_the_matrix_has_its_letter_below(text):
    matrix = text.split("\n\n")[1]
    used = set(re.findall(r"\[([a-z])\]", matrix.split("\nmedian (quartiles)")[0]))
    told = set(re.findall(r"^\[([a-z])\] ", matrix, re.MULTILINE))
    assert used <= told
    assert len(used) >= 2


def test_a_cause_is_told_as_the_commonest_only(text):
    causes = [li for li in text.splitlines() if re.match(r"\[[a-z]\] ", li)]
    assert len(causes) > 2
    assert all(li[4:].startswith("commonest cause: ") for li in causes)


def pathway(name, role, low):
    arm = ("pair_timing", "quantal_size", "bursts", "")
    return Pathway(*arm, name, role, 100.0, low, 100.2, 0.0, 0.0)


@pytest.mark.parametrize(
    ("name", "role", "low", "shown"),
    [
        ("far", PAIRED, 99.8, True),
        ("side", TESTED_ONLY, 99.8, True),
        ("near", FIXED, 99.8, False),
        ("near", FIXED, 99.3, True),
    ],
    ids=["paired", "control pathway", "idle", "changed by the dendrite"],
)
def test_only_what_does_not_learn_and_does_not_change_is_folded_away(name, role, low, shown):
    grid = pathway_grid([pathway(name, role, low), pathway("other", PAIRED, 99.0)], "far")
    assert (name in [row[3] for row in grid.rows]) is shown
    folded = "near does not learn and stays at 100 (100 to 100) in 1 of 1 arms, not shown"
    assert (folded in grid.notes) is not shown


def test_the_realised_lag_is_told_with_its_reference_points(text):
    timing = text[text.index("The pairing as it happened") :].split("\n\n")[0]
    row = next(li for li in timing.splitlines() if li.startswith("bursts  "))
    assert "+10.5 to +10.6" in row or "+10.6 to +10.6" in row  # median of 10.0 to 11.1 ms
    assert "first presynaptic spike of a repeat to the nearest spike of the soma" in timing
