"""Passive dendrites as a small network of conductances that is exact at steady state.

The stretch of dendrite between two neighbouring nodes is the pi-equivalent of its cable. With the
length constant lambda, L = l/lambda and the conductance G_inf of the semi-infinite cable::

    coupling            G_inf / sinh L
    shunt at both ends  G_inf tanh(L/2)
    sealed stub         G_inf tanh L          (what lies beyond the last node)

so that every steady voltage, attenuation and sensitivity to diameter is that of the continuous
cable, however the dendrite is cut. Capacitance follows leak (C = tau_m * leak): every node keeps
the membrane time constant, and transients are approximate, the better the finer the cut.

References
----------
Rall W (1959) Exp Neurol 1:491; Rall W (1977) in Handbook of Physiology, The Nervous System 1:39
(sealed and killed ends; from memory). The pi-equivalent of a uniform line is a textbook two-port
result (from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from plastic.membrane.tree import Dendrite, Tree, build_tree

__all__ = [
    "Dendrite",
    "Tree",
    "build_tree",
    "conductances",
    "g_inf",
    "input_resistance",
    "lambda_um",
    "leaks",
    "load_for_input_resistance",
    "pi_equivalent",
    "stub",
    "transfer_resistance",
]

Floats = NDArray[np.float64]


def lambda_um(diameter: ArrayLike, rm: float, ri: float) -> Floats:
    """Return the length constant of a cable, sqrt((d/4) (Rm/Ri)).

    Parameters
    ----------
    diameter : array_like, um
    rm : float
        Specific membrane resistance, ohm cm^2.
    ri : float
        Axial resistivity, ohm cm.

    Returns
    -------
    array, shape of `diameter`, um

    Examples
    --------
    >>> round(float(lambda_um(4.0, 20_000, 200)), 6)
    1000.0
    """
    return np.asarray(1e4 * np.sqrt(1e-4 * np.asarray(diameter, float) / 4 * rm / ri))


def g_inf(diameter: ArrayLike, rm: float, ri: float) -> Floats:
    """Return the input conductance of a semi-infinite cable, pi d^(3/2) / (2 sqrt(Rm Ri)).

    Parameters
    ----------
    diameter : array_like, um
    rm : float, ohm cm^2
    ri : float, ohm cm

    Returns
    -------
    array, shape of `diameter`, nS
    """
    return np.asarray(500 * np.pi * np.asarray(diameter, float) ** 1.5 / np.sqrt(rm * ri))


def pi_equivalent(
    length: ArrayLike, diameter: ArrayLike, rm: float, ri: float
) -> tuple[Floats, Floats]:
    """Return the coupling and the shunt (one at each end) that replace a stretch of cable.

    ``coupling = G_inf / sinh L`` and ``shunt = G_inf tanh(L/2)``.

    Parameters
    ----------
    length, diameter : array_like, um
    rm : float, ohm cm^2
    ri : float, ohm cm

    Returns
    -------
    coupling, shunt : array, broadcast shape of `length` and `diameter`, nS
    """
    L = np.asarray(length, float) / lambda_um(diameter, rm, ri)
    G = g_inf(diameter, rm, ri)
    # 2 e^-L / (1 - e^-2L) is 1/sinh L, and does not overflow for a long cable
    return G * 2 * np.exp(-L) / -np.expm1(-2 * L), G * np.tanh(L / 2)


def stub(length: ArrayLike, diameter: ArrayLike, rm: float, ri: float) -> Floats:
    """Return the input conductance of a cable with a sealed far end, G_inf tanh L.

    Parameters
    ----------
    length, diameter : array_like, um
    rm : float, ohm cm^2
    ri : float, ohm cm

    Returns
    -------
    array, broadcast shape of `length` and `diameter`, nS
    """
    L = np.asarray(length, float) / lambda_um(diameter, rm, ri)
    return np.asarray(g_inf(diameter, rm, ri) * np.tanh(L))


def _couplings_and_shunts(
    tree: Tree, rm: float, ri: float, diameter_multiple: ArrayLike
) -> tuple[Floats, Floats]:
    multiple = np.broadcast_to(np.asarray(diameter_multiple, float), tree.stretch_diameter.shape)
    if not np.all(multiple > 0):
        raise ValueError(f"diameter_multiple = {multiple}: every value must be above 0")
    diameter = tree.stretch_diameter * multiple
    coupling, shunt = pi_equivalent(tree.stretch_length, diameter, rm, ri)
    sealed = tree.stretch_child < 0
    tip = stub(tree.stretch_length, diameter, rm, ri)
    return np.where(sealed, 0.0, coupling), np.where(sealed, tip, shunt)


def leaks(
    tree: Tree, load: float, rm: float, ri: float, diameter_multiple: ArrayLike = 1.0
) -> Floats:
    """Return the conductance of each node to rest.

    The capacitance of a node is ``tau_m * leak`` with ``tau_m = Rm Cm``; in pF when tau_m is in ms.

    Parameters
    ----------
    tree : Tree
    load : float, nS
        Conductance of the soma and of the rest of the cell, 0 or more.
    rm : float, ohm cm^2
    ri : float, ohm cm
    diameter_multiple : float or array, shape (stretch,), dimensionless
        Membrane area, leak and capacitance grow with it: the channels keep their density.

    Returns
    -------
    array, shape (node,), nS
    """
    if not load >= 0:
        raise ValueError(f"load = {load} nS: must be 0 or more")
    _, shunt = _couplings_and_shunts(tree, rm, ri, diameter_multiple)
    total = np.zeros(tree.n_nodes)
    total[0] = load
    np.add.at(total, tree.stretch_parent, shunt)
    inner = tree.stretch_child >= 0
    np.add.at(total, tree.stretch_child[inner], shunt[inner])
    return total


def conductances(
    tree: Tree, load: float, rm: float, ri: float, diameter_multiple: ArrayLike = 1.0
) -> Floats:
    """Return the matrix G with G V = I at steady state (V in mV from rest, I in pA).

    Parameters
    ----------
    As for `leaks`.

    Returns
    -------
    array, shape (node, node), nS
        Diagonal: leak and couplings of the node; off the diagonal: minus the coupling.
    """
    coupling, _ = _couplings_and_shunts(tree, rm, ri, diameter_multiple)
    inner = tree.stretch_child >= 0
    parent, child, g = tree.stretch_parent[inner], tree.stretch_child[inner], coupling[inner]
    G = np.diag(leaks(tree, load, rm, ri, diameter_multiple))
    np.add.at(G, (parent, parent), g)
    np.add.at(G, (child, child), g)
    np.add.at(G, (parent, child), -g)
    np.add.at(G, (child, parent), -g)
    return G


def transfer_resistance(G: Floats, a: int, b: int) -> float:
    """Return the steady voltage at node `b` per current into node `a`, Mohm (G in nS)."""
    current = np.zeros(len(G))
    current[a] = 1000.0
    return float(np.linalg.solve(G, current)[b])


def input_resistance(G: Floats, node: int) -> float:
    """Return the steady voltage at `node` per current into it, Mohm (G in nS)."""
    return transfer_resistance(G, node, node)


def load_for_input_resistance(tree: Tree, target: float, rm: float, ri: float) -> float:
    """Return the load, nS, that gives the cell an input resistance of `target` Mohm at the soma.

    ``load = 1/R - sum of G_inf tanh(l/lambda)`` over the dendrites.

    Raises
    ------
    ValueError
        When the dendrites alone have a lower input resistance than `target`.
    """
    if not (np.isfinite(target) and target > 0):
        raise ValueError(f"input resistance = {target} Mohm: must be positive and finite")
    dendritic = 0.0
    for name in dict.fromkeys(tree.stretch_dendrite):
        on = np.array([dendrite == name for dendrite in tree.stretch_dendrite])
        length, diameter = tree.stretch_length[on].sum(), tree.stretch_diameter[on][0]
        dendritic += float(stub(length, diameter, rm, ri))
    load = 1000 / target - dendritic
    if load < 0:
        raise ValueError(
            f"input resistance = {target:g} Mohm cannot be reached: the dendrites alone have "
            f"{1000 / dendritic:.4g} Mohm ({dendritic:.4g} nS)"
        )
    return load
