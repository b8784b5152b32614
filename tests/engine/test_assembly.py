"""From a cell, a schedule, a rule and a route to arrays: order, places, delays, ceilings."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np
import pytest

from plastic import routes
from plastic.engine.assembly import (
    TICK,
    Contact,
    Drive,
    Receptor,
    Scene,
    events_of,
    input_times,
    wire,
)
from plastic.engine.kernel import numbers_of
from plastic.engine.layout import Records, Wiring
from plastic.errors import Misfit
from plastic.membrane.spikes import BackPropagation
from plastic.membrane.tree import Dendrite, build_tree
from plastic.routes import Mixture
from plastic.routes._interface import TARGETS
from plastic.rules.pair_timing import PairTiming
from plastic.rules.sliding_threshold import SlidingThreshold

NONE = np.array([])
FAST, SLOW = Receptor(0.0, 0.5, 3.0), Receptor(10.0, 0.0, 5.0)
PLACES = [("a", 50.0), ("a", 150.0), ("b", 100.0)]
TREE = build_tree({"a": Dendrite(200.0, 2.0), "b": Dendrite(120.0, 1.0)}, PLACES, 0)
NEAR, FAR, SIDE = (TREE.node_of[place] for place in PLACES)


def scene(contacts: Sequence[Contact], **settings: object) -> Scene:
    """Return a cell with two dendrites and the given contacts."""
    given = {
        "tree": TREE,
        "rm": 15_000.0,
        "ri": 150.0,
        "tau_m": 15.0,
        "rest": -70.0,
        "reset": -75.0,
        "refractory": 2.0,
        "contacts": contacts,
    }
    return Scene(**given | settings)  # type: ignore[arg-type]


def cell(**settings: object) -> Scene:
    """Return far and near learners, a side input that does not learn, inhibition at the soma."""
    contacts = [
        Contact("far", FAR, FAST, delay=1.0),
        Contact("side", SIDE, SLOW),
        Contact("near", NEAR, FAST, delay=0.5),
        Contact("brake", 0, Receptor(-75.0, 0.5, 7.0)),
        Contact("far", NEAR, FAST, delay=3.0, added=True),
    ]
    given: dict[str, object] = {"learners": ("far", "near"), "inhibitory": ("brake",)}
    return scene(contacts, **given | settings)


def rows(events: Records) -> list[tuple[int, ...]]:
    """Return (step, contact, learner) of every event."""
    return [tuple(int(row[n]) for n in ("step", "contact", "learner")) for row in events]


def wired(given: Scene, events: Records | None = None, **more: object) -> Wiring:
    """Return the arrays of an arm of the pair rule."""
    made = events_of(given, {}, NONE, pre_is="arrival") if events is None else events
    arm = {"end": 10.0, "readings": NONE, "numbers": numbers_of(PairTiming()), "route": None}
    return wire(given, made, **arm | more)  # type: ignore[arg-type]


# ---- times of the inputs


def test_a_driven_input_fires_after_its_drivers() -> None:
    driven = cell(drives=(Drive("near", "brake", 2.0), Drive("far", "brake", 3.0)))
    found = input_times(driven, {"near": np.array([10.0, 20.0]), "far": np.array([11.0])})
    assert found["brake"].tolist() == [12.0, 14.0, 22.0]
    assert found["near"].tolist() == [10.0, 20.0]


def test_spikes_of_an_input_that_fall_together_are_one() -> None:
    driven = cell(drives=(Drive("near", "brake", 2.0), Drive("far", "brake", 3.0)))
    found = input_times(driven, {"near": np.array([10.0]), "far": np.array([9.0]), "brake": NONE})
    assert found["brake"].tolist() == [12.0]


def test_blocked_inhibition_is_silent_and_nothing_else_is() -> None:
    driven = cell(drives=(Drive("near", "brake", 2.0),))
    times = {"near": np.array([10.0]), "brake": np.array([50.0])}
    found = input_times(driven, times, inhibition_blocked=True)
    assert found["brake"].tolist() == []
    assert found["near"].tolist() == [10.0]
    assert input_times(driven, times)["brake"].tolist() == [12.0, 50.0]  # the control


def test_times_are_whole_steps() -> None:
    found = input_times(cell(dt=0.25), {"near": np.array([10.1, 10.2, 30.0])})["near"]
    assert found.tolist() == [10.0, 10.25, 30.0]


def test_an_input_that_the_cell_does_not_have_is_refused() -> None:
    with pytest.raises(Misfit, match=r"protocol: got events of 'middle' but expected \['far', "):
        input_times(cell(), {"middle": np.array([1.0])})


# ---- events


def test_events_are_in_the_order_of_time_and_injected_spikes_come_first() -> None:
    """far: contacts 0 and 4 after 1 and 3 ms; near: contact 2 after 0.5 ms; steps of 0.1 ms.
    Learner 0 is near, learner 1 far; the added contact brings no second event to the rule, and
    opens before the rule learns: everything sees the strength of just before the instant."""
    times = {"far": np.array([5.0, 8.0]), "near": np.array([7.5]), "side": np.array([6.0])}
    found = rows(events_of(cell(), times, np.array([8.0, 6.0]), pre_is="arrival"))
    assert found == [
        (60, -1, -1),
        (60, 1, -1),
        (60, 0, 1),
        (80, -1, -1),
        (80, 4, -1),
        (80, 2, 0),
        (90, 0, 1),
        (110, 4, -1),
    ]


def test_a_rule_that_counts_spikes_hears_of_them_at_the_axon() -> None:
    """The learner's event is at the spike, after the contacts of its step; arrival is later."""
    times = {"far": np.array([5.0]), "side": np.array([5.0])}
    found = rows(events_of(cell(), times, np.array([5.0]), pre_is="spike"))
    assert found == [
        (50, -1, -1),
        (50, 1, -1),
        (50, -1, 1),
        (60, 0, -1),
        (80, 4, -1),
    ]


