"""Compiled primitives of the membrane and of release, shared by every generated module.

The random draws repeat `plastic.draws` bit for bit. Everything here is plain arithmetic on
scalars and small arrays, so that it can be read next to the formulas of `plastic.membrane`.
"""

from __future__ import annotations

import math

import numpy as np
from numba import njit

GOLDEN = np.uint64(0x9E3779B97F4A7C15)
MUL_A = np.uint64(0xBF58476D1CE4E5B9)
MUL_B = np.uint64(0x94D049BB133111EB)
R30, R27, R31, R11 = np.uint64(30), np.uint64(27), np.uint64(31), np.uint64(11)
ONE, PARTS = np.uint64(1), np.uint64(4096)
FRACTION, NORMAL_A, NORMAL_B, REFILL = 2045, 2046, 2047, 2048
DOUBLINGS = 26  # powers of two of one step that a jump may use
CUT = 1e-6  # nS: a conductance below it is over

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
def relaxed(z):
    """Return (1 - exp(-z)) / z; below 0.25 by the [4/4] Pade form of exp, exact to 1e-12."""
    if z < 0.25:
        square = z * z
        odd = 840.0 + 20.0 * square
        return 2.0 * odd / (1680.0 + square * (180.0 + square) + z * odd)
    return -math.expm1(-z) / z


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
def propagators(conductance, leak, n, tau_m, dt, powers, work):
    """Fill powers[j] with the exact propagator of 2**j steps of the quiet membrane, transposed."""
    biggest = 0.0
    for i in range(work.shape[1]):
        for j in range(work.shape[1]):
            powers[0, i, j] = 0.0
            for layer in range(3):
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
    for order in range(1, 12):
        product(work[1], work[0], work[2])
        for i in range(n):
            for j in range(n):
                work[1, i, j] = work[2, i, j] / order
                powers[0, i, j] += work[1, i, j]
    for _ in range(halvings):
        product(powers[0], powers[0], work[1])
        for i in range(n):
            for j in range(n):
                powers[0, i, j] = work[1, i, j]
    for j in range(1, powers.shape[0]):
        product(powers[j - 1], powers[j - 1], powers[j])


@compiled
def apply(turned, v, out):
    """Replace v by the product of a matrix, given transposed, and v; four rows at a time."""
    if v.shape[0] == 1:
        v[0] *= turned[0, 0]
    else:
        for row in range(0, v.shape[0], 4):
            one = two = three = four = 0.0
            for col in range(v.shape[0]):
                one += turned[col, row] * v[col]
                two += turned[col, row + 1] * v[col]
                three += turned[col, row + 2] * v[col]
                four += turned[col, row + 3] * v[col]
            out[row] = one
            out[row + 1] = two
            out[row + 2] = three
            out[row + 3] = four
        for row in range(v.shape[0]):
            v[row] = out[row]


@compiled
def padded(n):
    """Return the length of node arrays: one, or the next multiple of four."""
    return 1 if n == 1 else (n + 3) // 4 * 4


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
        steps >>= 1
        j += 1


@compiled
def respond(groups, slots, half_over_c, slow, fast, keep, push):
    """Set what the open conductances do in half a step, exactly for constant g: v -> keep v + push.

    Does not depend on v, so that a processor can work it out while the membrane is being stepped.
    """
    for slot in range(slots.shape[0]):
        total = drive = 0.0
        for g in range(slots[slot].first, slots[slot].last):
            total += slow[g] - fast[g]
            drive += (slow[g] - fast[g]) * groups[g].reversal
        keep[slot], push[slot] = 1.0, 0.0
        if total == 0.0:
            continue
        h = half_over_c[slots[slot].node]
        share = h * relaxed(total * h)
        keep[slot] = 1.0 - total * share
        push[slot] = drive * share


@compiled
def synaptic_half(v, slots, keep, push):
    """Let the open conductances act on their nodes for half a step."""
    for slot in range(slots.shape[0]):
        node = slots[slot].node
        v[node] = keep[slot] * v[node] + push[slot]


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
