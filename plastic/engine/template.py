"""The compiled loop, written for a rule that learns nothing.

For every real rule a module is generated from this text: the part between the two marks below is
replaced by the rule's own hooks, and the result is written to the cache, readable, and compiled
by numba. What follows the marks is the same for all rules.

One step of the loop, at time t = step * dt:

1.  A spike is due when the soma is at threshold (or one is injected): reset, refractory, and the
    spike sets out for every site.
2.  Windows, ticks of expression and readings that are due see the state before the instant.
3.  Presynaptic events open conductances, with the strength of just before the instant.
4.  The rule learns: all changes read the state before the instant, add, then bounds hold, then
    traces jump.
5.  The membrane takes one step (half synapses, exact linear propagator, half synapses), or, when
    no conductance is open and no node is above threshold, jumps exactly to the next thing due:
    with leak to rest everywhere the highest node can only fall, so no spike is missed.

Traces are stored scaled, x(t) exp((t - t_ref)/tau), so that an event costs no exponential; t_ref
moves up before the scale gets large.
"""

from __future__ import annotations

import math

import numpy as np
from numba import njit

from plastic.engine.steps import (
    DOUBLINGS,
    apply,
    binomial,
    fade,
    highest_of,
    jump,
    membrane,
    powered,
    propagators,
    quanta,
    stream_of,
    synaptic_half,
    trials_of,
)
from plastic.engine.steps import REFILL as REFILL_PART

# ---- the rule -----------------------------------------------------------------------------------
RATES = False  # learns from rates counted over a window
N_WEIGHTS, N_VARIABLES, N_CELL = 1, 1, 0
PRE_ADDS = (True,)  # a trace of "pre" adds 1 at an event (False: is set to 1)
POST_ADDS = (True,)
HAS_FLOW, HAS_CELL_FLOW = False, False


@njit(nogil=True)
def add_on_pre(p, S, C, X, Y, fx, fy, i, site, t, D):
    """Add to D what on_pre changes of learner i."""


@njit(nogil=True)
def add_on_post(p, S, C, X, Y, fx, fy, i, site, t, amplitude, D):
    """Add to D what on_post changes of learner i."""


@njit(nogil=True)
def add_on_presentation(p, S, C, i, t, pre_rate, post_rate, D):
    """Add to D what on_presentation changes of learner i."""


@njit(nogil=True)
def add_cell_on_post(p, C, Y, fy, t, DC):
    """Add to DC what cell_on_post changes."""


@njit(nogil=True)
def add_cell_on_presentation(p, C, t, post_rate, DC):
    """Add to DC what cell_on_presentation changes."""


@njit(nogil=True)
def add_flow(p, S, i, dt, D):
    """Add to D what flow changes of learner i."""


@njit(nogil=True)
def add_cell_flow(p, C, dt, DC):
    """Add to DC what cell_flow changes."""


@njit(nogil=True)
def factor_of(p, S, i):
    """Return the factor of learner i."""
    return 1.0


# ---- end of the rule ----------------------------------------------------------------------------

LARGEST_SCALE = 40.0  # e-folds of the scaled traces before t_ref moves up


@njit(nogil=True)
def settle(S, D, low, high, i):
    """Apply the changes of learner i, then its bounds."""
    for row in range(N_VARIABLES):
        S[row, i] += D[row, i]
        D[row, i] = 0.0
    for row in range(N_WEIGHTS):
        S[row, i] = min(max(S[row, i], low[row]), high[row, i])


@njit(nogil=True)
def flow_to(p, S, C, D, DC, low, high, dt):
    """Bring every input and the cell over `dt` ms of silence."""
    if HAS_FLOW:
        for i in range(S.shape[1]):
            add_flow(p, S, i, dt, D)
            settle(S, D, low, high, i)
    if HAS_CELL_FLOW:
        add_cell_flow(p, C, dt, DC)
        for row in range(N_CELL):
            C[row] += DC[row]
            DC[row] = 0.0


@njit(nogil=True)
def present(p, S, C, D, DC, low, high, t, counts, post_count, window):
    """Close a window (ms): its counts become rates (Hz) and are presented to the rule."""
    post_rate = post_count * 1000.0 / window
    add_cell_on_presentation(p, C, t, post_rate, DC)
    for i in range(S.shape[1]):
        add_on_presentation(p, S, C, i, t, counts[i] * 1000.0 / window, post_rate, D)
    for i in range(S.shape[1]):
        settle(S, D, low, high, i)
        counts[i] = 0.0
    for row in range(N_CELL):
        C[row] += DC[row]
        DC[row] = 0.0


