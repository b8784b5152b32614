"""What every deliberate error says, and what it keeps."""

from __future__ import annotations

import pytest

from plastic import errors
from plastic.errors import (
    DataError,
    Misfit,
    PlasticError,
    RuleError,
    StoreError,
    StudyError,
    UnknownName,
)
from plastic.parameters import ParameterError
from plastic.units import QuantityError


@pytest.mark.parametrize(
    "kind",
    [
        *(StudyError, UnknownName, Misfit, DataError, RuleError, StoreError),
        *(ParameterError, QuantityError),  # these live beside what raises them
    ],
)
def test_one_except_catches_every_deliberate_error(kind: type[Exception]) -> None:
    assert issubclass(kind, PlasticError)


def test_the_tree_at_the_top_of_the_file_is_complete() -> None:
    own = {
        name
        for name, value in vars(errors).items()
        if isinstance(value, type) and issubclass(value, PlasticError)
    }
    drawn = {word for word in (errors.__doc__ or "").split() if word in own}
    assert drawn == own


def test_a_study_error_names_file_key_value_and_what_is_allowed() -> None:
    error = StudyError(
        file="study.toml", key="input.far.release.probability", value=1.4, allowed="in [0, 1]"
    )
    assert str(error) == "study.toml: input.far.release.probability = 1.4: in [0, 1]"
    assert (error.file, error.key) == ("study.toml", "input.far.release.probability")
    assert (error.value, error.allowed) == (1.4, "in [0, 1]")


def test_a_study_error_without_a_value_shows_none() -> None:
    assert (
        str(StudyError(file="s.toml", key="cell", allowed="required")) == "s.toml: cell: required"
    )


def test_an_unknown_name_offers_the_nearest_then_all() -> None:
    error = UnknownName("rule", "pair_timimg", ["triplet_timing", "pair_timing"], where="s.toml")
    assert str(error) == (
        "s.toml: no rule is called 'pair_timimg'; did you mean 'pair_timing'? "
        "(known: pair_timing, triplet_timing)"
    )
    assert error.known == ["pair_timing", "triplet_timing"]
    assert (error.kind, error.name) == ("rule", "pair_timimg")


def test_an_unknown_name_like_no_other_gets_no_guess() -> None:
    assert str(UnknownName("rule", "zzz", ["pair_timing"])) == (
        "no rule is called 'zzz' (known: pair_timing)"
    )


def test_an_empty_catalogue_says_so() -> None:
    assert str(UnknownName("rule", "a", [])).endswith("(known: none)")


def test_a_misfit_says_got_and_expected() -> None:
    error = Misfit("pre", got="-1 ms", expected="times from 0 on")
    assert str(error) == "pre: got -1 ms but expected times from 0 on"
    assert (error.what, error.got, error.expected) == ("pre", "-1 ms", "times from 0 on")


def test_a_data_error_names_file_place_value_and_what_is_allowed() -> None:
    error = DataError("spikes.csv", "line 3", "abc", "a time in ms")
    assert str(error) == "spikes.csv: line 3 = 'abc': a time in ms"
    assert (error.file, error.place) == ("spikes.csv", "line 3")
    assert (error.value, error.allowed) == ("abc", "a time in ms")


def test_a_data_error_about_a_whole_file_names_no_place() -> None:
    assert str(DataError("spikes.csv", "", allowed="at least one row")) == (
        "spikes.csv: at least one row"
    )