# ---- learners and sites


def test_learners_are_sorted_by_the_distance_of_their_first_contact() -> None:
    assert cell().ordered_learners() == ["near", "far"]
    assert cell().inputs == ["far", "side", "near", "brake"]
    assert (cell().primary("far"), cell().primary("near")) == (0, 2)


def test_sites_are_the_soma_and_the_places_of_learners() -> None:
    spread = BackPropagation(velocity=100.0)
    found = wired(cell(back_propagation=spread))
    assert found.sites["distance"].tolist() == [0.0, 50.0, 150.0]
    assert found.sites["delay"].tolist() == [0, 5, 15]  # steps: 0.5 and 1.5 ms
    assert found.learner_site.tolist() == [1, 2]
    assert found.site_first.tolist() == [0, 0, 1, 2]


def test_every_site_has_a_range_of_learners_even_where_distances_are_equal() -> None:
    """Learners of one site stand together when two dendrites hold places at one distance."""
    tree = build_tree({n: Dendrite(200.0, 1.0) for n in "ab"}, [("a", 100.0), ("b", 100.0)], 0)
    nodes = [tree.node_of[place] for place in (("a", 100.0), ("b", 100.0), ("a", 100.0))]
    contacts = [Contact(n, node, FAST) for n, node in zip("xyz", nodes, strict=True)]
    found = wired(scene([*contacts, Contact("s", 0, FAST)], tree=tree, learners=tuple("xyzs")))
    for site in range(3):
        own = range(found.site_first[site], found.site_first[site + 1])
        assert list(own) == np.flatnonzero(found.learner_site == site).tolist()
    assert len(found.learner_site) == found.site_first[-1] == 4


# ---- the cell as arrays


def test_voltages_are_relative_to_rest_and_times_are_steps() -> None:
    found = wired(cell(dt=0.05), end=12.0, readings=np.array([0.0, 3.02]))
    plan = found.plan[0]
    assert (plan["n_steps"], plan["refractory"], plan["reset"]) == (240, 40, -5.0)
    assert found.reading_step.tolist() == [0, 60]
    assert received(found)["reversal"].tolist() == [70.0, 80.0, 70.0, -5.0, 70.0]


def test_contacts_of_one_place_and_kind_share_a_conductance() -> None:
    found = wired(cell())
    group = found.contacts["group"]
    assert group[4] == group[2]
    assert len(set(group)) == len(found.groups) == 4
    assert found.contacts["learner"].tolist() == [1, -1, 0, -1, 1]


