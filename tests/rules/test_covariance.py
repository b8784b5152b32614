"""The covariance rule: its three forms, its averages, its window."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import impose
from plastic.rules.covariance import Covariance

BASELINE = 600_000.0  # ms, ten silent minutes
BURST = [10.0, 20.0, 30.0]
FORMS = {"both": (1.0, 1.0), "active_inputs": (0.0, 1.0), "active_cell": (1.0, 0.0)}


def change(rule: Covariance, x: float, y: float) -> float:
    """Return the change of a weight at rates x and y, both of which average 4 Hz."""
    return rule.at_presentation(x, y, x_mean=4.0, y_mean=4.0)["w"]


def on_spikes(
    rule: Covariance, pre: object, post: object, **options: object
) -> dict[str, np.ndarray]:
    found = impose(rule, pre, post, compiled=False, **options)  # type: ignore[arg-type]
    return {"w": found.w.values[0], "x": found.x_mean.values[0], "y": found.y_mean.values}


def test_the_sign_of_a_change_is_that_of_the_product_of_departures() -> None:
    rule = Covariance(eta=0.5)
    changes = [change(rule, x, y) for x, y in ((6, 7), (2, 1), (6, 1), (2, 7), (4, 9))]
    assert changes == [0.5 * p for p in (6.0, 6.0, -6.0, -6.0, 0.0)]


@pytest.mark.parametrize(
    ("form", "silent_input", "silent_cell"),
    [("both", -8.0, -8.0), ("active_inputs", 0.0, -24.0), ("active_cell", -24.0, 0.0)],
)
def test_the_three_forms_differ_on_silent_inputs_and_cells(
    form: str, silent_input: float, silent_cell: float
) -> None:
    """By hand: x or y is 0 while the other is 6 Hz and both average 4 Hz."""
    rule = Covariance(eta=1, **dict(zip(("centre_x", "centre_y"), FORMS[form], strict=True)))
    assert (change(rule, 0.0, 6.0), change(rule, 6.0, 0.0)) == (silent_input, silent_cell)


@pytest.mark.parametrize("form", ["active_inputs", "active_cell"])
def test_a_set_is_the_form_it_is_named_after(form: str) -> None:
    rule = Covariance.from_set(form)
    assert (rule.centre_x, rule.centre_y) == FORMS[form]


def test_the_averages_go_to_rest_plus_the_rate() -> None:
    rule = Covariance(window=10, tau_mean=1, x_rest=3, y_rest=5)
    x = 7.0 + rule.at_presentation(20.0, 40.0, x_mean=7.0, y_mean=9.0)["x_mean"]
    y = 9.0 + rule.cell_at_presentation(40.0, y_mean=9.0)["y_mean"]
    assert x == pytest.approx(23 - 16 * math.exp(-10), rel=1e-12)
    assert y == pytest.approx(45 - 36 * math.exp(-10), rel=1e-12)


def test_the_averages_relax_the_same_in_one_piece_or_in_two() -> None:
    rule = Covariance()
    for flow, name in ((rule.flow, "x_mean"), (rule.cell_flow, "y_mean")):
        whole = 9.0 + flow(9000.0, 9.0)[name]
        half = 9.0 + flow(4000.0, 9.0)[name]
        assert half + flow(5000.0, half)[name] == pytest.approx(whole, rel=1e-12)
        assert whole == pytest.approx(1 + 8 * math.exp(-9000 / 60_000), rel=1e-12)


def test_windows_of_any_counts_do_what_a_few_lines_do() -> None:
    """Counts of spikes in windows of 100 ms that open every 150 ms, at the first spike."""
    rule = Covariance(eta=1e-3, tau_mean=400.0, x_rest=2.0, y_rest=3.0, w_max=100.0, w_min=-100.0)
    counts = np.random.default_rng(5).integers(1, 6, (2, 30))
    starts = 150.0 * np.arange(30)
    pre, post = (
        np.concatenate([s + 7.0 * np.arange(n) for s, n in zip(starts, row, strict=True)])
        for row in counts
    )
    w, x_mean, y_mean = 1.0, 2.0, 3.0
    for n_pre, n_post in counts.T:
        x, y = 10.0 * n_pre, 10.0 * n_post
        w += 1e-3 * (x - x_mean) * (y - y_mean)
        for gap, at_x, at_y in ((100.0, x, y), (50.0, 0.0, 0.0)):
            left = math.exp(-gap / 400.0)
            x_mean = 2.0 + at_x + (x_mean - 2.0 - at_x) * left
            y_mean = 3.0 + at_y + (y_mean - 3.0 - at_y) * left
    found = on_spikes(rule, pre, post, readings=[30 * 150.0])
    assert found["w"] == pytest.approx([w], rel=1e-9)
    assert (found["x"], found["y"]) == (pytest.approx([x_mean]), pytest.approx([y_mean]))


def test_sixty_bursts_about_double_the_weight_as_the_docstring_says() -> None:
    starts = 10_000.0 * np.arange(60)
    post = (starts[:, None] + np.array(BURST)).ravel()
    assert 1.7 < on_spikes(Covariance(), starts, post)["w"][-1] < 2.3


def test_the_averages_survive_a_silent_baseline_and_without_a_rest_they_do_not() -> None:
    times = ([0.0, BASELINE], [*BURST, *(BASELINE + t for t in BURST)])
    for rest in (1.0, 0.0):
        found = on_spikes(Covariance(x_rest=rest, y_rest=rest), *times, readings=[200, BASELINE])
        for name in ("x", "y"):
            after, before = found[name]
            assert after > rest + 0.01
            assert before == pytest.approx(rest, abs=1e-4)


def test_joint_silence_opens_no_window_and_teaches_nothing() -> None:
    """On patterns it does: both rates are below their averages, and the weight grows."""
    found = on_spikes(Covariance(), [0.0], BURST, readings=[200, BASELINE])
    assert found["w"][0] == found["w"][1] != 1.0
    assert Covariance().at_presentation(0.0, 0.0, x_mean=1.0, y_mean=1.0)["w"] > 0


def test_it_is_blind_to_the_order_of_spikes_in_a_window() -> None:
    forward = on_spikes(Covariance(), [0.0], BURST)["w"]
    backward = on_spikes(Covariance(), [30.0], [0.0, 10.0, 20.0])["w"]
    assert forward[-1] == backward[-1] != 1.0


@pytest.mark.parametrize(("y", "end"), [(1e4, 2.0), (-1e4, -3.0)])
def test_a_weight_stops_at_its_bounds(y: float, end: float) -> None:
    """Signed bounds: the rule declares both."""
    rule = Covariance(eta=1, w_min=-3, w_max=2, centre_y=1, y_rest=-y, x_rest=0, window=100)
    assert on_spikes(rule, [0.0], [])["w"][-1] == end
