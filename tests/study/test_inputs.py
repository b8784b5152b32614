"""The tables of an input."""

from __future__ import annotations

import pytest

from plastic.study.inputs import Input

TABLE = {
    "release": {"sites": 60, "probability": 0.6, "quantum": "0.275 nS"},
    "receptor": {"reversal": "0 mV", "rise": "0.5 ms", "decay": "3 ms"},
}


def test_the_defaults_are_the_stated_ones() -> None:
    it = Input.model_validate({**TABLE, "baseline_epsp": "8 mV"})
    assert (it.release.probability.mean, it.release.probability.cv) == (0.6, 0.1)
    assert (it.release.highest, it.release.quantum_cv) == (1.0, 0.3)
    assert (it.release.depletion, it.release.facilitation) == (0.0, 0.0)
    assert (it.delay, it.neck, it.driven_by, it.added_contact) == (0.0, 0.0, (), None)
    assert it.baseline_epsp is not None
    assert (it.baseline_epsp.target, it.baseline_epsp.cv) == (8.0, 0.3)


def test_a_location_is_one_place_with_all_sites() -> None:
    it = Input.model_validate({**TABLE, "location": {"on": "apical", "at": "320 um"}})
    assert it.places == (("apical", 320.0, 1.0),)


def test_contacts_share_the_sites_evenly_unless_said() -> None:
    contacts = [{"on": "apical", "at": "300 um"}, {"on": "soma"}]
    even = Input.model_validate({**TABLE, "contacts": contacts})
    assert even.places == (("apical", 300.0, 0.5), ("soma", 0.0, 0.5))
    said = [{**contacts[0], "share": 0.75}, {**contacts[1], "share": 0.25}]
    uneven = Input.model_validate({**TABLE, "contacts": said})
    assert [share for _, _, share in uneven.places] == pytest.approx([0.75, 0.25])
