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
CUT = 1e-5  # nS: a conductance below it is over

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

    `size` is the number of nodes, padded; leak and conductance in nS, v in mV over rest.
    """

    leak: Any  # (size,)
    conductance: Any  # (size, size)
    powers: Any  # (doublings, size, size) propagators of 1, 2, 4 ... steps, transposed
    spread: Any  # (slot, size) mV per pA
    work: Any  # (4, size, size)
    v: Any  # (size,)
    out: Any  # (size,) v after a step
    slow: Any  # (group,) nS
    fast: Any  # (group,) nS
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
        np.zeros(size),
        np.zeros(size),
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
def apply(turned, v, out):
    """Write the product of a matrix, given transposed, and v into out; four rows at a time."""
    if v.shape[0] == 1:
        out[0] = turned[0, 0] * v[0]
    else:
        n, row = np.uintp(v.shape[0]), U0
        while row < n:
            one = two = three = four = 0.0
            col = U0
            while col < n:
                x = v[col]
                one += turned[col, row] * x
                two += turned[col, row + U1] * x
                three += turned[col, row + U2] * x
                four += turned[col, row + U3] * x
                col += U1
            out[row] = one
            out[row + U1] = two
            out[row + U2] = three
            out[row + U3] = four
            row += U4


@compiled
def jump(powers, steps, v, out):
    """Take `steps` quiet steps at once, exactly."""
    if steps >> powers.shape[0] > 0:
        steps = 0  # two hours and more: below the smallest number
        for node in range(v.shape[0]):
            v[node] = 0.0
    j = 0
    while steps > 0:
        if steps & 1:
            apply(powers[j], v, out)
            for node in range(v.shape[0]):
                v[node] = out[node]
        steps >>= 1
        j += 1


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
def inject(slots, spread, total, drive, v, out, which, matrix, current):
    """Add to out, the quiet step from v, the currents of the open conductances.

    The current I into a slot's node is held over the step, so that its charge reaches every node
    exactly. It meets the voltage between v and the end of the step, out + sum of spread I, weighted
    1 : 1 + x with x = total spread: second order in the step, and for large x the node goes to the
    reversal without ringing (the step function of one node is 1 / (1 + x + x^2 / 2)). The equations
    of slots that are open together are solved together; they need no pivots, since each is a
    positive multiple of a symmetric positive one.
    """
    n_open = 0
    for slot in range(slots.shape[0]):
        if total[slot] > 0.0:
            which[n_open] = slot
            n_open += 1
    for a in range(n_open):
        slot = which[a]
        node, g = slots[slot].node, total[slot]
        x = g * spread[slot, node]
        current[a] = (2.0 + x) * drive[slot] - g * ((1.0 + x) * out[node] + v[node])
        if n_open == 1:
            current[a] /= 2.0 + x * (2.0 + x)
        else:
            for b in range(n_open):
                matrix[a, b] = (1.0 + x) * g * spread[which[b], node]
            matrix[a, a] += 2.0 + x
    if n_open > 1:
        eliminate(matrix, current, n_open)
    for a in range(n_open):
        shared, held = np.uintp(which[a]), current[a]
        at = U0
        while at < np.uintp(out.shape[0]):
            out[at] += spread[shared, at] * held
            at += U1


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
def fade(groups, slow, fast):
    """Let conductances decay over one step; return whether any is still open."""
    remaining = False
    for g in range(groups.shape[0]):
        if slow[g] > 0.0:
            slow[g] *= groups[g].keep_decay
            fast[g] *= groups[g].keep_rise
            if slow[g] < CUT:
                slow[g] = 0.0
                fast[g] = 0.0
            else:
                remaining = True
    return remaining


@compiled
def highest_of(v):
    """Return the largest deviation from rest."""
    top = v[0]
    for node in range(1, v.shape[0]):
        top = max(top, v[node])
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
