"""The tables of a study that describe the cell."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, ConfigDict, Field, model_validator
from pydantic.dataclasses import dataclass

from plastic.membrane import spikes, tree
from plastic.quantities import Count, Part, Potential, Quantity, Text, Time, checked_keys, lone

#: limits are those of any neuron; usual are pyramidal cells, from basal branches to apical trunks
Length = Annotated[float, Quantity("length", above=0, high=1e4, usual=(10.0, 2000.0))]
Diameter = Annotated[float, Quantity("length", above=0, high=100, usual=(0.2, 10.0))]
LengthConstant = Annotated[float, Quantity("length", above=0, high=1e5)]
Conductance = Annotated[float, Quantity("conductance", above=0, high=1e6)]
Spread = Annotated[float, Quantity("number", low=0, high=3)]

_CLOSED = ConfigDict(extra="forbid")


@dataclass(frozen=True, config=_CLOSED)
class Dendrite(tree.Dendrite):
    """An unbranched dendrite with a sealed end; `length` and `diameter` in um."""

    length: Length
    diameter: Diameter

    @model_validator(mode="before")
    @classmethod
    def _check_keys(cls, data: Any) -> Any:
        return checked_keys(vars(cls)["__pydantic_fields__"], data)


@dataclass(frozen=True, config=_CLOSED)
class BackPropagation(spikes.BackPropagation):
    """How spikes travel into a dendrite; um/ms, um, ms. Defaults are those of the membrane."""

    velocity: Annotated[float, Quantity("velocity", above=0)] = spikes.BackPropagation.velocity
    length_constant: LengthConstant = spikes.BackPropagation.length_constant
    train_loss: Annotated[float, Quantity("number", low=0, below=1)] = (
        spikes.BackPropagation.train_loss
    )
    recovery: Time = spikes.BackPropagation.recovery
    floor: Annotated[float, Quantity("number", low=0, high=1)] = spikes.BackPropagation.floor

    @model_validator(mode="before")
    @classmethod
    def _check_keys(cls, data: Any) -> Any:
        return checked_keys(vars(cls)["__pydantic_fields__"], data)


class Membrane(Part):
    """Specific values: ohm cm^2, uF/cm^2, ohm cm.

    Beyond the limits it is no cell: a membrane of 100 ohm cm^2 is that of an axon at the peak of
    its spike, a bare bilayer has 0.5 to 1 uF/cm^2, sea water 20 ohm cm (from memory, fairly sure).
    What is usual is common practice: 10 to 50 kohm cm^2 in pyramidal cells and more in small ones;
    0.9 uF/cm^2 measured, up to twice as much for the membrane of spines; 70 to 300 ohm cm.
    """

    resistance: Annotated[
        float, Quantity("membrane resistance", low=100, high=1e6, usual=(5e3, 1e5))
    ]
    capacitance: Annotated[
        float, Quantity("membrane capacitance", low=0.1, high=10, usual=(0.7, 2.0))
    ]
    axial: Annotated[float, Quantity("axial resistivity", low=10, high=1000, usual=(70.0, 300.0))]

    @property
    def tau(self) -> float:
        """The membrane time constant, ms."""
        return self.resistance * self.capacitance * 1e-3


class Threshold(Part):
    """Mean and spread over cells of the threshold of the spike, mV."""

    mean: Potential
    sd: Annotated[float, Quantity("potential", low=0, high=50)] = 3.0


class Cell(Part):
    """A soma with any number of dendrites; mV, ms, nS.

    Parameters
    ----------
    rest_of_cell : nS
        Conductance of the soma and of everything that is not written out.
    input_resistance_cv : float
        Spread of the input resistance over cells.
    refine : int
        Extra nodes per stretch of dendrite.
    """

    spikes: Literal["leaky"] = "leaky"
    rest: Potential
    threshold: Annotated[Threshold, BeforeValidator(lone("mean"))] = Field(
        description="a table such as { mean = '-55 mV', sd = '3 mV' }"
    )
    reset: Potential
    refractory: Time = 2.0
    rest_of_cell: Conductance
    input_resistance_cv: Spread = 0.3
    membrane: Membrane = Field(
        description="a table { resistance = '15 kohm cm^2', capacitance = '1 uF/cm^2', "
        "axial = '150 ohm cm' }"
    )
    dendrite: dict[Text, Dendrite] = Field(default_factory=dict)
    refine: Annotated[int, Count(0, 20)] = 1
    back_propagation: BackPropagation = Field(default_factory=BackPropagation)
