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
5.  The membrane takes one step (the exact linear propagator, and the currents of the open
    conductances, held over the step, through its exact integral), or, when no conductance is open
    and no node is above threshold, jumps exactly to the next thing due: with leak to rest
    everywhere the highest node can only fall, so no spike is missed.

Traces are stored scaled, x(t) exp((t - t_ref)/tau), so that an event costs no exponential; t_ref
moves up before the scale gets large.
"""

from __future__ import annotations

import math

import numpy as np

from plastic.engine.steps import (  # noqa: F401 - some are used by what is pasted
    CUT,
    DOUBLINGS,
    U0,
    U1,
    U2,
    U3,
    U4,
    advance,
    binomial,
    compiled,
    eliminate,
    fade,
    highest_of,
    hold_currents,
    jump,
    kept,
    mean_open,
    new_membrane,
    powered,
    quanta,
    rebuild,
    stream_of,
    trials_of,
)
from plastic.engine.steps import REFILL as REFILL_PART

# ---- the rule -----------------------------------------------------------------------------------
RATES = False  # learns from rates counted over a window
N_WEIGHTS, N_VARIABLES, N_CELL = 1, 1, 0
N_PRE, N_POST = 0, 0  # traces
PRE_ADDS = (True,)  # a trace of "pre" adds 1 at an event (False: is set to 1)
POST_ADDS = (True,)
HAS_FLOW, HAS_CELL_FLOW = False, False


@compiled
def add_at_pre(p, S, C, X, Y, fx, fy, i, site, t, D):
    """Add to D what at_pre changes of learner i."""


@compiled
def move_at_pre(p, C, X, Y, fx, fy, i, site, t, S):
    """Change learner i at once by what at_pre says."""


@compiled
def add_at_post(p, S, C, X, Y, fx, fy, i, site, t, amplitude, D):
    """Add to D what at_post changes of learner i."""


@compiled
def add_at_presentation(p, S, C, i, t, pre_rate, post_rate, D):
    """Add to D what at_presentation changes of learner i."""


@compiled
def add_cell_at_post(p, C, Y, fy, t, DC):
    """Add to DC what cell_at_post changes."""


@compiled
def add_cell_at_presentation(p, C, t, post_rate, DC):
    """Add to DC what cell_at_presentation changes."""


@compiled
def add_flow(p, S, i, dt, D):
    """Add to D what flow changes of learner i."""


@compiled
def add_cell_flow(p, C, dt, DC):
    """Add to DC what cell_flow changes."""


@compiled
def factor_of(p, S, i):
    """Return the factor of learner i."""
    return 1.0


# ---- end of the rule ----------------------------------------------------------------------------

LARGEST_SCALE = 40.0  # e-folds of the scaled traces before t_ref moves up


@compiled
def bound(S, low, high, i):
    """Keep the weights of learner i within their bounds."""
    for row in range(N_WEIGHTS):
        S[row, i] = min(max(S[row, i], low[row]), high[row, i])


@compiled
def settle(S, D, low, high, i):
    """Apply the changes of learner i, then its bounds."""
    for row in range(N_VARIABLES):
        S[row, i] += D[row, i]
        D[row, i] = 0.0
    bound(S, low, high, i)


@compiled
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


@compiled
def present(p, S, C, D, DC, low, high, t, counts, post_count, window):
    """Close a window (ms): its counts become rates (Hz) and are presented to the rule."""
    post_rate = post_count * 1000.0 / window
    add_cell_at_presentation(p, C, t, post_rate, DC)
    for i in range(S.shape[1]):
        add_at_presentation(p, S, C, i, t, counts[i] * 1000.0 / window, post_rate, D)
    for i in range(S.shape[1]):
        settle(S, D, low, high, i)
        counts[i] = 0.0
    for row in range(N_CELL):
        C[row] += DC[row]
        DC[row] = 0.0


@compiled
def learn(p, S, C, X, Y, fx, fy, D, DC, low, high, t, pre, n_pre, arrived, site_first, site_of):
    """Apply one instant: presynaptic events `pre`, local spikes where `arrived[site]` > 0."""
    some_post = False
    for site in range(arrived.shape[0]):
        if arrived[site] > 0.0:
            some_post = True
            for i in range(site_first[site], site_first[site + 1]):
                add_at_post(p, S, C, X, Y, fx, fy, i, site, t, arrived[site], D)
    for k in range(n_pre):
        i = pre[k]
        add_at_pre(p, S, C, X, Y, fx, fy, i, site_of[i], t, D)
    if arrived[0] > 0.0:
        add_cell_at_post(p, C, Y, fy, t, DC)
    if some_post:
        for i in range(S.shape[1]):
            settle(S, D, low, high, i)
        for row in range(N_CELL):
            C[row] += DC[row]
            DC[row] = 0.0
    else:
        for k in range(n_pre):
            settle(S, D, low, high, pre[k])


@compiled
def traces_jump(X, Y, fx, fy, pre, n_pre, arrived):
    """Let the traces jump, after the changes of the instant."""
    for row in range(N_PRE):
        unit = 1.0 / fx[row]
        for k in range(n_pre):
            X[row, pre[k]] = X[row, pre[k]] + unit if PRE_ADDS[row] else unit
    for row in range(N_POST):
        unit = 1.0 / fy[row]
        for site in range(arrived.shape[0]):
            if arrived[site] > 0.0:
                Y[row, site] = Y[row, site] + unit if POST_ADDS[row] else unit


@compiled
def rescale(X, Y, taus_pre, taus_post, elapsed, fx, fy):
    """Move the reference time of the scaled traces up by `elapsed` ms."""
    for row in range(N_PRE):
        shrink = math.exp(-elapsed / taus_pre[row])
        for i in range(X.shape[1]):
            X[row, i] *= shrink
        fx[row] = 1.0
    for row in range(N_POST):
        shrink = math.exp(-elapsed / taus_post[row])
        for site in range(Y.shape[1]):
            Y[row, site] *= shrink
        fy[row] = 1.0


@compiled
def factor_table(taus, dt):
    """Return exp(-k dt/tau) for k = low + 256 high as the product of two short tables."""
    table = np.empty((taus.shape[0], 2, 256))
    for row in range(taus.shape[0]):
        for k in range(256):
            table[row, 0, k] = math.exp(-k * dt / taus[row])
            table[row, 1, k] = math.exp(-256.0 * k * dt / taus[row])
    return table


@compiled
def shortest_of(taus_pre, taus_post):
    """Return the shortest time constant of the traces, ms."""
    shortest = 1e12
    for tau in taus_pre:
        shortest = min(shortest, tau)
    for tau in taus_post:
        shortest = min(shortest, tau)
    return shortest


@compiled
def express(contacts, base, k, channels, expressed, i, now):
    """Set now[k] = (sites, probability, quantum) of a contact from the factors of its learner i."""
    n, u, q, neck, added = base[k].sites, base[k].probability, base[k].quantum, 1.0, 0.0
    for ch in range(channels.shape[0]):
        target = channels[ch].target
        value = powered(
            expressed[ch, i],
            channels[ch].exponent,
            channels[ch].excess == 1,
            channels[ch].lowest,
            channels[ch].highest,
        )
        if target == 0:
            u = min(u * value, base[k].highest)
        elif target == 1:
            q *= value
        elif target == 2:
            n *= value
        elif target == 3:
            neck *= value
        elif target == 4:
            added = value
    now[k, 0] = n * added if contacts[k].added == 1 else n
    now[k, 1] = u
    now[k, 2] = q / (1.0 + q * contacts[k].neck * neck * 1e-3)


@compiled
def express_all(contacts, base, channels, expressed, now):
    """Set the physical variables of every learning contact."""
    for k in range(contacts.shape[0]):
        if contacts[k].learner >= 0:
            express(contacts, base, k, channels, expressed, contacts[k].learner, now)


@compiled
def ease(contacts, base, eased, channels, expressed, now):
    """Set the quantum of every inhibitory contact that a learning input drives."""
    for ch in range(channels.shape[0]):
        one = channels[ch]
        if one.target != 6:
            continue
        for k in range(contacts.shape[0]):
            total, number = 0.0, 0
            for i in range(eased.shape[0]):
                if eased[i, k] == 1:
                    total += max(expressed[ch, i], 0.0)
                    number += 1
            if number > 0:
                q = base[k].quantum * powered(
                    total / number, one.exponent, False, one.lowest, one.highest
                )
                now[k, 2] = q / (1.0 + q * contacts[k].neck * 1e-3)


@compiled
def widen(stretches, beyond, contacts, channels, expressed, multiple):
    """Set the diameter of every stretch on the path; return whether any moved by 1e-4."""
    moved = False
    for ch in range(channels.shape[0]):
        one = channels[ch]
        if one.target != 5:
            continue
        for s in range(multiple.shape[0]):
            if stretches[s].widens == 0:
                continue
            total, number = 0.0, 0
            for k in range(contacts.shape[0]):
                if beyond[s, k] == 1 and contacts[k].excites == 1:
                    i = contacts[k].learner
                    total += max(expressed[ch, i], 0.0) ** one.exponent if i >= 0 else 1.0
                    number += 1
            goal = min(max(total / number, one.lowest), one.highest)
            if abs(goal - multiple[s]) > 1e-4 * multiple[s]:
                moved = True
                multiple[s] = goal
    return moved


@compiled
def tick_expression(p, S, channels, history, ticks, expressed):
    """Let each channel's expressed factor follow the factor of `delay` ticks ago."""
    depth = history.shape[0]
    for i in range(S.shape[1]):
        history[ticks % depth, i] = factor_of(p, S, i)
        for ch in range(channels.shape[0]):
            late = channels[ch].delay
            goal = history[(ticks - late) % depth, i] if ticks >= late else 1.0
            expressed[ch, i] = goal + (expressed[ch, i] - goal) * channels[ch].keep