@njit(nogil=True)
def learn(p, S, C, X, Y, fx, fy, D, DC, low, high, t, pre, n_pre, arrived, site_first, site_of):
    """Apply one instant: presynaptic events `pre`, local spikes of amplitude `arrived[site]` > 0."""
    some_post = False
    for site in range(arrived.shape[0]):
        if arrived[site] > 0.0:
            some_post = True
            for i in range(site_first[site], site_first[site + 1]):
                add_on_post(p, S, C, X, Y, fx, fy, i, site, t, arrived[site], D)
    for k in range(n_pre):
        i = pre[k]
        add_on_pre(p, S, C, X, Y, fx, fy, i, site_of[i], t, D)
    if arrived[0] > 0.0:
        add_cell_on_post(p, C, Y, fy, t, DC)
    if some_post:
        for i in range(S.shape[1]):
            settle(S, D, low, high, i)
        for row in range(N_CELL):
            C[row] += DC[row]
            DC[row] = 0.0
    else:
        for k in range(n_pre):
            settle(S, D, low, high, pre[k])


@njit(nogil=True)
def traces_jump(X, Y, fx, fy, pre, n_pre, arrived):
    """Let the traces jump, after the changes of the instant."""
    for row in range(X.shape[0]):
        unit = 1.0 / fx[row]
        for k in range(n_pre):
            X[row, pre[k]] = X[row, pre[k]] + unit if PRE_ADDS[row] else unit
    for row in range(Y.shape[0]):
        unit = 1.0 / fy[row]
        for site in range(arrived.shape[0]):
            if arrived[site] > 0.0:
                Y[row, site] = Y[row, site] + unit if POST_ADDS[row] else unit


@njit(nogil=True)
def rescale(X, Y, taus_pre, taus_post, elapsed, fx, fy):
    """Move the reference time of the scaled traces up by `elapsed` ms."""
    for row in range(X.shape[0]):
        shrink = math.exp(-elapsed / taus_pre[row])
        for i in range(X.shape[1]):
            X[row, i] *= shrink
        fx[row] = 1.0
    for row in range(Y.shape[0]):
        shrink = math.exp(-elapsed / taus_post[row])
        for site in range(Y.shape[1]):
            Y[row, site] *= shrink
        fy[row] = 1.0


@njit(nogil=True)
def factor_table(taus, dt):
    """Return exp(-k dt/tau) for k = low + 256 high as the product of two short tables."""
    table = np.empty((taus.shape[0], 2, 256))
    for row in range(taus.shape[0]):
        for k in range(256):
            table[row, 0, k] = math.exp(-k * dt / taus[row])
            table[row, 1, k] = math.exp(-256.0 * k * dt / taus[row])
    return table


@njit(nogil=True)
def shortest_of(taus_pre, taus_post):
    """Return the shortest time constant of the traces, ms."""
    shortest = 1e12
    for tau in taus_pre:
        shortest = min(shortest, tau)
    for tau in taus_post:
        shortest = min(shortest, tau)
    return shortest


@njit(nogil=True)
def express(w, cells, c, k, i, expressed, sites, probability, quantum):
    """Set the physical variables of contact k from the expressed factors of its learner i."""
    n, u, q, neck = cells.sites[c, k], cells.probability[c, k], cells.quantum[c, k], 1.0
    added = 0.0
    for ch in range(w.channel_target.shape[0]):
        target = w.channel_target[ch]
        value = powered(
            expressed[ch, i], w.channel_exponent[ch], w.channel_excess[ch] == 1,
            w.channel_lowest[ch], w.channel_highest[ch],
        )
        if target == 0:
            u = min(u * value, cells.probability_highest[c, k])
        elif target == 1:
            q *= value
        elif target == 2:
            n *= value
        elif target == 3:
            neck *= value
        elif target == 4:
            added = value
    sites[k] = n * added if w.contact_added[k] == 1 else n
    probability[k] = u
    quantum[k] = q / (1.0 + q * w.contact_neck[k] * neck * 1e-3)


@njit(nogil=True)
def express_all(w, cells, c, expressed, sites, probability, quantum):
    """Set the physical variables of every learning contact."""
    for k in range(w.contact_group.shape[0]):
        if w.contact_learner[k] >= 0:
            express(w, cells, c, k, w.contact_learner[k], expressed, sites, probability, quantum)


