"""A schedule: the exact times of one protocol, and what it prints.

Every protocol comes down to the same thing: a pattern of times per input, repeated a number of
times at fixed intervals, between a baseline and a follow-up with test pulses.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from plastic.errors import Misfit

Floats = NDArray[np.float64]

#: the name under which a pattern lists forced spikes of the cell
INJECTED = "injected"
#: ms; two events of one input nearer than this are one event twice
NEAREST = 0.1
#: a repeat with more partner events than this tells the lag to the neighbours only
MANY = 12


@dataclass(frozen=True)
class Epoch:
    """A stretch of a protocol; `start` and `end` in ms."""

    name: str
    start: float
    end: float


@dataclass(frozen=True, eq=False)
class Schedule:
    """The exact times of one protocol. Build it with `Protocol.schedule` or `build`.

    Attributes
    ----------
    name : str
    times : dict of input to array, shape (event,), ms, strictly increasing
        Every event of the input, test pulses included, from the start of the baseline.
    injected : array, shape (event,), ms
        Spikes forced on the cell.
    epochs : tuple of Epoch
        baseline, induction, follow_up; contiguous, from 0.
    repeat_starts, repeat_ends : array, shape (repeat,), ms
        A repeat ends where the next one starts.
    test_times : dict of input to array, ms
        The events that are test pulses.
    pattern : dict of input (or "injected") to array, ms
        Times within one repeat.
    partner : tuple of str
        What the other inputs are paired with: inputs, or "injected".
    control : str
        "", or the control this schedule is.
    inhibition_blocked : bool
        Whether inhibitory inputs are silenced.
    """

    name: str
    times: dict[str, Floats]
    injected: Floats
    epochs: tuple[Epoch, ...]
    repeat_starts: Floats
    repeat_ends: Floats
    test_times: dict[str, Floats]
    pattern: dict[str, Floats] = field(default_factory=dict)
    partner: tuple[str, ...] = ()
    control: str = ""
    inhibition_blocked: bool = False

    @property
    def end(self) -> float:
        """The end of the follow-up, ms."""
        return self.epochs[-1].end

    @property
    def every(self) -> float:
        """The interval from one repeat to the next, ms."""
        return float(self.repeat_ends[0] - self.repeat_starts[0])

    @property
    def set_lags(self) -> list[dict[str, Any]]:
        """The set lags of one repeat: from the first event of an input to each partner event.

        Returns
        -------
        list of dict
            Keys ``input``, ``partner``, ``partner_event`` (from 1), ``set_lag_ms`` (t_partner -
            t_input, positive when the input comes first) and ``reference``.
        """
        return [
            {
                "input": name,
                "partner": partner,
                "partner_event": k + 1,
                "set_lag_ms": float(time - own[0]),
                "reference": reference(name, partner),
            }
            for name, own in self.pattern.items()
            if name not in self.partner and len(own)
            for partner in self.partner
            for k, time in enumerate(self.pattern.get(partner, ()))
        ]

    def table(self, spikes: ArrayLike | None = None) -> list[dict[str, Any]]:
        """Return one row per event, in order of time.

        Parameters
        ----------
        spikes : array, shape (spike,), ms, optional
            Spikes of the cell in a simulation; adds the realised lags.

        Returns
        -------
        list of dict
            ``time_ms``, ``input`` (or "injected"), ``kind`` ("test pulse" or "induction"),
            ``epoch``, ``repeat`` (from 1; None for a test pulse), ``set_lags_ms`` (dict of partner
            to the lags to its events in the same repeat), ``reference`` (between which two moments
            the lag is taken); with `spikes` also ``realised_lags_ms`` (list) and
            ``realised_reference``.
        """
        rows = self._test_rows() + self._induction_rows()
        rows.sort(key=lambda row: (row["time_ms"], row["input"]))
        if spikes is not None:
            _add_realised(rows, np.sort(np.asarray(spikes, float)), self)
        return rows

    def _epoch_of(self, time: float) -> str:
        later = [epoch.name for epoch in self.epochs if epoch.start <= time < epoch.end]
        return later[0]

    def _test_rows(self) -> list[dict[str, Any]]:
        return [
            {
                "time_ms": float(time),
                "input": name,
                "kind": "test pulse",
                "epoch": self._epoch_of(float(time)),
                "repeat": None,
                "set_lags_ms": {},
                "reference": "",
            }
            for name, times in self.test_times.items()
            for time in times
        ]

    def _induction_rows(self) -> list[dict[str, Any]]:
        rows = []
        for name, own in self.pattern.items():
            partners = () if name in self.partner else self.partner
            words = "; ".join(reference(name, p) for p in partners)
            lags = [{p: _lags(self.pattern.get(p), t) for p in partners} for t in own]
            rows += [
                {
                    "time_ms": float(start + time),
                    "input": name,
                    "kind": "induction",
                    "epoch": "induction",
                    "repeat": k + 1,
                    "set_lags_ms": lags[i],
                    "reference": words,
                }
                for k, start in enumerate(self.repeat_starts)
                for i, time in enumerate(own)
            ]
        return rows


def reference(name: str, partner: str) -> str:
    """Return in words between which two moments a set lag is taken."""
    ours = "injected spike" if name == INJECTED else "presynaptic spike"
    other = "injected spike" if partner == INJECTED else f"presynaptic spike of {partner}"
    return f"{ours} to {other}"


def _lags(partner: Floats | None, time: float) -> list[float]:
    """Return the lags from `time` to the partner's events, or to the neighbours when many."""
    if partner is None or len(partner) == 0:
        return []
    if len(partner) > MANY:
        after = int(np.searchsorted(partner, time))
        partner = partner[max(after - 1, 0) : after + 1]
    return [float(t - time) for t in partner]


