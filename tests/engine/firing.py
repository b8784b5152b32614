"""Cells that one input fires now and then, and the routes on which it is read."""

from __future__ import annotations

from plastic import routes
from plastic.engine.readings import Reader
from plastic.routes import Mixture
from tests.engine.readers import BRAKE, lands, reader_of, scene_of, state_at


def pure(name: str, **limits: float) -> Mixture:
    """Return a route that gives all of the factor to one channel."""
    return Mixture.pure(name, routes.find(name)(**limits))


QUANTUM, SITES, ADDED = pure("quantal_size"), pure("release_sites"), pure("added_contact")
WIDE = pure("dendrite_width")
BOTH = Mixture(
    "both", {"dendrite_width": 0.5, "added_contact": 0.5}, {**WIDE.channels, **ADDED.channels}
)


def near(cv: float = 0.3, **cells: float) -> Reader:
    """Return a cell whose weak input at 100 um fires it now and then."""
    scene = scene_of(lands("weak", 100.0, quantal_cv=cv))
    plain = {"threshold": 9.5, "sites": 60.0, "probability": 0.5, "quantum": 0.3}
    return reader_of(scene, **{**plain, **cells})


def twofold(threshold: float = 12.0, load: float = 8.0, **settings: bool) -> Reader:
    """Return a cell whose weak input at 320 um may get a contact at 80 um, 1 ms later."""
    scene = scene_of(
        lands("weak", 320.0, quantal_cv=0.3),
        lands("weak", 80.0, added=True, delay=1.0, quantal_cv=0.3),
        **settings,
    )
    return reader_of(
        scene, load=[load], threshold=threshold, sites=40.0, probability=0.6, quantum=0.275
    )


def braked(p: float, cv: float = 0.0, sites: float = 1.0, **settings: bool) -> Reader:
    """Return a cell whose weak input recruits a brake at the soma that opens 2 nS by chance p."""
    scene = scene_of(
        lands("weak", 100.0, quantal_cv=0.3),
        lands("brake", 0.0, BRAKE, quantal_cv=cv),
        drives=[("weak", "brake", 1.0)],
        **settings,
    )
    return reader_of(
        scene,
        threshold=9.5,
        sites=[60.0, sites],
        probability=[0.5, p],
        quantum=[0.36, 2.0 / sites],
    )


def spread_out() -> Reader:
    """Return a cell without chance whose weak input lands half at 100 and half at 300 um."""
    scene = scene_of(
        lands("weak", 100.0, share=0.5), lands("weak", 300.0, share=0.5), deterministic=True
    )
    return reader_of(scene, sites=30.0, quantum=0.3)


def alone(reader: Reader, route: Mixture, factor: float, **lifted: bool) -> float:
    """Return the chance that the weak input fires the cell at one factor."""
    state = state_at(reader, route, [factor])
    return float(reader.fires_alone("weak", route, state, **lifted)[0, 0])
