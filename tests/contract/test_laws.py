"""What holds for every law: it says what it is about, it can fail, and the catalogues keep it."""

from __future__ import annotations

from typing import Any

import pytest

from plastic import laws, routes, rules
from plastic.checking.check import check, exemptions
from plastic.checking.search import judged
from plastic.laws import Case
from plastic.laws._cells import PassiveCell
from tests.laws import faulty_cells, faulty_routes
from tests.laws.faulty import FAULTS, SLATE, variant
from tests.laws.test_claims import claiming
from tests.laws.test_counts_only import Late
from tests.laws.test_weight_units import UNITLESS
from tests.laws.trying import assert_caught

NAMES = laws.names()
RULE_LAWS = [n for n in NAMES if laws.find(n).about == "rule"]
#: laws that are not run here on every rule: the compiled rule is compared in the contract of rules
QUICK = [n for n in RULE_LAWS if n != "compiled"]
CELL = (faulty_cells.ONE, faulty_cells.PLACES)
NUMBERS = {"tenths": 20, "node": 1}

#: a part that breaks each law, besides the design faults
CONTROLS: dict[str, type[Any]] = {
    **{law: rule for rule, law in FAULTS.values()},
    "claims": claiming(9.0, 10.0),
    "counts_only": Late,
    "half_weights": variant("Adding", promises=("half_weights",)),
    "weight_units": UNITLESS,
    "neutral_factor": faulty_routes.route("Off", faulty_routes.off_by_a_percent),
    "monotone_route": faulty_routes.route("Turning", faulty_routes.turning),
    "route_defined": faulty_routes.route("Unlimited", faulty_routes.unlimited),
    "shares_make_a_whole": faulty_routes.route("Linear", faulty_routes.linear),
    "others_untouched": faulty_routes.route("Silent", target="diameter"),
}
CELLS = {
    "reciprocity": faulty_cells.OneWay,
    "rest": faulty_cells.Overshooting,
    "energy": faulty_cells.Charging,
}


@pytest.mark.parametrize("name", NAMES)
def test_a_law_is_one_sentence_in_words(name: str) -> None:
    law = laws.find(name)
    assert law.about in ("rule", "route", "cell")
    assert 20 < len(law.summary()) <= 100
    assert law.summary().endswith(".")
    assert "broken" in vars(law)


@pytest.mark.parametrize("name", [n for n in NAMES if n not in CELLS])
def test_every_law_fails_on_a_part_built_to_break_it(name: str) -> None:
    SLATE.clear()
    assert_caught(CONTROLS[name], name)


@pytest.mark.parametrize("name", sorted(CELLS))
def test_every_law_of_cells_fails_on_a_cell_built_to_break_it(name: str) -> None:
    law = laws.find(name)()
    assert judged(law, Case(CELLS[name](*CELL), numbers=NUMBERS)) is not None
    assert judged(law, Case(PassiveCell(*CELL), numbers=NUMBERS)) is None


def test_there_are_at_least_twenty_design_faults_and_a_law_for_each() -> None:
    assert len(FAULTS) >= 20
    assert {law for _, law in FAULTS.values()} <= set(RULE_LAWS)


@pytest.mark.parametrize("fault", FAULTS)
def test_every_design_fault_is_caught_by_its_law_within_six_spikes(fault: str) -> None:
    SLATE.clear()
    assert_caught(*FAULTS[fault])


@pytest.mark.parametrize("name", rules.names())
def test_every_rule_keeps_every_law_or_is_exempt_with_need(name: str) -> None:
    report = check(name, examples=25, seed=11, only=QUICK)
    assert [(v.law, v.broken) for v in report.failures] == []
    assert {v.law for v in report.verdicts if v.status == "exempt"} == set(
        exemptions(rules.find(name))
    )


@pytest.mark.parametrize("name", [*routes.names(), "cells"])
def test_every_route_and_the_cells_keep_every_law(name: str) -> None:
    report = check(name, examples=40, seed=11)
    assert [(v.law, v.broken) for v in report.failures] == []
    assert {v.status for v in report.verdicts} == {"holds"}
