"""Reversal potentials and currents from concentrations, and the way back to internal chloride.

    Nernst       E = (RT/zF) ln(outside/inside)
    GHK voltage  V = (RT/F) ln[(sum P+ outside + sum P- inside)/(sum P+ inside + sum P- outside)]
    GHK current  I = P z F u (inside - outside e^-u)/(1 - e^-u),    u = zFV/RT
    GABA-A       E = (RT/F) ln[(Cl_i + r HCO3_i)/(Cl_o + r HCO3_o)],    r = P_HCO3/P_Cl

Concentrations in mM, potentials in mV, temperatures in C, none with a default: a table of 18 C read
at 25 C is off by 1 or 2 mV. A number out of its range is a ValueError that names it and says what
is allowed; a depolarising reversal is in range, and has a name (`effect`).

References
----------
Constants: CODATA 2018. Nernst and GHK: Goldman DE (1943) J Gen Physiol 27:37; Hodgkin AL, Katz B
(1949) J Physiol 108:37. Bicarbonate: Kaila K (1994) Prog Neurobiol 42:489. (All from memory.)
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]

GAS, FARADAY, ZERO_CELSIUS = 8.314462618, 96485.33212, 273.15  # J/(mol K), C/mol, K
COLDEST, WARMEST = 0.0, 45.0  # C, inclusive: from an ice bath to beyond what a mammal survives


def _require(name: str, values: ArrayLike, good: ArrayLike, unit: str, allowed: str) -> Floats:
    """Return the values as floats, or refuse the first that is not good."""
    found, kept = np.broadcast_arrays(np.asarray(values, float), np.asarray(good, bool))
    if not np.all(kept):
        shown = f"{name} = {found[~kept].flat[0]:g} {unit}".rstrip()
        raise ValueError(f"{shown}: must be {allowed}")
    return np.asarray(values, float)


def _concentration(name: str, c: ArrayLike) -> Floats:
    good = np.isfinite(c) & np.greater(c, 0)
    return _require(name, c, good, "mM", "above 0 mM and finite")


def _permeability(p: ArrayLike, unit: str, name: str = "permeability") -> Floats:
    good = np.isfinite(p) & np.greater_equal(p, 0)
    return _require(name, p, good, unit, "0 or more and finite")


def _potential(name: str, v: ArrayLike) -> Floats:
    return _require(name, v, np.less_equal(np.abs(v), 1000), "mV", "from -1000 mV to 1000 mV")


def _valence(z: ArrayLike) -> Floats:
    good = np.isfinite(z) & np.not_equal(z, 0) & np.equal(z, np.rint(z))
    return _require("valence", z, good, "", "a whole number other than 0")


def thermal_voltage(temperature: ArrayLike) -> Floats:
    """Return RT/F, the e-fold slope of a monovalent ion, mV.

    Parameters
    ----------
    temperature : array_like, C, 0 to 45
    """
    good = np.greater_equal(temperature, COLDEST) & np.less_equal(temperature, WARMEST)
    t = _require("temperature", temperature, good, "C", f"from {COLDEST:g} C to {WARMEST:g} C")
    return np.asarray(1e3 * GAS / FARADAY * (ZERO_CELSIUS + t))


def nernst(
    inside: ArrayLike, outside: ArrayLike, valence: ArrayLike, temperature: ArrayLike
) -> Floats:
    """Return the potential at which an ion is in equilibrium, mV.

    Parameters
    ----------
    inside, outside : array_like, mM, above 0
    valence : array_like, whole and not 0
    temperature : array_like, C, 0 to 45
    """
    folds = np.log(_concentration("outside", outside)) - np.log(_concentration("inside", inside))
    return np.asarray(thermal_voltage(temperature) * folds / _valence(valence))


def ghk_voltage(
    permeability: ArrayLike,
    inside: ArrayLike,
    outside: ArrayLike,
    valence: ArrayLike,
    temperature: ArrayLike,
) -> Floats:
    """Return the potential at which several monovalent ions carry no net current, mV.

    Parameters
    ----------
    permeability : array_like, shape (..., ion), 0 or more, not all 0; only ratios matter
    inside, outside : array_like, shape (..., ion), mM, above 0
    valence : array_like, shape (..., ion), 1 or -1
    temperature : array_like, shape (...), C, 0 to 45
    """
    i, o = _concentration("inside", inside), _concentration("outside", outside)
    z = _require("valence", valence, np.equal(np.abs(valence), 1), "", "1 or -1")
    p = _permeability(permeability, "")
    most = p.max(axis=-1, keepdims=True)
    share = p / _require("largest permeability", most, most > 0, "", "above 0")
    towards, away = np.where(z > 0, o, i), np.where(z > 0, i, o)
    folds = np.log((share * towards).sum(axis=-1)) - np.log((share * away).sum(axis=-1))
    return np.asarray(thermal_voltage(temperature) * folds)


def ghk_current(
    v: ArrayLike,
    permeability: ArrayLike,
    inside: ArrayLike,
    outside: ArrayLike,
    valence: ArrayLike,
    temperature: ArrayLike,
) -> Floats:
    """Return the constant-field current of one ion, positive outward, uA/cm^2.

    Parameters
    ----------
    v : array_like, mV, -1000 to 1000
    permeability : array_like, cm/s, 0 or more
    inside, outside, valence, temperature
        As for `nernst`.
    """
    i, o = _concentration("inside", inside), _concentration("outside", outside)
    z, p = _valence(valence), _permeability(permeability, "cm/s")
    u = z * _potential("v", v) / thermal_voltage(temperature)
    # smooth at V = 0; b(-u) = b(u) + u, and of the two forms this one cancels at the reversal only
    flux = (i - o) * _b(np.abs(u)) + np.where(u > 0, i, o) * u
    return np.asarray(p * z * FARADAY * flux)


def _b(x: Floats) -> Floats:
    """Return x/(e^x - 1) for x >= 0, 1 at x = 0."""
    safe = np.where(x == 0, 1.0, x)
    with np.errstate(over="ignore"):  # far out nothing is left of it, which is what x/inf says
        return np.where(x == 0, 1.0, safe / np.expm1(safe))


@dataclass(frozen=True)
class Bicarbonate:
    """What GABA-A receptors let through besides chloride.

    Parameters
    ----------
    inside, outside : float, mM, above 0
    permeability_ratio : float, 0 or more
        P_HCO3/P_Cl, about 0.2 to 0.4: Kaila 1994 (from memory, fairly sure).
    """

    inside: float
    outside: float
    permeability_ratio: float

    def __post_init__(self) -> None:
        _concentration("bicarbonate inside", self.inside)
        _concentration("bicarbonate outside", self.outside)
        _permeability(self.permeability_ratio, "", "permeability ratio")

    def as_chloride(self) -> tuple[float, float]:
        """Return mM of chloride to the same effect, inside and outside."""
        return self.permeability_ratio * self.inside, self.permeability_ratio * self.outside


NONE = Bicarbonate(1.0, 1.0, 0.0)  # whatever there is, none of it passes


def gaba_reversal(
    inside: ArrayLike, outside: ArrayLike, temperature: ArrayLike, bicarbonate: Bicarbonate = NONE
) -> Floats:
    """Return the reversal of a GABA-A receptor, mV; without bicarbonate that of chloride.

    Parameters
    ----------
    inside, outside : array_like, mM of chloride, above 0
    temperature : array_like, C, 0 to 45
    bicarbonate : Bicarbonate, optional
    """
    i, o = _concentration("chloride inside", inside), _concentration("chloride outside", outside)
    more_i, more_o = bicarbonate.as_chloride()
    return nernst(i + more_i, o + more_o, -1, temperature)


def implied_chloride(
    reversal: ArrayLike, outside: ArrayLike, temperature: ArrayLike, bicarbonate: Bicarbonate = NONE
) -> Floats:
    """Return the internal chloride, mM, at which a GABA-A receptor has this reversal.

    It is refused where bicarbonate alone keeps the reversal above what is asked for.

    Parameters
    ----------
    reversal : array_like, mV, -1000 to 1000
    outside, temperature, bicarbonate
        As for `gaba_reversal`.
    """
    e, slope = _potential("reversal", reversal), thermal_voltage(temperature)
    more_i, more_o = bicarbonate.as_chloride()
    total = _concentration("chloride outside", outside) + more_o
    inside = np.exp(e / slope) * total - more_i
    with np.errstate(divide="ignore"):  # without bicarbonate there is no lowest reversal
        lowest = np.max(slope * np.log(more_i / total))
    allowed = f"above {lowest:.2f} mV, which bicarbonate gives with no chloride inside"
    _require("reversal", e, inside > 0, "mV", allowed)
    return np.asarray(inside)


def chloride_sentence(
    reversal: float, outside: float, temperature: float, bicarbonate: Bicarbonate = NONE
) -> str:
    """Return in words the internal chloride that an inhibitory reversal implies, or that none does.

    Examples
    --------
    >>> chloride_sentence(-80.0, 130.0, 37.0)
    'E_inh = -80 mV implies 6.52 mM internal chloride (130 mM outside, 37 C)'
    """
    alone = float(implied_chloride(reversal, outside, temperature))
    text = f"E_inh = {reversal:g} mV implies {alone:.3g} mM internal chloride"
    text += f" ({outside:g} mM outside, {temperature:g} C)"
    if bicarbonate.permeability_ratio == 0:
        return text
    try:
        also = f"{float(implied_chloride(reversal, outside, temperature, bicarbonate)):.3g} mM"
    except ValueError as error:
        also = f"none, the reversal {str(error).partition(': ')[2]}"
    text += f"; with bicarbonate ({bicarbonate.inside:g} mM inside, {bicarbonate.outside:g} mM"
    return f"{text} outside, permeability ratio {bicarbonate.permeability_ratio:g}): {also}"


def effect(reversal: float, rest: float, threshold: float, within: float = 1.0) -> str:
    """Return what a synapse of this reversal does to a cell at rest; every reversal has a name.

    "hyperpolarising"; "shunting", `within` mV of rest (ours); "depolarising below threshold",
    which cannot fire the cell alone (a reversal at threshold included); or "depolarising above
    threshold". All are in mV, and `rest` is below `threshold`.
    """
    for name, value in (("reversal", reversal), ("rest", rest), ("threshold", threshold)):
        _potential(name, value)
    _require("rest", rest, rest < threshold, "mV", f"below the threshold, {threshold:g} mV")
    if abs(reversal - rest) <= within:
        return "shunting"
    if reversal < rest:
        return "hyperpolarising"
    return f"depolarising {'below' if reversal <= threshold else 'above'} threshold"
