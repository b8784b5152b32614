"""Test pulses: nothing but the pulses that measure, for a while."""

from __future__ import annotations

from typing import ClassVar

from pydantic import Field, model_validator

from plastic.protocols._interface import MINUTE, Induction, Protocol, Pulses
from plastic.quantities import Duration, refusal


class TestPulses(Protocol):
    """Only test pulses: does measuring alone change anything?

    The epoch called induction lasts ``duration`` (default 10 min) and goes on with the test pulses
    of the baseline; one repeat is one interval between test pulses.
    """

    __test__: ClassVar[bool] = False  # its name is the protocol's, it is no test

    duration: Duration = 10 * MINUTE
    test: Pulses = Field(description="a table such as { inputs = ['far'], every = '30 s' }")

    @model_validator(mode="after")
    def _whole_intervals(self) -> TestPulses:
        intervals = self.duration / self.test.every
        if intervals < 1 or abs(intervals - round(intervals)) > 1e-9 * intervals:
            raise refusal(
                f"must be a whole number of test intervals of {self.test.every:g} ms",
                path=("duration",),
                value=f"{self.duration:g} ms",
            )
        return self

    def induction(self) -> Induction:
        """Return intervals that hold nothing but the test pulses."""
        times = round(self.duration / self.test.every)
        return Induction({}, times, self.test.every, tested=True)
