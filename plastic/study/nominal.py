"""The nominal cell of a study: the one whose every parameter is what the study states."""

from __future__ import annotations

import numpy as np

from plastic.engine.layout import Floats
from plastic.study.model import Study
from plastic.study.population import Population, populate


def nominal(study: Study) -> Population:
    """Return the population of one cell in which nothing is spread.

    Input resistance, threshold, release probability and recruited sites are at the stated means;
    with a ``baseline_epsp`` the sites are recruited to its target.
    """
    cell, compare = study.cell, study.compare
    threshold = cell.threshold.model_copy(update={"sd": 0.0})
    inputs = {}
    for name, it in study.inputs.items():
        even = it.release.probability.model_copy(update={"cv": 0.0})
        release = it.release.model_copy(update={"probability": even})
        epsp = it.baseline_epsp and it.baseline_epsp.model_copy(update={"cv": 0.0})
        inputs[name] = it.model_copy(update={"release": release, "baseline_epsp": epsp})
    bare = cell.model_copy(update={"threshold": threshold, "input_resistance_cv": 0.0})
    one = study.model_copy(
        update={
            "cells": 1,
            "cell": bare,
            "inputs": inputs,
            "compare": compare.model_copy(update={"amplitude_cv": 0.0}),
        }
    )
    return populate(one)


def mean_conductance(population: Population) -> Floats:
    """Return the mean conductance (nS) that each contact opens, (contact,), of the first cell.

    N p q, the quantum being what is left of it behind the neck of the spine.
    """
    quantum = population.quantum[0]
    neck = np.array([contact.neck for contact in population.scene.contacts]) * 1e-3
    seen = quantum / (1.0 + quantum * neck)
    return np.asarray(population.sites[0] * population.probability[0] * seen, dtype=float)
