"""A wider dendrite: a hypothesis, for everyone on it, and not always to the gain of anyone."""

from __future__ import annotations

import numpy as np
import pytest

from plastic.routes import Mixture
from plastic.routes.dendrite_width import DendriteWidth
from tests.engine.readers import Floats, lands, reader_of, scene_of, state_at


def peaks(load: float, factors: list[float], name: str = "weak", **limits: float) -> Floats:
    """Return EPSPs (mV) of a weak input at the tip, or of another one half-way, 0.1 nS each."""
    scene = scene_of(lands("weak", 400.0), lands("other", 200.0))
    reader = reader_of(scene, load=[load], sites=1.0, probability=1.0, quantum=0.1)
    route = Mixture.pure("it", DendriteWidth(**limits))
    return np.asarray(reader.shape(name, route, state_at(reader, route, factors)).peak[0])


def test_the_diameter_is_multiplied_by_the_factor_within_narrow_limits() -> None:
    found = DendriteWidth().multiple([0.0, 0.5, 0.9, 1.0, 1.2, 2.0])
    assert found.tolist() == [0.7, 0.7, 0.9, 1.0, 1.2, 1.3]
    assert DendriteWidth().multiple(1.44, share=0.5) == pytest.approx(1.2)


def test_it_is_a_hypothesis_and_says_so() -> None:
    assert DendriteWidth.evidence == "hypothesis"
    assert "hypothesis" in (DendriteWidth.__doc__ or "")
    assert DendriteWidth.touches_others


@pytest.mark.parametrize(("load", "sign"), [(0.63, -1), (40.0, 1)])
def test_the_same_widening_weakens_one_cell_and_strengthens_another(load: float, sign: int) -> None:
    """For a weak input at a sealed tip it helps if G_soma R_axial + L coth L > 3, else it hurts.

    Steady-state theorem (own); 400 um by 2 um: R_axial = 191 Mohm, L = 0.566, so that the sum is
    1.2 on a lone soma of 0.63 nS and 8.7 on one of 40 nS.
    """
    axial = 4 * 1.5 * 400 / (np.pi * 2.0**2) * 1e-3  # Gohm
    L = 400 / (1e4 * np.sqrt(2e-4 / 4 * 15_000 / 150))
    assert np.sign(load * axial + L / np.tanh(L) - 3) == sign
    plain, wide = peaks(load, [1.0, 1.6])
    assert sign * (wide - plain) > 0.02 * plain


def test_an_input_that_did_not_learn_is_moved_too() -> None:
    plain, wide = peaks(40.0, [1.0, 1.6], "other")
    assert abs(wide / plain - 1) > 0.01


def test_the_other_contact_holds_back_the_stretch_they_share() -> None:
    """Half of 1.2 to the contact half-way, all of it beyond: the mean over what lies there."""
    scene = scene_of(lands("weak", 400.0), lands("other", 200.0))
    route = Mixture.pure("it", DendriteWidth())
    width = state_at(reader_of(scene), route, [1.2]).width[0, 0]
    assert width.tolist() == pytest.approx([1.1, 1.2])
