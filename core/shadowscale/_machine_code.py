"""Machine code: how numba is told to make it, and a cache on disk that never serves old code.

Machine code is kept beside the sources where they may be written to; else in the user's cache folder;
else in a private temporary one; else nowhere, and every process compiles anew. None of this is ever
an error.

Code of other modules is built into a kernel when it is compiled, but numba's own cache looks only at
the file where the kernel stands. Here an entry is valid for one fingerprint: the contents of that file
and of every module of the engine that it imports, directly or not.
"""

from __future__ import annotations

import hashlib
import os
import re
import stat
import tempfile
from collections.abc import Callable
from contextlib import suppress
from functools import cache
from importlib import import_module
from pathlib import Path
from pickle import PickleError
from typing import Any

from numba import njit
from numba.core import caching
from numba.np import linalg

from shadowscale._version import __version__

_ROOT = Path(__file__).parent
_IMPORT = re.compile(rf"^\s*from ({_ROOT.name}[\w.]*) import (\([^)]*\)|.*)$", re.MULTILINE)
_UNREADABLE = (
    OSError,
    EOFError,
    PickleError,
    ImportError,
    LookupError,
    AttributeError,
    TypeError,
    ValueError,
)


def _spare_linear_algebra() -> None:
    """Let numba's array functions load without scipy's BLAS, which it looks for and no kernel needs.

    That import takes longer than all kernels take to load. Whoever wants BLAS in a kernel still finds
    it: numba asks again where it is used.
    """
    look, linalg.ensure_blas = linalg.ensure_blas, lambda: None
    try:
        import_module("numba.np.arraymath")
    finally:
        linalg.ensure_blas = look


_spare_linear_algebra()  # once: modules are imported under a lock


def dispatcher_of(
    function: Callable[..., Any], fastmath: frozenset[str], missed: Callable[[], None]
) -> Any:
    """numba's dispatcher of a function: compiles at the first call, or takes the code from the disk.

    `missed` is called where the disk has none.
    """
    options: dict[str, Any] = {"fastmath": set(fastmath)} if fastmath else {}
    return _cached(njit(nogil=True, error_model="numpy", **options)(function), missed)


@cache
def fingerprint(file: str) -> str:
    """Of the program's version, a module, and all modules of the engine that it imports.

    Parameters
    ----------
    file : str
        Path of the module's source.

    Returns
    -------
    str
        Hexadecimal; the same for the same contents, wherever they lie.
    """
    seen: set[Path] = set()
    waiting = [Path(file)]
    while waiting:
        source = waiting.pop()
        if source not in seen:
            seen.add(source)
            waiting += _imported(source)
    digest = hashlib.sha256(__version__.encode())
    for text in sorted(_text(source) for source in seen):
        digest.update(hashlib.sha256(text.encode()).digest())
    return digest.hexdigest()


@cache
def _text(source: Path) -> str:
    try:
        return source.read_text(encoding="utf-8")
    except OSError:  # a program frozen into one file: its version has to do
        return ""


@cache
def _imported(source: Path) -> tuple[Path, ...]:
    """Files of the engine's modules that a source names in its imports."""
    files = []
    for module, names in _IMPORT.findall(_text(source)):
        base = _ROOT.joinpath(*module.split(".")[1:])
        parts = [base / name for name in re.findall(r"\w+", names)]
        files += [base / "__init__.py", *(path.with_suffix(".py") for path in (base, *parts))]
    return tuple(path for path in files if path.is_file())


class _Stamped:
    """A place whose entries are valid for one fingerprint."""

    _py_file: str

    def get_source_stamp(self) -> str:
        return fingerprint(self._py_file)

    def get_disambiguator(self) -> str:
        return ""  # names are unique within a module; old code is replaced, not kept beside


class _Given(_Stamped, caching.UserProvidedCacheLocator):
    """Where NUMBA_CACHE_DIR says."""


class _Beside(_Stamped, caching.InTreeCacheLocator):
    """Beside the sources."""


class _OfUser(_Stamped, caching.UserWideCacheLocator):
    """The user's cache folder."""


class _Temporary(_Stamped, caching.UserWideCacheLocator):
    """For users without a home: a temporary folder that nobody else can write to."""

    def __init__(self, py_func: Any, py_file: str) -> None:
        super().__init__(py_func, py_file)
        base = os.path.join(tempfile.gettempdir(), f"{_ROOT.name}-{_user()}")
        self._cache_path = os.path.join(base, self.get_suitable_cache_subpath(py_file))
        self._base = base

    def ensure_cache_path(self) -> None:
        """Make the folder; OSError if it is not ours alone, for code is taken from it."""
        if hasattr(os, "getuid"):
            os.makedirs(self._base, mode=0o700, exist_ok=True)
            found = os.lstat(self._base)
            alone = stat.S_ISDIR(found.st_mode) and not found.st_mode & 0o077
            if not alone or found.st_uid != os.getuid():
                raise PermissionError(self._base)
        super().ensure_cache_path()


def _user() -> str:
    return str(os.getuid()) if hasattr(os, "getuid") else "user"


class _Entry(caching.CompileResultCacheImpl):
    _locator_classes = [_Given, _Beside, _OfUser, _Temporary]  # noqa: RUF012


class _Cache(caching.FunctionCache):
    """numba's cache of a function, with our places and without errors."""

    _impl_class = _Entry

    def __init__(self, py_func: Any, missed: Callable[[], None]) -> None:
        super().__init__(py_func)
        self._missed = missed

    def load_overload(self, sig: Any, target_context: Any) -> Any:
        """The stored code; None if there is none or it cannot be read."""
        found = None
        try:
            found = super().load_overload(sig, target_context)
        except _UNREADABLE:
            self._forget()
        if found is None:
            self._missed()
        return found

    def save_overload(self, sig: Any, data: Any) -> None:
        """Store code; a full or vanished disk only costs the time to compile again."""
        try:
            super().save_overload(sig, data)
        except _UNREADABLE:
            self.disable()

    def _forget(self) -> None:
        """Empty a damaged index, so that good code can be stored again."""
        with suppress(*_UNREADABLE):
            self.flush()


def _cached(dispatcher: Any, missed: Callable[[], None]) -> Any:
    """The same dispatcher with our cache, where there is any place for one."""
    try:
        dispatcher._cache = _Cache(dispatcher.py_func, missed)
    except (RuntimeError, OSError):  # no folder at all
        return dispatcher
    return dispatcher
