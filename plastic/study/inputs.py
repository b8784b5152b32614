"""The tables of a study that describe one presynaptic pathway."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import BeforeValidator, Field

from plastic.draws import MOST_SITES
from plastic.quantities import Duration, Part, Potential, Quantity, Text, Time, lone
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


class Receptor(Part):
    """Reversal (mV) and kinetics (ms) of the synaptic conductance; rise 0: a single exponential."""

    reversal: Potential
    rise: Time
    decay: Duration


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
