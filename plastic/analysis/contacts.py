"""What one contact of the nominal cell does: there, at the soma, and on the way."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from plastic.analysis.subject import Subject
from plastic.analysis.widening import Widening, widenings
from plastic.engine.layout import Floats
from plastic.engine.traces import Opening, Shape, Traces, shape
from plastic.study.accuracy import own_openings

#: elementary charges in 1 pC (2019 SI, exact: 1e-12 / 1.602176634e-19)
CHARGES = 1e-12 / 1.602176634e-19
#: mV; above it a passive dendrite is no good picture any more
LOCAL_LIMIT = 15.0
#: ms of the time courses that are kept
SHOWN = 60.0


@dataclass(frozen=True)
class ContactSheet:
    """One contact, opened alone at the mean of its release, without what its input drives.

    Attributes
    ----------
    input, on : str
        Its input, and the dendrite or "soma" it lands on.
    kind : "excitatory" or "inhibitory"
    distance : float, um
        Path distance from the soma.
    distance_lambda : float
        The same in length constants of its dendrite.
    conductance : float, nS
        Mean peak conductance, behind the neck of the spine.
    local, soma : Shape
        Of the EPSP where it lands and at the soma (mV from rest, ms).
    together : float, mV
        Peak where it lands when all contacts of its input open.
    attenuation_dc : float
        Steady local over somatic voltage for a current injected here, R_xx / R_x0; exact.
    charge : float, pC
        What enters through the synapse: the integral of g (E - V).
    arriving : float, pC
        What of it reaches the hillock: the charge that, injected at the soma, gives the same
        integral of the somatic voltage, ``charge R_x0 / R_00``. For a given injected charge it is
        what an electrode that holds the soma at rest collects, whatever the time course; on one
        uniform dendrite R_x0 / R_00 = cosh(L - X)/cosh L.
    ceiling : float, mV
        The somatic potential for an infinite conductance, ``(E - rest) R_x0 / R_xx``.
    widening : Widening
    flags : tuple of str
        What to be wary of, in words.
    time : array, ms
    at_soma, there : array, mV
        The EPSP at the soma and where the contact lands, every 0.1 ms or so.
    """

    input: str
    on: str
    kind: str
    distance: float
    distance_lambda: float
    conductance: float
    local: Shape
    soma: Shape
    together: float
    attenuation_dc: float
    charge: float
    arriving: float
    ceiling: float
    widening: Widening
    flags: tuple[str, ...]
    time: Floats
    at_soma: Floats
    there: Floats

    @property
    def label(self) -> str:
        """What tables and figures call it."""
        where = self.on if self.distance == 0 else f"{self.on} {self.distance:.4g} µm"
        return f"{self.input}, {where}"

    @property
    def attenuation(self) -> float:
        """Peak of the local EPSP over that at the soma."""
        return self.local.peak / self.soma.peak if self.soma.peak else np.nan

    @property
    def delay(self) -> float:
        """Time of the peak at the soma minus that of the local one, ms."""
        return self.soma.time - self.local.time

    @property
    def charges(self) -> float:
        """What enters, in elementary charges."""
        return self.charge * CHARGES

    @property
    def arriving_charges(self) -> float:
        """What arrives, in elementary charges."""
        return self.arriving * CHARGES


def contact_sheets(subject: Subject) -> list[ContactSheet]:
    """Return the sheet of each contact that is there from the start."""
    chosen, scene = subject.contacts, subject.scene
    inputs = list(dict.fromkeys(scene.contacts[k].input for k in chosen))
    alone = [[Opening(k, 0.0, float(subject.conductance[k]))] for k in chosen]
    whole = [own_openings(subject.cell, name) for name in inputs]
    nodes = [scene.contacts[k].node for k in chosen]
    seen = subject.run([*alone, *whole], [0, *nodes], length=subject.whole)
    resistance, wider = subject.resistances(), widenings(subject)
    found = []
    for i, k in enumerate(chosen):
        all_of_it = len(chosen) + inputs.index(scene.contacts[k].input)
        together = shape(seen.voltage[all_of_it, i + 1], seen.dt).peak
        found.append(_sheet(subject, k, seen, (i, i + 1), together, resistance, wider[k]))
    return found


def _sheet(
    subject: Subject,
    k: int,
    seen: Traces,
    at: tuple[int, int],
    together: float,
    resistance: Floats,
    wider: Widening,
) -> ContactSheet:
    contact = subject.scene.contacts[k]
    node, (on, distance), cable = contact.node, subject.place(k), subject.cable(k)
    own, transfer = resistance[node, node], resistance[node, 0]
    trace, charge = seen.voltage[at[0], 0], float(seen.charge[at[0], node])
    ceiling = float((contact.receptor.reversal - subject.scene.rest) * transfer / own)
    kind = str(subject.study.inputs[contact.input].kind)
    there = seen.voltage[at]
    every = max(1, round(0.1 / seen.dt))
    kept = np.arange(0, min(len(trace), round(SHOWN / seen.dt)), every)
    return ContactSheet(
        input=contact.input,
        on=on,
        kind=kind,
        distance=distance,
        distance_lambda=0.0 if cable is None else distance / cable.lambda_um,
        conductance=float(subject.conductance[k]),
        local=shape(there, seen.dt),
        soma=shape(trace, seen.dt),
        together=together,
        attenuation_dc=float(own / transfer),
        charge=charge,
        arriving=charge * float(transfer / resistance[0, 0]),
        ceiling=ceiling,
        widening=wider,
        flags=_flags(kind, together, ceiling, subject.threshold, on),
        time=np.asarray(kept * seen.dt, dtype=float),
        at_soma=trace[kept],
        there=there[kept],
    )


def _flags(kind: str, local: float, ceiling: float, threshold: float, on: str) -> tuple[str, ...]:
    flags = []
    if kind == "excitatory" and on != "soma" and local > LOCAL_LIMIT:
        flags.append(
            f"local EPSP of {local:.3g} mV, above {LOCAL_LIMIT:g} mV: a real dendrite would "
            "recruit NMDA or dendritic spikes"
        )
    if kind == "excitatory" and ceiling < threshold:
        flags.append(
            f"no conductance fires the cell from here: at most {ceiling:.3g} mV reach the soma, "
            f"{threshold:.3g} mV are needed"
        )
    return tuple(flags)
