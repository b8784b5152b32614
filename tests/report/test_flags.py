import numpy as np
import xarray as xr

from plastic.report.flags import integers, meanings, shares


def flags(values, **attrs):
    return xr.DataArray(values, dims="cell", attrs={"flag_meanings": "reached not_within", **attrs})


def test_words_follow_the_declared_values():
    array = flags([3, 7], flag_values=np.array([7, 3], dtype=np.int8))
    assert meanings(array) == {7: "reached", 3: "not within"}


def test_without_values_words_are_counted_from_zero():
    assert meanings(flags([0, 1])) == {0: "reached", 1: "not within"}


def test_a_missing_flag_is_no_word():
    assert integers(flags([0.0, np.nan])).tolist() == [0, -1]


def test_shares_sum_to_one_and_are_told_commonest_first():
    found = shares(np.array([1, 1, 0, -1, 1]), {0: "reached", 1: "not within"})
    assert found == {"not within": 0.6, "not run": 0.2, "reached": 0.2}
    assert next(iter(found)) == "not within"
