"""Whether two results are the same to the last bit, arrays and all."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import fields, is_dataclass

import numpy as np


def assert_same(expected: object, actual: object, where: str = "it") -> None:
    """AssertionError that names the first place where two values differ."""
    if is_dataclass(expected) and not isinstance(expected, type):
        assert type(expected) is type(actual), where
        for item in fields(expected):
            mine, other = getattr(expected, item.name), getattr(actual, item.name)
            assert_same(mine, other, f"{where}.{item.name}")
    elif isinstance(expected, np.ndarray):
        assert isinstance(actual, np.ndarray), where
        assert expected.dtype == actual.dtype, where
        assert expected.shape == actual.shape, where
        assert expected.tobytes() == actual.tobytes(), where
    elif isinstance(expected, tuple):
        assert isinstance(actual, tuple), where
        assert len(expected) == len(actual), where
        for number, (one, other) in enumerate(zip(expected, actual)):
            assert_same(one, other, f"{where}[{number}]")
    elif isinstance(expected, Mapping):
        assert isinstance(actual, Mapping), where
        assert list(expected) == list(actual), where
        for name, one in expected.items():
            assert_same(one, actual[name], f"{where}.{name}")
    else:
        same = expected == actual or (expected != expected and actual != actual)
        assert same, f"{where}: {expected!r} and {actual!r}"
