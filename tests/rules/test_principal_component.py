"""Oja's rule: growth, decay, length, window."""

from __future__ import annotations

import numpy as np
import pytest

from plastic import impose, present
from plastic.rules.principal_component import PrincipalComponent

BURST = [10.0, 20.0, 30.0]


def on_spikes(rule: PrincipalComponent, pre: object, post: object, **options: object) -> np.ndarray:
    return impose(rule, pre, post, compiled=False, **options).w.values[0]  # type: ignore[arg-type]


def test_it_grows_with_both_rates_and_decays_with_the_square_of_the_cells() -> None:
    rule = PrincipalComponent(eta=0.1, alpha=0.5)
    assert rule.at_presentation(3.0, 4.0, w=0.0) == {"w": pytest.approx(0.1 * 4 * 3)}
    assert rule.at_presentation(0.0, 4.0, w=2.0) == {"w": pytest.approx(-0.1 * 16 * 0.5 * 2)}


def test_a_silent_cell_does_not_change() -> None:
    assert PrincipalComponent().at_presentation(50.0, 0.0, w=2.0) == {"w": 0.0}


@pytest.mark.parametrize("alpha", [0.25, 1.0, 4.0])
def test_alpha_sets_the_length(alpha: float) -> None:
    """One direction of unit variance: |w| goes to 1 / sqrt(alpha) (derived)."""
    rule = PrincipalComponent.from_set("patterns", eta=0.1 / alpha**0.5, alpha=alpha)
    found = present(rule, [[1.0, 0.0], [-1.0, 0.0]], presentations=400, start=[0.2, 0.3])
    assert np.linalg.norm(found.weight.values[-1, :1]) == pytest.approx(alpha**-0.5, rel=1e-9)


def test_one_window_counts_spikes_into_rates() -> None:
    """One pre and three post spikes in 100 ms are 10 and 30 Hz."""
    rule = PrincipalComponent()
    w = on_spikes(rule, [0.0], BURST, end=100.0)
    assert w[-1] - 1 == pytest.approx(rule.eta * 30 * (10 - rule.alpha * 30), rel=1e-9)


def test_sixty_bursts_about_double_the_weight_and_many_rest_where_the_docstring_says() -> None:
    starts = 200.0 * np.arange(3000)
    post = (starts[:, None] + np.array(BURST)).ravel()
    w = on_spikes(PrincipalComponent(), starts, post, readings=[60 * 200, 6e5])
    assert 1.7 < w[0] < 2.3
    assert w[1] == pytest.approx(10 / (0.1 * 30), rel=1e-6)


def test_a_silent_input_decays_only_while_the_cell_fires() -> None:
    found = impose(PrincipalComponent(), {"silent": [], "active": [0.0]}, BURST, compiled=False)
    assert float(found.w.sel(input="silent")[-1]) < 1.0
    alone = impose(PrincipalComponent(), {"silent": [], "active": [0.0]}, [], compiled=False)
    assert (alone.w == 1.0).all()


def test_it_is_blind_to_the_order_of_spikes_in_a_window() -> None:
    forward = on_spikes(PrincipalComponent(), [0.0], BURST)
    backward = on_spikes(PrincipalComponent(), [30.0], [0.0, 10.0, 20.0])
    assert forward[-1] == backward[-1] != 1.0


@pytest.mark.parametrize(("w_min", "w_max", "sign", "end"), [(-3, 2, 1, 2.0), (-3, 2, -1, -3.0)])
def test_a_signed_weight_stops_at_its_bounds(
    w_min: float, w_max: float, sign: float, end: float
) -> None:
    rule = PrincipalComponent.from_set("patterns", eta=1, alpha=0, w_min=w_min, w_max=w_max)
    found = present(rule, [[1.0, sign * 100.0]], presentations=5, start=[1.0, sign * 0.1])
    assert found.weight.values[-1, 1] == end


def test_the_pattern_set_is_the_published_rule() -> None:
    """Oja 1982 (abstract looked up): dw = eta y (x - y w)."""
    rule = PrincipalComponent.from_set("patterns", eta=0.5)
    assert rule.at_presentation(3.0, 2.0, w=0.25) == {"w": 0.5 * 2 * (3 - 2 * 0.25)}
