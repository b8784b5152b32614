"""Which inputs reach threshold together; other roads: identities, and a steady closed form."""

from __future__ import annotations

import numpy as np
import pytest

from plastic.analysis.subject import Subject
from plastic.analysis.summation import Combination, combinations_of, openings_of
from tests.analysis.cells import BELOW, SHUNT, bundle, subject


def by_label(*inputs: str, **cell: object) -> dict[str, Combination]:
    return {c.label: c for c in combinations_of(subject(*inputs, **cell))}


def test_each_alone_each_pair_and_all_of_them() -> None:
    three = by_label(bundle("a", 500.0, 1.0), bundle("b", 300.0, 1.0), bundle("c", 60.0, 1.0))
    assert list(three) == ["a", "b", "c", "a + b", "a + c", "b + c", "a + b + c"]
    assert list(by_label(bundle("a", 500.0, 1.0), bundle("b", 300.0, 1.0))) == ["a", "b", "a + b"]
    assert list(by_label(bundle("a", 500.0, 1.0))) == ["a"]


def test_all_of_many_have_a_short_name() -> None:
    four = by_label(*(bundle(name, 300.0, 1.0) for name in "abcd"))
    assert len(four) == 4 + 6 + 1
    assert list(four)[-1] == "all 4 excitatory inputs"


def test_two_halves_at_one_place_are_one_input() -> None:
    found = by_label(*(bundle(name, 320.0, g) for name, g in (("a", 4.0), ("b", 4.0), ("c", 8.0))))
    assert found["a + b"].excited == pytest.approx(found["c"].excited, rel=1e-9)
    assert found["a"].excited == pytest.approx(found["b"].excited, rel=1e-12)
    assert found["a"].excited < 0.9 * found["c"].excited  # control


def test_weak_inputs_sum_linearly_and_strong_ones_less() -> None:
    """The linear sum of inputs at one place: twice the one."""
    losses = []
    for g in (1e-3, 1.0, 8.0):
        both = by_label(bundle("a", 320.0, g), bundle("b", 320.0, g))
        assert both["a + b"].linear == pytest.approx(2 * both["a"].excited, rel=1e-9)
        assert both["a"].sublinear == pytest.approx(0.0, abs=1e-9)
        losses.append(both["a + b"].sublinear)
    assert losses == sorted(losses)
    assert losses[0] < 0.1
    assert losses[-1] > 15


def test_inputs_at_one_place_lose_more_than_inputs_on_two_dendrites() -> None:
    """The order of the steady closed form (I + g K)^-1 on a tree."""
    apart = by_label(
        bundle("a", 300.0, 5.0),
        bundle("b", 300.0, 5.0, on="other"),
        shafts={"shaft": (300.0, 1.0), "other": (300.0, 1.0)},
    )
    same = by_label(
        bundle("a", 300.0, 5.0),
        bundle("b", 300.0, 5.0),
        shafts={"shaft": (300.0, 1.0), "other": (300.0, 1.0)},
    )
    assert same["a"].excited == pytest.approx(apart["a"].excited, rel=1e-9)
    assert same["a + b"].sublinear > 3 * apart["a + b"].sublinear > 0


def test_the_linear_sum_is_that_of_time_courses_and_not_of_peaks() -> None:
    """Peaks at other times do not add up."""
    both = by_label(bundle("a", 500.0, 0.5), bundle("b", 0.0, 0.5))
    assert both["a + b"].linear < 0.99 * (both["a"].excited + both["b"].excited)
    late = by_label(bundle("a", 500.0, 0.5), bundle("b", 500.0, 0.5, more='delay = "15 ms"'))
    assert late["a + b"].linear < 0.9 * (late["a"].excited + late["b"].excited)


