"""How to write a rule: the implementer's manual.

1.  A rule is one final class in one file; its instance is its frozen parameters, its methods are
    plain functions of numbers. The file's name is the public name, the class its CamelCase.

2.  Parameters are declared once: ``a_plus: float = parameter(0.0065, "1", low=0, source="...")``.
    Hooks read them as ``self.a_plus``.

3.  Variables are declared once, in the class body:

    ``w = weight(1.0, low=0.0, high="w_max")``
        per input; what the rule learns. A bound is a number or the name of a parameter.
    ``theta = state("theta_rest", scope="cell")``
        anything else that moves, per input or per cell. The start may name a parameter.
    ``r1 = trace("pre", tau="tau_plus", jump="add")``
        decays exactly with ``tau`` (ms); at an event of its source it adds 1 or is set to 1.
        "pre" is per input, "post" is per place where the spike of the cell arrives.

4.  Hooks pick their arguments *by name* from the variables and from the givens
    ``t`` (ms), ``dt`` (ms, in ``flow`` and ``cell_flow``), ``pre_rate`` and ``post_rate`` (Hz, in
    presentation hooks), ``amplitude`` (of the local spike, 1 at the soma; in ``at_post``), and
    return *named changes*: ``return {"w": -self.a_minus * o1}``.

    ``at_pre``, ``at_post``, ``at_presentation``
        once per input concerned; may change variables of input scope.
    ``cell_at_post``, ``cell_at_presentation``
        once per cell; may change states of cell scope.
    ``flow(dt, ...)``, ``cell_flow(dt, ...)``
        the exact change over an interval of length ``dt`` without events; sees variables of its
        own scope only.

5.  One law of time. Everything at an instant reads the state just before it; changes add; then
    bounds hold; then traces jump. Every input is brought up to date (``flow``) before the instant.

6.  ``factor`` maps the weights to a multiple of the baseline, 1 at the start. It is all that a
    route sees. The default is the first weight over its start.

7.  ``reads = "spikes"`` rules learn from spike times; ``reads = "rates"`` rules learn from rates:
    on patterns the rate itself, on a spiking cell the spikes counted over ``window`` ms, opened by
    the first spike after the last window closed. While a window is open ``flow`` and ``cell_flow``
    rest: the presentation hooks carry the state over it, reading it as it was when the window
    opened. ``pre_is`` says which presynaptic moment counts:
    the "spike" at the stimulated axon or its "arrival" at the contact.

8.  In a silent cell nothing moves: a baseline is silent, and its end is what changes are compared
    with. A rule that does move there says why in ``in_silence``.

9.  What a rule is for it says in ``claims``; which laws of ``plastic check`` it is exempt from, and
    why, in ``exempt``; which optional ones it keeps in ``promises``. A parameter of unit "1" that
    carries a power of a rate, as eta in eta x y, says so in ``rate_powers``: {"eta": -2}.

Hooks are compiled as they stand. They may use arithmetic, comparisons, ``if``, local names and
``math``; nothing global, nothing that remembers. Ordinary Python runs the same methods in the
reference loop, which is what a test of the rule calls.
"""

from __future__ import annotations

import inspect
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any, ClassVar, Literal

from plastic.errors import RuleError
from plastic.parameters import Parametrised

Changes = dict[str, float]
Scope = Literal["input", "cell"]
Source = Literal["pre", "post"]
Jump = Literal["add", "set"]

#: hook name -> givens it may ask for besides the rule's variables
HOOKS: Mapping[str, tuple[str, ...]] = {
    "at_pre": ("t",),
    "at_post": ("t", "amplitude"),
    "at_presentation": ("t", "pre_rate", "post_rate"),
    "cell_at_post": ("t",),
    "cell_at_presentation": ("t", "post_rate"),
    "flow": ("dt",),
    "cell_flow": ("dt",),
}


@dataclass(frozen=True)
class Weight:
    """A learned variable per input, with its start and bounds (numbers or parameter names)."""

    start: float | str
    low: float | str
    high: float | str
    name: str = ""


@dataclass(frozen=True)
class State:
    """Anything else that moves, per input or per cell."""

    start: float | str
    scope: Scope
    name: str = ""


@dataclass(frozen=True)
class Trace:
    """An exponentially decaying memory of spikes; the engine owns its exact decay."""

    source: Source
    tau: float | str
    jump: Jump
    name: str = ""


@dataclass(frozen=True)
class Claim:
    """What pairings do to the factor of one input: its change lies from `low` to `high`.

    Each of `times` pairings, `rate` of them a second, has `pre` presynaptic spikes and `post` of
    the cell, `apart` ms from each other; `lag` ms lie between the first of each (positive: pre
    first). `chosen` is a published set, by default none, and `given` are other parameters.
    """

    words: str
    low: float
    high: float
    lag: float = 10.0
    rate: float = 1.0
    times: int = 60
    pre: int = 1
    post: int = 1
    apart: float = 10.0
    chosen: str = ""
    given: Mapping[str, float] = field(default_factory=dict)


def weight(start: float | str, *, low: float | str, high: float | str) -> Any:
    """Declare a weight; see the manual at the top of this module, item 3."""
    return Weight(start, low, high)


def state(start: float | str, *, scope: Scope = "input") -> Any:
    """Declare a state; see the manual, item 3."""
    if scope not in ("input", "cell"):
        raise RuleError(f"a state's scope is 'input' or 'cell', not {scope!r}")
    return State(start, scope)


