"""A second road: new contacts of the same axon nearer to the soma."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.routes._interface import Route


class AddedContact(Route):
    """New sites of the same input at a nearer location, never fewer than none.

    The place is the input's ``added_contact``. A new contact cannot explain a change seen at ten
    minutes: lasting new spines need half an hour, mature synapses hours.
    """

    delay: float = parameter(
        1_800_000.0, "ms", low=0, source="lasting new spines about 30 min; Engert & Bonhoeffer 1999"
    )
    tau: float = parameter(3_600_000.0, "ms", low=0, source="ours: maturation over hours")
    highest: float = parameter(10.0, "1", low=1, source="ours: as for release_sites")

    target = "added_sites"
    form = "excess"
    evidence = "established"
    equation = "N_added = N0 max(0, factor^share - 1) at the nearer location"
    limit_cause = "number of added sites at its limit"
    references = ("Engert F, Bonhoeffer T (1999) Nature 399:66",)
