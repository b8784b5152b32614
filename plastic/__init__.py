"""plastic: learning rules and routes of synaptic strengthening on a shared protocol.

The public door. Names are loaded when they are first used, so that ``plastic --help`` is quick.
"""

from __future__ import annotations

import importlib
from typing import Any

from plastic.version import VERSION

__version__ = VERSION

_DOORS = {
    "Rule": "plastic.rules._interface",
    "weight": "plastic.rules._interface",
    "state": "plastic.rules._interface",
    "trace": "plastic.rules._interface",
    "Claim": "plastic.rules._interface",
    "parameter": "plastic.parameters",
    "impose": "plastic.engine.imposed",
    "present": "plastic.engine.presented",
    "run": "plastic.study.run",
    "load": "plastic.study.store",
    "check_dt": "plastic.study.half_step",
    "compare": "plastic.report.comparison",
    "check": "plastic.checking.check",
    "cell_sheet": "plastic.analysis.cell_sheet",
}
_ROOMS = ("rules", "routes", "protocols", "measures", "laws")

__all__ = ["__version__", *_DOORS, *_ROOMS]


def __getattr__(name: str) -> Any:
    if name in _DOORS:
        return getattr(importlib.import_module(_DOORS[name]), name)
    if name in _ROOMS:
        return importlib.import_module(f"plastic.{name}")
    raise AttributeError(f"module 'plastic' has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted([*globals(), *__all__])
