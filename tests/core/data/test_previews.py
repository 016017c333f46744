"""A look into a file before it is read."""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np
import pytest

from shadowscale.data import head_of, kind_of, preview, read_photometry
from shadowscale.errors import TableError
from table_files import light, rows, written


def test_a_short_file(tmp_path: Path) -> None:
    lines = ["# band: V", "BJD_TDB-2457000,mag,err", *rows(), "cloud,11.2,0.01"]
    lines[2:-1] = [f"{float(line[:14]) - 2457000:.6f}{line[14:]}" for line in lines[2:-1]]
    path = written(tmp_path, "a.csv", lines)
    seen = preview(path)
    assert seen.columns == ("BJD_TDB-2457000", "mag", "err")
    assert len(seen.rows) == 50
    assert [float(cell) for cell in seen.rows[3]] == [float(c) for c in lines[5].split(",")]
    assert [(g.role, g.index) for g in seen.guesses] == [("time", 0), ("mag", 1), ("error", 2)]
    assert seen.time_scale == "BJD_TDB"
    assert seen.clock is not None
    assert seen.clock.offset == 2457000
    assert seen.bands == ("V",)
    assert (seen.row_count, seen.estimated) == (61, False)
    assert [row.line for row in seen.unreadable] == [63]
    assert seen.problems == ()
    assert seen.form == "text separated by commas"


def test_rows_that_will_take_no_part_are_listed(tmp_path: Path) -> None:
    lines = ["HJD,mag,err", *rows(), "2459000.9,,0.01", "2459000.91,11.2,-0.01"]
    path = written(tmp_path, "a.csv", lines)
    seen, whole = preview(path), read_photometry(path)
    listed = [(row.line, row.reason) for row in seen.set_aside]
    assert listed == [
        (int(whole.line[row]), whole.reasons[whole.why[row]]) for row in np.flatnonzero(whole.why)
    ]
    assert [line for line, _ in listed] == [len(lines) - 1, len(lines)]


def test_problems_are_shown_and_the_user_settles_them(tmp_path: Path) -> None:
    time, magnitude, _ = light()
    lines = ["HJD,B,V", *(f"{t:.5f},{m + 1:.3f},{m:.3f}" for t, m in zip(time, magnitude))]
    path = written(tmp_path, "a.csv", lines)
    seen = preview(path)
    assert seen.guesses == ()
    assert "one column of mag, found 'B', 'V'" in str(seen.problems[0])
    assert len(seen.rows) == 50
    settled = preview(path, columns={"mag": "V"})
    assert settled.problems == ()
    assert settled.bands == ("V",)
    wrong = preview(path, columns={"colour": "V"})
    assert "expected one of time, mag" in str(wrong.problems[0])


def test_two_clocks_in_one_file_are_a_problem(tmp_path: Path) -> None:
    lines = [f"{2459000 - 2400000.5 * (k % 2)} 11.2" for k in range(30)]
    seen = preview(written(tmp_path, "a.txt", lines))
    assert "two kinds of Julian dates" in str(seen.problems[0])


def test_a_long_file_is_looked_at_in_part(tmp_path: Path) -> None:
    lines = [f"{2459000 + k * 1e-3:.4f},{1 + (k % 7) * 1e-3:.4f},0.001" for k in range(60_000)]
    path = written(tmp_path, "a.csv", ["BJD,flux,err", *lines])
    seen = preview(path)
    assert seen.estimated
    assert seen.row_count == pytest.approx(60_000, rel=0.01)
    assert seen.unreadable == ()
    packed = preview(written(tmp_path, "a.csv.gz", gzip.compress(path.read_bytes(), 1)))
    assert packed.row_count == pytest.approx(60_000, rel=0.2)
    whole = read_photometry(path)
    assert whole.files[0].rows == 60_000


def test_long_files_of_other_formats(tmp_path: Path) -> None:
    from astropy.table import Table

    count = 20_000
    table = Table({"bjd": 2459000 + np.arange(count) * 1e-3, "flux": 1 + np.arange(count) * 1e-7})
    for name, form in (("a.fits", "fits"), ("a.ecsv", "ascii.ecsv"), ("a.vot", "votable")):
        table.write(tmp_path / name, format=form)
        seen = preview(tmp_path / name)
        assert seen.estimated
        assert len(head_of(tmp_path / name).line) < count
        assert seen.row_count == pytest.approx(count, rel=0.02)
        assert [guess.column for guess in seen.guesses] == ["bjd", "flux"]


def test_velocities(tmp_path: Path) -> None:
    lines = ["BJD,rv1,rv1_err", *(f"{2459000 + k},{10 * k},0.2" for k in range(5))]
    seen = preview(written(tmp_path, "a.csv", lines), "velocities")
    assert [guess.role for guess in seen.guesses] == ["time", "rv1", "rv1_err"]
    assert seen.bands == ()
    with pytest.raises(ValueError, match="kind: 'spectra' is none of photometry, velocities"):
        preview(tmp_path / "a.csv", "spectra")


def test_what_is_no_table_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(TableError, match="no such file"):
        preview(tmp_path / "none.csv")


@pytest.mark.parametrize(
    ("header", "row", "kind"),
    [
        ("BJD,rv1,rv1_err,rv2,rv2_err", "{t},{v},0.1,{w},0.2", "velocities"),
        ("BJD,RV,err", "{t},{v},0.1", "velocities"),
        ("BJD,velocity [km/s]", "{t},{v}", "velocities"),
        ("", "{t} {v} 0.1 {w} 0.2", "velocities"),
        ("BJD,mag,err", "{t},{m},0.01", "photometry"),
        ("BJD,V,err", "{t},{m},0.01", "photometry"),
        ("time,flux", "{t},{f}", "photometry"),
        ("", "{t} {m} 0.01", "photometry"),
        ("", "{t} {f}", "photometry"),
        ("", "{t} {d} 0.004", "photometry"),
    ],
)
def test_the_kind_of_a_file(header: str, row: str, kind: str, tmp_path: Path) -> None:
    lines = [header] if header else []
    for k in range(30):
        swing = np.sin(k)
        lines.append(
            row.format(
                t=2459000.5 + k,
                v=f"{80 * swing:.2f}",
                w=f"{-95 * swing:.2f}",
                m=f"{12 + 0.01 * swing:.3f}",
                f=f"{1 + 0.01 * swing:.4f}",
                d=f"{0.4 + 0.1 * swing:.4f}",
            )
        )
    assert kind_of(head_of(written(tmp_path, "a.txt", lines))) == kind
