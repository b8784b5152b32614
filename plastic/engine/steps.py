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
CUT = 1e-7  # nS: a conductance below it is over


@njit(nogil=True)
def mix(z):
    """Return the 64-bit hash of z."""
    z = (z ^ (z >> R30)) * MUL_A
    z = (z ^ (z >> R27)) * MUL_B
    return z ^ (z >> R31)


@njit(nogil=True)
def stream_of(seed, cell, channel):
    """Return the key of the draws of one channel (a contact) of one cell."""
    inner = mix(np.uint64(seed) + GOLDEN) + GOLDEN * np.uint64(cell + 1)
    return mix(mix(inner) + GOLDEN * np.uint64(channel + 1))


@njit(nogil=True)
def uniform(stream, ordinal, part):
    """Return draw (ordinal, part) of a stream, in [0, 1)."""
    counter = np.uint64(ordinal) * PARTS + np.uint64(part)
    return float(mix(stream + GOLDEN * (counter + ONE)) >> R11) * 2.0**-53


@njit(nogil=True)
def binomial(stream, ordinal, trials, probability, part):
    """Return the number of successes in `trials` draws of one event."""
    count = 0
    for k in range(trials):
        if uniform(stream, ordinal, part + k) < probability:
            count += 1
    return count


@njit(nogil=True)
def normal(stream, ordinal):
    """Return the standard normal draw of one event (Box & Muller)."""
    radius = math.sqrt(-2.0 * math.log(1.0 - uniform(stream, ordinal, NORMAL_A)))
    return radius * math.cos(2.0 * math.pi * uniform(stream, ordinal, NORMAL_B))


@njit(nogil=True)
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


@njit(nogil=True)
def trials_of(stream, ordinal, sites):
    """Return whole sites for this event: a fractional site exists with a fractional chance."""
    whole = int(sites)
    fraction = sites - whole
    if fraction > 0.0 and uniform(stream, ordinal, FRACTION) < fraction:
        return whole + 1
    return whole


@njit(nogil=True)
def decay(z):
    """Return exp(-z); a Pade form where it is exact to 1e-14."""
    if z < 0.06:
        even = 120.0 + 12.0 * z * z
        odd = 60.0 * z + z * z * z
        return (even - odd) / (even + odd)
    return math.exp(-z)


@njit(nogil=True)
def product(a, b, out):
    """Write the matrix product a b into out."""
    n = a.shape[0]
    for i in range(n):
        for j in range(n):
            total = 0.0
            for k in range(n):
                total += a[i, k] * b[k, j]
            out[i, j] = total


@njit(nogil=True)
def membrane(parent, child, length, diameter, multiple, rm, ri, load, tau_m, conductance, leak):
    """Fill the conductance matrix (nS) and the leak (nS) of every node.

    Each stretch is the DC-exact pi-equivalent of its cable, a stub a sealed end; capacitance
    follows leak (C = tau_m leak), so every node keeps the membrane time constant.
    """
    conductance[:, :] = 0.0
    leak[:] = 0.0
    leak[0] = load
    for s in range(parent.shape[0]):
        d = diameter[s] * multiple[s]
        extent = length[s] / (100.0 * math.sqrt(d * rm / (4.0 * ri)))
        semi = 1e3 * math.pi * d**1.5 / (2.0 * math.sqrt(rm * ri))
        if child[s] < 0:
            leak[parent[s]] += semi * math.tanh(extent)
            continue
        link = semi / math.sinh(extent)
        shunt = semi * math.tanh(extent / 2.0)
        leak[parent[s]] += shunt
        leak[child[s]] += shunt
        conductance[parent[s], child[s]] -= link
        conductance[child[s], parent[s]] -= link
        conductance[parent[s], parent[s]] += link
        conductance[child[s], child[s]] += link
    for i in range(leak.shape[0]):
        conductance[i, i] += leak[i]


@njit(nogil=True)
def propagators(conductance, leak, tau_m, dt, powers, work):
    """Fill powers[j] with the exact propagator of 2**j steps of the quiet membrane."""
    n = leak.shape[0]
    biggest = 0.0
    for i in range(n):
        row = 0.0
        for j in range(n):
            work[0, i, j] = -conductance[i, j] * dt / (tau_m * leak[i])
            row += abs(work[0, i, j])
        biggest = max(biggest, row)
    halvings = 0
    while biggest > 0.25:
        biggest /= 2.0
        halvings += 1
    scale = 0.5**halvings
    for i in range(n):
        for j in range(n):
            work[0, i, j] *= scale
            work[1, i, j] = 1.0 if i == j else 0.0
            powers[0, i, j] = work[1, i, j]
    for order in range(1, 12):
        product(work[1], work[0], work[2])
        for i in range(n):
            for j in range(n):
                work[1, i, j] = work[2, i, j] / order
                powers[0, i, j] += work[1, i, j]
    for _ in range(halvings):
        product(powers[0], powers[0], work[1])
        powers[0, :, :] = work[1]
    for j in range(1, powers.shape[0]):
        product(powers[j - 1], powers[j - 1], powers[j])


@njit(nogil=True)
def apply(matrix, v, out):
    """Replace v by matrix v."""
    n = v.shape[0]
    for i in range(n):
        total = 0.0
        for k in range(n):
            total += matrix[i, k] * v[k]
        out[i] = total
    for i in range(n):
        v[i] = out[i]


@njit(nogil=True)
def jump(powers, steps, v, out):
    """Take `steps` quiet steps at once, exactly."""
    if steps >> powers.shape[0] > 0:
        v[:] = 0.0  # two hours and more: below the smallest number
        return
    j = 0
    while steps > 0:
        if steps & 1:
            apply(powers[j], v, out)
        steps >>= 1
        j += 1


@njit(nogil=True)
def synaptic_half(v, group_node, group_reversal, slow, fast, half_over_c, total, drive):
    """Let the open conductances act on their nodes for half a step (exact for constant g)."""
    for g in range(group_node.shape[0]):
        open_now = slow[g] - fast[g]
        node = group_node[g]
        total[node] += open_now
        drive[node] += open_now * group_reversal[g]
    for node in range(v.shape[0]):
        if total[node] > 0.0:
            goal = drive[node] / total[node]
            v[node] = goal + (v[node] - goal) * decay(total[node] * half_over_c[node])
        total[node] = 0.0
        drive[node] = 0.0


@njit(nogil=True)
def fade(slow, fast, keep_decay, keep_rise):
    """Let conductances decay over one step; return whether any is still open."""
    some_open = False
    for g in range(slow.shape[0]):
        if slow[g] > 0.0:
            slow[g] *= keep_decay[g]
            fast[g] *= keep_rise[g]
            if slow[g] < CUT:
                slow[g] = 0.0
                fast[g] = 0.0
            else:
                some_open = True
    return some_open


@njit(nogil=True)
def highest_of(v):
    """Return the largest deviation from rest."""
    top = v[0]
    for i in range(1, v.shape[0]):
        top = max(top, v[i])
    return top


@njit(nogil=True)
def powered(factor, exponent, excess, lowest, highest):
    """Return the multiple of the base that a channel gives to a factor."""
    if excess:
        value = factor if exponent == 1.0 else factor**exponent
        return min(max(value - 1.0, 0.0), highest)
    if exponent == 1.0:
        value = factor
    elif factor <= 0.0:
        value = 0.0 if exponent > 0.0 else highest
    else:
        value = factor**exponent
    return min(max(value, lowest), highest)
