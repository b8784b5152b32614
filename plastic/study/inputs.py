"""The tables of a study that describe one presynaptic pathway."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field, model_validator

from plastic.draws import MOST_SITES
from plastic.membrane.ions import COLDEST, NONE, WARMEST, Bicarbonate, gaba_reversal, nernst
from plastic.quantities import (
    POTENTIAL,
    Duration,
    Flag,
    Part,
    Potential,
    Quantity,
    Text,
    Time,
    checked_keys,
    lone,
    refusal,
)
from plastic.study.cell import Conductance, Spread

Distance = Annotated[float, Quantity("length", low=0, high=1e5)]
Share = Annotated[float, Quantity("number", above=0, high=1)]
Likely = Annotated[float, Quantity("number", above=0, high=1)]


class Location(Part):
    """A place on the cell: a dendrite (or "soma") and the path distance from the soma, um."""

    on: Text = Field(description="the name of a dendrite, or 'soma'")
    at: Distance = 0.0


class Contact(Location):
    """One of several places where an input lands, with its share of the sites."""

    share: Share | None = None


class AddedContact(Location):
    """Where new contacts land; `delay` (ms) comes on top of the input's own."""

    delay: Time = 0.0


class Probability(Part):
    """Mean and spread over cells of the release probability."""

    mean: Likely
    cv: Spread = 0.1


class Release(Part):
    """Binomial release: sites, probability, quantum (nS), and short-term dynamics (ms; 0: none).

    ``highest`` is what the probability can never pass. With a ``baseline_epsp`` the number of
    sites is set in each cell, and ``sites`` is the number in the nominal cell.
    """

    sites: Annotated[float, Quantity("number", above=0, high=MOST_SITES)]
    probability: Annotated[Probability, BeforeValidator(lone("mean"))] = Field(
        description="a number such as 0.5, or a table { mean = 0.5, cv = 0.1 }"
    )
    highest: Likely = 1.0
    quantum: Conductance
    quantum_cv: Spread = 0.3
    depletion: Time = 0.0
    facilitation: Time = 0.0


def _concentration(low: float, high: float) -> Quantity:
    """Return a concentration; `low` to `high` mM is usual in mammalian slices (common practice)."""
    return Quantity("concentration", above=0, high=1000, usual=(low, high))


class Potassium(Part):
    """Concentrations of potassium, mM."""

    inside: Annotated[float, _concentration(100, 160)]
    outside: Annotated[float, _concentration(1, 10)]

    def reversal(self, temperature: float) -> float:
        """Return the reversal, mV, at a temperature in C."""
        return float(nernst(self.inside, self.outside, 1, temperature))


class Chloride(Part):
    """Concentrations of what a GABA-A receptor passes, mM: chloride and, if given, bicarbonate.

    ``permeability_ratio`` is that of bicarbonate to chloride; the three keys of bicarbonate go
    together.
    """

    inside: Annotated[float, _concentration(3, 40)]
    outside: Annotated[float, _concentration(100, 160)]
    bicarbonate_inside: Annotated[float, _concentration(5, 25)] | None = None
    bicarbonate_outside: Annotated[float, _concentration(10, 40)] | None = None
    permeability_ratio: Annotated[float, Quantity("number", above=0, high=1)] | None = None

    @model_validator(mode="before")
    @classmethod
    def _check_keys(cls, data: Any) -> Any:
        data = checked_keys(cls.model_fields, data)
        keys = ("bicarbonate_inside", "bicarbonate_outside", "permeability_ratio")
        missing = [key for key in keys if isinstance(data, Mapping) and key not in data]
        if 0 < len(missing) < len(keys):
            given = next(key for key in keys if key not in missing)
            raise refusal(f"missing; it goes with {given}", path=(missing[0],), value=None)
        return data

    @property
    def bicarbonate(self) -> Bicarbonate:
        """What passes besides chloride."""
        inside, outside = self.bicarbonate_inside, self.bicarbonate_outside
        if inside is None or outside is None or self.permeability_ratio is None:
            return NONE
        return Bicarbonate(inside, outside, self.permeability_ratio)

    def reversal(self, temperature: float) -> float:
        """Return the reversal, mV, at a temperature in C."""
        return float(gaba_reversal(self.inside, self.outside, temperature, self.bicarbonate))


