"""Whatever a file holds: nothing but our own errors, and no line is lost."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from shadowscale.data import (
    head_of,
    preview,
    read_limb_table,
    read_photometry,
    read_velocities,
)
from shadowscale.data.files import read_table
from shadowscale.errors import InputError, Problem
from table_files import rows, written

MANGLED = settings(
    max_examples=80,
    deadline=None,
    suppress_health_check=[HealthCheck.function_scoped_fixture],
)
CELLS = st.one_of(
    st.floats(allow_nan=True, allow_infinity=True).map(repr),
    st.sampled_from(["", "-", "nan", "cloud", "12,43", "<13", '"', "1_0", "1e400", "0", "#", "é"]),
    st.text(max_size=6),
)


@st.composite
def mangled_lines(draw: st.DrawFn) -> list[str]:
    """A good night in which some lines were damaged, cut, doubled or made up."""
    separator = draw(st.sampled_from([",", ";", "\t", "  "]))
    lines = rows(separator, count=30)
    for _ in range(draw(st.integers(0, 8))):
        place = draw(st.integers(0, len(lines) - 1))
        made = draw(
            st.one_of(
                st.lists(CELLS, max_size=6).map(separator.join),
                st.integers(0, 25).map(lambda cut, line=lines[place]: line[:cut]),
                st.sampled_from([lines[place] + separator + "7", lines[place] * 2, "", "# cloud"]),
            )
        )
        lines.insert(place, made)
    head = draw(st.sampled_from([[], [separator.join(("HJD", "mag", "err"))], ["# a title"]]))
    return head + lines


def _counted(text: str) -> int:
    """Lines that are neither blank nor comments, counted apart from the reader."""
    every = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    return sum(bool(line.strip()) and not line.lstrip().startswith("#") for line in every)


@MANGLED
@given(lines=mangled_lines())
def test_every_line_is_a_row_or_listed(lines: list[str], tmp_path: Path) -> None:
    text = "\n".join(lines).replace("\0", "0")
    path = written(tmp_path, "mangled.csv", text.encode("utf-8", "surrogatepass"))
    try:
        table = read_photometry(path)
    except InputError:
        return
    (file,) = table.files
    assert file.rows == len(table.time) + len(table.unreadable)
    every = np.concatenate([table.line, [row.line for row in table.unreadable]])
    assert len(np.unique(every)) == len(every)
    header = 1 if read_table(path).named and not lines[0].startswith("#") else 0
    assert file.rows == _counted(text) - header
    assert file.used == np.count_nonzero(table.used) >= 20
    assert np.all(np.isfinite(table.time))
    assert np.all(np.isfinite(table.flux[table.used]))
    assert np.all(table.flux_error[table.used] > 0)
    assert np.all(np.isfinite(table.flux_error[table.used]))
    assert all(row.reason for row in table.unreadable)


def _try_everything(path: Path) -> None:
    for reader in (read_photometry, read_velocities, read_limb_table, preview, head_of):
        problems: tuple[Problem, ...] = ()
        try:
            reader(path)
        except InputError as error:
            problems = error.problems
        assert all(problem.file == str(path) for problem in problems)


@MANGLED
@given(content=st.binary(max_size=400))
def test_random_bytes_raise_nothing_else(content: bytes, tmp_path: Path) -> None:
    _try_everything(written(tmp_path, "random", content))


@MANGLED
@given(text=st.text(alphabet="0123456789.,;-+eE \t\n#|\"'nab", max_size=300))
def test_random_tables_raise_nothing_else(text: str, tmp_path: Path) -> None:
    _try_everything(written(tmp_path, "random", text))


@MANGLED
@given(
    start=st.sampled_from(
        [
            b"SIMPLE  =                    T",
            b"# %ECSV 1.0\n",
            b"<?xml version='1.0'?><VOTABLE",
            b"\x1f\x8b\x08\0",
        ]
    ),
    content=st.binary(max_size=300),
)
def test_random_ends_of_known_formats(start: bytes, content: bytes, tmp_path: Path) -> None:
    _try_everything(written(tmp_path, "random", start + content))


@pytest.mark.parametrize("damage", ["flip", "cut"])
@pytest.mark.parametrize("form", ["fits", "ascii.ecsv", "votable"])
def test_damaged_files_of_known_formats(form: str, damage: str, tmp_path: Path) -> None:
    from astropy.table import Table

    random = np.random.default_rng(7)
    table = Table({"bjd": 2459000 + np.arange(40) / 100, "flux": 1 + np.arange(40) / 1000})
    table.write(tmp_path / "good", format=form)
    good = (tmp_path / "good").read_bytes()
    for _ in range(25):
        content = bytearray(good)
        if damage == "cut":
            del content[int(random.integers(10, len(good))) :]
        else:
            for place in random.integers(0, len(good), 5):
                content[place] = int(random.integers(0, 256))
        _try_everything(written(tmp_path, "damaged", bytes(content)))
