"""Parameters: declared once with value, unit, bounds and source; read by everything else.

A part (rule, route, protocol) is one final class whose *instance is its frozen parameters*:

    class MyRule(Rule):
        tau: float = parameter(20.0, "ms", low=0.001, source="a paper")

    MyRule(tau=15.0).tau        # 15.0; bounds are checked, assignment is refused
    MyRule.parameters["tau"]    # the declaration: unit, bounds, source
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, ClassVar, Self, dataclass_transform

from plastic.errors import PlasticError, UnknownName


class ParameterError(PlasticError):
    """A parameter value outside what its declaration allows."""

    def __init__(self, owner: str, name: str, value: Any, allowed: str) -> None:
        self.owner, self.name, self.value, self.allowed = owner, name, value, allowed
        super().__init__(f"{owner}: {name} = {value!r} is not {allowed}")


@dataclass(frozen=True)
class Parameter:
    """The declaration of one number: default, unit, inclusive bounds and where it comes from."""

    default: float
    unit: str
    low: float = -math.inf
    high: float = math.inf
    source: str = ""
    name: str = ""

    @property
    def allowed(self) -> str:
        """The allowed range, in words."""
        unit = "" if self.unit == "1" else f" {self.unit}"
        if math.isinf(self.low) and math.isinf(self.high):
            return "a finite number"
        if math.isinf(self.high):
            return f"at least {self.low:g}{unit}"
        if math.isinf(self.low):
            return f"at most {self.high:g}{unit}"
        return f"in [{self.low:g}, {self.high:g}]{unit}"

    def check(self, owner: str, value: Any) -> float:
        """Return `value` as a float, or raise `ParameterError`."""
        try:
            number = float(value)
        except (TypeError, ValueError):
            raise ParameterError(owner, self.name, value, "a number") from None
        if not math.isfinite(number) or not self.low <= number <= self.high:
            raise ParameterError(owner, self.name, value, self.allowed)
        return number


def parameter(
    default: float,
    unit: str,
    *,
    low: float = -math.inf,
    high: float = math.inf,
    source: str = "",
) -> Any:
    """Declare a parameter in the body of a part's class.

    Parameters
    ----------
    default : float
        Value when none is given, in `unit`.
    unit : str
        One of the internal units ("ms", "mV", "nS", "um", "Hz", ...), or "1".
    low, high : float
        Inclusive bounds.
    source : str
        Where the default comes from: a paper, "common practice", "from memory", or "ours".
    """
    return Parameter(float(default), unit, float(low), float(high), source)


@dataclass_transform(kw_only_default=True, frozen_default=True, field_specifiers=(parameter,))
class Parametrised:
    """Base of every part whose instance is its frozen parameters.

    ``sets`` holds named parameter sets from the literature; ``Part.from_set("name")`` uses one.
    """

    parameters: ClassVar[Mapping[str, Parameter]] = {}
    sets: ClassVar[Mapping[str, Mapping[str, float]]] = {}

    def __init_subclass__(cls, **kwargs: Any) -> None:
        super().__init_subclass__(**kwargs)
        found = dict(cls.parameters)
        for name, value in list(vars(cls).items()):
            if isinstance(value, Parameter):
                found[name] = Parameter(
                    value.default, value.unit, value.low, value.high, value.source, name
                )
                delattr(cls, name)
        cls.parameters = found

    def __init__(self, **given: float) -> None:
        owner = type(self).__name__
        for name in given:
            if name not in self.parameters:
                raise UnknownName("parameter", name, self.parameters, where=owner)
        for name, declared in self.parameters.items():
            value = declared.check(owner, given.get(name, declared.default))
            object.__setattr__(self, name, value)

    def __setattr__(self, name: str, value: Any) -> None:
        raise AttributeError(f"{type(self).__name__}.{name} is frozen; make a new instance instead")

    @classmethod
    def from_set(cls, name: str, **given: float) -> Self:
        """Return an instance with the named literature set, changed by `given`."""
        if name not in cls.sets:
            raise UnknownName("parameter set", name, cls.sets, where=cls.__name__)
        return cls(**{**cls.sets[name], **given})

    @property
    def values(self) -> dict[str, float]:
        """The parameters by name, in order of declaration."""
        return {name: getattr(self, name) for name in self.parameters}

    def __eq__(self, other: object) -> bool:
        return type(other) is type(self) and self.values == other.values

    def __hash__(self) -> int:
        return hash((type(self), tuple(self.values.items())))

    def __repr__(self) -> str:
        inside = ", ".join(f"{name}={value:g}" for name, value in self.values.items())
        return f"{type(self).__name__}({inside})"
