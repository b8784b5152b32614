"""The nominal cell of a study, cut so finely that its transients are those of the cable."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike

from plastic.engine.assembly import Scene
from plastic.engine.layout import Floats
from plastic.engine.readings import EPSP_LENGTH
from plastic.engine.traces import Opening, Traces, traces
from plastic.membrane.cable import conductances, g_inf, lambda_um
from plastic.membrane.tree import SOMA
from plastic.study.accuracy import Limit, limit_of
from plastic.study.model import Study
from plastic.study.nominal import mean_conductance, nominal
from plastic.study.population import Population


@dataclass(frozen=True)
class Cable:
    """One dendrite of the cell, steady state.

    Attributes
    ----------
    name : str
    length, diameter, lambda_um : float, um
    share : float
        Of the input conductance at the soma, 0 to 1.
    criterion : float
        G_soma R_axial + L coth L with the conductance G_soma of everything but this dendrite: a
        weak synapse at its tip gains from widening where it is above 3, and loses below.
    """

    name: str
    length: float
    diameter: float
    lambda_um: float
    share: float
    criterion: float


@dataclass(frozen=True)
class Subject:
    """What every part of a cell sheet is about.

    Attributes
    ----------
    study : Study
    cell : Population
        The nominal cell, as it is simulated.
    limit : Limit
        The same cell, cut finely; all values of a sheet are of this one.
    """

    study: Study
    cell: Population
    limit: Limit

    @classmethod
    def of(cls, study: Study) -> Subject:
        """Return the subject of a study."""
        cell = nominal(study)
        return cls(study, cell, limit_of(study, cell))

    @property
    def scene(self) -> Scene:
        """Its finely cut cell."""
        return self.limit.scene

    @property
    def load(self) -> float:
        """The conductance at its soma, nS."""
        return float(self.cell.load[0])

    @property
    def threshold(self) -> float:
        """How far the threshold is above rest, mV."""
        return float(self.cell.threshold[0])

    @cached_property
    def conductance(self) -> Floats:
        """The mean conductance that each contact opens, (contact,), nS."""
        return mean_conductance(self.cell)

    @property
    def contacts(self) -> list[int]:
        """The contacts that are there from the start."""
        return [k for k, contact in enumerate(self.scene.contacts) if not contact.added]

    def place(self, contact: int) -> tuple[str, float]:
        """Return where a contact lands: (dendrite or "soma", path distance in um)."""
        tree, node = self.scene.tree, self.scene.contacts[contact].node
        return tree.node_dendrite[node], float(tree.node_distance[node])

    def resistances(self, multiple: ArrayLike = 1.0) -> Floats:
        """Return the steady voltage at every node per current into every node, (node, node), Mohm.

        Parameters
        ----------
        multiple : float or array, shape (stretch,)
            Of the diameter.
        """
        scene = self.scene
        matrix = conductances(scene.tree, self.load, scene.rm, scene.ri, multiple)
        return np.asarray(1000.0 * np.linalg.inv(matrix), dtype=float)

    def run(
        self,
        sets: Sequence[Sequence[Opening]],
        record: Sequence[int],
        *,
        multiple: ArrayLike = 1.0,
        length: float = EPSP_LENGTH,
    ) -> Traces:
        """Return what some sets of openings do within `length` ms; as `plastic.engine.traces`."""
        return traces(self.scene, self.load, sets, length=length, record=record, multiple=multiple)

    @property
    def whole(self) -> float:
        """A time, ms, after which every EPSP is over."""
        slowest = max(k.receptor.decay for k in self.scene.contacts) + self.scene.tau_m
        return max(EPSP_LENGTH, 12.0 * slowest)

    def cables(self) -> list[Cable]:
        """Return the dendrites of the cell."""
        rm, ri, found = self.scene.rm, self.scene.ri, []
        whole = 1000.0 / self.resistances()[0, 0]
        for name, dendrite in self.study.cell.dendrite.items():
            length, diameter = dendrite.length, dendrite.diameter
            unit = float(lambda_um(diameter, rm, ri))
            L, semi = length / unit, float(g_inf(diameter, rm, ri))
            own = semi * np.tanh(L)
            axial = L / semi  # G_inf/L is the axial conductance from end to end
            criterion = (whole - own) * axial + L / np.tanh(L)
            found.append(Cable(name, length, diameter, unit, float(own / whole), float(criterion)))
        return found

    def cable(self, contact: int) -> Cable | None:
        """Return the dendrite that a contact is on; None on the soma."""
        on = self.place(contact)[0]
        return None if on == SOMA else next(c for c in self.cables() if c.name == on)