class Receptor(Part):
    """Reversal (mV) and kinetics (ms) of the synaptic conductance; rise 0: a single exponential.

    The reversal is given in exactly one of four ways, and may be anywhere: an inhibitory synapse
    may depolarise. `reversal_at` returns it.

    Parameters
    ----------
    reversal : mV
        Itself.
    chloride : Chloride
        From concentrations, with `temperature` (C): GABA-A, with or without bicarbonate.
    potassium : Potassium
        From concentrations, with `temperature`: GABA-B and other potassium conductances.
    shunt : bool
        At the rest of the cell.
    """

    reversal: Potential | None = None
    chloride: Chloride | None = None
    potassium: Potassium | None = None
    shunt: Flag = False
    temperature: (
        Annotated[float, Quantity("temperature", low=COLDEST, high=WARMEST, usual=(18.0, 40.0))]
        | None
    ) = None
    rise: Time
    decay: Duration

    @model_validator(mode="before")
    @classmethod
    def _check_keys(cls, data: Any) -> Any:
        data = checked_keys(cls.model_fields, data)
        if not isinstance(data, Mapping):
            return data
        ways = ("reversal", "chloride", "potassium", "shunt")
        given = [way for way in ways if way in data and data[way] is not False]
        if len(given) != 1:
            found = " and ".join(given) or "none"
            raise refusal(f"needs exactly one of {', '.join(ways)}; it has {found}")
        from_ions = given[0] in ("chloride", "potassium")
        if from_ions and "temperature" not in data:
            allowed = f"missing; {given[0]} needs a temperature such as '32 degC'"
            raise refusal(allowed, path=("temperature",), value=None)
        if not from_ions and "temperature" in data:
            allowed = f"goes with chloride or potassium; with {given[0]}, leave it out"
            raise refusal(allowed, path=("temperature",), value=data["temperature"])
        return data

    @model_validator(mode="after")
    def _check_times(self) -> Receptor:
        if self.rise >= self.decay:
            allowed = f"must be shorter than the decay, {self.decay:g} ms"
            raise refusal(allowed, path=("rise",), value=f"{self.rise:g} ms")
        return self

    @model_validator(mode="after")
    def _check_reversal(self) -> Receptor:
        found = self.reversal_at(0.0)
        if not POTENTIAL.low <= found <= POTENTIAL.high:
            key = "chloride" if self.chloride else "potassium"
            allowed = f"gives a reversal of {found:.4g} mV, which {POTENTIAL.allowed}"
            raise refusal(allowed, path=(key,), value=None)
        return self

    def reversal_at(self, rest: float) -> float:
        """Return the reversal, mV, in a cell that rests at `rest`, mV."""
        ions = self.chloride or self.potassium
        if ions is not None and self.temperature is not None:
            return ions.reversal(self.temperature)
        return rest if self.reversal is None else self.reversal


class BaselineEpsp(Part):
    """The EPSP at the soma (mV) to which sites are recruited, with its spread over cells."""

    target: Annotated[float, Quantity("potential", above=0, high=200)]
    cv: Spread = 0.3


class Drive(Part):
    """A driver of a feed-forward input: `delay` ms after each of its spikes."""

    input: Text = Field(description="the name of the input that drives this one")
    delay: Time


class Input(Part):
    """One presynaptic pathway.

    ``kind`` is "inhibitory" when the reversal is at or below the mean threshold, unless it is
    given; ``neck`` is the resistance of one spine's neck, Mohm.
    """

    location: Location | None = None
    contacts: tuple[Contact, ...] = ()
    release: Release = Field(
        description="a table { sites = 60, probability = 0.5, quantum = '0.3 nS' }"
    )
    receptor: Receptor = Field(
        description="a table { reversal = '0 mV', rise = '0.5 ms', decay = '3 ms' }"
    )
    delay: Time = 0.0
    neck: Annotated[float, Quantity("resistance", low=0)] = 0.0
    baseline_epsp: Annotated[BaselineEpsp, BeforeValidator(lone("target"))] | None = None
    driven_by: tuple[Drive, ...] = ()
    added_contact: AddedContact | None = None
    kind: Literal["excitatory", "inhibitory"] | None = None

    @property
    def places(self) -> tuple[tuple[str, float, float], ...]:
        """Where the input lands: (dendrite or "soma", distance in um, share of the sites)."""
        if self.location is not None:
            return ((self.location.on, self.location.at, 1.0),)
        even = 1.0 / max(len(self.contacts), 1)
        return tuple((c.on, c.at, even if c.share is None else c.share) for c in self.contacts)
