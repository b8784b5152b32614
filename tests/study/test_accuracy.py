"""How exact the simulated cell is, against a fine cable that shares no code with the package."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import plastic
from plastic.engine.readings import State
from plastic.engine.traces import shape
from plastic.membrane.receptors import conductance
from plastic.study import accuracy
from plastic.study.accuracy import ERRORS, Accuracy, accuracy_of, limit_of
from plastic.study.nominal import nominal
from plastic.study.population import bare_reader
from tests.analysis import cells
from tests.membrane.fine_cable import FineCable

G = 3.0
INPUTS = (cells.bundle("a", 400.0, G), cells.bundle("b", 100.0, G))


def of(refine: int, *inputs: str) -> Accuracy:
    return accuracy_of(cells.study(*(inputs or INPUTS), refine=refine))


@pytest.fixture(scope="module")
def coarse() -> Accuracy:
    return of(0)


@pytest.fixture(scope="module")
def fine_cable() -> list[tuple[float, float, float, float]]:
    """Somatic peak, its time, half-width and attenuation of both inputs."""
    found = []
    for place in (400, 100):
        _, v = FineCable(500.0, 2.0, 10.0).run(
            place * 200 // 500,
            lambda t: G * conductance(t, 0.2, 2.0),
            65.0,
            dt=0.02,
            duration=120.0,
        )
        soma, there = shape(v[0], 0.02), shape(v[1], 0.02)
        found.append((soma.peak, soma.time, soma.half_width, there.peak / soma.peak))
    return found


def test_the_limit_is_the_continuous_cable(
    coarse: Accuracy, fine_cable: list[tuple[float, ...]]
) -> None:
    for i, (peak, time, half_width, attenuation) in enumerate(fine_cable):
        limit = {name: float(values[i]) for name, values in coarse.limit.items()}
        assert limit["peak"] == pytest.approx(peak, rel=1e-3)
        assert limit["time_to_peak"] == pytest.approx(time, abs=0.02)
        assert limit["half_width"] == pytest.approx(half_width, rel=1e-3)
        assert limit["attenuation"] == pytest.approx(attenuation, rel=2e-3)
    assert coarse.converged


def test_the_errors_are_those_against_the_continuous_cable(
    coarse: Accuracy, fine_cable: list[tuple[float, ...]]
) -> None:
    peaks = np.array([row[0] for row in fine_cable])
    expected = 100 * (coarse.simulated["peak"] / peaks - 1)
    np.testing.assert_allclose(coarse.error("peak"), expected, atol=0.1)
    assert np.abs(expected).max() > 0.5  # control: there is something to see
    times = coarse.simulated["time_to_peak"] - [row[1] for row in fine_cable]
    np.testing.assert_allclose(coarse.error("time_to_peak"), times, atol=0.02)


@pytest.mark.parametrize("name", ["peak", "time_to_peak", "half_width", "attenuation"])
def test_errors_fall_as_the_cell_is_cut_finer(coarse: Accuracy, name: str) -> None:
    """What beyond the last contact is one lump stays one: only what it leaves is no smaller."""
    finer = of(5, *INPUTS, cells.bundle("tip", 500.0, 0.01))
    before = np.abs(coarse.error(name)).max()
    assert np.abs(finer.error(name)).max() < before / 5


def test_what_the_simulation_makes_of_it_is_what_the_compiled_readings_read() -> None:
    """The tables behind `epsp_peak`, cubic between their nodes; of a coarse cell."""
    asked = cells.study(*INPUTS, refine=0)
    one = nominal(asked)
    reader, own = bare_reader(one), accuracy_of(asked)
    parts = (one.sites[:, :, None], one.probability[:, :, None], reader.quantum[:, :, None])
    state = State(*parts, np.ones((1, 1, len(reader.wiring.stretches))))
    for i, name in enumerate(own.inputs):
        read = reader.shape(name, None, state)
        assert own.simulated["peak"][i] == pytest.approx(read.peak[0, 0], rel=1e-4)
        assert own.simulated["half_width"][i] == pytest.approx(read.half_width[0, 0], rel=1e-3)
        assert own.limit["peak"][i] != pytest.approx(read.peak[0, 0], rel=2e-3)  # control


def test_an_input_that_reverses_at_rest_has_no_errors() -> None:
    found = of(1, INPUTS[0], cells.bundle("shunt", 100.0, 5.0, receptor=cells.SHUNT))
    for name in ERRORS:
        assert np.isfinite(found.error(name)[0])
        assert np.isnan(found.error(name)[1])
    assert found.converged


def test_a_limit_that_is_not_reached_is_said(monkeypatch: pytest.MonkeyPatch) -> None:
    assert of(1).converged
    monkeypatch.setattr(accuracy, "MOST_NODES", 10)
    found = of(1)
    assert not found.converged
    assert found.refine == 1


def test_the_limit_has_a_step_that_divides_the_study_s() -> None:
    """What opens at a step of the simulation opens at one of the limit's."""
    asked = cells.study(INPUTS[0], INPUTS[1])
    limit = limit_of(asked, nominal(asked))
    parts = asked.dt / limit.scene.dt
    assert parts == pytest.approx(round(parts))
    assert limit.scene.dt <= 0.2 / accuracy.STEPS + 1e-12  # of the fastest time constant
    assert limit.change < accuracy.CONVERGED


def test_results_say_how_exact_they_are(finished: Path) -> None:
    attrs = plastic.load(finished).attrs
    assert attrs["accuracy_inputs"] == "upper, lower, damper"
    for name, unit in ERRORS.items():
        found = np.asarray(attrs[f"accuracy_{name}_{unit}"])
        assert found.shape == (3,)
        assert np.isfinite(found).all()
    assert abs(np.asarray(attrs["accuracy_peak_percent"])).max() < 4  # coupling as in the guide
    assert attrs["accuracy_limit_refine"] > 1
    assert attrs["accuracy_limit_change_percent"] < 100 * accuracy.CONVERGED
