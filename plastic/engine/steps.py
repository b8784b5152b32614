"""Compiled primitives of the membrane and of release, shared by every generated module.

The random draws repeat `plastic.draws` bit for bit. Everything here is plain arithmetic on
scalars and small arrays, so that it can be read next to the formulas of `plastic.membrane`.
"""

from __future__ import annotations

import math
from typing import Any, NamedTuple

import numpy as np
from numba import njit

GOLDEN = np.uint64(0x9E3779B97F4A7C15)
MUL_A = np.uint64(0xBF58476D1CE4E5B9)
MUL_B = np.uint64(0x94D049BB133111EB)
R30, R27, R31, R11 = np.uint64(30), np.uint64(27), np.uint64(31), np.uint64(11)
ONE, PARTS = np.uint64(1), np.uint64(4096)
FRACTION, NORMAL_A, NORMAL_B, REFILL = 2045, 2046, 2047, 2048
DOUBLINGS = 26  # powers of two of one step that a jump may use
CUT = 1e-4  # a conductance that has fallen to this share of its largest is over

#: unsigned: a signed index is tested for being negative at every access
U0, U1, U2, U3, U4 = (np.uintp(k) for k in range(5))

#: every compiled function: no lock held, and x/0 is inf or nan (runs end with a check) as in numpy
compiled = njit(nogil=True, error_model="numpy")
#: entry points of generated modules, which numba keeps on disk
kept = njit(nogil=True, error_model="numpy", cache=True)


@compiled
def mix(z):
    """Return the 64-bit hash of z."""
    z = (z ^ (z >> R30)) * MUL_A
    z = (z ^ (z >> R27)) * MUL_B
    return z ^ (z >> R31)


@compiled
def stream_of(seed, cell, channel):
    """Return the key of the draws of one channel (a contact) of one cell."""
    inner = mix(np.uint64(seed) + GOLDEN) + GOLDEN * np.uint64(cell + 1)
    return mix(mix(inner) + GOLDEN * np.uint64(channel + 1))


@compiled
def uniform(stream, ordinal, part):
    """Return draw (ordinal, part) of a stream, in [0, 1)."""
    counter = np.uint64(ordinal) * PARTS + np.uint64(part)
    return float(mix(stream + GOLDEN * (counter + ONE)) >> R11) * 2.0**-53


@compiled
def binomial(stream, ordinal, trials, probability, part):
    """Return the number of successes in `trials` draws of one event."""
    count = 0
    for k in range(trials):
        if uniform(stream, ordinal, part + k) < probability:
            count += 1
    return count


@compiled
def normal(stream, ordinal):
    """Return the standard normal draw of one event (Box & Muller)."""
    radius = math.sqrt(-2.0 * math.log(1.0 - uniform(stream, ordinal, NORMAL_A)))
    return radius * math.cos(2.0 * math.pi * uniform(stream, ordinal, NORMAL_B))


@compiled
def quanta(stream, ordinal, available, probability, q, cv):
    """Return (number of quanta, their conductance): binomial, with Gaussian quantal variance."""
    count = available
    if probability < 1.0:
        count = binomial(stream, ordinal, available, probability, 0)
    if count == 0:
        return 0, 0.0
    if cv == 0.0:
        return count, count * q
    total = q * (count + cv * math.sqrt(float(count)) * normal(stream, ordinal))
    return count, max(total, 0.0)


@compiled
def trials_of(stream, ordinal, sites):
    """Return whole sites for this event: a fractional site exists with a fractional chance."""
    whole = int(sites)
    fraction = sites - whole
    if fraction > 0.0 and uniform(stream, ordinal, FRACTION) < fraction:
        return whole + 1
    return whole


@compiled
def product(a, b, out):
    """Write the matrix product a b into out."""
    n = a.shape[0]
    for i in range(n):
        for j in range(n):
            total = 0.0
            for k in range(n):
                total += a[i, k] * b[k, j]
            out[i, j] = total


@compiled
def membrane(stretches, multiple, rm, ri, load, conductance, leak):
    """Fill the conductance matrix (nS) and the leak (nS) of every node.

    Each stretch is the DC-exact pi-equivalent of its cable, a stub a sealed end; capacitance
    follows leak (C = tau_m leak), so every node keeps the membrane time constant. The arrays may
    be longer than there are nodes.
    """
    for i in range(leak.shape[0]):
        leak[i] = load if i == 0 else 0.0
        for j in range(leak.shape[0]):
            conductance[i, j] = 0.0
    for s in range(stretches.shape[0]):
        one = stretches[s]
        d = one.diameter * multiple[s]
        extent = one.length / (100.0 * math.sqrt(d * 1e-4 * rm / (4.0 * ri)) * 100.0)
        semi = 1e9 * math.pi * (d * 1e-4) ** 1.5 / (2.0 * math.sqrt(rm * ri))
        near, far = one.parent, one.child
        if far < 0:
            leak[near] += semi * math.tanh(extent)
            continue
        link = semi / math.sinh(extent)
        shunt = semi * math.tanh(extent / 2.0)
        leak[near] += shunt
        leak[far] += shunt
        conductance[near, far] -= link
        conductance[far, near] -= link
        conductance[near, near] += link
        conductance[far, far] += link
    for i in range(leak.shape[0]):
        conductance[i, i] += leak[i]


