"""FITS, ECSV and VOTable files as astropy writes them (the outside truth) are read back to the bit."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from astropy import units as u
from astropy.io import fits
from astropy.table import MaskedColumn, QTable, Table
from astropy.time import Time

from shadowscale.data import read_photometry, read_velocities
from shadowscale.errors import TableError
from table_files import light, written

TIME, MAGNITUDE, ERROR = light(60)
FLUX = 1e4 * 10 ** (-0.4 * (MAGNITUDE - 11.2))


def space_table(folder: Path, name: str = "lc.fits") -> Path:
    """A light curve laid out as space missions do."""
    flux = FLUX.astype(">f4")
    flux[7] = np.nan
    quality = np.zeros(60, dtype=np.int32)
    quality[[3, 11]] = 128
    time = TIME - 2457000
    time[20] = np.nan
    columns = [
        fits.Column("TIME", "D", unit="BJD - 2457000, days", disp="D14.7", array=time),
        fits.Column("TIMECORR", "E", unit="d", array=np.zeros(60)),
        fits.Column("CADENCENO", "J", array=np.arange(60) + 1000),
        fits.Column("SAP_FLUX", "E", unit="e-/s", array=flux * 0.9),
        fits.Column("SAP_FLUX_ERR", "E", unit="e-/s", array=np.full(60, 9.0)),
        fits.Column("PDCSAP_FLUX", "E", unit="e-/s", array=flux),
        fits.Column("PDCSAP_FLUX_ERR", "E", unit="e-/s", array=np.full(60, 10.0)),
        fits.Column("QUALITY", "J", array=quality),
        fits.Column("PIXELS", "4E", dim="(2,2)", array=np.zeros((60, 2, 2))),
    ]
    table = fits.BinTableHDU.from_columns(columns, name="LIGHTCURVE")
    table.header.update({"BJDREFI": 2457000, "BJDREFF": 0.0, "TIMESYS": "TDB", "TIMEUNIT": "d"})
    first = fits.PrimaryHDU()
    first.header["TELESCOP"] = "TESS"
    fits.HDUList([first, table, fits.ImageHDU(np.zeros((4, 4)))]).writeto(folder / name)
    return folder / name


def test_a_fits_table_of_a_space_mission(tmp_path: Path) -> None:
    table = read_photometry(space_table(tmp_path))
    kept = np.arange(60) != 20
    np.testing.assert_allclose(table.time, TIME[kept], rtol=0, atol=1e-9)
    np.testing.assert_array_equal(table.line, np.arange(1, 61)[kept])
    expected = FLUX.astype(np.float32).astype(float)[kept]
    np.testing.assert_array_equal(table.value[table.used], expected[table.used])
    assert (table.time_scale, table.bands) == ("BJD_TDB", ("TESS",))
    assert [
        (int(table.line[k]), table.reasons[table.why[k]]) for k in np.flatnonzero(table.why)
    ] == [
        (4, "quality flag 128"),
        (8, "no measurement"),
        (12, "quality flag 128"),
    ]
    assert [(row.line, row.reason) for row in table.unreadable] == [(21, "column 'TIME': no time")]
    assert (table.files[0].rows, table.files[0].used) == (60, 56)
    assert any("PIXELS" in note for note in table.notes)


def test_a_compressed_fits_file(tmp_path: Path) -> None:
    plain = read_photometry(space_table(tmp_path))
    packed = read_photometry(space_table(tmp_path, "lc.fits.gz"))
    np.testing.assert_array_equal(plain.time, packed.time)


def test_integers_that_stand_for_nothing_in_fits(tmp_path: Path) -> None:
    counts = np.round(FLUX).astype(np.int32)
    counts[5] = -99
    columns = [
        fits.Column("HJD", "D", unit="d", array=TIME),
        fits.Column("COUNTS", "J", null=-99, array=counts),
        fits.Column("FILTER", "A2", array=["V"] * 60),
    ]
    fits.BinTableHDU.from_columns(columns).writeto(tmp_path / "a.fits")
    table = read_photometry(tmp_path / "a.fits")
    assert table.bands == ("V",)
    assert table.reasons[table.why[5]] == "no measurement"


def test_velocities_in_fits(tmp_path: Path) -> None:
    columns = [
        fits.Column("BJD_TDB", "D", unit="d", array=TIME[:5]),
        fits.Column("RV1", "D", unit="m/s", array=np.arange(5) * 1000.0),
        fits.Column("RV1_ERR", "D", unit="m/s", array=np.full(5, 100.0)),
    ]
    fits.BinTableHDU.from_columns(columns).writeto(tmp_path / "rv.fits")
    table = read_velocities(tmp_path / "rv.fits")
    np.testing.assert_allclose(table.rv1, np.arange(5.0))
    np.testing.assert_allclose(table.rv1_error, 0.1)


@pytest.mark.parametrize("keep", [100, 2880, 6000, 11000])
def test_a_fits_file_cut_short(keep: int, tmp_path: Path) -> None:
    content = space_table(tmp_path).read_bytes()[:keep]
    with pytest.raises(TableError, match="expected a FITS"):
        read_photometry(written(tmp_path, "cut.fits", content))


def test_a_fits_picture_is_no_table(tmp_path: Path) -> None:
    fits.PrimaryHDU(np.zeros((4, 4))).writeto(tmp_path / "a.fits")
    with pytest.raises(TableError, match="1 parts, none of them a table with two columns"):
        read_photometry(tmp_path / "a.fits")


@pytest.mark.parametrize(("name", "form"), [("a.ecsv", "ascii.ecsv"), ("a.vot", "votable")])
def test_tables_with_units_and_gaps(name: str, form: str, tmp_path: Path) -> None:
    mask = np.arange(60) == 9
    table = Table(
        {
            "hjd": TIME,
            "brightness": MaskedColumn(MAGNITUDE * 1000, mask=mask, unit="mmag"),
            "unc": ERROR * 1000,
            "band": ["V", "R"] * 30,
        }
    )
    table["hjd"].unit = "d"
    table["unc"].unit = "mmag"
    table.write(tmp_path / name, format=form)
    read = read_photometry(tmp_path / name)
    np.testing.assert_array_equal(read.time, TIME)
    np.testing.assert_allclose(read.value[~mask], 1000 * MAGNITUDE[~mask])
    assert read.reasons[read.why[9]] == "no measurement"
    assert read.bands == ("V", "R")
    for band in (0, 1):
        rows = read.used & (read.band == band)
        level = np.median(MAGNITUDE[rows])
        np.testing.assert_allclose(read.flux[rows], 10 ** (-0.4 * (MAGNITUDE[rows] - level)))
    np.testing.assert_allclose(
        (read.flux_error / read.flux)[read.used], (ERROR * np.log(10) / 2.5)[read.used]
    )


@pytest.mark.parametrize("scale", ["tdb", "utc"])
def test_times_of_astropy_keep_their_scale(scale: str, tmp_path: Path) -> None:
    table = QTable({"time": Time(TIME, format="jd", scale=scale), "mag": MAGNITUDE * u.mag})
    table.write(tmp_path / "a.ecsv", format="ascii.ecsv")
    read = read_photometry(tmp_path / "a.ecsv")
    np.testing.assert_allclose(read.time, TIME, rtol=0, atol=1e-9)
    assert read.time_scale == f"JD_{scale.upper()}"


def test_lines_of_an_ecsv_file_are_counted_in_the_file(tmp_path: Path) -> None:
    path = tmp_path / "a.ecsv"
    Table({"hjd": TIME, "mag": MAGNITUDE}).write(path, format="ascii.ecsv")
    lines = path.read_text().splitlines()
    read = read_photometry(path)
    assert lines[read.line[0] - 1].startswith(str(TIME[0]))
    assert lines[read.line[-1] - 1].startswith(str(TIME[-1]))


def test_a_broken_ecsv_file_is_read_as_text(tmp_path: Path) -> None:
    path = tmp_path / "a.ecsv"
    Table({"hjd": TIME, "mag": MAGNITUDE}).write(path, format="ascii.ecsv")
    text = path.read_text().replace(str(TIME[4]), "cloud")
    read = read_photometry(written(tmp_path, "b.ecsv", text))
    assert [row.reason for row in read.unreadable] == [
        "column 'hjd': expected a number, found 'cloud'"
    ]
    assert len(read.time) == 59
    assert any("breaks the rules of ECSV" in note for note in read.notes)


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (
            "<?xml version='1.0'?><VOTABLE><RESOURCE><TABLE>",
            "expected a VOTable, found a file that",
        ),
        ("<VOTABLE version='1.3'></VOTABLE>", "found 0 tables, none with two columns"),
    ],
)
def test_broken_votables(content: str, words: str, tmp_path: Path) -> None:
    with pytest.raises(TableError, match=words):
        read_photometry(written(tmp_path, "a.vot", content))


def test_reading_text_needs_no_astropy(tmp_path: Path) -> None:
    path = written(
        tmp_path, "a.csv", ["hjd,mag", *(f"{t:.5f},{m:.3f}" for t, m in zip(TIME, MAGNITUDE))]
    )
    code = (
        "import sys; from shadowscale.data import *; read_photometry(sys.argv[1]); preview(sys.argv[1]);"
        "print([name for name in ('astropy', 'scipy', 'numba') if name in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, str(path)], capture_output=True, text=True, check=True
    )
    assert done.stdout.strip() == "[]"
