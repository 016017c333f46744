"""The table of the hidden fraction against the kernel that fills it."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numba import njit

from limb_examples import ALL_CASES, PUBLISHED
from shadowscale.light._table import (
    fill_table,
    read_table,
    read_table_value,
    table_columns,
    table_rows,
)
from shadowscale.light.eclipse import hidden_fraction_derivatives
from shadowscale.light.laws import LAWS

RATIOS = (0.02, 0.1, 0.5, 0.9, 0.999, 1 - 1e-7, 1.0, 1 + 1e-5, 1.1, 2.0, 50.0)


def filled(p, name, c):
    table = np.full((table_rows(p), table_columns(len(c))), np.nan)
    fill_table(p, LAWS[name].code, np.array(c), table)
    return table


@njit(error_model="numpy")
def read_all(table, p, d, out, values):
    for i in range(d.size):
        read_table(table, p, d[i], out[i])
        values[i] = read_table_value(table, p, d[i])


def read(table, p, d):
    out = np.full((d.size, table.shape[1] // 6), np.nan)
    values = np.full(d.size, np.nan)
    read_all(table, p, d, out, values)
    return out, values


def exact(p, name, c, d):
    found = hidden_fraction_derivatives(d, p, name, c)
    return np.column_stack(
        [found.value, found.by_separation, found.by_ratio, found.by_coefficients]
    )


def crowded(p, count=400):
    """Separations everywhere and on both sides of the contacts."""
    inner, outer, half = abs(1 - p), 1 + p, min(1.0, p)
    steps = 10.0 ** np.linspace(-11, 0, count)
    pieces = [inner - inner * steps, inner + half * steps, outer - half * steps]
    d = np.concatenate([np.linspace(0, outer, count), *pieces, [inner, p, outer, outer + 1]])
    return d[d >= 0]


@pytest.mark.parametrize(("name", "c"), ALL_CASES)
@pytest.mark.parametrize("p", RATIOS)
def test_errors_of_value_and_derivatives(name, c, p):
    d = crowded(p)
    out, values = read(filled(p, name, c), p, d)
    expected = exact(p, name, c, d)
    np.testing.assert_allclose(out[:, 0], expected[:, 0], rtol=0, atol=1e-9)
    resolved = d > 0  # at p = 1, d = 0 derivatives are one-sided
    np.testing.assert_allclose(out[resolved, 1:], expected[resolved, 1:], rtol=0, atol=1e-6)
    np.testing.assert_array_equal(values, out[:, 0])


@pytest.mark.parametrize("p", RATIOS)
def test_the_table_is_small_and_completely_filled(p):
    for name, rows in PUBLISHED.items():
        table = filled(p, name, rows[0])
        assert np.all(np.isfinite(table))
        assert table.shape[0] <= 300


@pytest.mark.parametrize("p", RATIOS)
def test_exact_outside_eclipse_and_where_all_is_hidden(p):
    table = filled(p, "power-2", (0.7, 0.65))
    out, values = read(table, p, np.array([1 + p, 1 + p + 1e-9, 3 + p, 1e9]))
    assert not np.any(out)
    assert not np.any(values)
    if p >= 1:
        out, values = read(table, p, np.array([0.0, 0.5, 1.0]) * (p - 1))
        np.testing.assert_array_equal(values, 1.0)
        np.testing.assert_array_equal(out[:, 0], 1.0)
        assert not np.any(out[out[:, 0] < 1])
        if p > 1:
            assert not np.any(out[:, 1:])


wide = st.floats(-2, 2).map(lambda x: 10.0**x)
nearly_equal = st.floats(-9, -2).map(lambda x: 10.0**x)


@settings(max_examples=60, deadline=None)
@given(
    case=st.sampled_from([(name, rows[0]) for name, rows in PUBLISHED.items()]),
    p=st.one_of(wide, nearly_equal.map(lambda x: 1 - x), nearly_equal.map(lambda x: 1 + x)),
    place=st.floats(0, 1),
)
def test_any_pair_of_stars(case, p, place):
    name, c = case
    d = np.array([place * (1 + p), abs(1 - p) * (1 - place**8), abs(1 - p) + place**8 * p])
    out, values = read(filled(p, name, c), p, d)
    expected = exact(p, name, c, d)
    assert np.all((values >= 0) & (values <= 1))
    np.testing.assert_allclose(out[:, 0], expected[:, 0], rtol=0, atol=1e-9)
    inside = d > 0
    np.testing.assert_allclose(out[inside, 1:], expected[inside, 1:], rtol=0, atol=1e-6)
