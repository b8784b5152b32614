"""Excitation and inhibition at steady state, at any nodes of a passive cell.

With the conductance matrix G of the cell, synaptic conductances g and their reversals E from rest,
the voltages obey::

    (G + diag g) V = g E

A shunt (E = 0) does nothing alone, and divides what excitation does. With K = 1/G, excitation g_e
at e and a shunt g_i at i, it makes the voltage at the soma s smaller by the factor::

    F = K_es D / {(1 + g_e K_ee) [K_es (1 + g_i K_ii) - g_i K_ei K_is]},
    D = (1 + g_e K_ee) (1 + g_i K_ii) - g_e g_i K_ei^2

and where i is on the path from e to s, there K_es K_ii = K_ei K_is, by::

    F = 1 + g_i [K_ii - g_e K_ei^2 / (1 + g_e K_ee)]

The best place of a shunt lies on that path (on-path theorem), at the synapse, at the soma or in
between, as the conductances decide. It is about the steady voltage at the soma in a passive cell:
against a spike of the dendrite itself, a shunt beyond the excitation may do more.

References
----------
Koch C, Poggio T, Torre V (1983) PNAS 80:2799 (theorem, from memory, sure; the closed forms are our
own algebra). Gidon A, Segev I (2012) Neuron 75:330 for the shunt level (from memory, fairly sure).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from plastic.membrane.tree import Tree

Floats = NDArray[np.float64]


def steady_voltages(
    G: Floats, nodes: ArrayLike, conductance: ArrayLike, reversal: ArrayLike
) -> Floats:
    """Return the voltage at every node under steady synaptic conductances.

    Parameters
    ----------
    G : array, shape (node, node), nS
        As returned by `plastic.membrane.cable.conductances`; ``[[leak]]`` is a point neuron.
    nodes : array_like of int, shape (synapse,)
        Where each synapse is; several may share a node.
    conductance : array_like, broadcast to (synapse,), nS, 0 or more
    reversal : array_like, broadcast to (synapse,), mV from rest

    Returns
    -------
    array, shape (node,), mV from rest

    Examples
    --------
    >>> [float(v) for v in steady_voltages(np.array([[10.0]]), [0], 10.0, 70.0)]
    [35.0]
    """
    at = np.atleast_1d(np.asarray(nodes, dtype=np.intp))
    g = np.broadcast_to(_conductance("conductance", conductance), at.shape)
    total, drive = np.zeros(len(G)), np.zeros(len(G))
    np.add.at(total, at, g)
    np.add.at(drive, at, g * np.asarray(reversal, float))
    return np.asarray(np.linalg.solve(G + np.diag(total), drive))


def summation(
    G: Floats, nodes: ArrayLike, conductance: ArrayLike, reversal: ArrayLike, *, at: int = 0
) -> float:
    """Return what synapses do together over the sum of what each does alone, steady, at one node.

    n synapses of g at one place of input resistance K: ``(1 + g K)/(1 + n g K)``.

    Parameters
    ----------
    G, nodes, conductance, reversal
        As for `steady_voltages`.
    at : int
        The node that is recorded from, the soma by default.

    Returns
    -------
    float, dimensionless
        Below 1: sublinear. NaN when nothing is moved alone.
    """
    where, g, E = np.broadcast_arrays(np.asarray(nodes), conductance, reversal)
    each = [steady_voltages(G, [n], *pair)[at] for n, *pair in zip(where, g, E, strict=True)]
    alone = float(np.sum(each))
    together = float(steady_voltages(G, where, g, E)[at])
    return together / alone if alone != 0 else float("nan")


def shunt_factor(
    G: Floats, excitation: int, g_e: float, shunt: ArrayLike, g_i: ArrayLike, *, at: int = 0
) -> Floats:
    """Return F, the voltage of an excitation without a shunt over that with it.

    The general closed form at the top of this file; larger is stronger inhibition.

    Parameters
    ----------
    G : array, shape (node, node), nS
    excitation : int
        Node of the excitatory synapse.
    g_e : float, nS, 0 or more
        0: the limit of a weak excitation.
    shunt : array_like of int
        Node, or nodes, of the shunt, each taken alone.
    g_i : array_like, nS, 0 or more
    at : int
        The node that is recorded from, the soma by default.

    Returns
    -------
    array, broadcast shape of `shunt` and `g_i`, 1 or more
    """
    K, i = np.linalg.inv(G), np.asarray(shunt, dtype=np.intp)
    e, g_e, g_i = excitation, float(_conductance("g_e", g_e)), _conductance("g_i", g_i)
    alone, shunted = 1 + g_e * K[e, e], 1 + g_i * K[i, i]
    both = alone * shunted - g_e * g_i * K[e, i] ** 2
    return np.asarray(K[e, at] * both / (alone * (K[e, at] * shunted - g_i * K[e, i] * K[i, at])))


def shunt_level(G: Floats, shunt: int, g_i: float) -> Floats:
    """Return by which share a shunt lowers the input resistance of every node.

    ``SL_j = g_i K_ij^2 / [K_jj (1 + g_i K_ii)]``, the shunt level: largest at the shunt, and
    falling off as the product of the attenuations to and fro.

    Parameters
    ----------
    G : array, shape (node, node), nS
    shunt : int
        Node of the shunt.
    g_i : float, nS, 0 or more

    Returns
    -------
    array, shape (node,), in [0, 1)
    """
    K, g_i = np.linalg.inv(G), float(_conductance("g_i", g_i))
    return np.asarray(g_i * K[shunt] ** 2 / (K.diagonal() * (1 + g_i * K[shunt, shunt])))


def path_nodes(tree: Tree, node: int) -> list[int]:
    """Return the nodes on the path from the soma to `node`, both included, the soma first.

    Parameters
    ----------
    tree : Tree
    node : int
    """
    return [0, *(int(tree.stretch_child[stretch]) for stretch in tree.path(node))]


def _conductance(name: str, value: ArrayLike) -> Floats:
    found = np.asarray(value, float)
    if not np.all(found >= 0):
        raise ValueError(f"{name} = {found} nS: must be 0 or more")
    return found
