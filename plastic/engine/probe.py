"""Compiled readings: what one input alone does to a rested cell. Changes nothing.

A probe opens conductances at given steps in a cell at rest, without learning and, for the shape of
an EPSP, without spikes. The membrane is stepped exactly as in the simulation.
"""

from __future__ import annotations

import math

import numpy as np

from plastic.engine.steps import (  # noqa: F401 - some are used by what is pasted
    CUT,
    U0,
    U1,
    U2,
    U3,
    U4,
    advance,
    compiled,
    eliminate,
    fade,
    hold_currents,
    kept,
    mean_open,
    new_membrane,
    quanta,
    rebuild,
    stream_of,
    trials_of,
)


@compiled
def run_probe(
    groups,
    slots,
    m,
    open_step,
    open_group,
    amount,
    threshold,
    trace,
):
    """Run one probe into `trace`; return the step at which the soma reaches threshold, or -1.

    With an infinite threshold there are no spikes. The probe ends when the soma spikes, or is well
    past its last peak: an excitatory conductance can lift it once more when inhibition is over, so
    each is given three of its time constants. What is left of the trace stays at the last value.
    """
    v, slow, fast, ends, single, here = m.v, m.slow, m.fast, m.ends, m.powers[0], U0
    there = np.uintp(m.leak.shape[0])
    total, drive, which, matrix, current, spread = (
        m.total,
        m.drive,
        m.which,
        m.matrix,
        m.current,
        m.spread,
    )
    for node in range(v.shape[0]):
        v[node] = 0.0
    for g in range(slow.shape[0]):
        slow[g] = 0.0
        fast[g] = 0.0
        ends[g] = 0.0
    o, top, fired, lifted = 0, 0.0, -1, open_step[open_step.shape[0] - 1] + 50.0
    for k in range(open_step.shape[0]):
        if groups[open_group[k]].reversal > 0.0 and amount[k] > 0.0:
            span = -3.0 / math.log(groups[open_group[k]].keep_decay)
            lifted = max(lifted, open_step[k] + span)
    enough = 0.9 if threshold < 1e300 else 0.45
    step = 0
    while step < trace.shape[0]:
        trace[step] = v[here]
        if v[here] >= threshold:
            fired = step
            break
        top = max(top, v[here])
        if step > lifted and v[here] < enough * top:
            break
        while o < open_step.shape[0] and open_step[o] == step:
            g = open_group[o]
            scaled = amount[o] * groups[g].norm
            slow[g] += scaled
            ends[g] = max(ends[g], CUT * slow[g])
            if groups[g].keep_rise > 0.0:
                fast[g] += scaled
            o += 1
        mean_open(groups, slots, slow, fast, total, drive)
        n_open = hold_currents(single, slots, spread, total, drive, v, here, which, matrix, current)
        advance(single, spread, which, current, n_open, v, here, there)
        here, there = there, here
        _open = fade(groups, slow, fast, ends)
        step += 1
    for rest in range(step, trace.shape[0]):
        trace[rest] = v[here]
    return fired


@compiled
def crossing(trace, level, start, stop):
    """Return the step, interpolated, at which the trace crosses a level from start towards stop."""
    direction = 1 if stop > start else -1
    i = start
    while i != stop:
        a, b = trace[i], trace[i + direction]
        if (a < level) != (b < level):
            return i + direction * (level - a) / (b - a)
        i += direction
    return math.nan


@compiled
def shape_of(trace, dt, out):
    """Write peak (mV), time of the peak, 20-80 % rise and half-width (ms) of a trace."""
    peak = 0
    for i in range(trace.shape[0]):
        if trace[i] > trace[peak]:
            peak = i
    height = trace[peak]
    out[0] = max(height, 0.0)
    out[1] = peak * dt
    out[2] = math.nan
    out[3] = math.nan
    if height > 1e-9:
        out[2] = dt * (
            crossing(trace, 0.8 * height, peak, 0) - crossing(trace, 0.2 * height, peak, 0)
        )
        down = crossing(trace, 0.5 * height, peak, trace.shape[0] - 1)
        out[3] = dt * (down - crossing(trace, 0.5 * height, peak, 0))


@compiled
def run_shapes(
    plans, stretches, groups, slots, loads, multiples, step, group, amounts, length, out
):
    """Fill out (cell, geometry, probe, 4) with EPSP shapes; amounts (cell, probe, opening), nS."""
    plan = plans[0]
    cell = new_membrane(plan.n_nodes, groups.shape[0], slots.shape[0], 1)
    trace = np.zeros(length)
    for c in range(loads.shape[0]):
        for m in range(multiples.shape[0]):
            rebuild(plan, stretches, slots, multiples[m], loads[c], cell)
            for k in range(amounts.shape[1]):
                run_probe(groups, slots, cell, step, group, amounts[c, k], math.inf, trace)
                shape_of(trace, plan.dt, out[c, m, k])


