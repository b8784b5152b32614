"""Pairing: a written-out pattern of event times per input, repeated."""

from __future__ import annotations

from pydantic import Field, model_validator

from plastic.protocols._interface import Induction, Named, Protocol, Repeat, checked_pattern
from plastic.protocols._schedule import INJECTED
from plastic.quantities import Text, Time


class Pairing(Protocol):
    """A pattern of event times per input, repeated: pairs, bursts, triplets.

    ``pattern = { far = ["0 ms"], near = ["10 ms", "20 ms", "30 ms"] }`` with
    ``repeat = { times = 60, every = "10 s" }``. The name ``injected`` forces spikes on the cell.
    Every time counts from the start of the repeat; nothing is inferred from a rate.
    """

    pattern: dict[Text, tuple[Time, ...]] = Field(
        description="a table of times per input such as { far = ['0 ms'], near = ['10 ms'] }"
    )
    repeat: Repeat = Field(description="a table such as { times = 60, every = '10 s' }")

    references = (
        "Markram H, Lubke J, Frotscher M, Sakmann B (1997) Science 275:213 (paired spikes)",
        "Bi G, Poo M (1998) J Neurosci 18:10464 (60 pairs)",
    )

    @model_validator(mode="after")
    def _is_a_pattern(self) -> Pairing:
        checked_pattern(self.pattern, self.repeat.every, self.repeat.times > 1)
        return self

    def named_inputs(self) -> Named:
        """Return every input the protocol names, by the path of the key that names it."""
        own: Named = {("pattern", name): name for name in self.pattern if name != INJECTED}
        return {**own, **super().named_inputs()}

    def induction(self) -> Induction:
        """Return the pattern as it is written."""
        return Induction(self.pattern, self.repeat.times, self.repeat.every)
