"""Published limb-darkening coefficients."""

from __future__ import annotations

import warnings
from math import log10
from pathlib import Path

import numpy as np
import pytest

from shadowscale.data import read_limb_table
from shadowscale.errors import ColumnError, TableError
from table_files import written

# Claret & Bloemen 2011 (A&A 529, A75), ATLAS, least squares, [M/H] = 0, 2 km/s, and Claret 2017
# (A&A 600, A30; TESS): Teff, log g, band, u, a, b, c, d, e, f, a1, a2, a3, a4
CLARET = """\
4500 4.5 V    0.7947 0.7872  0.0100  0.7600  0.0498  0.8014  0.0159  0.6738 -0.8523  1.6485 -0.5850
4500 4.5 TESS 0.6256 0.5126  0.1514  0.3912  0.3368  0.6867  0.1445  0.7285 -0.7225  1.2547 -0.4896
5750 4.5 V    0.6564 0.4650  0.2565  0.2892  0.5276  0.7556  0.2345  0.4482  0.2143  0.3961 -0.2625
5750 4.5 TESS 0.5122 0.3075  0.2743  0.1123  0.5745  0.6193  0.2534  0.5712 -0.1025  0.4745 -0.2657
6500 4.5 V    0.5847 0.3493  0.3154  0.1247  0.6608  0.7081  0.2919  0.3380  0.8694 -0.6594  0.1951
6500 4.5 TESS 0.4499 0.2179  0.3109 -0.0068  0.6562  0.5721  0.2889  0.4233  0.5171 -0.4469  0.1247
10000 4.0 V    0.4714 0.2276  0.3267 -0.0147  0.6984  0.6007  0.3057  0.5552  0.3224 -0.3071  0.0947
"""
NAMES = "Teff logg band u a b c d e f a1 a2 a3 a4"


@pytest.fixture(name="claret")
def claret_file(tmp_path: Path) -> Path:
    return written(tmp_path, "claret.txt", f"{NAMES}\n{CLARET}")


@pytest.mark.parametrize(
    ("law", "first", "last"),
    [
        ("linear", 3, 4),
        ("quadratic", 4, 6),
        ("square-root", 6, 8),
        ("logarithmic", 8, 10),
        ("four-parameter", 10, 14),
    ],
)
def test_rows_come_back_as_printed(law: str, first: int, last: int, claret: Path) -> None:
    table = read_limb_table(claret)
    assert table.bands == ("V", "TESS")
    for line in CLARET.splitlines():
        cells = line.split()
        found = table.coefficients(float(cells[0]), float(cells[1]), cells[2], law=law)
        assert found == tuple(map(float, cells[first:last]))


def test_between_rows_it_is_linear_in_log_teff(claret: Path) -> None:
    table = read_limb_table(claret)
    share = (log10(6000) - log10(5750)) / (log10(6500) - log10(5750))
    (found,) = table.coefficients(6000, 4.5, "V", law="linear")
    assert found == pytest.approx(0.6564 + share * (0.5847 - 0.6564), rel=1e-12)


def test_the_published_rows_are_smooth_between_their_neighbours(claret: Path) -> None:
    rows = [line for line in CLARET.splitlines() if not line.startswith("5750")]
    without = written(claret.parent, "without.txt", "\n".join([NAMES, *rows]) + "\n")
    (interpolated,) = read_limb_table(without).coefficients(5750, 4.5, "V", law="linear")
    assert interpolated == pytest.approx(0.6564, abs=0.02)


@pytest.mark.parametrize(
    ("teff", "logg", "band", "law", "words"),
    [
        (3000, 4.5, "V", "linear", "expected Teff 3000 K within the table, found 4500 to 10000 K"),
        (12000, 4.5, "V", "linear", "expected Teff 12000 K within the table, found 4500 to 10000 K"),
        (5750, 4.4, "V", "linear", "log g at Teff 5750 K 4.4 within the table, found 4.5 to 4.5"),
        (8000, 4.5, "V", "linear", "log g at Teff 10000 K 4.5 within the table, found 4 to 4"),
        (5750, 4.5, "K", "linear", "coefficients for band K, found the bands V, TESS"),
        (5750, 4.5, "V", "power-2", "coefficients of the power-2 law, found coefficients for linear, quadratic"),
        (float("nan"), 4.5, "V", "linear", "expected Teff nan K within"),
    ],
)  # fmt: skip
def test_nothing_is_extrapolated(
    teff: float, logg: float, band: str, law: str, words: str, claret: Path
) -> None:
    with pytest.raises(TableError, match=words):
        read_limb_table(claret).coefficients(teff, logg, band, law=law)


