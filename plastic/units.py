"""Units at the border: quantities enter as text with a unit and are floats inside.

Inside, always: ms, mV, nS, pA, pF, um, MOhm, Hz, mM, degC. A membrane's specific values keep the
units the trade writes them in: ohm cm^2, uF/cm^2, ohm cm.
"""

from __future__ import annotations

import functools
import math
import re
from typing import Any

import pint

from plastic.errors import PlasticError

#: dimension (as said in messages) -> internal unit
INTERNAL = {
    "time": "ms",
    "potential": "mV",
    "conductance": "nS",
    "current": "pA",
    "capacitance": "pF",
    "length": "um",
    "resistance": "Mohm",
    "rate": "Hz",
    "velocity": "um/ms",
    "concentration": "mM",
    "temperature": "degC",
    "membrane resistance": "ohm*cm**2",
    "membrane capacitance": "uF/cm**2",
    "axial resistivity": "ohm*cm",
    "number": "",
}


class QuantityError(PlasticError):
    """Text that is no quantity of the wanted dimension."""

    def __init__(self, text: object, dimension: str, reason: str) -> None:
        self.text, self.dimension, self.reason = text, dimension, reason
        super().__init__(f"{text!r} is {reason}")


@functools.cache
def _registry() -> pint.UnitRegistry[float]:
    registry: pint.UnitRegistry[float] = pint.UnitRegistry(cache_folder=None)
    registry.define("@alias micrometer = um")
    return registry


def example(dimension: str) -> str:
    """Return a well-formed quantity of `dimension`, for messages."""
    return {
        "time": "10 ms",
        "potential": "-68 mV",
        "conductance": "0.3 nS",
        "current": "200 pA",
        "capacitance": "100 pF",
        "length": "320 um",
        "resistance": "150 Mohm",
        "rate": "20 Hz",
        "velocity": "0.5 m/s",
        "concentration": "130 mM",
        "temperature": "32 degC",
        "membrane resistance": "15 kohm cm^2",
        "membrane capacitance": "1 uF/cm^2",
        "axial resistivity": "150 ohm cm",
        "number": "0.5",
    }[dimension]


def _spaced(text: str) -> str:
    """Turn the way the trade writes units ("kohm cm^2") into products ("kohm*cm^2").

    Raises
    ------
    ValueError
        When the text does not start with one number ("1,5 ms", "ms").
    """
    match = re.fullmatch(
        r"\s*([-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?|[-+]?nan|[-+]?inf)\s*(.*?)\s*", text
    )
    if match is None or re.match(r"[\d,.+-]", match[2]):
        raise ValueError("it starts with no number")
    unit = (
        re.sub(r"(?<=[\w)\d])\s+(?=[A-Za-zµΩ])", "*", match[2])
        .replace("µ", "u")
        .replace("Ω", "ohm")
    )
    unit = unit.replace("Ohm", "ohm")
    return f"{match[1]} {unit}" if unit else match[1]


def number_in(text: object, dimension: str) -> float:
    """Return the quantity `text` as a float in the internal unit of `dimension`.

    Parameters
    ----------
    text : str, or a plain number where `dimension` is "number"
    dimension : str
        A key of `INTERNAL`.

    Raises
    ------
    QuantityError
        No number, no unit, a unit of another dimension, or not finite.

    Examples
    --------
    >>> number_in("0.5 m/s", "velocity")
    500.0
    """
    wanted = INTERNAL[dimension]
    if isinstance(text, bool) or not isinstance(text, (str, int, float)):
        raise QuantityError(text, dimension, f"no quantity (write it like {example(dimension)!r})")
    if not isinstance(text, str):
        zero = text == 0 and dimension != "temperature"  # whose scales differ in where 0 is
        if wanted and not zero:
            raise QuantityError(
                text, dimension, f"without a unit (write it like {example(dimension)!r})"
            )
        value = float(text)
    else:
        value = _parsed(text, dimension, wanted)
    if not math.isfinite(value):
        raise QuantityError(text, dimension, "not a finite number")
    return value


def _quantity(text: str) -> Any:
    try:
        return _registry().Quantity(text)
    except pint.OffsetUnitCalculusError:  # "32 degC" is no product: the scale has its own zero
        number, unit = text.split(" ", 1)
        return _registry().Quantity(float(number), unit)


def _parsed(text: str, dimension: str, wanted: str) -> float:
    hint = f"(write it like {example(dimension)!r})"
    try:
        quantity = _quantity(_spaced(text))
    except Exception:  # pint raises many kinds, all meaning the same to a user
        raise QuantityError(text, dimension, f"no quantity that can be read {hint}") from None
    try:
        return float(quantity.to(wanted).magnitude)
    except (pint.DimensionalityError, pint.OffsetUnitCalculusError):
        found = f"{quantity.units:~}" or "no unit"
        raise QuantityError(text, dimension, f"in {found}, not a {dimension} {hint}") from None