@compiled
def release(contacts, k, deterministic, stream, ordinal, t, now, memory):
    """Return the conductance (nS) that contact k releases at its event, and move its dynamics.

    now[k] is (sites, probability, quantum), memory[k] (use, full, empties, time of the last
    event, number of events). Deterministic: N u R q with the recursion u, R. Stochastic: sites
    empty and refill one by one, so that the recursion is the mean.
    """
    u = now[k, 1]
    if contacts[k].facilitation > 0.0:
        u += memory[k, 0] * (1.0 - u) * math.exp((memory[k, 3] - t) / contacts[k].facilitation)
    recovery = contacts[k].recovery
    refilled = 1.0
    if recovery > 0.0:
        refilled = -math.expm1((memory[k, 3] - t) / recovery)
    memory[k, 0] = u
    memory[k, 3] = t
    if deterministic:
        memory[k, 1] += (1.0 - memory[k, 1]) * refilled
        amount = now[k, 0] * u * memory[k, 1] * now[k, 2]
        memory[k, 1] *= 1.0 - u
    else:
        available = trials_of(stream, ordinal, now[k, 0])
        if recovery > 0.0:
            back = binomial(stream, ordinal, int(memory[k, 2]), refilled, REFILL_PART)
            memory[k, 2] -= back
            available = max(available - int(memory[k, 2]), 0)
        count, amount = quanta(stream, ordinal, available, u, now[k, 2], contacts[k].cv)
        memory[k, 2] += count if recovery > 0.0 else 0
    return amount


