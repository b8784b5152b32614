"""Verdicts: what became of a cell, and every "never" shown by lifting its cause."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest
from numpy.typing import NDArray

from plastic.engine.readings import state_of
from plastic.study.population import bare_reader, populate
from plastic.study.verdicts import CAUSES, VERDICTS, Judgement, judge, reach
from tests.study.small import UNIFORM, routes, study

Floats = NDArray[np.float64]
Change = tuple[str, str]

REPEATS = np.array([0, 0, 1, 2, 3, 3])
MINUTES = np.array([-2.0, 0.0, 0.5, 1.0, 1.5, 9.0])
LOW, HIGH = 0.1, 0.9
FLAT = [LOW] * 6


def judged(
    fires: list[float],
    *,
    factor: float = 1.2,
    partner: float = 1.0,
    paired: bool = True,
    reachable: bool = True,
) -> Judgement:
    """Judge one cell; the baseline is the first two readings."""
    return judge(
        np.array([fires]),
        0.5,
        repeats=REPEATS,
        minutes=MINUTES,
        factor=np.array([[1.0] * 5 + [factor]]),
        partner_fired=np.array([partner]),
        needs_partner=paired,
        reachable=np.array([reachable]),
    )


def word(judgement: Judgement) -> str:
    return VERDICTS[int(judgement.verdict[0])]


@pytest.mark.parametrize(
    ("fires", "facts", "expected"),
    [
        ([LOW, LOW, LOW, HIGH, HIGH, HIGH], {}, "reached"),
        ([LOW, LOW, LOW, HIGH, HIGH, LOW], {}, "reached_then_lost"),
        (FLAT, {}, "not_within"),
        ([HIGH] * 6, {}, "already_at_baseline"),
        (FLAT, {"factor": 0.9}, "depressed"),
        (FLAT, {"partner": 0.4}, "partner_failed"),
        (FLAT, {"reachable": False}, "never"),
    ],
)
def test_each_verdict(fires: list[float], facts: dict[str, float], expected: str) -> None:
    assert word(judged(fires, **facts)) == expected  # type: ignore[arg-type]


def test_the_verdicts_are_these_seven() -> None:
    assert len(VERDICTS) == len(set(VERDICTS)) == 7


@pytest.mark.parametrize(
    ("fires", "facts", "expected"),
    [
        ([HIGH, LOW, LOW, LOW, LOW, HIGH], {}, "already_at_baseline"),  # before any event
        ([LOW, HIGH, HIGH, HIGH, HIGH, HIGH], {}, "reached"),  # test pulses taught it
        ([LOW, HIGH, LOW, LOW, LOW, LOW], {}, "reached_then_lost"),
        ([LOW, LOW, HIGH, HIGH, HIGH, HIGH], {"factor": 0.5}, "reached"),
        ([LOW, LOW, HIGH, HIGH, HIGH, HIGH], {"partner": 0.0}, "reached"),
        (FLAT, {"factor": 0.9, "partner": 0.0}, "partner_failed"),
        (FLAT, {"factor": 0.9, "reachable": False}, "never"),
        (FLAT, {"partner": 0.0, "reachable": False}, "never"),
        (FLAT, {"partner": 0.0, "paired": False}, "not_within"),
        (FLAT, {"factor": 0.981}, "not_within"),
        (FLAT, {"partner": 0.5}, "not_within"),
    ],
)
def test_what_is_said_when_several_verdicts_hold(
    fires: list[float], facts: dict[str, float], expected: str
) -> None:
    assert word(judged(fires, **facts)) == expected  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("fires", "expected"),
    [
        ([LOW, LOW, LOW, 0.5, LOW, HIGH], (2.0, 1.0)),
        ([LOW, LOW, LOW, LOW, LOW, HIGH], (3.0, 9.0)),
        ([LOW, HIGH, HIGH, HIGH, HIGH, HIGH], (0.0, 0.0)),  # taught by test pulses
        (FLAT, (np.inf, np.inf)),
        ([LOW, LOW, LOW, LOW, LOW, 0.4999], (np.inf, np.inf)),
        ([HIGH] * 6, (np.nan, np.nan)),
        ([HIGH, LOW, LOW, LOW, LOW, HIGH], (np.nan, np.nan)),
    ],
)
def test_the_count_is_that_of_the_first_reading_at_the_criterion(
    fires: list[float], expected: tuple[float, float]
) -> None:
    """Infinite where it is never reached, no number where there was nothing to reach."""
    found = judged(fires)
    assert (found.repeats[0], found.minutes[0]) == pytest.approx(expected, nan_ok=True)


def threshold(value: float) -> Change:
    return 'mean = "-57 mV"', f'mean = "{value} mV"'


def found(*changes: Change, highest: float = 1e6, inhibition: bool = True) -> str:
    """Return why the upper bundle of the nominal cell never fires it, or "none"."""
    made = study(*UNIFORM, *changes)
    can, cause = reach(
        bare_reader(populate(made)), "upper", made.compare.routes[0], 0.5,
        highest_factor=np.array([highest]), inhibition=inhibition,
    )  # fmt: skip
    assert can[0] == (cause[0] == 0)
    return CAUSES[int(cause[0])]


@dataclass(frozen=True)
class Never:
    """A cell that never gets there, the change that lifts the cause, and one that does not."""

    route: str
    cell: tuple[Change, ...]
    lifted: tuple[Change, ...]
    control: tuple[Change, ...] = ()
    lifted_route: str = ""
    control_route: str = ""


FARTHER = ('at = "240 um"', 'at = "290 um"')
THIN = ('diameter = "2 um"', 'diameter = "0.8 um"')
WEAK = ('target = "8 mV"', 'target = "6 mV"')
NECKS = (
    ('neck = "100 Mohm"', 'neck = "1000 Mohm"'),
    ('quantum = "0.3 nS"', 'quantum = "1 nS"'),
)
DAMPED = ("driven_by = [ {", 'driven_by = [ { input = "upper", delay = "1 ms" }, {')
#: 95 sites, whatever the inhibition: nothing is recruited
FIXED = (
    ('baseline_epsp = { target = "8 mV", cv = 0 }\n', ""),
    ("sites = 60", "sites = 95"),
)
CERTAIN = ("highest = 0.9, quantum", "highest = 1.0, quantum")
RELEASE = '"release_probability"'

CASES = {
    "release_probability_at_its_limit": Never(RELEASE, (threshold(-56),), (CERTAIN,)),
    "quantal_size_at_its_limit": Never(
        '"quantal_size"', (threshold(-48),), (),
        lifted_route='{ use = "quantal_size", highest = 20 }', control=(CERTAIN,),
    ),
    "number_of_sites_at_its_limit": Never(
        '"release_sites"', (threshold(-40),), (),
        lifted_route='{ use = "release_sites", highest = 60 }', control=(CERTAIN,),
    ),
    "spine_neck_at_its_limit": Never(
        '{ use = "spine_neck", lowest = 0.5 }', (threshold(-57), *NECKS), (),
        lifted_route='{ use = "spine_neck", lowest = 0.001 }',
    ),
    "number_of_added_sites_at_its_limit": Never(
        '{ use = "added_contact", highest = 1 }', (threshold(-48),), (),
        lifted_route='{ use = "added_contact", highest = 10 }',
    ),
    "dendrite_diameter_at_its_limit": Never(
        '{ use = "dendrite_width", highest = 1.05 }', (threshold(-60), FARTHER, THIN, WEAK), (),
        lifted_route='{ use = "dendrite_width", highest = 3 }',
    ),
    "feed_forward_inhibition": Never(
        RELEASE, (threshold(-55), DAMPED, *FIXED), (('quantum = "10 nS"', 'quantum = "1 pS"'),),
        control=(CERTAIN,),
    ),
    "release_certain_and_still_too_small": Never(
        RELEASE, (threshold(-54),), (), control=(CERTAIN,), lifted_route='"quantal_size"',
    ),
    "no_conductance_at_this_distance_fires_the_cell": Never(
        '"quantal_size"', (threshold(-30),), (('at = "240 um"', 'at = "100 um"'),),
        lifted_route='{ use = "quantal_size", highest = 100 }',
        control_route='{ use = "quantal_size", highest = 1000 }',
    ),
    "without_a_neck_and_still_too_small": Never(
        '"spine_neck"', (threshold(-55), *NECKS), (),
        control_route='{ use = "spine_neck", lowest = 0 }', lifted_route='"release_sites"',
    ),
}  # fmt: skip


@pytest.mark.parametrize("cause", CASES)
def test_a_cause_is_one_that_the_cell_is_freed_by_lifting(cause: str) -> None:
    case = CASES[cause]
    assert found(routes(case.route), *case.cell) == cause
    other = case.control_route or case.route
    assert found(routes(other), *case.cell, *case.control) == cause  # control: not the cause
    freed = case.lifted_route or case.route
    assert found(routes(freed), *case.cell, *case.lifted) == "none"


def test_the_bound_of_the_rule_is_a_cause_that_a_higher_bound_lifts() -> None:
    cell = (routes('"quantal_size"'), threshold(-55))
    assert found(*cell, highest=1.05) == "rule_at_its_own_bound"
    assert found(*cell, highest=4.0) == "none"


def test_a_limit_of_the_route_is_named_before_the_bound_of_the_rule() -> None:
    assert found(routes(RELEASE), threshold(-56), highest=1.05) != "rule_at_its_own_bound"


def test_blocked_inhibition_is_inhibition_lifted() -> None:
    cell = (routes(RELEASE), threshold(-55), DAMPED)
    assert found(*cell) == "feed_forward_inhibition"
    assert found(*cell, inhibition=False) == "none"


def test_several_limits_hold_together_when_lifting_any_one_of_them_is_not_enough() -> None:
    cell = (routes(RELEASE), threshold(-50), DAMPED, *FIXED)
    assert found(*cell) == "several_limits_together"
    assert found(*cell, CERTAIN) != "none"
    assert found(*cell, inhibition=False) != "none"
    assert found(*cell, CERTAIN, inhibition=False) == "none"


def test_beyond_the_best_diameter_a_wider_dendrite_is_worse() -> None:
    cell = (threshold(-57), ('target = "8 mV"', 'target = "3 mV"'))
    assert found(routes('"dendrite_width"'), *cell) == "beyond_the_best_diameter"
    widest = routes('{ use = "dendrite_width", highest = 10 }')
    assert found(widest, *cell) == "beyond_the_best_diameter"  # not the limit
    made = study(*UNIFORM, widest, *cell)
    population, route = populate(made), made.compare.routes[0]
    reader, factor = bare_reader(population), np.geomspace(1, 10, 60)
    state = state_of(
        population.scene, reader.wiring, reader.cells, route, factor[None, :, None, None]
    )
    peak = reader.shape("upper", route, state).peak[0]
    assert 0 < np.argmax(peak) < 59
    assert peak[-1] < 0.9 * peak.max()


def test_a_mixture_frees_cells_that_neither_pure_route_frees() -> None:
    """Release and width multiply: both have a limit, and together they pass the threshold."""
    cell = (threshold(-55.5),)
    assert found(routes(RELEASE), *cell) != "none"
    assert found(routes('"dendrite_width"'), *cell) != "none"
    assert found(routes("{ dendrite_width = 0.5, release_probability = 0.5 }"), *cell) == "none"


def test_more_sites_never_make_a_cell_silent() -> None:
    """The chance of no release at all underflows with many sites; the others must not with it."""
    many = ('{ target = "8 mV", cv = 0.1 }', '{ target = "8 mV", cv = 0 }')
    made = study(
        routes('{ use = "release_sites", highest = 100 }'),
        ('quantum = "0.3 nS"', 'quantum = "0.05 nS"'), ("sites = 60", "sites = 300"), many,
    )  # fmt: skip
    population, route = populate(made), made.compare.routes[0]
    reader = bare_reader(population)
    factor = np.broadcast_to(np.geomspace(1, 7, 40)[None, :, None, None], (4, 40, 1, 1)).copy()
    state = state_of(population.scene, reader.wiring, reader.cells, route, factor)
    fires = reader.fires_alone("upper", route, state)
    assert state.sites[:, 0].max() > 1500
    assert np.all(np.diff(fires, axis=1) > -1e-3)
    assert np.all(fires[:, -1] > 0.999)
