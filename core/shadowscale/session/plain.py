"""Frozen dataclasses to plain JSON values and back, led by their annotations.

Numbers come back bit for bit: floats are written in their shortest exact form, what is not finite
as a word, and long arrays are packed (byte-shuffled, deflated, base 64). What does not fit raises
`PlainError` with the place in the document, so that a hand-written file gets a useful message.
"""

from __future__ import annotations

import base64
import types
import zlib
from collections.abc import Mapping
from dataclasses import MISSING, Field, fields, is_dataclass
from difflib import get_close_matches
from functools import cache
from math import isfinite
from typing import Any, TypeVar, Union, get_args, get_origin, get_type_hints

import numpy as np
from numpy.typing import NDArray

T = TypeVar("T")
WORDS = {"nan": float("nan"), "inf": float("inf"), "-inf": float("-inf")}
DTYPES = ("<f8", "<i8")
PLAIN_LENGTH = 64  # shorter arrays stay legible
MAX_BYTES = 1 << 30


class PlainError(ValueError):
    """A value in the document that does not fit: where, what was expected, what was found."""

    def __init__(self, where: str, expected: str, found: str) -> None:
        self.where, self.expected, self.found = where, expected, found
        super().__init__(f"{where}: expected {expected}, found {found}")


def to_plain(value: object) -> Any:
    """A value as JSON knows it; fields that hold their default are left out.

    Raises
    ------
    TypeError
        If there is no plain form of it.
    """
    if is_dataclass(value) and not isinstance(value, type):
        return {
            item.name: to_plain(getattr(value, item.name))
            for item in fields(value)
            if not _is_default(item, getattr(value, item.name))
        }
    if isinstance(value, np.ndarray):
        return _array_to_plain(value)
    if isinstance(value, Mapping):
        return {str(name): to_plain(item) for name, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [to_plain(item) for item in value]
    if isinstance(value, (float, np.floating)):
        return float(value) if isfinite(value) else str(float(value))
    if isinstance(value, np.bool_):
        return bool(value)
    if isinstance(value, np.integer):
        return int(value)
    if value is None or isinstance(value, (bool, int, str)):
        return value
    raise TypeError(f"{type(value).__name__} has no plain form")


def from_plain(kind: type[T], data: object, *, where: str = "") -> T:
    """A value of type `kind` from its plain form.

    Raises
    ------
    PlainError
        Naming the first place that does not fit.
    """
    found: T = _read(kind, data, where or kind.__name__.lower())
    return found


def _is_default(item: Field[Any], value: object) -> bool:
    if item.default is not MISSING:
        default = item.default
    elif item.default_factory is not MISSING:
        default = item.default_factory()
    else:
        return False
    return type(value) is type(default) and not isinstance(value, np.ndarray) and value == default


def _read(kind: Any, data: object, where: str) -> Any:
    """Dispatch on the annotation."""
    if kind in (Any, object):
        return data
    origin, arguments = get_origin(kind), get_args(kind)
    if origin in (Union, types.UnionType):
        return _read_optional(arguments, data, where)
    if origin is tuple:
        return _read_tuple(arguments, data, where)
    if isinstance(origin, type) and issubclass(origin, Mapping):
        return _read_mapping(arguments, data, where)
    if origin is np.ndarray:
        return _read_array(data, where, element=_element(kind))
    if is_dataclass(kind):
        return _read_dataclass(kind, data, where)
    return _read_scalar(kind, data, where)


def _read_optional(kinds: tuple[Any, ...], data: object, where: str) -> Any:
    """Only `X | None` occurs."""
    if data is None and type(None) in kinds:
        return None
    (kind,) = (item for item in kinds if item is not type(None))
    return _read(kind, data, where)


def _read_tuple(kinds: tuple[Any, ...], data: object, where: str) -> tuple[Any, ...]:
    items = _expect(list, data, where)
    if len(kinds) == 2 and kinds[1] is Ellipsis:
        kinds = (kinds[0],) * len(items)
    if len(items) != len(kinds):
        raise PlainError(where, f"{len(kinds)} values", f"{len(items)}")
    pairs = enumerate(zip(kinds, items))
    return tuple(_read(kind, item, f"{where}[{number}]") for number, (kind, item) in pairs)


def _read_mapping(kinds: tuple[Any, ...], data: object, where: str) -> dict[str, Any]:
    items = _expect(dict, data, where)
    return {name: _read(kinds[1], item, f"{where}.{name}") for name, item in items.items()}


@cache
def _hints(kind: Any) -> dict[str, Any]:
    return get_type_hints(kind)


def _read_dataclass(kind: Any, data: object, where: str) -> Any:
    items = _expect(dict, data, where)
    hints = _hints(kind)
    for name in items:
        if name not in hints:
            near = get_close_matches(name, hints, n=1)
            allowed = f"{near[0]!r}" if near else "one of " + ", ".join(hints)
            raise PlainError(f"{where}.{name}", allowed, repr(name))
    for item in fields(kind):
        needed = item.default is MISSING and item.default_factory is MISSING
        if needed and item.name not in items:
            raise PlainError(where, f"a value for {item.name!r}", "none")
    values = {name: _read(hints[name], item, f"{where}.{name}") for name, item in items.items()}
    return kind(**values)


def _read_scalar(kind: Any, data: object, where: str) -> Any:
    if kind is float:
        return _read_float(data, where)
    return _read_whole(data, where) if kind is int else _expect(kind, data, where)


def _read_whole(data: object, where: str) -> int:
    if isinstance(data, bool):
        raise PlainError(where, "a whole number", repr(data))
    return _expect(int, data, where)


def _read_float(data: object, where: str) -> float:
    if isinstance(data, (int, float)) and not isinstance(data, bool):
        return float(data)
    if isinstance(data, str) and data in WORDS:
        return WORDS[data]
    raise PlainError(where, "a number", _shown(data))


_NAMES = {
    list: "a list",
    dict: "an object",
    str: "text",
    int: "a whole number",
    bool: "true or false",
}


def _expect(kind: type[T], data: object, where: str) -> T:
    if not isinstance(data, kind):
        raise PlainError(where, _NAMES.get(kind, kind.__name__), _shown(data))
    return data


def _shown(data: object) -> str:
    text = repr(data)
    return text if len(text) <= 40 else text[:37] + "..."


def _array_to_plain(array: NDArray[Any]) -> Any:
    if array.size <= PLAIN_LENGTH or array.ndim != 1:
        return to_plain(array.tolist())
    kind = "<i8" if array.dtype.kind in "iu" else "<f8"
    values = np.ascontiguousarray(array, dtype=kind)
    shuffled = values.view(np.uint8).reshape(-1, 8).T.tobytes()
    packed = base64.b64encode(zlib.compress(shuffled, 6)).decode("ascii")
    return {"length": int(values.size), "type": kind, "packed": packed}


def _read_array(data: object, where: str, *, element: Any) -> NDArray[Any]:
    if isinstance(data, list):
        return _read_list(data, where, element=element)
    items = _expect(dict, data, where)
    kind, length, packed = (items.get(name) for name in ("type", "length", "packed"))
    if kind not in DTYPES or not isinstance(length, int) or not isinstance(packed, str):
        raise PlainError(where, "a list or a packed array", _shown(data))
    if not 0 <= 8 * length <= MAX_BYTES:
        raise PlainError(where, "a length that fits in memory", str(length))
    try:
        unpacker = zlib.decompressobj()
        raw = unpacker.decompress(base64.b64decode(packed, validate=True), 8 * length + 1)
    except (zlib.error, ValueError) as error:
        raise PlainError(where, "a packed array", f"damaged data ({error})") from error
    if len(raw) != 8 * length:
        raise PlainError(where, f"{length} packed values", f"{len(raw)} bytes")
    shuffled = np.frombuffer(raw, dtype=np.uint8).reshape(8, length)
    return np.ascontiguousarray(shuffled.T).view(kind).reshape(length).astype(element)


def _element(kind: Any) -> Any:
    """The element type of an annotation such as `NDArray[np.float64]`."""
    (element,) = get_args(get_args(kind)[1])
    return element


def _read_list(data: list[Any], where: str, *, element: Any) -> NDArray[Any]:
    """Numbers in a row, or nested lists as a matrix."""
    read = _read_float if element is np.float64 else _read_whole
    if data and all(isinstance(item, list) for item in data):
        rows = [[read(item, where) for item in row] for row in data]
        if len({len(row) for row in rows}) > 1:
            raise PlainError(where, "rows of one length", "different lengths")
        return np.array(rows, dtype=element)
    return np.array([read(item, where) for item in data], dtype=element)