@compiled
def propagators(conductance, leak, slots, n, tau_m, dt, powers, spread, work):
    """Fill powers[j] with the exact propagator of 2**j steps of the quiet membrane, transposed.

    spread[slot, node] is what a current of 1 pA into the slot's node, held for one step, leaves
    there (mV): the integral of the propagator over the step, over the capacitance (pF).
    """
    biggest = 0.0
    for i in range(work.shape[1]):
        for j in range(work.shape[1]):
            powers[0, i, j] = 0.0
            for layer in range(4):
                work[layer, i, j] = 0.0
    for i in range(n):
        row = 0.0
        for j in range(n):
            work[0, j, i] = -conductance[i, j] * dt / (tau_m * leak[i])
            row += abs(work[0, j, i])
        biggest = max(biggest, row)
    halvings = 0
    while biggest > 0.25:
        biggest /= 2.0
        halvings += 1
    scale = 0.5**halvings
    for i in range(n):
        for j in range(n):
            work[0, i, j] *= scale
        work[1, i, i] = 1.0
        powers[0, i, i] = 1.0
        work[3, i, i] = scale * dt
    for order in range(1, 12):
        product(work[1], work[0], work[2])
        for i in range(n):
            for j in range(n):
                work[1, i, j] = work[2, i, j] / order
                powers[0, i, j] += work[1, i, j]
                work[3, i, j] += work[1, i, j] * scale * dt / (order + 1)
    for _ in range(halvings):
        product(powers[0], work[3], work[1])
        product(powers[0], powers[0], work[2])
        for i in range(n):
            for j in range(n):
                work[3, i, j] += work[1, i, j]
                powers[0, i, j] = work[2, i, j]
    for slot in range(slots.shape[0]):
        node = slots[slot].node
        for i in range(work.shape[1]):
            spread[slot, i] = work[3, node, i] / (tau_m * leak[node])
    for j in range(1, powers.shape[0]):
        product(powers[j - 1], powers[j - 1], powers[j])


@compiled
def padded(n):
    """Return the length of node arrays: one, or the next multiple of four."""
    return 1 if n == 1 else (n + 3) // 4 * 4


class Membrane(NamedTuple):
    """The arrays of one cell's membrane: its matrices, its state, and room to work in.

    `size` is the number of nodes, padded; leak and conductance in nS, v in mV over rest. The two
    halves of v change places with every step, by their offsets: to swap two arrays costs numba as
    much as the step.
    """

    leak: Any  # (size,)
    conductance: Any  # (size, size)
    powers: Any  # (doublings, size, size) propagators of 1, 2, 4 ... steps, transposed
    spread: Any  # (slot, size) mV per pA
    work: Any  # (4, size, size)
    v: Any  # (2 size,) before and after a step, in turn
    slow: Any  # (group,) nS
    fast: Any  # (group,) nS
    ends: Any  # (group,) nS, at which it is over
    total: Any  # (slot,) nS
    drive: Any  # (slot,) pA
    current: Any  # (slot,) pA
    which: Any  # (slot,)
    matrix: Any  # (slot, slot)


@compiled
def new_membrane(nodes, groups, slots, doublings):
    """Return the arrays of a membrane at rest, with nothing open."""
    size = padded(nodes)
    return Membrane(
        np.zeros(size),
        np.zeros((size, size)),
        np.zeros((doublings, size, size)),
        np.zeros((slots, size)),
        np.zeros((4, size, size)),
        np.zeros(2 * size),
        np.zeros(groups),
        np.zeros(groups),
        np.zeros(groups),
        np.zeros(slots),
        np.zeros(slots),
        np.zeros(slots),
        np.zeros(slots, np.int64),
        np.zeros((slots, slots)),
    )


@compiled
def rebuild(plan, stretches, slots, multiple, load, m):
    """Set the matrices of a membrane for the present diameters and the load (nS) at its soma."""
    membrane(stretches, multiple, plan.rm, plan.ri, load, m.conductance, m.leak)
    propagators(
        m.conductance, m.leak, slots, plan.n_nodes, plan.tau_m, plan.dt, m.powers, m.spread, m.work
    )


@compiled
def advance(turned, spread, which, current, n_open, v, here, there):
    """Write the voltages after a step to v[there:], from those at v[here:]; four rows at a time.

    The quiet step (a matrix, given transposed) and what the held currents leave.
    """
    n, row = np.uintp(turned.shape[0]), U0
    if n == U1:
        v[there] = turned[0, 0] * v[here]
        for a in range(n_open):
            v[there] += spread[which[a], 0] * current[a]
        row = n
    while row < n:
        one = two = three = four = 0.0
        for a in range(n_open):
            slot, held = np.uintp(which[a]), current[a]
            one += spread[slot, row] * held
            two += spread[slot, row + U1] * held
            three += spread[slot, row + U2] * held
            four += spread[slot, row + U3] * held
        col = U0
        while col < n:
            x = v[here + col]
            one += turned[col, row] * x
            two += turned[col, row + U1] * x
            three += turned[col, row + U2] * x
            four += turned[col, row + U3] * x
            col += U1
        v[there + row] = one
        v[there + row + U1] = two
        v[there + row + U2] = three
        v[there + row + U3] = four
        row += U4