@compiled
def run_thresholds(
    plans,
    stretches,
    groups,
    slots,
    loads,
    thresholds,
    multiples,
    step,
    group,
    amounts,
    own,
    added,
    added_amounts,
    largest,
    length,
    out,
):
    """Fill out (cell, geometry, added) with the own conductance (nS) that just fires the cell.

    `own[o]` is the share of the own conductance at opening o; added (cell, opening) is what opens
    per unit of the second axis `added_amounts`, along which the need may only fall; amounts (cell,
    opening) holds what else opens. Infinite when `largest` does not fire it.
    """
    plan = plans[0]
    cell = new_membrane(plan.n_nodes, groups.shape[0], slots.shape[0], 1)
    trace = np.zeros(length)
    now = np.zeros(step.shape[0])
    for c in range(loads.shape[0]):
        for m in range(multiples.shape[0]):
            rebuild(plan, stretches, slots, multiples[m], loads[c], cell)
            for a in range(added_amounts.shape[0]):
                if a > 0 and out[c, m, a - 1] == 0.0:
                    out[c, m, a] = 0.0  # nothing of its own was needed before
                    continue
                low, high = 0.0, largest
                for turn in range(26):
                    # the two ends first, then bisection of the logarithm
                    middle = (
                        high
                        if turn == 0
                        else (0.0 if turn == 1 else math.sqrt(max(low, 1e-3) * high))
                    )
                    for o in range(step.shape[0]):
                        now[o] = amounts[c, o] + own[o] * middle + added[c, o] * added_amounts[a]
                    fired = run_probe(groups, slots, cell, step, group, now, thresholds[c], trace)
                    if fired >= 0:
                        high = middle
                    else:
                        low = middle
                    if (turn == 0 and fired < 0) or (turn == 1 and fired >= 0):
                        break
                    if turn > 1 and high - low < 1e-5 * high:
                        break
                out[c, m, a] = high if high < largest or fired >= 0 else math.inf


@compiled
def run_chances(
    plans,
    stretches,
    groups,
    slots,
    numbers,
    loads,
    thresholds,
    multiples,
    step,
    group,
    contact,
    release,
    cv,
    trials,
    length,
    out,
):
    """Fill out (cell, reading) with the share of `trials` in which the stimulated input fires.

    Every opening is a release of contact[o], drawn from release (cell, reading, opening, 3) =
    (sites, probability, quantum); multiples (cell, reading, stretch).
    """
    plan = plans[0]
    cell = new_membrane(plan.n_nodes, groups.shape[0], slots.shape[0], 1)
    trace = np.zeros(length)
    now = np.zeros(step.shape[0])
    for c in range(loads.shape[0]):
        for r in range(out.shape[1]):
            rebuild(plan, stretches, slots, multiples[c, r], loads[c], cell)
            fires = 0
            for trial in range(trials):
                for o in range(step.shape[0]):
                    stream = stream_of(plan.seed, numbers[c], 1_000_000 + contact[o])
                    ordinal = trial * step.shape[0] + o
                    available = trials_of(stream, ordinal, release[c, r, o, 0])
                    _count, amount = quanta(
                        stream, ordinal, available, release[c, r, o, 1], release[c, r, o, 2], cv[o]
                    )
                    now[o] = amount
                fired = run_probe(groups, slots, cell, step, group, now, thresholds[c], trace)
                fires += 1 if fired >= 0 else 0
            out[c, r] = fires / trials


@compiled
def count_chances(sites, probability, out):
    """Fill out[k] with the chance of k quanta: binomial, a fractional site counting by chance."""
    whole = int(sites)
    fraction = (sites - whole) * probability
    for k in range(out.shape[0]):
        out[k] = 0.0
    if probability >= 1.0:
        out[whole] = 1.0
    elif probability <= 0.0:
        out[0] = 1.0
    else:  # from the mode outwards: the chance of no quantum at all may be no number any more
        mode = min(int((whole + 1) * probability), whole)
        odds = probability / (1.0 - probability)
        out[mode] = math.exp(
            math.lgamma(whole + 1.0)
            - math.lgamma(mode + 1.0)
            - math.lgamma(whole - mode + 1.0)
            + mode * math.log(probability)
            + (whole - mode) * math.log1p(-probability)
        )
        for k in range(mode, whole):
            out[k + 1] = out[k] * (whole - k) / (k + 1.0) * odds
        for k in range(mode, 0, -1):
            out[k - 1] = out[k] * k / (whole - k + 1.0) / odds
    for k in range(out.shape[0] - 1, 0, -1):
        out[k] = out[k] * (1.0 - fraction) + out[k - 1] * fraction
    out[0] *= 1.0 - fraction


@compiled
def tail_of(goal, chances, count, q, cv):
    """Return the chance that the summed conductance of the quanta reaches `goal` > 0."""
    total = 0.0
    for k in range(1, count if q > 0.0 else 0):
        if chances[k] < 1e-14:
            continue
        if cv == 0.0:
            total += chances[k] if k * q >= goal else 0.0
        else:
            total += chances[k] * 0.5 * math.erfc((goal - k * q) / (cv * q * math.sqrt(2.0 * k)))
    return total


