"""Spike times: recorded times, read from tables of text."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

from pydantic import Field, PrivateAttr, field_validator, model_validator

from plastic.errors import DataError, UnknownName
from plastic.protocols._interface import Induction, Named, Protocol, Repeat
from plastic.protocols._recorded import read_times
from plastic.protocols._schedule import INJECTED
from plastic.quantities import Text, refusal
from plastic.units import QuantityError, number_in

SECOND = 1000.0


class SpikeTimes(Protocol):
    """Recorded spike times of one or several inputs, replayed as the induction.

    ``files = { far = "far.csv", injected = "cell.csv" }`` with ``unit = "s"``. Times count from the
    start of the induction; ``column`` names the column of a table with several. The whole recording
    is one repeat, ending at the next full second after its last event, unless ``repeat`` replays
    it. Files are looked for beside the study.
    """

    files: dict[Text, Text] = Field(
        description="a table of files such as { far = 'far.csv' }", min_length=1
    )
    unit: Text = Field(description="the unit of the times in the files, such as 's' or 'ms'")
    column: Text | None = None
    repeat: Repeat | None = None

    _recorded: dict[str, tuple[float, ...]] = PrivateAttr(default_factory=dict)

    @field_validator("unit")
    @classmethod
    def _is_a_time(cls, value: str) -> str:
        try:
            number_in(f"1 {value}", "time")
        except QuantityError:
            raise refusal("must be a unit of time such as 's' or 'ms'") from None
        return value

    def model_post_init(self, context: Any) -> None:
        """Read the files, relative to ``base`` of the validation context."""
        base = Path((context or {}).get("base", "."))
        self._recorded = {name: self._read(name, base / file) for name, file in self.files.items()}

    def _read(self, name: str, path: Path) -> tuple[float, ...]:
        """Return the times of one file; what is wrong with it is said at its key."""
        try:
            return read_times(path, unit=self.unit, column=self.column)
        except (DataError, UnknownName) as error:
            told = str(error).removeprefix(f"{path.name}: ")
            raise refusal(told, path=("files", name), value=self.files[name]) from None

    @model_validator(mode="after")
    def _fits_into_its_repeat(self) -> SpikeTimes:
        if self.repeat is None:
            return self
        for name, times in self._recorded.items():
            if times[-1] >= self.repeat.every:
                raise refusal(
                    f"the last time, {times[-1]:g} ms, must come before the next repeat, after "
                    f"{self.repeat.every:g} ms",
                    path=("files", name),
                    value=self.files[name],
                )
        return self

    def named_inputs(self) -> Named:
        """Return every input the protocol names, by the path of the key that names it."""
        own: Named = {("files", name): name for name in self.files if name != INJECTED}
        return {**own, **super().named_inputs()}

    def induction(self) -> Induction:
        """Return the recording, once or repeated."""
        if self.repeat is not None:
            return Induction(self._recorded, self.repeat.times, self.repeat.every)
        last = max(times[-1] for times in self._recorded.values())
        return Induction(self._recorded, 1, SECOND * (math.floor(last / SECOND) + 1))