def test_every_place_has_the_range_of_its_conductances() -> None:
    """The third conductance lands where the first does."""
    contacts = [Contact(n, node, kind) for n, node, kind in PLACED]
    found = wired(scene(contacts))
    nodes = {
        int(g): int(slot["node"])
        for slot in found.slots
        for g in range(slot["first"], slot["last"])
    }
    assert [nodes[int(g)] for g in found.contacts["group"]] == [node for _, node, _ in PLACED]
    assert len(nodes) == len(found.groups) == 3
    assert len(found.slots) == 2


PLACED = (("x", FAR, FAST), ("y", 0, FAST), ("z", FAR, SLOW))


def received(found: Wiring) -> Records:
    """Return the conductance of each contact."""
    conductances: Records = found.groups[found.contacts["group"]]
    return conductances


def test_receptors_decay_by_step_and_peak_at_one() -> None:
    """A single exponential has no rise and peaks at once."""
    found = received(wired(cell(dt=0.2)))[:2]
    assert found["keep_decay"].tolist() == pytest.approx([math.exp(-0.2 / 3), math.exp(-0.2 / 5)])
    assert found["keep_rise"].tolist() == pytest.approx([math.exp(-0.4), 0.0])
    t = np.linspace(0, 20, 200_001)
    peak = (np.exp(-t / 3) - np.exp(-t / 0.5)).max()
    assert found["norm"].tolist() == pytest.approx([1 / peak, 1.0], rel=1e-8)


def test_a_stretch_widens_when_a_learning_contact_lies_at_or_beyond_it() -> None:
    """Dendrite b has no learner, an added contact widens nothing, a sealed stub never does."""
    found = wired(cell())
    on = np.array(TREE.stretch_dendrite)
    assert found.stretches["widens"][on == "a"].tolist() == [1, 1, 0]
    assert not found.stretches["widens"][on == "b"].any()
    beyond = found.beyond[on == "a"]
    assert beyond.tolist() == [[1, 0, 1, 0, 0], [1, 0, 0, 0, 0], [0, 0, 0, 0, 0]]
    only_added = wired(cell(learners=("near",)))
    assert only_added.stretches["widens"][on == "a"].tolist() == [1, 0, 0]


def test_rates_are_counted_over_a_window_in_steps() -> None:
    numbers = numbers_of(SlidingThreshold(window=40))
    assert wired(cell(), numbers=numbers).plan["window"][0] == 400
    assert wired(cell()).plan["window"][0] == 0


# ---- routes as arrays


def test_delays_and_time_constants_of_expression_are_in_ticks() -> None:
    slow = Mixture.pure("r", routes.find("quantal_size")(delay=60_000, tau=30_000))
    found = wired(cell(), route=slow)
    assert found.channels["delay"].tolist() == [60]
    assert found.channels["keep"][0] == pytest.approx(math.exp(-TICK / 30_000), rel=1e-14)
    assert found.plan["tick"][0] == round(TICK / 0.1)


@pytest.mark.parametrize(
    ("name", "times", "immediate", "ticks"),
    [
        ("quantal_size", {"delay": 0, "tau": 0}, False, False),
        ("quantal_size", {"delay": 0, "tau": 1000}, False, True),
        ("quantal_size", {"delay": 2000, "tau": 0}, False, True),
        ("quantal_size", {"delay": 2000, "tau": 1000}, True, False),
        ("dendrite_width", {"delay": 0, "tau": 0}, False, True),
        ("dendrite_width", {"delay": 2000, "tau": 1000}, True, True),
    ],
)
def test_expression_ticks_when_it_is_late_or_moves_the_dendrite(
    name: str, times: Mapping[str, float], immediate: bool, ticks: bool
) -> None:
    route = Mixture.pure("r", routes.find(name)(**times))
    found = wired(cell(), route=route, immediate=immediate)
    assert (found.plan["tick"][0] > 0) == ticks
    if immediate:
        assert (found.channels["delay"].tolist(), found.channels["keep"].tolist()) == ([0], [0.0])


def test_a_mixture_is_one_channel_per_share_with_its_sign() -> None:
    shares = {"spine_neck": 0.25, "quantal_size": 0.45, "added_contact": 0.3}
    found = wired(
        cell(), route=Mixture("m", shares, {n: routes.find(n)() for n in shares})
    ).channels
    assert found["exponent"].tolist() == [-0.25, 0.45, 0.3]
    assert found["excess"].tolist() == [0, 0, 1]
    targets = [TARGETS[t] for t in found["target"]]
    assert targets == ["neck", "quantum", "added_sites"]
