import csv
import io

import pytest

import plastic
from plastic.report.comparison import compare
from tests.report.conftest import PROTOCOLS, ROUTES, RULES


@pytest.fixture(scope="module")
def comparison(fake_results):
    return compare(fake_results)


@pytest.fixture(scope="module")
def text(comparison):
    return str(comparison)


def test_the_public_door_leads_here():
    assert plastic.compare is compare


def test_there_is_one_arm_for_each_rule_route_and_protocol(comparison):
    assert [a.key for a in comparison.arms] == [
        (rule, route, protocol) for protocol in PROTOCOLS for rule in RULES for route in ROUTES
    ]
    assert comparison.own_protocols == ("single_pairs", "bursts")


def test_verdict_shares_sum_to_one_in_every_arm(comparison):
    done = [a for a in comparison.arms if a.expressed]
    assert len(done) > 40
    for one in done:
        assert sum(one.expressed.verdicts.values()) == pytest.approx(1)
        assert sum(one.never_causes.values()) == pytest.approx(
            one.expressed.verdicts.get("never", 0.0)
        )


def test_simulated_cells_are_never_called_n(text):
    assert "12 simulated cells" in text
    assert " n " not in text
    assert "n =" not in text


def test_the_head_tells_criterion_matching_and_ceiling(comparison, fake_results):
    assert comparison.head.splitlines() == [
        "An invented pair of pathways",
        "criterion: far alone fires the cell with probability >= 0.5; 12 simulated cells per arm",
        "routes matched by same factor; at a route's ceiling the weight is held",
    ]
    hidden = compare(fake_results.assign_attrs(at_ceiling="hidden"))
    assert "the weight goes on, unseen" in hidden.head


def test_the_head_tells_where_the_baseline_epsp_could_not_be_met(fake_results):
    assert "baseline EPSP" not in compare(fake_results).head
    short = fake_results.assign_attrs(baseline_epsp_not_recruited="far: 4 cells")
    assert "\nbaseline EPSP not met: far: 4 cells (" in compare(short).head


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