def test_the_distance_to_threshold_is_told_with_its_sign() -> None:
    found = by_label(bundle("a", 60.0, 1.0), bundle("b", 60.0, 40.0), threshold=-55.0)
    for c in found.values():
        assert c.threshold == pytest.approx(10.0)
        assert c.missing(inhibition=False) == pytest.approx(10.0 - c.excited)
        assert c.fires(inhibition=False) == (c.excited >= 10.0)
    assert [c.fires(inhibition=False) for c in found.values()] == [False, True, True]


# ---- inhibition


def test_without_inhibition_there_is_one_answer() -> None:
    for c in by_label(bundle("a", 60.0, 5.0), bundle("b", 300.0, 5.0)).values():
        assert c.inhibited == pytest.approx(c.excited, rel=1e-12)
        assert c.taken == pytest.approx(0.0, abs=1e-9)


def driven(by: str, g: float = 20.0, delay: str = "0 ms", receptor: str = BELOW) -> str:
    more = f'driven_by = [ {{ input = "{by}", delay = "{delay}" }} ]'
    return bundle("brake", 0.0, g, receptor=receptor, more=more)


def test_driven_inhibition_comes_with_its_driver_only() -> None:
    found = by_label(bundle("a", 300.0, 5.0), bundle("b", 60.0, 5.0), driven("b"))
    assert list(found) == ["a", "b", "a + b"]
    assert found["a"].inhibited == pytest.approx(found["a"].excited, rel=1e-12)
    assert found["b"].taken > 20
    assert found["a + b"].taken > 20


def test_inhibition_that_nothing_drives_is_there_with_everything() -> None:
    found = by_label(bundle("a", 300.0, 5.0), bundle("free", 0.0, 20.0, receptor=BELOW))
    assert list(found) == ["a"]
    assert found["a"].taken > 20


def test_inhibition_that_comes_after_the_peak_takes_nothing() -> None:
    late = by_label(bundle("a", 60.0, 5.0), driven("a", delay="40 ms"))
    early = by_label(bundle("a", 60.0, 5.0), driven("a", delay="1 ms"))
    assert late["a"].taken == pytest.approx(0.0, abs=1e-9)
    assert early["a"].taken > 10


def test_a_shunt_divides_although_it_moves_nothing() -> None:
    found = by_label(bundle("a", 300.0, 5.0), driven("a", receptor=SHUNT))
    assert found["a"].taken > 10


@pytest.fixture(scope="module")
def twice() -> Subject:
    """One brake with depression, driven by both inputs at different delays."""
    brake = (
        '[input.brake]\nlocation = { on = "soma" }\n'
        'driven_by = [ { input = "a", delay = "1 ms" }, { input = "b", delay = "5 ms" } ]\n'
        'release = { sites = 10, probability = 0.5, quantum = "2 nS", depletion = "100 ms" }\n'
        f"receptor = {{ {BELOW} }}\n"
    )
    return subject(bundle("a", 300.0, 5.0), bundle("b", 60.0, 5.0), brake)


def test_inhibition_that_two_inputs_drive_comes_twice_and_depressed(twice: Subject) -> None:
    """By hand: half of the sites are empty, and e^(-4/100) of them still are 4 ms later."""
    opened = [o for o in openings_of(twice, ["a", "b"], inhibition=True) if o.contact == 2]
    assert [o.time for o in opened] == pytest.approx([1.0, 5.0])
    assert [o.peak for o in opened] == pytest.approx([10.0, 10.0 * (1 - 0.5 * np.exp(-0.04))])


def test_blocked_inhibition_opens_nothing(twice: Subject) -> None:
    opened = openings_of(twice, ["a", "b"], inhibition=False)
    assert sorted(o.contact for o in opened) == [0, 1]


def test_an_excitatory_input_that_is_driven_comes_with_its_driver() -> None:
    relay = bundle("relay", 60.0, 3.0, more='driven_by = [ { input = "a", delay = "2 ms" } ]')
    alone, relayed = by_label(bundle("a", 300.0, 1.0)), by_label(bundle("a", 300.0, 1.0), relay)
    assert list(relayed) == ["a"]
    assert relayed["a"].excited > 2 * alone["a"].excited
