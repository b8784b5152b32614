"""What a rule could remember between runs, put back before every case.

A hook must remember nothing. One that does would make every case depend on those before it, and the
smallest failing case could not be found. Within a case the rule may still be caught remembering.
"""

from __future__ import annotations

import copy
import types
from typing import Any

#: what can be changed in place
CONTAINERS = (dict, list, set, bytearray)
PLAIN = (int, float, complex, str, bytes, tuple, frozenset, type(None))
_NOTHING = object()


class Memory:
    """The module-level names that the methods of a class use, and the class's own containers."""

    def __init__(self, part: type[Any]) -> None:
        own = [f for f in vars(part).values() if isinstance(f, types.FunctionType)]
        self._names: dict[tuple[int, str], tuple[dict[str, Any], Any]] = {}
        for function in _reached(own):
            for name in function.__code__.co_names:
                value = function.__globals__.get(name, _NOTHING)
                if value is _NOTHING or isinstance(value, (*CONTAINERS, *PLAIN)):
                    key = (id(function.__globals__), name)
                    kept = value if value is _NOTHING else _copied(value)
                    self._names[key] = (function.__globals__, kept)
        held = [
            v for k, v in vars(part).items() if isinstance(v, CONTAINERS) and not k.startswith("__")
        ]
        held += [c for f in own for c in (f.__defaults__ or ()) if isinstance(c, CONTAINERS)]
        self._held = [(container, _copied(container)) for container in held]

    def restore(self) -> None:
        """Put everything back as it was."""
        for (_, name), (space, value) in self._names.items():
            if value is _NOTHING:
                space.pop(name, None)
            elif isinstance(value, CONTAINERS) and isinstance(space.get(name), type(value)):
                _refill(space[name], value)
            else:
                space[name] = _copied(value)
        for container, value in self._held:
            _refill(container, value)


def _reached(functions: list[types.FunctionType]) -> list[types.FunctionType]:
    """Return functions and those of the same module that they call."""
    found = list(functions)
    for function in found:
        for name in function.__code__.co_names:
            other = function.__globals__.get(name)
            if not isinstance(other, types.FunctionType) or other in found:
                continue
            if other.__globals__ is function.__globals__:
                found.append(other)
    return found


def _refill(container: Any, value: Any) -> None:
    fresh = _copied(value)
    if isinstance(container, (dict, set)):
        container.clear()
        container.update(fresh)
    else:
        container[:] = fresh


def _copied(value: Any) -> Any:
    """Return a copy with all that is inside, or at least of the container."""
    try:
        return copy.deepcopy(value)
    except Exception:  # something inside that cannot be copied, such as a file
        return copy.copy(value)
