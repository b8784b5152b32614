"""What a reading opens, what a route makes of factors, and that reading changes nothing."""

from __future__ import annotations

import copy
from collections.abc import Callable
from dataclasses import fields
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic import routes
from plastic.engine.readings import Reader, State, axis, interpolate, position
from plastic.routes import Mixture
from tests.engine.readers import (
    BRAKE,
    FAST,
    Floats,
    Opening,
    cells_of,
    integrated,
    lands,
    network,
    reader_of,
    scene_of,
    state_at,
    wiring_of,
)

NAMES = routes.names()
QUANTUM = Mixture.pure("quantal_size", routes.find("quantal_size")())


def pure(name: str, **limits: float) -> Mixture:
    return Mixture.pure(name, routes.find(name)(**limits))


# ---- the axes of the tables


@given(st.floats(0.1, 1e4), st.integers(4, 60))
def test_every_node_of_an_axis_is_at_its_own_position(top: float, nodes: int) -> None:
    at = axis(top, nodes)
    assert (at[0], at[-1]) == (0.0, pytest.approx(top))
    assert (np.diff(at) > 0).all()
    assert position(at, top, nodes) == pytest.approx(np.arange(nodes), abs=1e-9)


def test_what_lies_outside_a_table_is_read_at_its_edge() -> None:
    assert position(np.array([0.0, 1e9]), 50.0, 12).tolist() == [0.0, 11.0]


@given(st.integers(0, 3), st.integers(0, 3))
def test_tables_of_cubics_are_interpolated_exactly(i: int, j: int) -> None:
    """Cubic Lagrange interpolation has no error up to third powers, on both axes."""
    across, along = np.arange(9.0), np.arange(14.0)
    table = (across**i)[:, None] * along**j
    rng = np.random.default_rng(1)
    y, x = rng.uniform(0, 8, (2, 30)), rng.uniform(0, 13, (2, 30))
    found = interpolate(np.stack([table, 2 * table]), x, y)
    assert found == pytest.approx(np.array([[1.0], [2.0]]) * y**i * x**j, rel=1e-9, abs=1e-9)


# ---- what opens


def braked(own: float = 0.0, drive: float = 2.0) -> Reader:
    scene = scene_of(
        lands("weak", 300.0, delay=own),
        lands("brake", 0.0, BRAKE),
        drives=[("weak", "brake", drive)],
    )
    return reader_of(scene, sites=[20, 1], probability=[0.5, 1], quantum=[0.4, 3.0])


def test_one_stimulus_opens_the_input_and_what_it_drives_in_order_of_time() -> None:
    opened = braked().openings("weak")
    assert (opened.contact.tolist(), opened.step.tolist()) == ([0, 1], [0, 20])
    assert (opened.own.tolist(), opened.fixed.tolist()) == ([1, 0], [0, 1])
    assert braked().openings("weak", inhibition=False).contact.tolist() == [0]
    assert braked().openings("brake").contact.tolist() == [1]


def test_shares_are_those_of_the_places_and_an_added_contact_has_none() -> None:
    scene = scene_of(
        lands("weak", 300.0, share=0.25),
        lands("weak", 200.0, share=0.75, delay=0.5),
        lands("weak", 80.0, added=True, delay=1.5),
    )
    opened = reader_of(scene).openings("weak")
    assert opened.step.tolist() == [0, 5, 15]
    assert opened.own.tolist() == [0.25, 0.75, 0.0]
    assert opened.added.tolist() == [0.0, 0.0, 1.0]


def test_delays_that_all_share_are_not_seen() -> None:
    """The brake follows 2 ms after the input, whatever the way to both."""
    plain, late = braked(0.0, 2.0), braked(6.0, 8.0)
    for reader in (plain, late):
        assert reader.openings("weak").step.tolist() == [0, 20]
    peaks = [r.shape("weak", None, state_at(r, QUANTUM, [1.0])).peak[0, 0] for r in (plain, late)]
    assert peaks[0] == peaks[1]


def test_inhibition_may_arrive_before_the_input_that_recruits_it() -> None:
    """The brake opens 4 ms before the EPSP does; against scipy."""
    reader = braked(own=5.0, drive=1.0)
    assert reader.openings("weak").step.tolist() == [0, 40]
    found = reader.shape("weak", None, state_at(reader, QUANTUM, [1.0])).peak[0, 0]
    early = [Opening(3.0, 0, BRAKE), Opening(4.0, 1, FAST, 4.0)]
    assert found == pytest.approx(integrated(network(8.0, [300.0]), early)[1].max(), rel=2e-3)


