import numpy as np
import pytest

from plastic.report.comparison import compare
from plastic.report.pathways import criterion_input, parent_of
from tests.report.conftest import ROUTES, RULES


@pytest.fixture(scope="module")
def comparison(fake_results):
    return compare(fake_results)


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


def test_an_input_that_does_not_learn_is_no_pathway_of_control(fake_results):
    found = compare(fake_results.assign_attrs(learns="far")).pathways
    assert {p.role for p in found if p.input == "side"} == {"does not learn"}


def test_the_criterion_names_its_input(fake_results):
    assert criterion_input(fake_results) == "far"


def test_a_control_belongs_to_the_protocol_before_its_words():
    assert parent_of("bursts, test pulses only", "test_pulses_only") == "bursts"
    assert parent_of("bursts, unpaired", "") == "bursts, unpaired"  # a label of the user's own
