"""What holds for every measure, whoever wrote it."""

from __future__ import annotations

import inspect
from dataclasses import fields, replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plastic import measures
from plastic.catalogue import class_name
from plastic.measures import Measure, Readout
from plastic.study.schema import VARIABLES
from plastic.units import INTERNAL
from tests.measures.readouts import CELLS, READINGS, invented

NAMES = measures.names()
MEASURES = [measures.find(name) for name in NAMES]
every_measure = pytest.mark.parametrize("measure", MEASURES, ids=NAMES)
SEEDS = st.integers(0, 10_000)
few = settings(max_examples=25, deadline=None)

#: arrays of a readout by the axes they have
PER_CELL = ("peak", "rise", "half_width", "fires", "sites", "probability", "quantum", "effect")
PER_INPUT = ("peak", "rise", "half_width", "fires")
PER_CONTACT = ("sites", "probability", "quantum", "effect")
OF_CONTACT = ("input_of", "quantal_cv", "depletion", "facilitation")
MOVING = ("peak", "rise", "half_width", "fires", "sites", "probability", "quantum")


def taken(readout: Readout, names: tuple[str, ...], index: list[int], axis: int) -> Readout:
    """Return the readout with the chosen rows of some of its arrays."""
    return replace(readout, **{n: np.take(getattr(readout, n), index, axis) for n in names})


def frozen(readout: Readout) -> Readout:
    """Return a copy in which no array can be written to."""
    arrays = {f.name: np.array(getattr(readout, f.name)) for f in fields(readout)}
    for array in arrays.values():
        array.flags.writeable = False
    return replace(readout, **{n: a for n, a in arrays.items() if a.ndim})


@pytest.mark.parametrize("name", NAMES)
def test_the_file_the_name_and_the_class_agree(name: str) -> None:
    measure = measures.find(name)
    assert issubclass(measure, Measure)
    assert measure.__name__ == class_name(name)
    assert measure.__module__.split(".")[-1] == name


@every_measure
def test_it_says_what_it_is_in_which_unit_and_from_where(measure: type[Measure]) -> None:
    assert vars(measure).get("__doc__")
    assert 10 < len(measure.summary()) <= 100
    assert measure.summary().endswith(".")
    assert measure.unit in {"1", "%", *INTERNAL.values()}
    assert 5 < len(measure.long_name) <= 80
    assert measure.equation or measure.references
    assert inspect.getdoc(measure.value)
    assert "value" in vars(measure)


@pytest.mark.parametrize("name", NAMES)
def test_it_has_a_place_in_the_results(name: str) -> None:
    assert VARIABLES[name].dims == ("rule", "route", "protocol", "cell", "input", "reading")


def test_no_two_measures_have_one_name_in_words() -> None:
    names = [measure.long_name for measure in MEASURES]
    assert len(names) == len(set(names))


@every_measure
@given(seed=SEEDS)
@few
def test_it_is_a_finite_number_for_every_cell_input_and_reading(
    measure: type[Measure], seed: int
) -> None:
    value = measure.value(invented(seed))
    assert value.shape == (CELLS, 2, READINGS)
    assert value.dtype == np.float64
    assert np.isfinite(value).all()
    assert (value >= 0).all()


@every_measure
def test_it_depends_on_what_was_seen(measure: type[Measure]) -> None:
    """A constant has all the symmetries below."""
    assert not np.array_equal(measure.value(invented(1)), measure.value(invented(2)))


@every_measure
@given(seed=SEEDS, order=st.permutations(range(CELLS)))
@few
def test_cells_in_another_order_are_measured_in_that_order(
    measure: type[Measure], seed: int, order: list[int]
) -> None:
    readout = invented(seed)
    moved = measure.value(taken(readout, PER_CELL, order, 0))
    assert np.array_equal(moved, measure.value(readout)[order])


@every_measure
@given(seed=SEEDS, order=st.permutations(range(READINGS)))
@few
def test_readings_in_another_order_are_measured_in_that_order(
    measure: type[Measure], seed: int, order: list[int]
) -> None:
    readout = invented(seed)
    other = replace(taken(readout, MOVING, order, 2), baseline=order.index(readout.baseline))
    assert np.array_equal(measure.value(other), measure.value(readout)[:, :, order])


@every_measure
@given(seed=SEEDS)
@few
def test_inputs_in_another_order_are_measured_in_that_order(
    measure: type[Measure], seed: int
) -> None:
    readout = invented(seed)
    turned = taken(readout, PER_INPUT, [1, 0], 1)
    turned = replace(turned, input_of=np.array([1, 1, 0, -1]))
    assert np.array_equal(measure.value(turned), measure.value(readout)[:, [1, 0]])


@every_measure
@given(seed=SEEDS, order=st.permutations(range(4)))
@few
def test_the_order_of_contacts_is_not_seen(
    measure: type[Measure], seed: int, order: list[int]
) -> None:
    readout = invented(seed)
    turned = taken(taken(readout, PER_CONTACT, order, 1), OF_CONTACT, order, 0)
    assert measure.value(turned) == pytest.approx(measure.value(readout), rel=1e-12)


@every_measure
@given(seed=SEEDS)
@few
def test_an_input_is_measured_by_its_own_contacts_alone(measure: type[Measure], seed: int) -> None:
    """Whatever the contacts of the others and of nobody do: here, those of another readout."""
    readout, other = invented(seed), invented(seed + 1)
    mine = readout.input_of == 0
    mixed = {
        n: np.where(mine.reshape(1, -1, *[1] * (getattr(readout, n).ndim - 2)), *pair)
        for n in PER_CONTACT
        for pair in [(getattr(readout, n), getattr(other, n))]
    }
    mixed |= {n: np.where(mine, getattr(readout, n), getattr(other, n)) for n in OF_CONTACT[1:]}
    found = measure.value(replace(readout, **mixed))
    assert np.array_equal(found[:, 0], measure.value(readout)[:, 0])


@every_measure
def test_it_does_not_write_into_what_it_reads(measure: type[Measure]) -> None:
    """The arrays are read-only: writing would raise; and the same question has the same answer."""
    readout = frozen(invented())
    with pytest.raises(ValueError, match="read-only"):
        readout.peak[0] = 1.0
    assert np.array_equal(measure.value(readout), measure.value(readout))


def test_a_measure_without_a_value_is_refused() -> None:
    with pytest.raises(TypeError, match="a measure defines value"):
        Measure.value(invented())


def test_sums_and_products_over_the_contacts_of_each_input() -> None:
    readout = invented()
    each = np.arange(4.0)[None, :, None] + np.ones((1, 4, 1))
    assert readout.per_input(each)[0, :, 0].tolist() == [3.0, 3.0]
    assert readout.per_input(each, product=True)[0, :, 0].tolist() == [2.0, 3.0]


def test_the_amplitude_is_sites_times_probability_times_quantum_times_effect() -> None:
    r = invented()
    expected = r.sites[1, 2, 3] * r.probability[1, 2, 3] * r.quantum[1, 2, 3] * r.effect[1, 2]
    assert r.amplitude[1, 2, 3] == pytest.approx(expected)