@compiled
def certain(contacts, base, channels, k, deterministic, immediate):
    """Return what contact k always releases (nS) at its baseline quantum, or -1 when that varies.

    Certain: whole sites that all release the same, without short-term dynamics; and at most the
    quantum, in proportion to the factor, is what the route moves.
    """
    one, here = contacts[k], base[k]
    if one.added == 1 or one.neck > 0.0 or one.recovery > 0.0 or one.facilitation > 0.0:
        return -1.0
    if one.learner >= 0 and channels.shape[0] > 0:
        only = channels.shape[0] == 1 and channels[0].target == 1 and channels[0].exponent == 1.0
        if not (immediate and only):
            return -1.0
    whole = here.probability == 1.0 and one.cv == 0.0 and here.sites == math.floor(here.sites)
    return here.sites * here.probability * here.quantum if deterministic or whole else -1.0


@compiled
def run_cell(w, cells, log, c, stop):
    """Run one cell from the first step to the last; return False when stopped before the end."""
    plan, cell, ended = w.plan[0], cells.cells[c], log.ended[c]
    stretches, contacts, channels, groups = w.stretches, w.contacts, w.channels, w.groups
    events, reading_step, sites, slots = w.events, w.reading_step, w.sites, w.slots
    base, high, low, p = cells.release[c], cells.high[c], w.low, cells.parameters[c]
    learner_site, site_first, taus_pre, taus_post = (
        w.learner_site,
        w.site_first,
        w.taus_pre,
        w.taus_post,
    )
    spike_step = log.spike_step[c]
    n_learners, n_contacts, n_sites = learner_site.shape[0], contacts.shape[0], sites.shape[0]
    n_channels, n_events, n_readings = channels.shape[0], events.shape[0], reading_step.shape[0]
    dt, threshold, n_steps, tick = plan.dt, cell.threshold, plan.n_steps, plan.tick
    deterministic, clocked = plan.deterministic == 1, plan.clocked == 1

    # membrane
    m = new_membrane(plan.n_nodes, groups.shape[0], slots.shape[0], DOUBLINGS)
    v, slow, fast, ends, spread = m.v, m.slow, m.fast, m.ends, m.spread
    size = m.leak.shape[0]
    total, drive, which, matrix, current = m.total, m.drive, m.which, m.matrix, m.current
    here, there = U0, np.uintp(size)
    multiple = np.ones(stretches.shape[0])
    rebuild(plan, stretches, slots, multiple, cell.load, m)
    single = m.powers[0]

    # learning
    S, D = np.empty((N_VARIABLES, n_learners)), np.zeros((N_VARIABLES, n_learners))
    C, DC = w.cell_starts.copy(), np.zeros(N_CELL)
    for row in range(N_VARIABLES):
        for i in range(n_learners):
            S[row, i] = w.starts[row]
    X, Y = np.zeros((taus_pre.shape[0], n_learners)), np.zeros((taus_post.shape[0], n_sites))
    fx, fy, ux = np.ones(X.shape[0]), np.ones(Y.shape[0]), np.ones(X.shape[0])
    table_x, table_y = factor_table(taus_pre, dt), factor_table(taus_post, dt)
    longest_scale = int(min(LARGEST_SCALE * shortest_of(taus_pre, taus_post) / dt, 65535.0))
    reference, flowed = 0, 0
    pre, counts = np.empty(max(n_learners, 1), np.int64), np.zeros(n_learners)
    post_count, closes = 0.0, -1

    # expression
    depth = 1
    for ch in range(n_channels):
        depth = max(depth, channels[ch].delay + 1)
    history, expressed = np.ones((depth, n_learners)), np.ones((n_channels, n_learners))
    now = np.empty((n_contacts, 3))
    for k in range(n_contacts):
        now[k, 0] = 0.0 if contacts[k].added == 1 else base[k].sites
        now[k, 1] = base[k].probability
        now[k, 2] = base[k].quantum / (1.0 + base[k].quantum * contacts[k].neck * 1e-3)
    ticks, next_tick = 0, tick if tick > 0 else n_steps + 1

    # release: use, full, empties, time of the last event, number of events
    streams, memory = np.empty(n_contacts, np.uint64), np.zeros((n_contacts, 5))
    sure, immediate = np.empty(n_contacts), tick == 0 and n_channels > 0
    for k in range(n_contacts):
        streams[k] = stream_of(plan.seed, cell.number, k)
        memory[k, 1] = 1.0
        memory[k, 3] = -1e300
        sure[k] = certain(contacts, base, channels, k, deterministic, tick == 0)
        if tick > 0 and w.eased[:, k].any():
            sure[k] = -1.0  # its quantum may be eased

    # spikes on their way to the sites
    pending, amplitude = np.full((n_sites, 64), -1, np.int64), np.zeros((n_sites, 64))
    head, tail = np.zeros(n_sites, np.int64), np.zeros(n_sites, np.int64)
    arrived = np.zeros(n_sites)
    train, last_spike, free = 1.0, -1e300, 0

    step, e, r, some_open, taken = 0, 0, 0, False, 0
    next_event = events[0].step if n_events > 0 else n_steps + 1
    next_reading = reading_step[0] if n_readings > 0 else n_steps + 1
    next_arrival = n_steps + 1
    while True:
        # 1. a spike of the cell
        injected = False
        while next_event == step and events[e].contact < 0 and events[e].learner < 0:
            injected = True
            e += 1
            next_event = events[e].step if e < n_events else n_steps + 1
        if step >= free and (injected or v[here] >= threshold):
            if ended.spikes < spike_step.shape[0]:
                spike_step[ended.spikes] = step
            ended.spikes += 1
            v[here] = plan.reset
            free = step + plan.refractory
            train = 1.0 - (1.0 - train) * math.exp((last_spike - step * dt) / plan.bap_recovery)
            for site in range(n_sites):
                local = math.exp(-sites[site].distance / (plan.bap_length * train))
                if local >= plan.bap_floor:
                    pending[site, tail[site] % 64] = step + sites[site].delay
                    amplitude[site, tail[site] % 64] = local
                    tail[site] += 1
                    next_arrival = min(next_arrival, step + sites[site].delay)
            train *= 1.0 - plan.bap_loss
            last_spike = step * dt
        some_arrived = next_arrival == step
        if some_arrived:
            next_arrival = n_steps + 1
            for site in range(n_sites):
                arrived[site] = 0.0
                if head[site] < tail[site] and pending[site, head[site] % 64] == step:
                    arrived[site] = amplitude[site, head[site] % 64]
                    head[site] += 1
                if head[site] < tail[site]:
                    next_arrival = min(next_arrival, pending[site, head[site] % 64])

        # 2. what is due sees the state before the instant
        due = some_arrived or next_event == step
        if RATES and closes == step:
            present(p, S, C, D, DC, low, high, step * dt, counts, post_count, plan.window * dt)
            post_count, closes, flowed = 0.0, -1, step
        flows = (HAS_FLOW or HAS_CELL_FLOW) and closes < 0 and step > flowed
        if flows and (due or next_reading == step or (HAS_FLOW and next_tick <= step)):
            flow_to(p, S, C, D, DC, low, high, (step - flowed) * dt)
            flowed = step
        if next_tick <= step:
            moved = False
            while next_tick <= step:
                tick_expression(p, S, channels, history, ticks, expressed)
                moved |= widen(stretches, w.beyond, contacts, channels, expressed, multiple)
                ticks += 1
                next_tick += tick
            express_all(contacts, base, channels, expressed, now)
            ease(contacts, base, w.eased, channels, expressed, now)
            if moved:
                rebuild(plan, stretches, slots, multiple, cell.load, m)
        while next_reading == step:
            for i in range(n_learners):
                for row in range(N_VARIABLES):
                    log.variables[c, r, row, i] = S[row, i]
                log.factor[c, r, i] = factor_of(p, S, i)
                for ch in range(n_channels):
                    log.expressed[c, r, ch, i] = (
                        expressed[ch, i] if tick > 0 else log.factor[c, r, i]
                    )
            for s in range(multiple.shape[0]):
                log.diameter[c, r, s] = multiple[s]
            for row in range(N_CELL):
                log.cell_states[c, r, row] = C[row]
            r += 1
            next_reading = reading_step[r] if r < n_readings else n_steps + 1

        if due:
            if stop[0] != 0:
                return False
            if not RATES:
                gap = step - reference
                if gap > longest_scale:
                    rescale(X, Y, taus_pre, taus_post, gap * dt, fx, fy)
                    reference = step
                    for row in range(N_PRE):
                        ux[row] = 1.0
                else:
                    for row in range(N_PRE):
                        fx[row] = table_x[row, 0, gap & 255] * table_x[row, 1, gap >> 8]
                        ux[row] = 1.0 / fx[row]
                    for row in range(N_POST):
                        fy[row] = table_y[row, 0, gap & 255] * table_y[row, 1, gap >> 8]
            # 3. events open conductances; 4. their learners learn, those of the instant's last
            # event at once, unless a spike arrives: then all changes wait for each other
            n_pre = 0
            while next_event == step:
                k, i = events[e].contact, events[e].learner
                if k >= 0:
                    j, amount = contacts[k].learner, sure[k]
                    if amount >= 0.0:
                        if immediate and j >= 0:
                            amount *= min(
                                max(factor_of(p, S, j), channels[0].lowest), channels[0].highest
                            )
                    else:
                        if immediate and j >= 0:
                            for ch in range(n_channels):
                                expressed[ch, j] = factor_of(p, S, j)
                            express(contacts, base, k, channels, expressed, j, now)
                        amount, ordinal = 0.0, int(memory[k, 4])
                        memory[k, 4] += 1.0
                        if now[k, 0] > 0.0:
                            amount = release(
                                contacts,
                                k,
                                deterministic,
                                streams[k],
                                ordinal,
                                step * dt,
                                now,
                                memory,
                            )
                    g = contacts[k].group
                    scaled = amount * groups[g].norm
                    slow[g] += scaled
                    ends[g] = max(ends[g], CUT * slow[g])
                    if groups[g].keep_rise > 0.0:
                        fast[g] += scaled  # a dual exponential starts at zero
                    some_open = some_open or amount > 0.0
                if i >= 0:
                    if RATES:
                        if closes < 0:
                            closes = step + plan.window
                        counts[i] += 1.0
                    elif some_arrived:
                        pre[n_pre] = i
                        n_pre += 1
                    else:
                        move_at_pre(p, C, X, Y, fx, fy, i, learner_site[i], step * dt, S)
                        bound(S, low, high, i)
                        for row in range(N_PRE):
                            X[row, i] = X[row, i] + ux[row] if PRE_ADDS[row] else ux[row]
                e += 1
                next_event = events[e].step if e < n_events else n_steps + 1
            if some_arrived and RATES:
                if arrived[0] > 0.0:
                    if closes < 0:
                        closes = step + plan.window
                    post_count += 1.0
            elif some_arrived:
                learn(
                    p,
                    S,
                    C,
                    X,
                    Y,
                    fx,
                    fy,
                    D,
                    DC,
                    low,
                    high,
                    step * dt,
                    pre,
                    n_pre,
                    arrived,
                    site_first,
                    learner_site,
                )
                traces_jump(X, Y, fx, fy, pre, n_pre, arrived)
        if step >= n_steps:
            break

        # 5. one step of the membrane, or a jump to the next thing due
        if not some_open and not clocked and step >= free and highest_of(v, here, size) < threshold:
            goal = min(min(n_steps, next_event), min(next_reading, next_arrival))
            if RATES and closes >= 0:
                goal = min(goal, min(closes, next_tick))  # a tick reads what was before it
            if HAS_FLOW:
                goal = min(goal, next_tick)  # a tick reads what flowed up to it
            here = jump(m, goal - step, here, there)
            there = np.uintp(size) - here
            step = goal
            continue
        if some_open:
            mean_open(groups, slots, slow, fast, total, drive)
            if (
                size == 1
            ):  # what `hold_currents` does to one node: one product and one sum wait for v
                decay = single[0, 0]
                x = total[0] * spread[0, 0]
                share = 1.0 / (2.0 + x * (2.0 + x))
                gain = decay - x * ((1.0 + x) * decay + 1.0) * share
                v[here] = gain * v[here] + spread[0, 0] * (2.0 + x) * drive[0] * share
            else:
                n_open = hold_currents(
                    single,
                    slots,
                    spread,
                    total,
                    drive,
                    v,
                    here,
                    which,
                    matrix,
                    current,
                )
                advance(single, spread, which, current, n_open, v, here, there)
                here, there = there, here
            some_open = fade(groups, slow, fast, ends)
        else:
            advance(single, spread, which, current, 0, v, here, there)
            here, there = there, here
        if step < free:
            v[here] = plan.reset
        step += 1
        taken += 1
    ended.steps = taken
    for i in range(n_learners):
        for row in range(N_VARIABLES):
            if not math.isfinite(S[row, i]):
                ended.fault = i + 1
    return True


