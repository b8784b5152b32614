"""Compiled readings: what one input alone does to a rested cell. Changes nothing.

A probe opens conductances at given steps in a cell at rest, without learning and, for the shape of
an EPSP, without spikes. The membrane is stepped exactly as in the simulation.
"""

from __future__ import annotations

import math

import numpy as np
from numba import njit

from plastic.engine.steps import (  # noqa: F401 - some are used by what is pasted
    CUT,
    DOUBLINGS,
    apply,
    fade,
    membrane,
    padded,
    propagators,
    quanta,
    relaxed,
    stream_of,
    synaptic_half,
    trials_of,
)


@njit(nogil=True)
def set_geometry(plan, stretches, multiple, load, conductance, leak, powers, work, half_over_c):
    """Fill the one-step propagator and half a step over the capacitance of every node."""
    membrane(stretches, multiple, plan.rm, plan.ri, load, conductance, leak)
    propagators(conductance, leak, plan.n_nodes, plan.tau_m, plan.dt, powers, work)
    for node in range(plan.n_nodes):
        half_over_c[node] = 0.5 * plan.dt / (plan.tau_m * leak[node])


@njit(nogil=True)
def run_probe(
    groups,
    slot_node,
    single,
    half_over_c,
    open_step,
    open_group,
    amount,
    threshold,
    trace,
    v,
    scratch,
    slow,
    fast,
    total,
    drive,
):
    """Run one probe into `trace`; return the step at which the soma reaches threshold, or -1.

    With an infinite threshold there are no spikes. The probe ends when the soma spikes, or is well
    past its last peak; what is left of the trace then stays at the last value.
    """
    for node in range(v.shape[0]):
        v[node] = 0.0
    for g in range(slow.shape[0]):
        slow[g] = 0.0
        fast[g] = 0.0
    for slot in range(total.shape[0]):
        total[slot] = 0.0
        drive[slot] = 0.0
    o, top, fired, last = 0, 0.0, -1, open_step[open_step.shape[0] - 1]
    enough = 0.9 if threshold < 1e300 else 0.45
    step = 0
    while step < trace.shape[0]:
        trace[step] = v[0]
        if v[0] >= threshold:
            fired = step
            break
        top = max(top, v[0])
        if step > last + 50 and v[0] < enough * top:
            break
        while o < open_step.shape[0] and open_step[o] == step:
            g = open_group[o]
            scaled = amount[o] * groups[g].norm
            slow[g] += scaled
            if groups[g].keep_rise > 0.0:
                fast[g] += scaled
            else:
                total[groups[g].slot] += scaled
                drive[groups[g].slot] += scaled * groups[g].reversal
            o += 1
        synaptic_half(v, slot_node, total, drive, half_over_c)
        apply(single, v, scratch)
        _open = fade(groups, slow, fast, total, drive)
        synaptic_half(v, slot_node, total, drive, half_over_c)
        step += 1
    for rest in range(step, trace.shape[0]):
        trace[rest] = v[0]
    return fired


@njit(nogil=True)
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


@njit(nogil=True)
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


@njit(nogil=True)
def run_shapes(
    plans, stretches, groups, slot_node, loads, multiples, step, group, amounts, length, out
):
    """Fill out (cell, geometry, probe, 4) with EPSP shapes; amounts (cell, probe, opening), nS."""
    plan = plans[0]
    size = padded(plan.n_nodes)
    v, scratch, half_over_c, leak = np.zeros(size), np.zeros(size), np.zeros(size), np.zeros(size)
    conductance, powers = np.zeros((size, size)), np.zeros((1, size, size))
    work, trace = np.zeros((3, size, size)), np.zeros(length)
    slow, fast = np.zeros(groups.shape[0]), np.zeros(groups.shape[0])
    total, drive = np.zeros(slot_node.shape[0]), np.zeros(slot_node.shape[0])
    single = powers[0]
    for c in range(loads.shape[0]):
        for m in range(multiples.shape[0]):
            set_geometry(
                plan,
                stretches,
                multiples[m],
                loads[c],
                conductance,
                leak,
                powers,
                work,
                half_over_c,
            )
            for k in range(amounts.shape[1]):
                run_probe(
                    groups,
                    slot_node,
                    single,
                    half_over_c,
                    step,
                    group,
                    amounts[c, k],
                    math.inf,
                    trace,
                    v,
                    scratch,
                    slow,
                    fast,
                    total,
                    drive,
                )
                shape_of(trace, plan.dt, out[c, m, k])