# ---- the slow variables

FACTORS = [0.0, 0.4, 1.0, 1.3, 2.0, 9.0]


def every_route() -> Reader:
    """Return a reader of two cells with a place for every route; contacts 3 and 4 do not learn."""
    scene = scene_of(
        lands("weak", 300.0, neck=150.0),
        lands("weak", 200.0, neck=150.0, share=0.5),
        lands("weak", 100.0, neck=150.0, added=True),
        lands("other", 200.0, neck=150.0),
        lands("brake", 300.0, BRAKE),
    )
    return reader_of(scene, load=[8.0, 5.0], quantum=[0.4, 0.4, 0.4, 0.7, 0.5], highest=0.8)


def variables(state: State) -> dict[str, Floats]:
    return {field.name: getattr(state, field.name) for field in fields(state)}


#: target -> the variable it moves, and what the map's multiple makes of it at contact 0
MOVED: dict[str, tuple[str, Callable[[Floats], Floats]]] = {
    "probability": ("probability", lambda m: np.minimum(0.5 * m, 0.8)),
    "quantum": ("quantum", lambda m: 0.4 * m / (1 + 0.4 * m * 0.15)),
    "sites": ("sites", lambda m: 20 * m),
    "neck": ("quantum", lambda m: 0.4 / (1 + 0.4 * 0.15 * m)),
}


@pytest.mark.parametrize("share", [1.0, 0.4])
@pytest.mark.parametrize("target", MOVED)
def test_a_route_moves_its_variable_by_its_map_and_no_other(target: str, share: float) -> None:
    (name,) = [n for n in NAMES if routes.find(n).target == target]
    rest = next(n for n in NAMES if routes.find(n).target == "added_sites")
    mixture = Mixture(
        "m", {name: share, rest: 1 - share}, {n: routes.find(n)() for n in (name, rest)}
    )
    reader = every_route()
    still, found = state_at(reader, mixture, [1.0]), state_at(reader, mixture, FACTORS)
    variable, made = MOVED[target]
    expected = made(routes.find(name)().multiple(FACTORS, share))
    moved = variables(found)
    for cell in range(2):
        for contact in (0, 1):
            assert moved[variable][cell, contact] == pytest.approx(expected, rel=1e-12)
    for other, values in moved.items():
        where = [3, 4] if other == variable else [0, 1, 3, 4]
        at_rest = np.broadcast_to(variables(still)[other], values.shape)
        if other != "width":
            values, at_rest = values[:, where], at_rest[:, where]
        assert (values == at_rest).all(), other


def test_an_added_contact_has_sites_above_a_factor_of_one_only() -> None:
    state = state_at(every_route(), pure("added_contact"), FACTORS)
    assert state.sites[0, 2] == pytest.approx(20 * np.array([0, 0, 0, 0.3, 1, 8]))
    assert (state.sites[:, [0, 1, 3, 4]] == 20).all()
    assert (state_at(every_route(), QUANTUM, FACTORS).sites[:, 2] == 0).all()


def test_a_stretch_follows_the_mean_over_all_excitatory_contacts_beyond_it() -> None:
    """Beyond 0 and 100 um lie two that learn and another, beyond 200 um one and a brake."""
    state = state_at(every_route(), pure("dendrite_width", lowest=0.3, highest=3.0), FACTORS)
    f = np.array(FACTORS)
    shared, alone = np.clip((2 * f + 1) / 3, 0.3, 3.0), np.clip(f, 0.3, 3.0)
    for cell in range(2):
        widths = state.width[cell].T
        assert widths == pytest.approx(np.array([shared, shared, alone, 1 + 0 * f]))


def test_a_mixture_gives_every_channel_its_share_of_the_exponent() -> None:
    shares = {"release_sites": 0.5, "quantal_size": 0.25, "dendrite_width": 0.25}
    mixture = Mixture("m", shares, {n: routes.find(n)() for n in shares})
    factors = np.array([1.0, 1.2, 2.0])
    state = state_at(every_route(), mixture, list(factors))
    q = 0.4 * factors**0.25
    assert state.sites[0, 0] == pytest.approx(20 * factors**0.5)
    assert state.quantum[0, 0] == pytest.approx(q / (1 + 0.15 * q))
    assert state.width[0, :, 2] == pytest.approx(factors**0.25)


