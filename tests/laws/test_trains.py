"""The dense trains that laws look at a rule with."""

from __future__ import annotations

from itertools import pairwise

from plastic import rules
from plastic.laws._trains import dense, versions


def test_trains_rise_and_some_of_their_spikes_coincide() -> None:
    a, b, post = dense(1, 20.0, 2000.0)
    for train in (a, b, post):
        assert len(train) >= 38
        assert all(x < y for x, y in pairwise(train))
        assert train[0] > 0
        assert train[-1] < 2000
    assert set(a) & set(post)
    assert set(b) & set(a)


def test_the_same_seed_is_the_same_train_and_another_is_not() -> None:
    assert dense(1, 20.0, 500.0) == dense(1, 20.0, 500.0)
    assert dense(1, 20.0, 500.0) != dense(2, 20.0, 500.0)


def test_versions_are_the_default_and_every_set() -> None:
    rule = rules.find("triplet_timing")
    found = dict(versions(rule))
    assert list(found) == ["default", *rule.sets]
    assert found["hippocampal_full"] == rule.from_set("hippocampal_full")