def _plane(teff: float, logg: float, metallicity: float) -> tuple[float, float]:
    """Coefficients that are linear in log Teff, log g and metallicity, each alone."""
    x = log10(teff) - 3.7
    return 0.5 - x + 0.02 * logg + 0.1 * metallicity + 0.3 * x * logg, 0.2 + x - 0.01 * metallicity


@pytest.mark.parametrize(
    "names", ["Teff,logg,Z,g,h", "T_eff,log(g),[M/H],c,alpha", "TEFF,LOGG,FeH,a,b"]
)
@pytest.mark.parametrize("form", ["csv", "ascii.ecsv", "votable"])
def test_trilinear_functions_are_exact(names: str, form: str, tmp_path: Path) -> None:
    from astropy.table import Table

    grid = [
        (teff, logg, z, *_plane(teff, logg, z))
        for teff in (5000.0, 5500.0, 6500.0)
        for logg in (3.5, 4.0, 4.5)
        for z in (-0.5, 0.0, 0.3)
    ]
    path = tmp_path / "grid.dat"
    if form == "csv":
        lines = [",".join(map(repr, row)) for row in grid]
        written(tmp_path, "grid.dat", [names, *lines])
    else:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # VOTable has no brackets in names
            Table(rows=grid, names=names.split(",")).write(path, format=form)
    law = "quadratic" if names.endswith("a,b") else "power-2"
    table = read_limb_table(path)
    assert table.laws == (law,)
    for teff, logg, z in (
        (5000, 3.5, -0.5),
        (5200, 3.6, 0.1),
        (6400, 4.45, 0.29),
        (6500, 4.5, 0.3),
    ):
        found = table.coefficients(teff, logg, "any band", law=law, metallicity=z)
        np.testing.assert_allclose(found, _plane(teff, logg, z), rtol=1e-12)
    with pytest.raises(
        TableError, match=r"expected metallicity 0\.4 within the table, found -0\.5 to 0\.3"
    ):
        table.coefficients(5500, 4.0, "V", law=law, metallicity=0.4)


def test_the_usual_version_of_a_row_is_taken(tmp_path: Path) -> None:
    lines = ["logg Teff Z xi u Filt Met Mod"]
    lines += [
        f"4.5 {teff} 0.0 {xi} {u + shift} V {method} {model}"
        for teff, u in ((5000, 0.7), (6000, 0.6))
        for xi, shift in ((1.0, 0.05), (2.0, 0.0))
        for method in "LF"
        for model in "AP"
    ]
    lines = [
        line.replace("0.6 V F", "0.61 V F").replace("0.7 V L P", "0.72 V L P") for line in lines
    ]
    table = read_limb_table(written(tmp_path, "a.txt", lines))
    assert table.coefficients(5000, 4.5, "V", law="linear") == (0.7,)
    assert table.coefficients(6000, 4.5, "V", law="linear") == (0.6,)
    assert any("microturbulence 2 km/s" in note for note in table.notes)
    assert any("ATLAS" in note for note in table.notes)


def test_rows_that_contradict_each_other(tmp_path: Path) -> None:
    lines = ["Teff,logg,u", "5000,4.5,0.7", "5000,4.5,0.71", "6000,4.5,0.6"]
    table = read_limb_table(written(tmp_path, "a.csv", lines))
    with pytest.raises(
        TableError, match=r"one row for each Teff.*found 2 different ones for log g 4.5"
    ):
        table.coefficients(5000, 4.5, "V", law="linear")


def test_other_names_of_a_band(claret: Path) -> None:
    table = read_limb_table(claret)
    assert table.coefficients(5750, 4.5, "Johnson V", law="linear") == (0.6564,)
    assert table.coefficients(5750, 4.5, "tess", law="linear") == (0.5122,)


@pytest.mark.parametrize(
    ("header", "words"),
    [
        ("Teff,size,u", "expected a column logg, found none; the columns are"),
        ("x1,logg,u", "expected a column teff, found none"),
        ("Teff,logg,q", "expected coefficients .u; a b; c d.*found the columns Teff, logg, q"),
    ],
)
def test_columns_that_are_missing(header: str, words: str, tmp_path: Path) -> None:
    with pytest.raises(ColumnError, match=words):
        read_limb_table(written(tmp_path, "a.csv", [header, "5000,4.5,0.7", "6000,4.5,0.6"]))
