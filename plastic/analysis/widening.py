"""What a wider dendrite does to an input of it: how much, with which sign, and why.

A steady, weak input at the tip of a sealed dendrite gains at the soma if and only if ``G_soma
R_axial + L coth L > 3``, with the conductance G_soma of all else; below that the added membrane
costs more than the lower axial resistance saves. Saturation of the synapse and the briefness of its
EPSP both favour widening; membrane that is added beyond the synapse only draws current. Channels
keep their density: membrane area, leak and capacitance grow with the diameter. (Own derivation.)
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from plastic.analysis.subject import Cable, Subject
from plastic.engine.layout import Floats
from plastic.engine.readings import EPSP_LENGTH
from plastic.engine.traces import Opening, Shape, shape

#: the diameter is multiplied by this
WIDER = 1.2
#: nS; does not move its own driving force
WEAK = 1e-4
#: percent; a smaller change is called none
NOTHING = 0.05


@dataclass(frozen=True)
class Widening:
    """Change of the peak at the soma, percent, when the dendrite is 20 % wider.

    Attributes
    ----------
    whole, on_path, beyond : float
        All of the dendrite; only what is between soma and contact; only the rest of it.
    weak : float
        All of the dendrite, for a brief input too weak to saturate.
    steady : float
        All of the dendrite, for a weak and steady current.
    criterion : float
        That of `Cable`; NaN on the soma.
    reason : str
        The sign in words.
    """

    whole: float
    on_path: float
    beyond: float
    weak: float
    steady: float
    criterion: float
    reason: str


def widenings(subject: Subject) -> dict[int, Widening]:
    """Return what widening does to each contact that is there from the start."""
    found: dict[int, Widening] = {}
    same = np.ones(len(subject.scene.tree.stretch_parent))
    base = _shapes(subject, subject.contacts, same, EPSP_LENGTH)
    for k, shapes in zip(subject.contacts, base, strict=True):
        cable = subject.cable(k)
        if cable is None:
            found[k] = _without(np.nan, "does not apply: it lands on the soma")
        elif shapes[0].peak == 0:
            found[k] = _without(cable.criterion, "moves nothing: it reverses at rest")
        else:
            found[k] = _widening(subject, k, cable, shapes)
    return found


def _without(criterion: float, reason: str) -> Widening:
    return Widening(np.nan, np.nan, np.nan, np.nan, np.nan, criterion, reason)


def multiples(subject: Subject, contact: int) -> tuple[Floats, Floats, Floats]:
    """Return the diameter multiples (stretch,) of whole dendrite, path, and what is beyond."""
    tree = subject.scene.tree
    on = subject.place(contact)[0]
    mine = np.array([name == on for name in tree.stretch_dendrite])
    path = np.zeros(len(mine), dtype=bool)
    path[tree.path(subject.scene.contacts[contact].node)] = True
    whole, along, beyond = (np.where(where, WIDER, 1.0) for where in (mine, path, mine & ~path))
    return whole, along, beyond


def _shapes(
    subject: Subject, contacts: Sequence[int], multiple: Floats, length: float
) -> list[tuple[Shape, Shape]]:
    """Return the shape at the soma, as it is and weak, of each contact in one geometry."""
    peaks = [(float(subject.conductance[k]), WEAK) for k in contacts]
    sets = [[Opening(k, 0.0, g)] for k, pair in zip(contacts, peaks, strict=True) for g in pair]
    seen = subject.run(sets, [0], multiple=multiple, length=length)
    found = [shape(trace[0], seen.dt) for trace in seen.voltage]
    return list(zip(found[::2], found[1::2], strict=True))


def _widening(subject: Subject, k: int, cable: Cable, base: tuple[Shape, Shape]) -> Widening:
    wide, along, beyond = multiples(subject, k)
    node, R = subject.scene.contacts[k].node, subject.resistances
    late = min(EPSP_LENGTH, 5.0 + 2.0 * max(one.time for one in base))  # widening delays no peak so

    def change(multiple: Floats) -> tuple[float, float]:
        if np.all(multiple == 1.0):
            return 0.0, 0.0
        now = _shapes(subject, [k], multiple, late)[0]
        strong, weak = (100 * (a.peak / b.peak - 1) for a, b in zip(now, base, strict=True))
        return strong, weak

    (whole, weak), (on_path, _), (past, _) = (change(m) for m in (wide, along, beyond))
    steady = 100 * float(R(wide)[node, 0] / R()[node, 0] - 1)
    reason = reason_for(whole, on_path, past, weak, steady, cable)
    return Widening(whole, on_path, past, weak, steady, cable.criterion, reason)


def reason_for(
    whole: float, on_path: float, beyond: float, weak: float, steady: float, cable: Cable
) -> str:
    """Return why widening changes an input as it does, in words; percent."""
    rule = f"G_soma R_axial + L coth L = {cable.criterion:.3g}"
    if abs(whole) < NOTHING:
        return f"changes nothing: what the path saves, the added membrane draws ({rule}, limit 3)"
    if whole > 0 and steady >= 0:
        strong = "; most of it because the synapse saturates its place: a weak input would change"
        return (
            f"strengthens: {cable.name} is thin or long against what it must charge ({rule} > 3), "
            "so a lower axial resistance brings more than the added membrane draws"
            + (f"{strong} by {weak:+.2g} %" if whole > 2 * weak else "")
        )
    if whole > 0 and weak > 0:
        return (
            f"strengthens because the EPSP is brief: a steady weak input would change by "
            f"{steady:+.2g} % ({rule})"
        )
    if whole > 0:
        return (
            "strengthens only because the synapse saturates its place: a wider dendrite lets more "
            f"current in; a weak input would change by {weak:+.2g} % ({rule})"
        )
    if beyond < min(on_path, 0.0):
        return (
            f"weakens: the membrane added beyond the contact only draws current ({beyond:+.2g} %), "
            f"and the wider path does not make up for it ({on_path:+.2g} %; {rule})"
        )
    side = " < 3" if cable.criterion < 3 else ""
    return (
        f"weakens: {cable.name} itself is {100 * cable.share:.0f} % of the cell's conductance, and "
        f"its added membrane draws more than a lower axial resistance brings ({rule}{side})"
    )
