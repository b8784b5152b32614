"""The table of what results hold, and the results that hold it."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import h5netcdf
import numpy as np
import pytest
import xarray as xr

from plastic import measures
from plastic.study.schema import ARM, COMPLETE, NOT_RUN, STATUSES, VARIABLES
from plastic.study.store import RESULTS
from plastic.study.verdicts import CAUSES, VERDICTS

#: units that a reader of the results meets, in the spelling of UDUNITS (common practice)
UNITS = {"1", "mV", "ms", "min", "nS", "um", "Mohm", "%"}


@pytest.mark.parametrize("name", VARIABLES)
def test_every_variable_says_its_unit_and_what_it_is(name: str) -> None:
    kind = VARIABLES[name]
    assert kind.unit in UNITS
    assert len(kind.long_name) > 5
    assert kind.dims[:3] == ARM
    assert kind.dims[3] == "cell"


def test_no_two_variables_say_the_same_of_themselves() -> None:
    told = [kind.long_name for kind in VARIABLES.values()]
    assert len(set(told)) == len(told)


@pytest.mark.parametrize("name", measures.names())
def test_measures_come_from_their_catalogue(name: str) -> None:
    measure, kind = measures.find(name), VARIABLES[name]
    assert (kind.unit, kind.long_name) == (measure.unit, measure.long_name)
    assert kind.dims == (*ARM, "cell", "input", "reading")


@pytest.mark.parametrize(
    ("name", "words"),
    [("verdict", VERDICTS), ("verdict_induced", VERDICTS), ("never_cause", CAUSES[1:]),
     ("extrapolated", ("no", "yes"))],
)  # fmt: skip
def test_words_are_stored_as_flags(name: str, words: tuple[str, ...]) -> None:
    kind = VARIABLES[name]
    assert kind.whole
    assert kind.flags == tuple(words)
    assert not any(" " in word for word in kind.flags)  # flag_meanings are parted by blanks


def test_only_words_are_flags() -> None:
    assert {n for n, kind in VARIABLES.items() if kind.whole} == {
        "verdict", "verdict_induced", "never_cause", "extrapolated",
    }  # fmt: skip


@pytest.mark.parametrize("name", VARIABLES)
def test_results_hold_every_variable_as_the_table_says(results: xr.Dataset, name: str) -> None:
    kind, found = VARIABLES[name], results[name]
    assert found.dims == kind.dims
    assert (found.attrs["units"], found.attrs["long_name"]) == (kind.unit, kind.long_name)
    assert found.dtype == (np.int8 if kind.whole else np.float32)


def test_the_status_of_an_arm_is_a_flag_and_tells_the_arms_that_were_not_run(
    results: xr.Dataset,
) -> None:
    status = results["status"]
    assert tuple(status.attrs["flag_meanings"].split()) == STATUSES
    control = (results["control"] != "").values
    for route in results["route"].values:
        one = status.sel(route=route).values
        expected = COMPLETE if route == "quantal_size" else NOT_RUN
        assert np.all(one[:, control] == expected)
        assert np.all(one[:, ~control] == COMPLETE)


def test_an_arm_that_was_not_run_has_no_numbers(results: xr.Dataset) -> None:
    left = results.sel(route="release_probability", protocol="pairs, unpaired")
    ran = results.sel(route="quantal_size", protocol="pairs, unpaired")
    for name, kind in VARIABLES.items():
        values = left[name].values
        missing = values == -1 if kind.whole else np.isnan(values)
        assert np.all(missing), name
    assert np.all(np.isfinite(ran["epsp_peak"].values))


def raw(file: Path) -> dict[str, dict[str, Any]]:
    """Return every variable of a netCDF file with its attributes, dimensions and type."""
    with h5netcdf.File(file, "r") as opened:
        return {
            name: {**v.attrs, "dims": v.dimensions, "dtype": v.dtype}
            for name, v in opened.variables.items()
        }


def test_every_variable_has_a_unit_and_a_name_in_words(finished: Path) -> None:
    found = raw(finished / RESULTS)
    assert len(found) > 40
    for name, attrs in found.items():
        assert isinstance(attrs["units"], str), name
        assert attrs["long_name"], name


def test_flags_follow_the_cf_conventions(finished: Path) -> None:
    """As many values as meanings, of the variable's own type (CF conventions 1.11, 3.5)."""
    found = {n: a for n, a in raw(finished / RESULTS).items() if "flag_values" in a}
    assert {"status", "verdict", "verdict_induced", "never_cause", "extrapolated"} <= set(found)
    for name, attrs in found.items():
        assert len(attrs["flag_values"]) == len(attrs["flag_meanings"].split()), name
        assert np.asarray(attrs["flag_values"]).dtype == attrs["dtype"] == np.int8, name