@njit(nogil=True)
def run_thresholds(
    plans,
    stretches,
    groups,
    slot_node,
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

    `own[o]` is the share of the own conductance at opening o, `added[o]` that of the added one;
    amounts (cell, opening) holds what else opens. Infinite when `largest` does not fire it.
    """
    plan = plans[0]
    size = padded(plan.n_nodes)
    v, scratch, half_over_c, leak = np.zeros(size), np.zeros(size), np.zeros(size), np.zeros(size)
    conductance, powers = np.zeros((size, size)), np.zeros((1, size, size))
    work, trace = np.zeros((3, size, size)), np.zeros(length)
    slow, fast = np.zeros(groups.shape[0]), np.zeros(groups.shape[0])
    total, drive = np.zeros(slot_node.shape[0]), np.zeros(slot_node.shape[0])
    now = np.zeros(step.shape[0])
    single = powers[0]
    for c in range(loads.shape[0]):
        for m in range(multiples.shape[0]):
            set_geometry(
                plan,
                stretches,
                multiples[m],
                loads[c],
                conductance,
                leak,
                powers,
                work,
                half_over_c,
            )
            for a in range(added_amounts.shape[0]):
                low, high = 0.0, largest
                for turn in range(26):
                    # the two ends first, then bisection of the logarithm
                    middle = (
                        high
                        if turn == 0
                        else (0.0 if turn == 1 else math.sqrt(max(low, 1e-3) * high))
                    )
                    for o in range(step.shape[0]):
                        now[o] = amounts[c, o] + own[o] * middle + added[o] * added_amounts[a]
                    fired = run_probe(
                        groups,
                        slot_node,
                        single,
                        half_over_c,
                        step,
                        group,
                        now,
                        thresholds[c],
                        trace,
                        v,
                        scratch,
                        slow,
                        fast,
                        total,
                        drive,
                    )
                    if fired >= 0:
                        high = middle
                    else:
                        low = middle
                    if (turn == 0 and fired < 0) or (turn == 1 and fired >= 0):
                        break
                    if turn > 1 and high - low < 1e-5 * high:
                        break
                out[c, m, a] = high if high < largest or fired >= 0 else math.inf


@njit(nogil=True)
def run_chances(
    plans,
    stretches,
    groups,
    slot_node,
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
    size = padded(plan.n_nodes)
    v, scratch, half_over_c, leak = np.zeros(size), np.zeros(size), np.zeros(size), np.zeros(size)
    conductance, powers = np.zeros((size, size)), np.zeros((1, size, size))
    work, trace = np.zeros((3, size, size)), np.zeros(length)
    slow, fast = np.zeros(groups.shape[0]), np.zeros(groups.shape[0])
    total, drive = np.zeros(slot_node.shape[0]), np.zeros(slot_node.shape[0])
    now = np.zeros(step.shape[0])
    single = powers[0]
    for c in range(loads.shape[0]):
        for r in range(out.shape[1]):
            set_geometry(
                plan,
                stretches,
                multiples[c, r],
                loads[c],
                conductance,
                leak,
                powers,
                work,
                half_over_c,
            )
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
                fired = run_probe(
                    groups,
                    slot_node,
                    single,
                    half_over_c,
                    step,
                    group,
                    now,
                    thresholds[c],
                    trace,
                    v,
                    scratch,
                    slow,
                    fast,
                    total,
                    drive,
                )
                fires += 1 if fired >= 0 else 0
            out[c, r] = fires / trials


@njit(nogil=True)
def count_chances(sites, probability, out):
    """Fill out[k] with the chance of k quanta: binomial, a fractional site counting by chance."""
    whole = int(sites)
    fraction = (sites - whole) * probability
    for k in range(out.shape[0]):
        out[k] = 0.0
    if probability >= 1.0:
        out[whole] = 1.0
    else:
        chance = (1.0 - probability) ** whole
        for k in range(whole + 1):
            out[k] = chance
            chance *= (whole - k) / (k + 1.0) * probability / (1.0 - probability)
    for k in range(out.shape[0] - 1, 0, -1):
        out[k] = out[k] * (1.0 - fraction) + out[k - 1] * fraction
    out[0] *= 1.0 - fraction


@njit(nogil=True)
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


@njit(nogil=True)
def run_two_contacts(own, extra, cv, grid, goals, nodes, weights, out):
    """Fill out (cell, reading) with the chance that two contacts together fire the cell.

    own, extra (cell, reading, 3) = (sites, probability, quantum) of the contact at the old and at
    the new place; goals (cell, added) the own conductance needed beside grid[a] nS of the other.
    """
    most = 0.0
    for c in range(own.shape[0]):
        for r in range(own.shape[1]):
            most = max(most, max(own[c, r, 0], extra[c, r, 0]))
    size, points = int(most) + 2, 257
    first, second, tails = np.zeros(size), np.zeros(size), np.zeros(points)
    for c in range(own.shape[0]):
        farthest = 0.0
        for a in range(grid.shape[0]):
            if goals[c, a] < 1e300:
                farthest = max(farthest, goals[c, a])
        known = np.full(3, -1.0)
        for r in range(own.shape[1]):
            same = True
            for j in range(3):
                same = same and own[c, r, j] == known[j]
            if not same and farthest > 0.0:
                for j in range(3):
                    known[j] = own[c, r, j]
                count_chances(own[c, r, 0], own[c, r, 1], first)
                count = int(own[c, r, 0]) + 2
                for i in range(points):
                    goal = farthest * i / (points - 1.0)
                    tails[i] = 1.0 if i == 0 else tail_of(goal, first, count, own[c, r, 2], cv)
            count_chances(extra[c, r, 0], extra[c, r, 1], second)
            total = 0.0
            for k in range(int(extra[c, r, 0]) + 2):
                if k >= size or second[k] < 1e-12:
                    continue
                for z in range(nodes.shape[0]):
                    g = max(extra[c, r, 2] * (k + cv * math.sqrt(float(k)) * nodes[z]), 0.0)
                    a = 0
                    while a < grid.shape[0] - 2 and grid[a + 1] <= g:
                        a += 1
                    along = min((g - grid[a]) / (grid[a + 1] - grid[a]), 1.0)
                    low, high = goals[c, a], goals[c, a + 1]
                    goal = low if low == high else low + along * (high - low)
                    if math.isnan(goal) or goal > 1e300:
                        continue
                    at = goal / farthest * (points - 1.0) if farthest > 0.0 else 0.0
                    i = min(int(at), points - 2)
                    chance = 1.0 if goal <= 0.0 else tails[i] + (at - i) * (tails[i + 1] - tails[i])
                    total += second[k] * weights[z] * chance
            out[c, r] = min(total, 1.0)


@njit(nogil=True)
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
