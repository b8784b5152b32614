"""Verdicts: when an input came to drive its cell, or why it never will."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from plastic.engine.layout import Cells
from plastic.engine.readings import Reader, state_of
from plastic.routes import Mixture

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

VERDICTS = (
    "reached",
    "reached_then_lost",
    "not_within",
    "already_at_baseline",
    "depressed",
    "partner_failed",
    "never",
)
REACHED, LOST, NOT_WITHIN, ALREADY, DEPRESSED, PARTNER, NEVER = range(7)

#: why never: limits of routes, and what no route can lift
CAUSES = (
    "none",
    "release_probability_at_its_limit",
    "quantal_size_at_its_limit",
    "number_of_sites_at_its_limit",
    "spine_neck_at_its_limit",
    "number_of_added_sites_at_its_limit",
    "dendrite_diameter_at_its_limit",
    "feed_forward_inhibition",
    "release_certain_and_still_too_small",
    "beyond_the_best_diameter",
    "no_conductance_at_this_distance_fires_the_cell",
    "rule_at_its_own_bound",
    "several_limits_together",
    "without_a_neck_and_still_too_small",
    "inhibition_at_its_limit",
    "without_inhibition_and_still_too_small",
)
_LIMIT_OF = {
    "probability": 1,
    "quantum": 2,
    "sites": 3,
    "neck": 4,
    "added_sites": 5,
    "diameter": 6,
    "inhibition": 14,
}
INHIBITION, CERTAIN, BEST_DIAMETER, DISTANCE, RULE_BOUND, SEVERAL, NO_NECK = range(7, 14)
NO_INHIBITION = 15

#: below this share of repeats with a spike of the cell, the pairing did not happen
PARTNER_SHARE = 0.5
#: a factor below this is a depression
DEPRESSED_BELOW = 0.98
#: factors at which a route's reach is searched
SEARCHED, FARTHEST = 48, 1e3


@dataclass(frozen=True)
class Judgement:
    """What became of every cell of an arm, each array of shape (cell,).

    Repeats and minutes are infinite where the criterion was not reached, and no number where the
    cell was there before anything was learned, so that a median leaves such cells out.
    """

    verdict: Ints
    repeats: Floats
    minutes: Floats


def judge(
    fires: Floats,
    goal: float,
    *,
    repeats: Ints,
    minutes: Floats,
    factor: Floats,
    partner_fired: Floats,
    needs_partner: bool,
    reachable: NDArray[np.bool_],
) -> Judgement:
    """Return the verdict on each cell.

    Parameters
    ----------
    fires : array, shape (cell, reading)
        Probability that the input alone fires the cell; the first reading is before any event. A
        cell that test pulses teach during the baseline is reached, at 0 repeats.
    goal : float
        The probability that counts as driving it.
    repeats, minutes : array, shape (reading,)
        Repeats completed, and minutes since the induction started.
    factor : array, shape (cell, reading)
    partner_fired : array, shape (cell,)
        Share of repeats with a spike of the cell.
    needs_partner : bool
        Whether the protocol pairs the input with spikes at all.
    reachable : array, shape (cell,)
        Whether the route can make the input drive the cell at all.
    """
    above = fires[:, 1:] >= goal
    first = np.argmax(above, axis=1)
    reached = above.any(axis=1)
    verdict = np.full(len(fires), NOT_WITHIN)
    verdict[factor[:, -1] < DEPRESSED_BELOW] = DEPRESSED
    verdict[~reachable] = NEVER
    if needs_partner:
        verdict[(partner_fired < PARTNER_SHARE) & reachable] = PARTNER
    verdict[reached & above[:, -1]] = REACHED
    verdict[reached & ~above[:, -1]] = LOST
    already = fires[:, 0] >= goal
    verdict[already] = ALREADY
    told = [np.where(reached, row[1 + first], np.inf) for row in (repeats, np.maximum(minutes, 0))]
    return Judgement(verdict, *(np.where(already, np.nan, row) for row in told))


def reach(
    reader: Reader,
    name: str,
    route: Mixture,
    goal: float,
    *,
    highest_factor: Floats,
    inhibition: bool = True,
) -> tuple[NDArray[np.bool_], Ints]:
    """Return, per cell, whether a route can make an input drive it, and if not, why.

    Each cause is found by lifting it: the first limit that is enough on its own is named.

    Parameters
    ----------
    highest_factor : array, shape (cell,)
        The largest factor that the rule's own bounds allow.
    """
    far = np.full(len(highest_factor), FARTHEST)

    def best_of(kind: Mixture, cells: Cells, highest: Floats, inhibition: bool) -> Floats:
        return _best(reader, cells, name, kind, highest, inhibition)

    best = best_of(route, reader.cells, far, inhibition)
    within = best_of(route, reader.cells, highest_factor, inhibition)
    can = within >= goal
    cause = np.zeros(len(can), dtype=np.int64)
    cause[~can & (best >= goal)] = RULE_BOUND
    stuck = ~can & (best < goal)
    if not stuck.any():
        return can, cause
    single: list[tuple[int, Floats]] = []
    for channel in route.channels:
        target = route.channels[channel].target
        lifted, cells = _lifted(reader.cells, route, [channel])
        single.append((_LIMIT_OF[target], best_of(lifted, cells, far, inhibition)))
    if inhibition and reader.openings(name).fixed.any():
        single.append((INHIBITION, best_of(route, reader.cells, far, False)))
    for code, chance in reversed(single):
        cause[stuck & (chance >= goal)] = code
    left = stuck & (cause == 0)
    if left.any():
        lifted, cells = _lifted(reader.cells, route, list(route.channels))
        together = best_of(lifted, cells, far, False) >= goal
        cause[left & together] = SEVERAL
        cause[left & ~together] = _intrinsic(route)
    return can, cause


def _intrinsic(route: Mixture) -> int:
    """Return why even a route without limits cannot do it."""
    targets = {c.target for c in route.channels.values()}
    if targets == {"probability"}:
        return CERTAIN
    if targets <= {"diameter", "probability", "neck"} and "diameter" in targets:
        return BEST_DIAMETER
    if targets == {"inhibition"}:
        return NO_INHIBITION
    return NO_NECK if targets == {"neck"} else DISTANCE


def _lifted(cells: Cells, route: Mixture, names: list[str]) -> tuple[Mixture, Cells]:
    """Return the route and the cells with the limits of some channels taken away."""
    channels, release = dict(route.channels), cells.release.copy()
    for name in names:
        kind = channels[name]
        if kind.target == "probability":
            release["highest"] = 1.0
        lowest = max(type(kind).parameters["lowest"].low, 1e-6)
        values = {**kind.values, "highest": min(type(kind).parameters["highest"].high, 1e6)}
        channels[name] = type(kind)(**{**values, "lowest": lowest})
    return replace(route, channels=channels), cells._replace(release=release)


def _best(
    reader: Reader, cells: Cells, name: str, route: Mixture, highest: Floats, inhibition: bool
) -> Floats:
    """Return the best probability over factors from 1 to `highest`, per cell."""
    top = np.maximum(highest, 1.0)[:, None]
    factor = top ** np.linspace(0.0, 1.0, SEARCHED)[None, :]
    shape = (*factor.shape, len(route.shares), len(reader.scene.learners))
    factors = np.broadcast_to(factor[:, :, None, None], shape).copy()
    state = state_of(reader.scene, reader.wiring, cells, route, factors)
    chance = reader.fires_alone(name, route, state, inhibition=inhibition)
    return np.asarray(chance.max(axis=1), dtype=float)
