"""How the engine compiles: decorators whose functions become machine code at their first call.

numba takes as long to import as the rest of the engine: it is loaded when something is computed.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property, update_wrapper
from typing import Any, TypeVar, cast

F = TypeVar("F", bound=Callable[..., Any])


_waiting: list[Callable[[], None]] = []


def when_compiling(tell: Callable[[], None] | None) -> None:
    """Have `tell` called, once, before a kernel is compiled that no cache holds: that takes long.

    None takes the wish back.
    """
    _waiting[:] = [] if tell is None else [tell]


def _compiling() -> None:
    while _waiting:
        _waiting.pop()()


class Kernel:
    """A function that becomes machine code at its first call; other kernels may call it."""

    def __init__(self, function: Callable[..., Any], *fastmath: str) -> None:
        self._function, self._fastmath = function, frozenset(fastmath)
        update_wrapper(self, function)

    def __call__(self, *arguments: Any) -> Any:
        return self.dispatcher(*arguments)

    @cached_property
    def dispatcher(self) -> Any:
        """numba's own object."""
        from shadowscale._machine_code import dispatcher_of

        return dispatcher_of(self._function, self._fastmath, _compiling)

    @property
    def _numba_type_(self) -> Any:
        """What numba asks of an object that it finds in a kernel."""
        return self.dispatcher._numba_type_


def compiled(function: F) -> F:
    """Compile at the first call, or take the code from the disk; without the interpreter's lock."""
    return cast(F, Kernel(function))


def fused(function: F) -> F:
    """As `compiled`; a*b + c may be one instruction. NaN and infinity keep their meaning."""
    return cast(F, Kernel(function, "contract"))


def summed(function: F) -> F:
    """As `fused`; sums may be taken in another order, so that several numbers are added at once."""
    return cast(F, Kernel(function, "contract", "reassoc"))