def _add_realised(rows: list[dict[str, Any]], spikes: Floats, schedule: Schedule) -> None:
    """Add to each row the lags from its event to the cell's spikes within the same repeat."""
    for row in rows:
        row["realised_lags_ms"], row["realised_reference"] = [], ""
        if row["repeat"] is None or row["input"] == INJECTED:
            continue
        k = row["repeat"] - 1
        low, high = np.searchsorted(spikes, [schedule.repeat_starts[k], schedule.repeat_ends[k]])
        row["realised_lags_ms"] = _lags(spikes[low:high], row["time_ms"])
        row["realised_reference"] = "presynaptic spike to threshold crossing at the soma"


def build(
    name: str,
    pattern: Mapping[str, Sequence[float] | Floats],
    *,
    times: int,
    every: float,
    baseline: float,
    follow_up: float,
    test_times: Mapping[str, Floats],
    **rest: Any,
) -> Schedule:
    """Return the schedule of a pattern repeated `times` times, `every` ms.

    Raises
    ------
    Misfit
        Events of one input nearer than 0.1 ms, or outside the repeat they belong to.
    """
    induction = Epoch("induction", baseline, baseline + times * every)
    epochs = (
        Epoch("baseline", 0.0, baseline),
        induction,
        Epoch("follow_up", induction.end, induction.end + follow_up),
    )
    edges = np.asarray(baseline + every * np.arange(times + 1), dtype=np.float64)
    own = {key: np.asarray(t, dtype=float) for key, t in pattern.items()}
    for key, t in own.items():
        if len(t) and not (t.min() >= 0 and t.max() < every):
            raise Misfit(
                f"protocol {name!r}",
                got=f"events of {key} from {t.min():g} to {t.max():g} ms",
                expected=f"events within one repeat, 0 to {every:g} ms",
            )
    induced = {key: (edges[:-1, None] + t).ravel() for key, t in own.items()}
    tests = {key: np.asarray(t, dtype=float) for key, t in test_times.items()}
    inputs = [key for key in dict.fromkeys([*own, *tests]) if key != INJECTED]
    all_times = {
        key: np.sort(np.concatenate([induced.get(key, np.empty(0)), tests.get(key, np.empty(0))]))
        for key in inputs
    }
    injected = induced.get(INJECTED, np.empty(0))
    for key, t in [*all_times.items(), (INJECTED, injected)]:
        _refuse_overlap(name, key, t)
    return Schedule(name, all_times, injected, epochs, edges[:-1], edges[1:], tests, own, **rest)


def _refuse_overlap(name: str, key: str, times: Floats) -> None:
    gaps = np.diff(times)
    close = np.flatnonzero(gaps < NEAREST - 1e-6)
    if len(close):
        k = int(close[0])
        raise Misfit(
            f"protocol {name!r}",
            got=f"events of {key} at {times[k]:.6g} and {times[k + 1]:.6g} ms",
            expected=f"events of one input at least {NEAREST:g} ms apart",
        )
