"""Checked values at the border: what a user writes becomes a float inside, or one clear refusal.

Pydantic carries the checks; the messages are ours. A `Part` is a frozen table of known keys; a
`Quantity` is text with a unit that becomes a float in the internal unit; `refusal` and `unknown`
are what a check raises, with the path of the key below the place where it stands.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Annotated, Any

from pydantic import (
    AfterValidator,
    BaseModel,
    ConfigDict,
    GetCoreSchemaHandler,
    StrictBool,
    StringConstraints,
    model_validator,
)
from pydantic.fields import FieldInfo
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from plastic.units import INTERNAL, QuantityError, example, number_in

Key = str | int

#: what a quantity looks like before its unit is read: a point for decimals, no list separators
_QUANTITY = re.compile(
    r"\s*[-+]?(\d+\.?\d*|\.\d+|inf|nan)([eE][-+]?\d+)?(\s*[^\d\s.,;+-][^,;]*)?\s*"
)

#: a key that TOML reads without quotation marks, and what pydantic calls a key itself
_BARE = re.compile(r"[\w-]+|\[key\]")


def key_text(path: Iterable[Key]) -> str:
    """Return the path of a key as people write it: ``input.far.driven_by[0].delay``."""
    text = ""
    for key in path:
        quoted = isinstance(key, str) and not _BARE.fullmatch(key)
        text += f"[{key}]" if isinstance(key, int) else f'."{key}"' if quoted else f".{key}"
    return text.removeprefix(".")


def refusal(allowed: str, *, path: Sequence[Key] = (), **value: Any) -> PydanticCustomError:
    """Return the error of a value that cannot be used.

    Parameters
    ----------
    allowed : str
        What may stand there.
    path : sequence of key or index
        Where, below the place of the check that raises.
    value : object, optional
        What stands there, as the keyword ``value``; by default what the check was given.
    """
    return PydanticCustomError("refused", "{allowed}", {"allowed": allowed, "path": path, **value})


def unknown(
    kind: str, name: str, known: Iterable[str], *, path: Sequence[Key] = ()
) -> PydanticCustomError:
    """Return the error of a name that is not among those known."""
    return PydanticCustomError(
        "unknown_name",
        "no {kind} is called {name}",
        {"kind": kind, "name": str(name), "known": sorted(known), "path": path},
    )


@dataclass(frozen=True)
class Quantity:
    """A number with a unit, as text; a float in the internal unit of `dimension` inside.

    ``low`` and ``high`` are inclusive bounds, ``above`` and ``below`` exclusive ones; ``usual`` is
    the range of common practice, outside which a value is possible and told.
    """

    dimension: str
    low: float = -math.inf
    high: float = math.inf
    above: float = -math.inf
    below: float = math.inf
    usual: tuple[float, float] | None = None

    @property
    def hint(self) -> str:
        """What to write, for messages."""
        kind = "a number" if self.dimension == "number" else f"a {self.dimension}"
        return f"{kind} such as {example(self.dimension)!r}".replace("'0.5'", "0.5")

    @property
    def allowed(self) -> str:
        """The allowed range, in words."""
        parts = [
            (self.low, "at least"),
            (self.above, "above"),
            (self.high, "at most"),
            (self.below, "below"),
        ]
        words = [f"{word} {self.shown(bound)}" for bound, word in parts if math.isfinite(bound)]
        usual = f"; {self.practice}" if self.usual else ""
        return "must be " + " and ".join(words) + usual

    @property
    def practice(self) -> str:
        """The usual range, in words; empty where there is none."""
        if self.usual is None:
            return ""
        low, high = self.usual
        return f"{low:g} to {self.shown(high)} is usual (common practice)"

    def shown(self, value: float) -> str:
        """Return a value with the internal unit, as people write it."""
        unit = INTERNAL[self.dimension].replace("**", "^").replace("*", " ")
        return f"{value:g} {unit}".rstrip()

    def read(self, text: Any) -> float:
        """Return the float in the internal unit, or raise a refusal."""
        if isinstance(text, str) and not _QUANTITY.fullmatch(text):
            raise refusal(f"no quantity that can be read (write {self.hint})")
        try:
            value = number_in(text, self.dimension)
        except QuantityError as error:
            raise refusal(str(error).removeprefix(f"{text!r} is ")) from None
        inside = self.low <= value <= self.high and self.above < value < self.below
        if not inside:
            raise refusal(self.allowed)
        return value

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        """Let pydantic read the field with `read` and nothing else."""
        return core_schema.no_info_plain_validator_function(self.read)


@dataclass(frozen=True)
class Count:
    """A whole number between two inclusive bounds."""

    low: int
    high: int

    @property
    def hint(self) -> str:
        """What to write, for messages."""
        return f"a whole number from {self.low} to {self.high}"

    def read(self, value: Any) -> int:
        """Return the whole number, or raise a refusal."""
        if isinstance(value, bool) or not isinstance(value, int):
            raise refusal(f"must be {self.hint}")
        if not self.low <= value <= self.high:
            raise refusal(f"must be {self.hint}")
        return value

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        """Let pydantic read the field with `read` and nothing else."""
        return core_schema.no_info_plain_validator_function(self.read)


#: ms, about eleven days: longer than any recording
LONGEST = 1e9

Time = Annotated[float, Quantity("time", low=0, high=LONGEST)]
Duration = Annotated[float, Quantity("time", above=0, high=LONGEST)]
Rate = Annotated[float, Quantity("rate", above=0)]
POTENTIAL = Quantity("potential", low=-200, high=200)
Potential = Annotated[float, POTENTIAL]
Text = Annotated[str, StringConstraints(strict=True, min_length=1, strip_whitespace=True)]
Flag = StrictBool


def _distinct(values: tuple[str, ...]) -> tuple[str, ...]:
    for k, value in enumerate(values):
        if value in values[:k]:
            raise refusal("stands there twice", path=(k,), value=value)
    return values


#: a list of different names
Names = Annotated[tuple[Text, ...], AfterValidator(_distinct)]


def lone(key: str) -> Callable[[Any], Any]:
    """Return a reader that takes a bare value for the `key` of a table of one."""

    def read(value: Any) -> Any:
        return value if isinstance(value, (Mapping, BaseModel)) else {key: value}

    return read


def checked_keys(fields: Mapping[str, FieldInfo], data: Any) -> Any:
    """Refuse keys that are not known and required keys that are not there; return `data`."""
    if not isinstance(data, Mapping):
        return data
    known = {str(field.validation_alias or name): field for name, field in fields.items()}
    for key in data:
        if key not in known:
            raise unknown("key", key, known)
    for key, field in known.items():
        if field.is_required() and key not in data:
            hints = [m.hint for m in field.metadata if isinstance(m, (Quantity, Count))]
            hint = (hints or [field.description or "see the starter study"])[0]
            raise refusal(f"missing; {hint}", path=(key,), value=None)
    return data


class Part(BaseModel):
    """A frozen table of known keys."""

    model_config = ConfigDict(frozen=True, extra="forbid", arbitrary_types_allowed=True)

    @model_validator(mode="before")
    @classmethod
    def _check_keys(cls, data: Any) -> Any:
        return checked_keys(cls.model_fields, data)