def trace(source: Source, *, tau: float | str, jump: Jump = "add") -> Any:
    """Declare a trace; see the manual, item 3."""
    if source not in ("pre", "post"):
        raise RuleError(f"a trace follows 'pre' or 'post', not {source!r}")
    if jump not in ("add", "set"):
        raise RuleError(f"a trace's jump is 'add' or 'set', not {jump!r}")
    return Trace(source, tau, jump)


class Rule(Parametrised):
    """Base of every learning rule; see the manual at the top of this module."""

    weights: ClassVar[Mapping[str, Weight]] = {}
    states: ClassVar[Mapping[str, State]] = {}
    traces: ClassVar[Mapping[str, Trace]] = {}

    #: the equation as people write it, for ``plastic show``
    equation: ClassVar[str] = ""
    #: what to cite
    references: ClassVar[Sequence[str]] = ()
    #: repeats of the protocol at which the rule's parameters were measured; counts beyond it are
    #: reported as extrapolated. None: never measured on a counted protocol.
    dose: ClassVar[int | None] = None
    #: "spikes", or "rates" (counted over the parameter ``window``)
    reads: ClassVar[Literal["spikes", "rates"]] = "spikes"
    #: which presynaptic moment is "pre"
    pre_is: ClassVar[Literal["spike", "arrival"]] = "arrival"
    #: why the rule is only illustrative on spiking cells; empty when it is not
    illustrative: ClassVar[str] = ""
    #: why the rule moves without a spike; empty when it does not
    in_silence: ClassVar[str] = ""
    #: the parameters that set the size of a change; a population spreads them together
    amplitudes: ClassVar[Sequence[str]] = ()
    #: what the rule is for
    claims: ClassVar[Sequence[Claim]] = ()
    #: optional laws that the rule keeps
    promises: ClassVar[Sequence[str]] = ()
    #: laws that do not hold for the rule, each with the reason; one that does hold is a fault
    exempt: ClassVar[Mapping[str, str]] = {}
    #: parameters of unit "1" that carry a power of a rate
    rate_powers: ClassVar[Mapping[str, int]] = {}

    def __init_subclass__(cls, **kwargs: Any) -> None:
        kinds: dict[type, dict[str, Any]] = {Weight: {}, State: {}, Trace: {}}
        for name, value in list(vars(cls).items()):
            if type(value) in kinds:
                kinds[type(value)][name] = replace(value, name=name)
                delattr(cls, name)
        super().__init_subclass__(**kwargs)
        cls.weights, cls.states, cls.traces = kinds[Weight], kinds[State], kinds[Trace]
        _check_declarations(cls)

    def number(self, value: float | str) -> float:
        """Return a declared number: itself, or the parameter it names."""
        return float(getattr(self, value)) if isinstance(value, str) else float(value)

    def factor(self, **weights: float) -> float:
        """Return the multiple of the baseline that the weights stand for, 1 at the start."""
        first = next(iter(self.weights.values()))
        return weights[first.name] / self.number(first.start)

    @classmethod
    def hooks(cls) -> dict[str, tuple[str, ...]]:
        """Return the hooks the rule has, each with the names of its arguments."""
        return {
            name: tuple(inspect.signature(getattr(cls, name)).parameters)[1:]
            for name in HOOKS
            if hasattr(cls, name)
        }

    @classmethod
    def summary(cls) -> str:
        """Return the first line of the rule's docstring."""
        return (inspect.getdoc(cls) or "").split("\n")[0]


def _check_declarations(cls: type[Rule]) -> None:
    """Refuse a rule whose hooks ask for names that nobody provides."""
    owner = cls.__name__
    if not cls.weights:
        raise RuleError(f"{owner}: a rule needs at least one weight")
    for name in vars(cls):
        if (name.startswith(("at_", "on_", "cell_")) or name == "flow") and name not in HOOKS:
            raise RuleError(f"{owner}.{name}: no such hook; known hooks are {', '.join(HOOKS)}")
    hooks = cls.hooks()
    if not hooks:
        raise RuleError(f"{owner}: a rule needs a hook; known hooks are {', '.join(HOOKS)}")
    per_cell = {n for n, s in cls.states.items() if s.scope == "cell"}
    per_input = {*cls.weights, *(n for n, s in cls.states.items() if s.scope == "input")}
    post = {n for n, tr in cls.traces.items() if tr.source == "post"}
    for hook, arguments in hooks.items():
        known = {*HOOKS[hook]}
        if hook == "flow":
            known |= per_input
        elif hook == "cell_flow":
            known |= per_cell
        elif hook.startswith("cell_"):
            known |= per_cell | post
        else:
            known |= per_input | per_cell | set(cls.traces)
        for argument in arguments:
            if argument not in known:
                raise RuleError(
                    f"{owner}.{hook}: nothing is called {argument!r} there; "
                    f"known names are {', '.join(sorted(known))}"
                )
    numbers = [v for w in cls.weights.values() for v in (w.start, w.low, w.high)]
    numbers += [s.start for s in cls.states.values()] + [t.tau for t in cls.traces.values()]
    for value in numbers:
        if isinstance(value, str) and value not in cls.parameters:
            raise RuleError(f"{owner}: {value!r} is no parameter of the rule")
    for kind, names in (("amplitude", cls.amplitudes), ("rate power", cls.rate_powers)):
        for name in names:
            if name not in cls.parameters:
                raise RuleError(f"{owner}: {kind} {name!r} is no parameter of the rule")
    for law, reason in cls.exempt.items():
        if not reason.strip():
            raise RuleError(f"{owner}: the exemption from {law!r} needs a reason")
    if cls.reads == "rates" and "window" not in cls.parameters:
        raise RuleError(f"{owner}: a rule that reads rates needs the parameter 'window' (ms)")