def test_the_conductance_of_contacts_is_the_sum_of_their_means() -> None:
    state = state_at(every_route(), pure("release_sites"), [1.0, 2.0])
    each = 20 * 0.5 * 0.4 / (1 + 0.4 * 0.15)
    assert state.conductance([0, 1])[1] == pytest.approx([2 * each, 4 * each])


# ---- reading changes nothing


def test_readings_leave_cells_wiring_and_state_as_they_were() -> None:
    scene = scene_of(
        lands("weak", 300.0, quantal_cv=0.3), lands("weak", 80.0, added=True), lands("brake")
    )
    reader = reader_of(scene, load=[8.0, 5.0])
    route = pure("added_contact")
    state = state_at(reader, route, [1.0, 2.0])
    before: list[Any] = copy.deepcopy([*reader.wiring, *reader.cells, *variables(state).values()])
    for inhibition in (True, False):
        reader.shape("weak", route, state, inhibition=inhibition)
        reader.fires_alone("weak", route, state, inhibition=inhibition)
    reader.simulated("weak", state, trials=20)
    reader.effect(0)
    after: list[Any] = [*reader.wiring, *reader.cells, *variables(state).values()]
    for old, new in zip(before, after, strict=True):
        assert old.tobytes() == new.tobytes()


def test_the_order_of_questions_does_not_matter() -> None:
    """Tables are made when first needed and kept: a reader that was asked before says the same."""
    fresh, asked = every_route(), every_route()
    route, factors = pure("added_contact"), [1.0, 1.4, 2.5]
    for name in ("release_probability", "dendrite_width", "added_contact"):
        asked.shape("weak", pure(name), state_at(asked, pure(name), factors), inhibition=False)
        asked.threshold("weak", pure(name), state_at(asked, pure(name), factors))
    for ask in (
        lambda r, state: r.shape("weak", route, state).peak,
        lambda r, state: r.threshold("weak", route, state),
        lambda r, state: r.threshold("weak", None, state, inhibition=False),
    ):
        found = [ask(r, state_at(r, route, factors)) for r in (fresh, asked)]
        assert found[0].tobytes() == found[1].tobytes()


def test_a_cell_reads_the_same_whatever_the_cells_beside_it() -> None:
    scene, top = scene_of(lands("weak", 300.0, quantal_cv=0.3)), 160.0
    loads, sites = [8.0, 3.0, 5.0], np.array([[20.0], [33.0], [60.0]])
    wiring = wiring_of(scene)
    whole = Reader(scene, wiring, cells_of(scene, load=loads, sites=sites), top)
    alone = Reader(scene, wiring, cells_of(scene, load=loads[1:2], sites=sites[1:2]), top)
    for ask in (
        lambda r: r.shape("weak", None, state_at(r, QUANTUM, [1.0, 1.7])).half_width,
        lambda r: r.fires_alone("weak", None, state_at(r, QUANTUM, [1.0, 1.7])),
    ):
        assert ask(whole)[1].tobytes() == ask(alone)[0].tobytes()


# ---- the effect of one contact


def test_the_effect_of_a_contact_is_the_linear_response_to_its_current() -> None:
    """A point cell in closed form: the difference of exponentials through one membrane.

    V = f E g/G sum of (+-) [e^(-t/tau) - e^(-t/tau_m)] / (1 - tau_m/tau), textbook.
    """
    reader = reader_of(scene_of(lands("weak")), load=[8.0, 3.0])
    t, top = np.linspace(0, 60, 60_001), np.log(6.0) * 0.5 * 3.0 / 2.5
    f = 1 / (np.exp(-top / 3.0) - np.exp(-top / 0.5))
    fall = np.exp(-t / 15.0)
    terms = [(np.exp(-t / tau) - fall) / (1 - 15.0 / tau) for tau in (3.0, 0.5)]
    unit = f * 70.0 * (terms[0] - terms[1]).max()
    assert reader.effect(0) == pytest.approx([unit / 8.0, unit / 3.0], rel=2e-3)


def test_the_effect_of_a_far_contact_is_what_little_conductance_does() -> None:
    """Against scipy, at the 0.01 nS of the definition."""
    reader = reader_of(scene_of(lands("weak", 300.0), lands("near", 100.0), lands("brake")))
    cell = network(8.0, [100.0, 300.0])
    for contact, node in ((0, 2), (1, 1)):
        exact = integrated(cell, [Opening(0.01, node)])[1].max() / 0.01
        assert reader.effect(contact)[0] == pytest.approx(exact, rel=1e-3)
