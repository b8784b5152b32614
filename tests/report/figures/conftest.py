import pytest

from tests.report.conftest import fake_dataset


@pytest.fixture(scope="module")
def bursts():
    """One protocol and its controls."""
    data = fake_dataset()
    return data.sel(protocol=[p for p in data["protocol"].values if p.startswith("bursts")])
