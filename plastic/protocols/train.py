"""Train: evenly spaced spikes at a rate, in trains that are repeated."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any

from pydantic import BeforeValidator, Field, model_validator

from plastic.protocols._interface import Induction, Named, Protocol, checked_pattern
from plastic.protocols._schedule import INJECTED
from plastic.quantities import Count, Duration, Rate, Text, Time, refusal


def _starting_together(value: Any) -> Any:
    """Let a list of inputs, or one input, start at 0 ms."""
    if isinstance(value, str):
        return {value: 0}
    if isinstance(value, list | tuple) and all(isinstance(name, str) for name in value):
        if len(set(value)) < len(value):
            raise refusal("names an input twice")
        return dict.fromkeys(value, 0)
    if not isinstance(value, Mapping):
        raise refusal("must be a list of inputs, or a table of starts such as { far = '0 ms' }")
    return value


class Train(Protocol):
    """Trains of evenly spaced spikes: tetani, trains of bursts, continuous pairing at a rate.

    Each train has ``spikes`` spikes at ``rate`` on every input of ``inputs``; one repeat is one
    train; trains start ``every`` apart. ``inputs`` is a list, or a table of where in the train each
    input starts: ``{ far = "0 ms", injected = "10 ms" }`` pairs at a lag of +10 ms. Spikes per
    train, rate, number of trains and interval are all required: a rate and a number alone are not
    a protocol.
    """

    inputs: Annotated[dict[Text, Time], BeforeValidator(_starting_together)] = Field(
        description="a list of inputs such as ['far']"
    )
    spikes: Annotated[int, Count(1, 1_000_000)]
    rate: Rate
    trains: Annotated[int, Count(1, 1_000_000)]
    every: Duration

    references = (
        "Bliss TV, Lomo T (1973) J Physiol 232:331 (tetani)",
        "Sjostrom PJ, Turrigiano GG, Nelson SB (2001) Neuron 32:1149 (pairing at a rate)",
    )

    @property
    def pattern(self) -> dict[str, tuple[float, ...]]:
        """The times of one train per input, ms."""
        gap = 1000.0 / self.rate
        return {
            name: tuple(start + k * gap for k in range(self.spikes))
            for name, start in self.inputs.items()
        }

    @model_validator(mode="after")
    def _is_a_pattern(self) -> Train:
        checked_pattern(self.pattern, self.every, self.trains > 1, key="inputs")
        return self

    def named_inputs(self) -> Named:
        """Return every input the protocol names, by the path of the key that names it."""
        own: Named = {("inputs", name): name for name in self.inputs if name != INJECTED}
        return {**own, **super().named_inputs()}

    def induction(self) -> Induction:
        """Return one train, repeated."""
        return Induction(self.pattern, self.trains, self.every)
