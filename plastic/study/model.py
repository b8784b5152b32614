"""A study: one cell, its inputs, its protocols and what is compared, in internal units."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, Literal

from pydantic import (
    AfterValidator,
    Field,
    PlainValidator,
    PrivateAttr,
    ValidationInfo,
    field_validator,
    model_validator,
)

from plastic.errors import Misfit
from plastic.protocols import CONTROLS, Protocol, Schedule, controlled
from plastic.quantities import (
    Count,
    Duration,
    Flag,
    Names,
    Part,
    Quantity,
    Text,
    checked_keys,
    refusal,
    unknown,
)
from plastic.routes import Mixture
from plastic.study.cell import Cell, Spread
from plastic.study.choices import RuleChoice, read_protocol, read_route, read_rule
from plastic.study.inputs import Input


def _distinct_rules(chosen: tuple[RuleChoice, ...]) -> tuple[RuleChoice, ...]:
    _refuse_twins([choice.label for choice in chosen])
    return chosen


def _distinct_routes(chosen: tuple[Mixture, ...]) -> tuple[Mixture, ...]:
    _refuse_twins([mixture.name for mixture in chosen])
    return chosen


def _refuse_twins(labels: list[str]) -> None:
    for k, label in enumerate(labels):
        if label in labels[:k]:
            raise refusal(
                "is the label of two entries; give one another with label = '...'",
                path=(k,),
                value=label,
            )


def _known_controls(names: tuple[str, ...]) -> tuple[str, ...]:
    for k, name in enumerate(names):
        if name not in CONTROLS:
            raise unknown("control", name, CONTROLS, path=(k,))
    return names


class Criterion(Part):
    """What counts as learned: ``input`` alone fires the cell with this probability."""

    input: Text = Field(description="the name of a learning input")
    alone_fires: Annotated[float, Quantity("number", above=0, below=1)] = 0.5


class Compare(Part):
    """What is compared with what, and what counts as learned.

    Parameters
    ----------
    controls_on : label of a route, optional
        The route on which the controls run; by default the first.
    amplitude_cv : float
        Spread over cells of the size of a rule's changes.
    expression : "declared" or "immediate"
        Whether routes keep their delays and time constants.
    """

    learns: Names = Field(description="a list of inputs such as ['far']", min_length=1)
    rules: Annotated[
        tuple[Annotated[RuleChoice, PlainValidator(read_rule)], ...],
        AfterValidator(_distinct_rules),
    ] = Field(description="a list of rules such as ['pair_timing']", min_length=1)
    routes: Annotated[
        tuple[Annotated[Mixture, PlainValidator(read_route)], ...],
        AfterValidator(_distinct_routes),
    ] = Field(description="a list of routes such as ['quantal_size']", min_length=1)
    match: Literal["same_factor", "sensitivity"] = "same_factor"
    at_ceiling: Literal["stop", "hidden"] = "stop"
    controls: Annotated[Names, AfterValidator(_known_controls)] = ()
    controls_on: Text | None = None
    criterion: Criterion = Field(description="a table such as { input = 'far', alone_fires = 0.5 }")
    amplitude_cv: Spread = 0.2
    expression: Literal["declared", "immediate"] = "declared"

    @model_validator(mode="before")
    @classmethod
    def _check_keys(cls, data: Any) -> Any:
        """With one learning input, the criterion is about that one."""
        if isinstance(data, Mapping) and "criterion" not in data:
            learns = data.get("learns")
            if not isinstance(learns, list | tuple) or len(learns) < 2:
                only = learns[0] if isinstance(learns, list | tuple) and learns else "none"
                data = {**data, "criterion": {"input": only}}
        return checked_keys(cls.model_fields, data)

    @property
    def control_route(self) -> Mixture:
        """The route on which the controls run."""
        chosen = [r for r in self.routes if r.name == self.controls_on]
        return (chosen or list(self.routes))[0]


class Study(Part):
    """A whole study; made by `plastic.study.file.load_study` and frozen.

    Attributes
    ----------
    dt : ms
        The step of the simulation.
    deterministic : bool
        Whether every release is replaced by its mean.
    text, file : str
        What was read, and the file it came from.
    """

    title: Text = Field(description="a title in quotes")
    seed: Annotated[int, Count(0, 2**53)] = 1
    cells: Annotated[int, Count(1, 1_000_000_000)] = 100
    dt: Duration = 0.1
    deterministic: Flag = False
    cell: Cell = Field(description="a table [cell]")
    inputs: dict[Text, Input] = Field(
        validation_alias="input", description="a table [input.NAME] for each input", min_length=1
    )
    protocols: dict[Text, Annotated[Protocol, PlainValidator(read_protocol)]] = Field(
        validation_alias="protocol",
        description="a table [protocol.NAME] for each protocol",
        min_length=1,
    )
    compare: Compare = Field(description="a table [compare]")

    _text: str = PrivateAttr("")
    _file: str = PrivateAttr("")

    def model_post_init(self, context: Any) -> None:
        """Keep the source that was read."""
        self._text = (context or {}).get("text", "")
        self._file = (context or {}).get("file", "")

    @field_validator("inputs")
    @classmethod
    def _kinds(cls, inputs: dict[str, Input], info: ValidationInfo) -> dict[str, Input]:
        """Say of every input whether it excites or inhibits."""
        cell = info.data.get("cell")
        if cell is None:
            return inputs
        found: dict[str, Input] = {}
        for name, it in inputs.items():
            below = it.receptor.reversal_at(cell.rest) <= cell.threshold.mean
            kind = it.kind or ("inhibitory" if below else "excitatory")
            found[name] = it.model_copy(update={"kind": kind})
        return found

    @property
    def text(self) -> str:
        """The source of the study."""
        return self._text

    @property
    def file(self) -> str:
        """The file the study came from."""
        return self._file

    @property
    def inhibitory(self) -> list[str]:
        """The names of the inhibitory inputs."""
        return [name for name, it in self.inputs.items() if it.kind == "inhibitory"]

    def schedules(self) -> dict[str, Schedule]:
        """Return the exact times of every protocol, each followed by its controls.

        A control that a protocol leaves no room for (nothing to pair with, too fast) is left out;
        `controls_left_out` says which and why.
        """
        return self._arms()[0]

    def controls_left_out(self) -> dict[str, str]:
        """Return why a control of a protocol does not exist, by "protocol, control"."""
        return self._arms()[1]

    def _arms(self) -> tuple[dict[str, Schedule], dict[str, str]]:
        found: dict[str, Schedule] = {}
        left_out: dict[str, str] = {}
        for name, protocol in self.protocols.items():
            schedule = protocol.schedule(name, learns=self.compare.learns)
            found[name] = schedule
            for control in self.compare.controls:
                try:
                    made = controlled(schedule, control, self.compare.learns)
                except Misfit as reason:
                    left_out[f"{name}, {control.replace('_', ' ')}"] = str(reason)
                else:
                    found[made.name] = made
        return found, left_out