@compiled
def fill_tails(release, cv, chances, tails):
    """Fill tails with the chance that one contact reaches each of even steps of conductance.

    Return the step (nS). Without quantal variance the steps are quanta, so that nothing is lost.
    """
    sites, q = release[0], release[2]
    count = int(sites) + 2
    count_chances(sites, release[1], chances)
    step = q
    if cv > 0.0:
        step = q * (sites + 8.0 * cv * math.sqrt(sites)) / (tails.shape[0] - 1.0)
    for i in range(tails.shape[0]):
        if cv > 0.0:
            tails[i] = tail_of(i * step, chances, count, q, cv)
        else:
            tails[i] = 0.0
            for k in range(max(i, 1), count):
                tails[i] += chances[k]
    return step


@compiled
def chance_of(goal, tails, step, cv):
    """Return the chance that one contact reaches `goal`, from its tails."""
    if goal <= 0.0:
        return 1.0
    if step <= 0.0 or goal > step * (tails.shape[0] - 1.0):
        return 0.0
    at = goal / step
    if cv == 0.0:
        return tails[math.ceil(at * (1.0 - 1e-12))]
    i = min(int(at), tails.shape[0] - 2)
    return tails[i] + (at - i) * (tails[i + 1] - tails[i])


@compiled
def goal_beside(g, grid, goals):
    """Return the own conductance needed beside g nS of the other, between nodes of a table.

    Linear in the logarithm; in the inverse next to a node where no conductance is enough, and in
    itself next to one where none is needed.
    """
    low, high = 0, grid.shape[0] - 1
    while high - low > 1:
        middle = (low + high) // 2
        if grid[middle] <= g:
            low = middle
        else:
            high = middle
    along = min((g - grid[low]) / (grid[high] - grid[low]), 1.0)
    if goals[high] > 1e300:
        return math.inf
    if goals[high] == 0.0:
        return goals[low] * (1.0 - along) if along < 1.0 else 0.0
    if goals[low] > 1e300:
        return goals[high] / along if along > 0.0 else math.inf
    return goals[low] * (goals[high] / goals[low]) ** along


@compiled
def run_two_contacts(own, extra, cv, grid, goals, nodes, weights, out):
    """Fill out (cell, reading) with the chance that two contacts together fire the cell.

    own, extra (cell, reading, 3) = (sites, probability, quantum) of the contact at the old and at
    the new place; goals (cell, added) the own conductance needed beside grid[a] nS of the other.
    """
    most = 0.0
    for c in range(own.shape[0]):
        for r in range(own.shape[1]):
            most = max(most, max(own[c, r, 0], extra[c, r, 0]))
    size = int(most) + 2
    first, second = np.zeros(size), np.zeros(size)
    tails, step = np.zeros(257 if cv > 0.0 else size), 0.0
    known = np.zeros(3)
    for c in range(own.shape[0]):
        for r in range(own.shape[1]):
            same = c + r > 0
            for j in range(3):
                same = same and own[c, r, j] == known[j]
            if not same:
                for j in range(3):
                    known[j] = own[c, r, j]
                step = fill_tails(known, cv, first, tails)
            count_chances(extra[c, r, 0], extra[c, r, 1], second)
            total = 0.0
            for k in range(int(extra[c, r, 0]) + 2):
                if k >= size or second[k] < 1e-12:
                    continue
                for z in range(nodes.shape[0]):
                    g = max(extra[c, r, 2] * (k + cv * math.sqrt(float(k)) * nodes[z]), 0.0)
                    goal = goal_beside(g, grid, goals[c])
                    total += second[k] * weights[z] * chance_of(goal, tails, step, cv)
            out[c, r] = min(total, 1.0)


@compiled
def run_tails(goals, release, cv, out):
    """Fill out (cell, reading) with the chance that one contact reaches goals (cell, reading)."""
    most = 0.0
    for c in range(release.shape[0]):
        for r in range(release.shape[1]):
            most = max(most, release[c, r, 0])
    chances = np.zeros(int(most) + 2)
    for c in range(release.shape[0]):
        for r in range(release.shape[1]):
            goal = goals[c, r]
            if goal <= 0.0:
                out[c, r] = 1.0
            elif goal > 1e300:
                out[c, r] = 0.0
            elif (
                r > 0
                and goal == goals[c, r - 1]
                and (
                    release[c, r, 0] == release[c, r - 1, 0]
                    and release[c, r, 1] == release[c, r - 1, 1]
                    and release[c, r, 2] == release[c, r - 1, 2]
                )
            ):
                out[c, r] = out[c, r - 1]
            else:
                count_chances(release[c, r, 0], release[c, r, 1], chances)
                out[c, r] = tail_of(goal, chances, int(release[c, r, 0]) + 2, release[c, r, 2], cv)
