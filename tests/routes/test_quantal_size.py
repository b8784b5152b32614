"""More receptors: the mean moves, and nothing else that is seen of release."""

from __future__ import annotations

import pytest

from plastic.routes.quantal_size import QuantalSize
from tests.routes.responses import responses


def test_the_quantum_is_multiplied_by_the_factor_up_to_its_limit() -> None:
    """Fourfold: spines enlarge 3 to 4 fold at once (Matsuzaki et al. 2004, from memory)."""
    assert QuantalSize().multiple([0.0, 0.5, 1.0, 2.0, 9.0]).tolist() == [0.0, 0.5, 1.0, 2.0, 4.0]
    assert 3 <= QuantalSize().highest <= 4
    assert QuantalSize(highest=2.0).multiple(9.0) == 2.0


def test_it_is_postsynaptic_by_every_sign() -> None:
    """Same failures, same paired-pulse ratio, same CV^-2: a level line on a locus plot."""
    seen = responses(QuantalSize(), [1.0, 0.5, 2.5])
    assert seen.pop("mean") == pytest.approx([4.0, 2.0, 10.0])
    for values in seen.values():
        assert values == pytest.approx([values[0]] * 3, rel=1e-12)


def test_half_of_the_exponent_is_the_square_root() -> None:
    assert QuantalSize().multiple([0.25, 9.0], share=0.5) == pytest.approx([0.5, 3.0])


def test_it_is_expressed_within_about_two_minutes() -> None:
    """Spines enlarge within about 2 min (Matsuzaki et al. 2004)."""
    assert QuantalSize().delay + QuantalSize().tau == pytest.approx(120_000, rel=0.5)
