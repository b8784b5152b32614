"""Named fields instead of positions, and one type whatever an arm holds."""

from __future__ import annotations

import numba
import numpy as np
import pytest

from plastic.engine import layout
from plastic.engine.assembly import empty_log
from plastic.engine.layout import table
from plastic.routes import names
from plastic.rules.pair_timing import PairTiming
from tests.engine.scenes import Trial, mixed, pure, scene

LAYOUTS = {n: v for n, v in vars(layout).items() if isinstance(v, np.dtype)}
every_layout = pytest.mark.parametrize("dtype", LAYOUTS.values(), ids=LAYOUTS)


@every_layout
def test_a_table_keeps_every_column_under_its_name(dtype: np.dtype[np.void]) -> None:
    columns = {name: 10 * k + np.arange(3) for k, name in enumerate(dtype.names or ())}
    made = table(dtype, **columns)
    assert made.dtype == dtype
    assert {name: made[name].tolist() for name in columns} == {
        name: values.tolist() for name, values in columns.items()
    }


@every_layout
def test_single_numbers_fill_their_column(dtype: np.dtype[np.void]) -> None:
    first, *others = dtype.names or ()
    made = table(dtype, **{first: [[1, 2, 3], [4, 5, 6]]}, **dict.fromkeys(others, 7))
    assert made.shape == (2, 3)
    assert made[first].tolist() == [[1, 2, 3], [4, 5, 6]]
    assert all((made[name] == 7).all() for name in others)
    assert table(dtype, **{name: [] for name in (first, *others)}).shape == (0,)


@pytest.mark.parametrize("fields", [{}, {"delay": 1}, {"delay": 1, "distance": 2.0, "delays": 3}])
def test_a_field_that_is_missing_or_unknown_is_refused(fields: dict[str, float]) -> None:
    with pytest.raises(ValueError, match=r"are not those of \('delay', 'distance'\)"):
        table(layout.SITE, **fields)


def test_whole_numbers_are_whole_and_measures_are_not() -> None:
    made = table(layout.SITE, delay=3, distance=2.5)
    assert (made["delay"].dtype, made["distance"].dtype) == (np.int64, np.float64)


ARMS = {
    "no route": Trial(PairTiming(), None),
    "a mixture": Trial(PairTiming(), mixed()),
    **{name: Trial(PairTiming(), pure(name)) for name in names()},
    "no events": Trial(PairTiming(), None, times={}, readings=np.array([])),
    "no learner": Trial(PairTiming(), None, scene(learners=())),
    "one reading": Trial(PairTiming(), None, readings=np.array([5.0])),
    "at once": Trial(PairTiming(), mixed(), immediate=True),
    "deterministic": Trial(PairTiming(), None, scene(deterministic=True, dt=0.05)),
    "one cell": Trial(PairTiming(), None, cells=1),
}


@pytest.mark.parametrize("arm", ARMS.values(), ids=ARMS)
def test_every_arm_of_a_rule_has_one_type_and_compiles_nothing(arm: Trial) -> None:
    """What numba sees: the same for all routes, protocols, readings and cells."""
    first = ARMS["no route"]
    for one, other in ((first.wiring(), arm.wiring()), (first.population(), arm.population())):
        assert numba.typeof(one) == numba.typeof(other)


def test_an_array_of_another_kind_would_compile_again() -> None:
    """The control of the law above."""
    wiring = ARMS["no route"].wiring()
    turned = wiring._replace(reading_step=wiring.reading_step[::2])
    assert numba.typeof(turned) != numba.typeof(wiring)


def test_the_log_has_room_for_everything() -> None:
    trial = Trial(PairTiming(), mixed(), readings=np.array([0.0, 5.0, 9.0]), cells=4)
    wiring, cells = trial.wiring(), trial.population()
    log = empty_log(cells, wiring, 6, spikes=50)
    shapes = {name: array.shape for name, array in log._asdict().items()}
    assert shapes == {
        "variables": (4, 3, 6, 2),
        "factor": (4, 3, 2),
        "expressed": (4, 3, len(names()), 2),
        "diameter": (4, 3, len(wiring.stretches)),
        "cell_states": (4, 3, 0),
        "spike_step": (4, 50),
        "ended": (4,),
    }