@njit(nogil=True)
def widen(w, expressed, multiple):
    """Set the diameter of every stretch on the path; return whether any moved by 1e-4."""
    moved = False
    for ch in range(w.channel_target.shape[0]):
        if w.channel_target[ch] != 5:
            continue
        for s in range(multiple.shape[0]):
            if w.stretch_widens[s] == 0:
                continue
            total, number = 0.0, 0
            for k in range(w.contact_group.shape[0]):
                if w.contact_beyond[s, k] == 1 and w.contact_excites[k] == 1:
                    i = w.contact_learner[k]
                    grown = 1.0
                    if i >= 0:
                        grown = max(expressed[ch, i], 0.0) ** w.channel_exponent[ch]
                    total += grown
                    number += 1
            goal = min(max(total / number, w.channel_lowest[ch]), w.channel_highest[ch])
            if abs(goal - multiple[s]) > 1e-4 * multiple[s]:
                moved = True
                multiple[s] = goal
    return moved


@njit(nogil=True)
def tick_expression(w, S, p, history, ticks, expressed):
    """Let each channel's expressed factor follow the factor of `channel_delay` ticks ago."""
    depth = history.shape[0]
    for i in range(S.shape[1]):
        history[ticks % depth, i] = factor_of(p, S, i)
        for ch in range(w.channel_target.shape[0]):
            goal = 1.0
            if ticks >= w.channel_delay[ch]:
                goal = history[(ticks - w.channel_delay[ch]) % depth, i]
            expressed[ch, i] = goal + (expressed[ch, i] - goal) * w.channel_keep[ch]


@njit(nogil=True)
def release(w, k, stream, ordinal, t, sites, probability, quantum, use, full, empties, last):
    """Return the conductance (nS) that contact k releases at its event, and move its dynamics.

    Deterministic: N u R q with the recursion u, R. Stochastic: sites empty and refill one by one,
    so that the recursion is the mean.
    """
    u = probability[k]
    gap = t - last[k]
    if w.contact_facilitation[k] > 0.0:
        u += use[k] * (1.0 - u) * math.exp(-gap / w.contact_facilitation[k])
    use[k] = u
    recovery = w.contact_recovery[k]
    if w.deterministic == 1:
        if recovery > 0.0:
            full[k] = 1.0 - (1.0 - full[k]) * math.exp(-gap / recovery)
        amount = sites[k] * u * full[k] * quantum[k]
        if recovery > 0.0:
            full[k] *= 1.0 - u
    else:
        trials = trials_of(stream, ordinal, sites[k])
        if recovery > 0.0:
            refilled = -math.expm1(-gap / recovery)
            empties[k] -= binomial(stream, ordinal, empties[k], refilled, REFILL_PART)
            trials = max(trials - empties[k], 0)
        count, amount = quanta(stream, ordinal, trials, u, quantum[k], w.contact_cv[k])
        if recovery > 0.0:
            empties[k] += count
    last[k] = t
    return amount


@njit(nogil=True)
def note_reading(w, log, c, r, S, C, p, expressed, multiple):
    """Write down what a reading sees; changes nothing."""
    for i in range(S.shape[1]):
        for row in range(N_VARIABLES):
            log.variables[c, r, row, i] = S[row, i]
        log.factor[c, r, i] = factor_of(p, S, i)
        for ch in range(w.channel_target.shape[0]):
            log.expressed[c, r, ch, i] = log.factor[c, r, i] if w.tick == 0 else expressed[ch, i]
    for s in range(multiple.shape[0]):
        log.diameter[c, r, s] = multiple[s]
    for row in range(N_CELL):
        log.cell_states[c, r, row] = C[row]


