"""`plastic.cell_sheet`: what the nominal cell of a study does with its inputs, before any learning.

Values are those of the passive cable, cut until finer cuts change nothing; `Accuracy` says how far
the simulation of the study's own, coarser cell is from them.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from plastic.analysis.contacts import ContactSheet, contact_sheets
from plastic.analysis.subject import Cable, Subject
from plastic.analysis.summation import Combination, combinations_of
from plastic.membrane.ions import chloride_sentence, effect
from plastic.study.accuracy import Accuracy, accuracy_of
from plastic.study.file import load_study
from plastic.study.inputs import Receptor
from plastic.study.model import Study

#: what an inhibitory synapse does by itself, by the name of its reversal
DOES = {
    "shunting": "moves nothing by itself; divides what arrives while it is open",
    "hyperpolarising": "pulls the cell below rest, and divides what arrives while it is open",
    "depolarising below threshold": "lifts the cell by itself but cannot fire it; holds it there",
    "depolarising above threshold": "can fire the cell: it excites",
}
#: mM and C: what is taken for the outside and the bath where a study gives a reversal alone (ours)
OUTSIDE, TEMPERATURE = 130.0, 32.0


@dataclass(frozen=True)
class Inhibition:
    """One inhibitory input in words.

    Attributes
    ----------
    input : str
    reversal : float, mV
    effect, does : str
        Name of the reversal seen from rest and threshold, and what that means.
    chloride : str
        The internal chloride that the reversal implies; empty where chloride carries nothing.
    assumed : bool
        Whether the chloride outside and the temperature are assumed.
    driven_by : tuple of str
        Empty: it has its own times.
    """

    input: str
    reversal: float
    effect: str
    does: str
    chloride: str
    assumed: bool
    driven_by: tuple[str, ...]


@dataclass(frozen=True)
class CellSheet:
    """The nominal cell of a study; see the classes of its parts.

    Attributes
    ----------
    title : str
    rest, threshold : float, mV
    input_resistance : float, Mohm
    tau : float, ms
    load : float, nS
        Conductance of the soma and of everything that is not written out.
    dt : float, ms
    refine : int
        Step and extra nodes per stretch of the simulation.
    cables : list of Cable
    contacts : list of ContactSheet
    combinations : list of Combination
    inhibition : list of Inhibition
    accuracy : Accuracy
    notes : tuple of str
    """

    title: str
    rest: float
    threshold: float
    input_resistance: float
    tau: float
    load: float
    dt: float
    refine: int
    cables: list[Cable]
    contacts: list[ContactSheet]
    combinations: list[Combination]
    inhibition: list[Inhibition]
    accuracy: Accuracy
    notes: tuple[str, ...]


def cell_sheet(study: Study | str | Path) -> CellSheet:
    """Return the cell sheet of a study: its nominal cell, input by input.

    Parameters
    ----------
    study : Study, str or Path
        A study, or its file.

    Raises
    ------
    StudyError, UnknownName, DataError
        What is wrong with the study.
    """
    made = study if isinstance(study, Study) else load_study(study)
    subject = Subject.of(made)
    return CellSheet(
        title=made.title,
        rest=subject.scene.rest,
        threshold=subject.scene.rest + subject.threshold,
        input_resistance=float(subject.resistances()[0, 0]),
        tau=subject.scene.tau_m,
        load=subject.load,
        dt=made.dt,
        refine=made.cell.refine,
        cables=subject.cables(),
        contacts=contact_sheets(subject),
        combinations=combinations_of(subject),
        inhibition=inhibition_of(made),
        accuracy=accuracy_of(made, subject.cell, subject.limit),
        notes=_notes(subject),
    )


def inhibition_of(study: Study) -> list[Inhibition]:
    """Return the inhibitory inputs of a study in words."""
    found, cell = [], study.cell
    for name in study.inhibitory:
        it = study.inputs[name]
        reversal = it.receptor.reversal_at(cell.rest)
        called = effect(reversal, cell.rest, cell.threshold.mean)
        drivers = tuple(drive.input for drive in it.driven_by)
        told, assumed = _chloride(it.receptor, reversal)
        found.append(Inhibition(name, reversal, called, DOES[called], told, assumed, drivers))
    return found


def _chloride(receptor: Receptor, reversal: float) -> tuple[str, bool]:
    """Return the internal chloride in words, and whether anything was assumed for it."""
    if receptor.potassium is not None:
        return "", False
    given = receptor.chloride
    if given is None or receptor.temperature is None:
        return chloride_sentence(reversal, OUTSIDE, TEMPERATURE), True
    told = chloride_sentence(reversal, given.outside, receptor.temperature, given.bicarbonate)
    return told, False


def _notes(subject: Subject) -> tuple[str, ...]:
    return tuple(
        f"{name}: its baseline EPSP could not be recruited in the nominal cell"
        for name in subject.cell.short
    )
