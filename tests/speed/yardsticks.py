"""What the engine is measured against: naive C, built on the spot, and a plain NumPy script."""

from __future__ import annotations

import ctypes
import shutil
import subprocess
from collections.abc import Callable
from pathlib import Path

import numpy as np

from plastic.engine.layout import Floats, Wiring
from tests.speed import workloads as w

FLAGS = ["-O3", "-march=native", "-shared", "-fPIC"]
COMPILER = shutil.which("gcc") or shutil.which("cc")

DOUBLES = (
    "dt tau_m g_leak threshold reset tau_e tau_i e_exc e_inh g_exc g_inh "
    "a_plus a_minus tau_plus tau_minus w_max"
)


class Setup(ctypes.Structure):
    """The structure of the same name in naive.c."""

    _fields_ = [
        *((name, ctypes.c_double) for name in DOUBLES.split()),
        *((name, ctypes.c_long) for name in ("n_steps", "refractory", "n_plastic")),
    ]


def setup_of(prepared: w.Prepared) -> Setup:
    """Return W1's numbers for the C program."""
    rule, plan = prepared.rule.values, prepared.wiring.plan[0]
    return Setup(
        dt=w.DT,
        tau_m=w.TAU,
        g_leak=w.LEAK,
        threshold=w.THRESHOLD,
        reset=w.RESET,
        tau_e=w.EXCITATORY.decay,
        tau_i=w.BRAKE.decay,
        e_exc=w.EXCITATORY.reversal - w.REST,
        e_inh=w.BRAKE.reversal - w.REST,
        g_exc=w.QUANTUM,
        g_inh=w.BRAKE_QUANTUM,
        n_steps=int(plan["n_steps"]),
        refractory=int(plan["refractory"]),
        n_plastic=len(prepared.wiring.learner_site),
        **{name: rule[name] for name in ("a_plus", "a_minus", "tau_plus", "tau_minus", "w_max")},
    )


def naive_c(folder: Path, prepared: w.Prepared) -> Callable[[], tuple[Floats, Floats]]:
    """Build the C program and return a function that runs it: spike times (ms), weights."""
    assert COMPILER is not None
    library = folder / "naive.so"
    source = Path(__file__).with_name("naive.c")
    subprocess.run([COMPILER, *FLAGS, "-o", str(library), str(source), "-lm"], check=True)
    run = ctypes.CDLL(str(library)).run
    run.restype = ctypes.c_long
    step, who = (
        np.ascontiguousarray(prepared.wiring.events[n], np.int32) for n in ("step", "contact")
    )
    setup = setup_of(prepared)

    def once() -> tuple[Floats, Floats]:
        weights, spike_step = np.ones(setup.n_plastic), np.empty(setup.n_steps // 10, np.int64)
        pointers = (ctypes.c_void_p(a.ctypes.data) for a in (step, who, weights, spike_step))
        count = run(ctypes.byref(setup), ctypes.c_long(len(step)), *pointers)
        return spike_step[:count] * w.DT, weights

    return once


def numpy_script(wiring: Wiring, setup: Setup) -> tuple[int, Floats]:
    """Run W1 as a plain script: a loop over time, arrays over inputs, spikes drawn step by step."""
    draw = np.random.default_rng(1)
    s, count = setup, setup.n_plastic
    chance = np.concatenate(
        [
            np.full(count, w.RATE * w.DT / 1000),
            np.full(w.INHIBITORY, w.INHIBITORY_RATE * w.DT / 1000),
        ]
    )
    weights, x, y = np.ones(count), np.zeros(count), 0.0
    v, ge, gi, free, spikes = 0.0, 0.0, 0.0, 0, 0
    for step in range(int(wiring.plan["n_steps"][0])):
        fired = step >= free and v >= s.threshold
        x *= np.exp(-s.dt / s.tau_plus)
        y *= np.exp(-s.dt / s.tau_minus)
        spiking = draw.random(len(chance)) < chance
        pre = spiking[:count]
        ge += s.g_exc * weights[pre].sum()
        gi += s.g_inh * spiking[count:].sum()
        weights[pre] -= s.a_minus * y
        if fired:
            weights += s.a_plus * x
            y, v, free, spikes = y + 1, s.reset, step + s.refractory, spikes + 1
        np.clip(weights, 0, s.w_max, out=weights)
        x[pre] += 1
        total = s.g_leak + ge + gi
        goal = (ge * s.e_exc + gi * s.e_inh) / total
        v = goal + (v - goal) * np.exp(-s.dt * total / (s.tau_m * s.g_leak))
        v = s.reset if step < free else v
        ge *= np.exp(-s.dt / s.tau_e)
        gi *= np.exp(-s.dt / s.tau_i)
    return spikes, weights