@compiled
def jump(m, steps, here, there):
    """Take `steps` quiet steps at once, exactly; return where the voltages are now."""
    if steps >> m.powers.shape[0] > 0:
        steps = 0  # two hours and more: below the smallest number
        for node in range(m.v.shape[0]):
            m.v[node] = 0.0
    j = 0
    while steps > 0:
        if steps & 1:
            advance(m.powers[j], m.spread, m.which, m.current, 0, m.v, here, there)
            here, there = there, here
        steps >>= 1
        j += 1
    return here


@compiled
def mean_open(groups, slots, slow, fast, total, drive):
    """Set what is open at each slot on average over the coming step: conductance (nS), drive (pA).

    The drive is conductance times reversal. Exact: the kinetics are exponentials.
    """
    for slot in range(slots.shape[0]):
        open_here = pulled = 0.0
        of, end = np.uintp(slots[slot].first), np.uintp(slots[slot].last)
        while of < end:
            one = slow[of] * groups[of].mean_decay - fast[of] * groups[of].mean_rise
            open_here += one
            pulled += one * groups[of].reversal
            of += U1
        total[slot] = open_here
        drive[slot] = pulled


@compiled
def hold_currents(turned, slots, spread, total, drive, v, here, which, matrix, current):
    """Set the current (pA) of every open slot, held over the step; return how many are open.

    Held, its charge reaches every node exactly. It meets the voltage between the start of the step
    and its end, quiet + sum of spread I, weighted 1 : 1 + x with x = total spread: second order in
    the step, and for large x the node goes to the reversal without ringing (the step function of
    one node is 1 / (1 + x + x^2 / 2)). The equations of slots that are open together are solved
    together; they need no pivots, since each is a positive multiple of a symmetric positive one.
    """
    n_open, n = 0, np.uintp(turned.shape[0])
    for slot in range(slots.shape[0]):
        if total[slot] > 0.0:
            node, g = np.uintp(slots[slot].node), total[slot]
            quiet, col = 0.0, U0
            while col < n:
                quiet += turned[col, node] * v[here + col]
                col += U1
            x = g * spread[slot, node]
            which[n_open] = slot
            current[n_open] = (2.0 + x) * drive[slot] - g * ((1.0 + x) * quiet + v[here + node])
            matrix[n_open, n_open] = 2.0 + x * (2.0 + x)
            n_open += 1
    if n_open == 1:
        current[0] *= 1.0 / matrix[0, 0]
    elif n_open > 1:
        for a in range(n_open):
            node, g = np.uintp(slots[which[a]].node), total[which[a]]
            x = g * spread[which[a], node]
            for b in range(n_open):
                if b != a:
                    matrix[a, b] = (1.0 + x) * g * spread[which[b], node]
        eliminate(matrix, current, n_open)
    return n_open


@compiled
def eliminate(matrix, values, n):
    """Solve n equations in place, without pivots; the solution takes the place of the values."""
    for a in range(n):
        matrix[a, a] = 1.0 / matrix[a, a]
        for row in range(a + 1, n):
            ratio = matrix[row, a] * matrix[a, a]
            values[row] -= ratio * values[a]
            for b in range(a + 1, n):
                matrix[row, b] -= ratio * matrix[a, b]
    for back in range(n):
        a = n - 1 - back
        for b in range(a + 1, n):
            values[a] -= matrix[a, b] * values[b]
        values[a] *= matrix[a, a]


@compiled
def fade(groups, slow, fast, ends):
    """Let conductances decay over one step; return whether any is still open.

    One that has fallen to `ends` (nS) is over.
    """
    remaining = False
    for g in range(groups.shape[0]):
        if slow[g] > 0.0:
            slow[g] *= groups[g].keep_decay
            fast[g] *= groups[g].keep_rise
            if slow[g] < ends[g]:
                slow[g] = 0.0
                fast[g] = 0.0
                ends[g] = 0.0
            else:
                remaining = True
    return remaining


@compiled
def highest_of(v, here, n):
    """Return the largest deviation from rest of the n nodes at v[here:]."""
    top = v[here]
    for node in range(1, n):
        top = max(top, v[here + np.uintp(node)])
    return top


@compiled
def powered(factor, exponent, excess, lowest, highest):
    """Return the multiple of the base that a channel gives to a factor."""
    if exponent == 1.0:
        value = factor
    elif exponent == 0.0:
        value = 1.0
    elif factor <= 0.0:
        value = 0.0 if exponent > 0.0 else highest
    else:
        value = factor**exponent
    if excess:
        return min(max(value - 1.0, 0.0), highest)
    return min(max(value, lowest), highest)
