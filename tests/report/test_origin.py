from plastic.report.comparison import compare
from plastic.report.origin import rules_of, schedules_of, study_of
from plastic.rules.triplet_timing import TripletTiming
from tests.report.conftest import PROTOCOLS, RULES


def test_rules_and_schedules_are_rebuilt_from_the_results_own_text(fake_results):
    study = study_of(fake_results)
    rules = rules_of(study)
    assert list(rules) == RULES
    assert rules["triplet_timing"] == TripletTiming()
    assert list(schedules_of(study)) == PROTOCOLS


def test_without_a_study_there_is_nothing_to_rebuild(fake_results):
    assert study_of(fake_results.assign_attrs(study="")) is None
    assert rules_of(None) == {}
    assert schedules_of(None) == {}


def test_a_study_that_cannot_be_rebuilt_is_said_so(fake_results):
    lost = compare(fake_results.assign_attrs(study="not = a study"))
    assert lost.illustrative == {}
    assert {p.role for p in lost.pathways} == {"not told"}
    assert "cannot be rebuilt here" in str(lost)