@njit(nogil=True)
def run_cell(w, cells, log, c, stop):
    """Run one cell from the first step to the last."""
    n_nodes, n_learners = w.n_nodes, w.learner_site.shape[0]
    n_contacts, n_groups = w.contact_group.shape[0], w.group_node.shape[0]
    n_sites, n_channels = w.site_delay.shape[0], w.channel_target.shape[0]
    event_step, event_contact = w.event_step, w.event_contact
    event_learner, event_ordinal = w.event_learner, w.event_ordinal
    contact_group, group_norm, dt = w.contact_group, w.group_norm, w.dt
    p, threshold = cells.parameters[c], cells.threshold[c]
    low, high = w.low, cells.high[c]

    # membrane
    v, scratch = np.zeros(n_nodes), np.zeros(n_nodes)
    total, drive, half_over_c = np.zeros(n_nodes), np.zeros(n_nodes), np.zeros(n_nodes)
    conductance, leak = np.zeros((n_nodes, n_nodes)), np.zeros(n_nodes)
    powers, work = np.zeros((DOUBLINGS, n_nodes, n_nodes)), np.zeros((3, n_nodes, n_nodes))
    multiple = np.ones(w.stretch_parent.shape[0])
    slow, fast = np.zeros(n_groups), np.zeros(n_groups)

    # learning
    S, D = np.empty((N_VARIABLES, n_learners)), np.zeros((N_VARIABLES, n_learners))
    C, DC = w.cell_starts.copy(), np.zeros(N_CELL)
    for row in range(N_VARIABLES):
        S[row, :] = w.starts[row]
    X, Y = np.zeros((w.taus_pre.shape[0], n_learners)), np.zeros((w.taus_post.shape[0], n_sites))
    fx, fy = np.ones(X.shape[0]), np.ones(Y.shape[0])
    table_x, table_y = factor_table(w.taus_pre, dt), factor_table(w.taus_post, dt)
    longest_scale = int(min(LARGEST_SCALE * shortest_of(w.taus_pre, w.taus_post) / dt, 65535.0))
    reference, flowed = 0, 0
    pre, counts = np.empty(max(n_learners, 1), np.int64), np.zeros(n_learners)
    post_count, closes = 0.0, -1

    # expression
    depth = 1
    for ch in range(n_channels):
        depth = max(depth, w.channel_delay[ch] + 1)
    history, expressed = np.ones((depth, n_learners)), np.ones((n_channels, n_learners))
    sites, probability, quantum = np.empty(n_contacts), np.empty(n_contacts), np.empty(n_contacts)
    for k in range(n_contacts):
        sites[k] = 0.0 if w.contact_added[k] == 1 else cells.sites[c, k]
        probability[k] = cells.probability[c, k]
        quantum[k] = cells.quantum[c, k]
        quantum[k] /= 1.0 + quantum[k] * w.contact_neck[k] * 1e-3
    express_all(w, cells, c, expressed, sites, probability, quantum)
    ticks, next_tick = 0, w.tick if w.tick > 0 else w.n_steps + 1

    # release
    streams = np.empty(n_contacts, np.uint64)
    for k in range(n_contacts):
        streams[k] = stream_of(w.seed, cells.number[c], k)
    use, full, last = np.zeros(n_contacts), np.ones(n_contacts), np.full(n_contacts, -1e300)
    empties = np.zeros(n_contacts, np.int64)

    # spikes on their way to the sites
    pending, amplitude = np.full((n_sites, 64), -1, np.int64), np.zeros((n_sites, 64))
    head, tail = np.zeros(n_sites, np.int64), np.zeros(n_sites, np.int64)
    arrived = np.zeros(n_sites)
    train, last_spike, free = 1.0, -1e300, 0

    membrane(
        w.stretch_parent, w.stretch_child, w.stretch_length, w.stretch_diameter, multiple,
        w.rm, w.ri, cells.load[c], w.tau_m, conductance, leak,
    )
    propagators(conductance, leak, w.tau_m, dt, powers, work)
    for node in range(n_nodes):
        half_over_c[node] = 0.5 * dt / (w.tau_m * leak[node])

    step, e, r, some_open, taken = 0, 0, 0, False, 0
    n_events, n_readings = event_step.shape[0], w.reading_step.shape[0]
    while True:
        # 1. a spike of the cell
        injected = False
        while e < n_events and event_step[e] == step and event_contact[e] < 0 and event_learner[e] < 0:
            injected = True
            e += 1
        if step >= free and (injected or v[0] >= threshold):
            number = log.spike_count[c]
            if number < log.spike_step.shape[1]:
                log.spike_step[c, number] = step
            log.spike_count[c] = number + 1
            v[0] = w.reset
            free = step + w.refractory
            train = 1.0 - (1.0 - train) * math.exp(-(step * dt - last_spike) / w.bap_length[2])
            for site in range(n_sites):
                size = math.exp(-w.site_distance[site] / (w.bap_length[0] * train))
                if size >= w.bap_length[3]:
                    pending[site, tail[site] % 64] = step + w.site_delay[site]
                    amplitude[site, tail[site] % 64] = size
                    tail[site] += 1
            train *= 1.0 - w.bap_length[1]
            last_spike = step * dt
        some_arrived = False
        for site in range(n_sites):
            arrived[site] = 0.0
            if head[site] < tail[site] and pending[site, head[site] % 64] == step:
                arrived[site] = amplitude[site, head[site] % 64]
                head[site] += 1
                some_arrived = True

        # 2. what is due sees the state before the instant
        due = some_arrived or (e < n_events and event_step[e] == step)
        reads = r < n_readings and w.reading_step[r] == step
        if RATES and closes == step:
            present(
                p, S, C, D, DC, low, high, step * dt, counts, post_count, w.window * dt
            )
            post_count, closes, flowed = 0.0, -1, step
        if (HAS_FLOW or HAS_CELL_FLOW) and (due or reads) and step > flowed and closes < 0:
            flow_to(p, S, C, D, DC, low, high, (step - flowed) * dt)
            flowed = step
        if next_tick <= step:
            while next_tick <= step:
                tick_expression(w, S, p, history, ticks, expressed)
                ticks += 1
                next_tick += w.tick
            express_all(w, cells, c, expressed, sites, probability, quantum)
            if widen(w, expressed, multiple):
                membrane(
                    w.stretch_parent, w.stretch_child, w.stretch_length, w.stretch_diameter,
                    multiple, w.rm, w.ri, cells.load[c], w.tau_m, conductance, leak,
                )
                propagators(conductance, leak, w.tau_m, dt, powers, work)
                for node in range(n_nodes):
                    half_over_c[node] = 0.5 * dt / (w.tau_m * leak[node])
        while r < n_readings and w.reading_step[r] == step:
            note_reading(w, log, c, r, S, C, p, expressed, multiple)
            r += 1

        if due:
            # 3. events open conductances
            if stop[0] != 0:
                return False
            n_pre = 0
            while e < n_events and event_step[e] == step:
                k = event_contact[e]
                if k >= 0 and w.tick == 0 and n_channels > 0 and w.contact_learner[k] >= 0:
                    i = w.contact_learner[k]
                    for ch in range(n_channels):
                        expressed[ch, i] = factor_of(p, S, i)
                    express(w, cells, c, k, i, expressed, sites, probability, quantum)
                if k >= 0 and sites[k] > 0.0:
                    amount = release(
                        w, k, streams[k], event_ordinal[e], step * dt,
                        sites, probability, quantum, use, full, empties, last,
                    )
                    if amount > 0.0:
                        g = contact_group[k]
                        slow[g] += amount * group_norm[g]
                        if w.group_keep_rise[g] > 0.0:
                            fast[g] += amount * group_norm[g]
                        some_open = True
                        log.releases[c, k] += amount
                if event_learner[e] >= 0:
                    pre[n_pre] = event_learner[e]
                    n_pre += 1
                e += 1
            # 4. the rule learns
            if RATES:
                if closes < 0 and (n_pre > 0 or arrived[0] > 0.0):
                    closes = step + w.window
                for k in range(n_pre):
                    counts[pre[k]] += 1.0
                if arrived[0] > 0.0:
                    post_count += 1.0
            elif n_pre > 0 or some_arrived:
                gap = step - reference
                if gap > longest_scale:
                    rescale(X, Y, w.taus_pre, w.taus_post, gap * dt, fx, fy)
                    reference = step
                else:
                    for row in range(X.shape[0]):
                        fx[row] = table_x[row, 0, gap & 255] * table_x[row, 1, gap >> 8]
                    for row in range(Y.shape[0]):
                        fy[row] = table_y[row, 0, gap & 255] * table_y[row, 1, gap >> 8]
                learn(
                    p, S, C, X, Y, fx, fy, D, DC, low, high, step * dt, pre, n_pre, arrived,
                    w.site_first, w.learner_site,
                )
                traces_jump(X, Y, fx, fy, pre, n_pre, arrived)
        if step >= w.n_steps:
            break

        # 5. one step of the membrane, or a jump to the next thing due
        if w.clocked == 0 and not some_open and step >= free and highest_of(v) < threshold:
            goal = w.n_steps
            if e < n_events:
                goal = min(goal, event_step[e])
            if r < n_readings:
                goal = min(goal, w.reading_step[r])
            if RATES and closes >= 0:
                goal = min(goal, closes)
            for site in range(n_sites):
                if head[site] < tail[site]:
                    goal = min(goal, pending[site, head[site] % 64])
            jump(powers, goal - step, v, scratch)
            step = goal
            continue
        if some_open:
            synaptic_half(
                v, w.group_node, w.group_reversal, slow, fast, half_over_c, total, drive
            )
            apply(powers[0], v, scratch)
            some_open = fade(slow, fast, w.group_keep_decay, w.group_keep_rise)
            synaptic_half(
                v, w.group_node, w.group_reversal, slow, fast, half_over_c, total, drive
            )
        else:
            apply(powers[0], v, scratch)
        if step < free:
            v[0] = w.reset
        step += 1
        taken += 1
    log.steps[c] = taken
    for i in range(n_learners):
        for row in range(N_VARIABLES):
            if not math.isfinite(S[row, i]):
                log.fault[c] = i + 1
    return True