@compiled
def run_cells(w, cells, log, stop):
    """Run every cell of a block; return how many were finished before `stop[0]` was set."""
    for c in range(cells.cells.shape[0]):
        if stop[0] != 0 or not run_cell(w, cells, log, c, stop):
            return c
    return cells.cells.shape[0]


@compiled
def run_imposed(
    p,
    starts,
    cell_starts,
    low,
    high,
    taus_pre,
    taus_post,
    window,
    event_time,
    event_learner,
    reading_time,
    variables,
    factors,
    cell_states,
):
    """Run the rule alone on imposed spike times (ms); a learner of -1 is a spike of the cell."""
    n_learners = high.shape[1]
    S, D = np.empty((N_VARIABLES, n_learners)), np.zeros((N_VARIABLES, n_learners))
    for row in range(N_VARIABLES):
        for i in range(n_learners):
            S[row, i] = starts[row]
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
                for row in range(N_PRE):
                    fx[row] = math.exp(-gap / taus_pre[row])
                for row in range(N_POST):
                    fy[row] = math.exp(-gap / taus_post[row])
            learn(
                p,
                S,
                C,
                X,
                Y,
                fx,
                fy,
                D,
                DC,
                low,
                high,
                t,
                pre,
                n_pre,
                arrived,
                site_first,
                site_of,
            )
            traces_jump(X, Y, fx, fy, pre, n_pre, arrived)