@njit(nogil=True)
def run_cells(w, cells, log, stop):
    """Run every cell of a block; return how many were finished before `stop[0]` was set."""
    for c in range(cells.load.shape[0]):
        if stop[0] != 0 or not run_cell(w, cells, log, c, stop):
            return c
    return cells.load.shape[0]


@njit(nogil=True)
def run_imposed(
    p, starts, cell_starts, low, high, taus_pre, taus_post, window, event_time, event_learner,
    reading_time, variables, factors, cell_states,
):
    """Run the rule alone on imposed spike times (ms); a learner of -1 is a spike of the cell."""
    n_learners = high.shape[1]
    S, D = np.empty((N_VARIABLES, n_learners)), np.zeros((N_VARIABLES, n_learners))
    for row in range(N_VARIABLES):
        S[row, :] = starts[row]
    C, DC = cell_starts.copy(), np.zeros(N_CELL)
    X, Y = np.zeros((taus_pre.shape[0], n_learners)), np.zeros((taus_post.shape[0], 1))
    fx, fy = np.ones(X.shape[0]), np.ones(Y.shape[0])
    longest = LARGEST_SCALE * shortest_of(taus_pre, taus_post)
    reference, flowed, closes, post_count = 0.0, 0.0, math.inf, 0.0
    pre, counts = np.empty(max(n_learners, 1), np.int64), np.zeros(n_learners)
    site_first, site_of = np.array([0, n_learners]), np.zeros(n_learners, np.int64)
    arrived = np.zeros(1)
    e, r, n_events, n_readings = 0, 0, event_time.shape[0], reading_time.shape[0]
    while e < n_events or r < n_readings:
        t = min(
            event_time[e] if e < n_events else math.inf,
            reading_time[r] if r < n_readings else math.inf,
        )
        if RATES and closes <= t:
            present(p, S, C, D, DC, low, high, closes, counts, post_count, window)
            post_count, flowed, closes = 0.0, closes, math.inf
        if (HAS_FLOW or HAS_CELL_FLOW) and t > flowed and math.isinf(closes):
            flow_to(p, S, C, D, DC, low, high, t - flowed)
            flowed = t
        while r < n_readings and reading_time[r] == t:
            for i in range(n_learners):
                for row in range(N_VARIABLES):
                    variables[r, row, i] = S[row, i]
                factors[r, i] = factor_of(p, S, i)
            for row in range(N_CELL):
                cell_states[r, row] = C[row]
            r += 1
        n_pre, arrived[0] = 0, 0.0
        while e < n_events and event_time[e] == t:
            if event_learner[e] < 0:
                arrived[0] = 1.0
            else:
                pre[n_pre] = event_learner[e]
                n_pre += 1
            e += 1
        if RATES:
            if math.isinf(closes) and (n_pre > 0 or arrived[0] > 0.0):
                closes = t + window
            for k in range(n_pre):
                counts[pre[k]] += 1.0
            post_count += arrived[0]
        elif n_pre > 0 or arrived[0] > 0.0:
            gap = t - reference
            if gap > longest:
                rescale(X, Y, taus_pre, taus_post, gap, fx, fy)
                reference = t
            else:
                for row in range(X.shape[0]):
                    fx[row] = math.exp(-gap / taus_pre[row])
                for row in range(Y.shape[0]):
                    fy[row] = math.exp(-gap / taus_post[row])
            learn(
                p, S, C, X, Y, fx, fy, D, DC, low, high, t, pre, n_pre, arrived, site_first,
                site_of,
            )
            traces_jump(X, Y, fx, fy, pre, n_pre, arrived)
