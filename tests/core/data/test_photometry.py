"""From files to the table of photometry."""

from __future__ import annotations

from hashlib import sha256
from pathlib import Path

import numpy as np
import pytest

from shadowscale.data import read_photometry
from shadowscale.errors import ColumnError, TableError, UnitError
from table_files import START, light, rows, written

HEADER = "BJD_TDB,mag,err"


def test_magnitudes_become_flux(tmp_path: Path) -> None:
    path = written(tmp_path, "a.csv", [HEADER, *rows()])
    table = read_photometry(path)
    _, magnitude, error = light()
    level = np.median(magnitude)
    # m = -2.5 log10 F, and its derivative (definition of the magnitude)
    np.testing.assert_allclose(table.flux, 10 ** (-0.4 * (magnitude - level)), rtol=1e-13)
    np.testing.assert_allclose(table.flux_error, table.flux * error * np.log(10) / 2.5, rtol=1e-13)
    assert np.median(table.flux) == pytest.approx(1.0, abs=3e-3)
    assert f"band light: magnitude {level:.7g} is taken as 1" in table.notes
    assert table.files[0].sha256 == sha256(path.read_bytes()).hexdigest()
    assert table.errors_from_scatter == (False,)


def test_flux_is_scaled_to_its_median(tmp_path: Path) -> None:
    time, magnitude, error = light()
    flux = 5200.0 * 10 ** (-0.4 * (magnitude - 11.2))
    lines = [f"{t:.6f} {f:.2f} {f * e:.2f}" for t, f, e in zip(time, flux, error)]
    table = read_photometry(written(tmp_path, "a.txt", ["BJD flux err", *lines]))
    assert not table.magnitudes
    assert float(np.median(table.flux)) == pytest.approx(1.0, rel=1e-12)
    np.testing.assert_allclose(table.flux / table.flux_error, table.value / table.value_error)


def test_rows_are_put_in_time_order_and_keep_their_lines(tmp_path: Path) -> None:
    lines = rows()
    mixed = [lines[k] for k in np.random.default_rng(1).permutation(len(lines))]
    table = read_photometry(written(tmp_path, "a.csv", [HEADER, *mixed]))
    assert np.all(np.diff(table.time) > 0)
    for row in range(len(lines)):
        assert mixed[table.line[row] - 2] == lines[row]


def test_missing_errors_are_estimated_from_the_scatter(tmp_path: Path) -> None:
    random = np.random.default_rng(5)
    time = START + np.arange(3000) * 5e-4
    flux = 1 + 0.003 * random.normal(size=3000) - 0.4 * (np.abs(time % 0.5 - 0.25) < 0.03)
    lines = [f"{t:.6f},{f:.6f}" for t, f in zip(time, flux)]
    table = read_photometry(written(tmp_path, "a.csv", ["BJD,flux", *lines]))
    assert table.errors_from_scatter == (True,)
    # standard error of a scatter from median absolute differences: some per cent of it
    assert table.flux_error[0] == pytest.approx(0.003 / np.median(flux), rel=0.06)
    assert "band light: errors are missing and estimated from the scatter" in table.notes


def test_a_column_of_zero_errors_counts_as_none(tmp_path: Path) -> None:
    lines = [line.rsplit(",", 1)[0] + ",0.0" for line in rows()]
    table = read_photometry(written(tmp_path, "a.csv", [HEADER, *lines]))
    assert table.errors_from_scatter == (True,)
    assert np.all(table.used)


@pytest.mark.parametrize(
    ("cells", "reason"),
    [
        ("nan,0.01", "no measurement"),
        (",0.01", "no measurement"),
        ("-,0.01", "no measurement"),
        ("inf,0.01", "the value is not finite"),
        ("99.999,0.01", "the magnitude stands for no measurement"),
        ("11.2,0", "the error is missing, zero or negative"),
        ("11.2,-0.01", "the error is missing, zero or negative"),
        ("11.2,nan", "the error is missing, zero or negative"),
        ("11.2,inf", "the error is missing, zero or negative"),
        ("11.2", "the error is missing, zero or negative"),
    ],
)
def test_rows_set_aside_say_why(cells: str, reason: str, tmp_path: Path) -> None:
    lines = [HEADER, *rows()[:30], f"{START + 0.5},{cells}", *rows()[30:]]
    table = read_photometry(written(tmp_path, "a.csv", lines))
    (row,) = np.flatnonzero(~table.used)
    assert table.reasons[table.why[row]] == reason
    assert table.line[row] == 32
    assert table.files[0].rows == 61
    assert table.files[0].used == 60


def test_zero_flux_is_set_aside_but_negative_flux_is_not(tmp_path: Path) -> None:
    lines = [f"{START + k * 1e-3:.4f},{1 + 0.01 * (k % 3):.3f},0.01" for k in range(40)]
    lines[5] = f"{START + 5e-3:.4f},0.0,0.01"
    lines[6] = f"{START + 6e-3:.4f},-0.02,0.01"
    table = read_photometry(written(tmp_path, "a.csv", ["BJD,flux,err", *lines]))
    assert table.reasons[table.why[5]] == "the flux is exactly zero"
    assert table.used[6]


def test_quality_flags_set_aside(tmp_path: Path) -> None:
    flags = {3: 128, 4: 128, 9: 2048}
    lines = [f"{line},{flags.get(k, 0)}" for k, line in enumerate(rows())]
    table = read_photometry(written(tmp_path, "a.csv", [HEADER + ",quality", *lines]))
    found = {int(k): table.reasons[table.why[k]] for k in np.flatnonzero(~table.used)}
    assert found == {3: "quality flag 128", 4: "quality flag 128", 9: "quality flag 2048"}


def test_quality_in_words(tmp_path: Path) -> None:
    lines = [f"{line},{'B' if k == 7 else 'G'}" for k, line in enumerate(rows())]
    table = read_photometry(written(tmp_path, "a.csv", [HEADER + ",Quality", *lines]))
    assert [table.reasons[code] for code in table.why[table.why > 0]] == ["quality flag B"]


def test_a_flag_that_would_take_all_rows_is_not_used(tmp_path: Path) -> None:
    lines = [f"{line},1" for line in rows()]
    table = read_photometry(written(tmp_path, "a.csv", [HEADER + ",flag", *lines]))
    assert np.all(table.used)
    assert any("would set aside all but 0 rows" in note for note in table.notes)


def test_many_different_flags_share_a_reason(tmp_path: Path) -> None:
    lines = [f"{line},{k if k > 40 else 0}" for k, line in enumerate(rows(count=200))]
    path = written(tmp_path, "a.csv", [HEADER + ",flag", *lines])
    table = read_photometry(path)
    assert "a rare quality flag" in table.reasons
    assert len(table.reasons) == 52
    assert np.count_nonzero(table.used) == 41


@pytest.mark.parametrize(
    ("name", "lines", "band"),
    [
        ("star_V.csv", [HEADER], "V"),
        ("night2-Rc.txt", [HEADER], "Rc"),
        ("a.csv", ["# band: I", HEADER], "I"),
        ("a.csv", ["# Filter = r'", HEADER], "r'"),
        ("a.csv", ["BJD_TDB,V,err"], "V"),
        ("a.csv", ["BJD_TDB,Bmag,err"], "B"),
        ("a.csv", ["BJD_TDB,mag_R,err"], "R"),
        ("a.csv", ["BJD_TDB,mag (TESS),err"], "TESS"),
        ("a.csv", [HEADER], "light"),
        ("data_all.csv", [HEADER], "light"),
    ],
)
def test_the_band_of_a_file(name: str, lines: list[str], band: str, tmp_path: Path) -> None:
    assert read_photometry(written(tmp_path, name, [*lines, *rows()])).bands == (band,)


def test_the_band_given_by_the_user_goes_first(tmp_path: Path) -> None:
    path = written(tmp_path, "star_V.csv", ["# band: I", HEADER, *rows()])
    assert read_photometry(path, band="B").bands == ("B",)


def test_a_column_of_bands(tmp_path: Path) -> None:
    lines = [f"{line},{'BVR'[k % 3]}" for k, line in enumerate(rows(count=90))]
    table = read_photometry(written(tmp_path, "a.csv", [HEADER + ",filter", *lines]))
    assert table.bands == ("B", "V", "R")
    np.testing.assert_array_equal(table.band, np.arange(90) % 3)
    for band in range(3):
        assert float(np.median(table.flux[table.band == band])) == pytest.approx(1.0, abs=5e-3)


def test_too_many_bands_are_no_bands(tmp_path: Path) -> None:
    lines = [f"{line},x{k}" for k, line in enumerate(rows())]
    with pytest.raises(ColumnError, match="names of some bands, found 60 different words"):
        read_photometry(written(tmp_path, "a.csv", [HEADER + ",band", *lines]))


def test_several_files_of_one_band_share_a_scale(tmp_path: Path) -> None:
    night1 = [HEADER, *rows(count=40)]
    night2 = [HEADER, *(f"{START + 1 + k * 1e-3:.4f},11.5,0.005" for k in range(30))]
    table = read_photometry(
        [written(tmp_path, "n1_V.csv", night1), written(tmp_path, "n2_V.csv", night2)]
    )
    assert table.bands == ("V",)
    assert [file.used for file in table.files] == [40, 30]
    ratio = np.median(table.flux[table.file == 1]) / table.flux[table.file == 0]
    np.testing.assert_allclose(ratio, 10 ** (0.4 * (table.value[table.file == 0] - 11.5)))


def test_files_of_one_band_with_unlike_levels_are_scaled_one_by_one(tmp_path: Path) -> None:
    time, magnitude, _ = light(40)
    counts = [f"{t + 1:.6f},{1e5 * 10 ** (-0.4 * (m - 11.2)):.1f}" for t, m in zip(time, magnitude)]
    table = read_photometry(
        [
            written(tmp_path, "n1_V.csv", [HEADER, *rows(count=40)]),
            written(tmp_path, "n2_V.csv", ["BJD_TDB,flux", *counts]),
        ]
    )
    assert table.bands == ("V",)
    assert not table.magnitudes
    np.testing.assert_allclose(np.sort(table.flux[:40]), np.sort(table.flux[40:]), rtol=1e-4)
    assert table.errors_from_scatter == (True,)


def test_one_band_a_file_given_by_the_user(tmp_path: Path) -> None:
    paths = [
        written(tmp_path, "a.csv", [HEADER, *rows(count=40)]),
        written(tmp_path, "b.csv", [HEADER, *rows(count=50)]),
    ]
    table = read_photometry(paths, band=["B", None], columns=[{}, {"error": ""}])
    assert table.bands == ("B", "light")
    assert table.errors_from_scatter == (False, True)
    with pytest.raises(ValueError, match="2 files but 1 bands"):
        read_photometry(paths, band=["B"])
    with pytest.raises(ValueError, match="2 files but 1 mappings"):
        read_photometry(paths, columns=[{}])
    with pytest.raises(ValueError, match="at least one file"):
        read_photometry([])


@pytest.mark.parametrize(
    ("header", "value", "error", "flux", "sigma"),
    [
        ("BJD,flux [ppm],err", "{p:.1f}", "150", 1e-6, 150e-6),
        ("BJD,dmag [mmag],err [mmag]", "{m:.3f}", "5", None, 5e-3 * np.log(10) / 2.5),
    ],
)
def test_units_of_light(
    header: str, value: str, error: str, flux: float | None, sigma: float, tmp_path: Path
) -> None:
    ppm = np.array([0.0, 500.0, -1e4, 200.0, -300.0] * 10)
    mmag = -2500 * np.log10(1 + 1e-6 * ppm)
    lines = [
        f"{START + k * 1e-3:.4f}," + value.format(p=p, m=m) + f",{error}"
        for k, (p, m) in enumerate(zip(ppm, mmag))
    ]
    table = read_photometry(written(tmp_path, "a.csv", [header, *lines]))
    np.testing.assert_allclose(table.flux, 1 + 1e-6 * ppm, atol=1e-6)
    np.testing.assert_allclose(table.flux_error / table.flux, sigma, rtol=0.011)


def test_a_unit_that_is_none_of_light(tmp_path: Path) -> None:
    lines = ["BJD,flux [km/s],err", *rows()]
    with pytest.raises(
        UnitError,
        match="column 'flux \\[km/s\\]': expected magnitudes or flux, found the unit km/s",
    ):
        read_photometry(written(tmp_path, "a.csv", lines))


def test_flux_around_zero_is_refused(tmp_path: Path) -> None:
    lines = [f"{START + k * 1e-3:.4f},{0.001 * (k % 5 - 3):.4f},0.001" for k in range(40)]
    with pytest.raises(
        TableError, match=r"flux above zero in band light, found a median of -0.001"
    ):
        read_photometry(written(tmp_path, "a.csv", ["BJD,flux,err", *lines]))


def test_too_few_rows_say_what_was_found(tmp_path: Path) -> None:
    lines = [HEADER, *rows()[:15], f"{START + 1},nan,0.01", "cloud,11.2,0.01", *rows()[15:18]]
    with pytest.raises(
        TableError,
        match=r"at least 20 rows that can be used, found 18 in 20 rows .1: no measurement; 1 unreadable, first in line 18",
    ) as caught:
        read_photometry(written(tmp_path, "a.csv", lines))
    whole, row = caught.value.problems
    assert whole.line is None
    assert row.line == 18
    assert row.found == "'cloud 11.2 0.01' (column 'BJD_TDB': expected a number, found 'cloud')"


def test_repeated_rows_are_noted(tmp_path: Path) -> None:
    lines = [HEADER, *rows(), rows()[3], rows()[3], rows()[9]]
    table = read_photometry(written(tmp_path, "a.csv", lines))
    assert any(note.startswith("3 rows repeat the time") for note in table.notes)


def test_nights_are_counted_per_band(tmp_path: Path) -> None:
    lines = []
    for night in (0, 1, 4):
        for k in range(20):
            lines.append(f"{START + night + k * 2e-3:.4f},11.2,0.01,V")
            if night != 1:
                lines.append(f"{START + night + k * 2e-3 + 1e-3:.4f},11.9,0.01,B")
    table = read_photometry(written(tmp_path, "a.csv", [HEADER + ",band", *lines]))
    assert table.bands == ("V", "B")
    np.testing.assert_array_equal(np.unique(table.night[table.band == 0]), [0, 1, 2])
    np.testing.assert_array_equal(np.unique(table.night[table.band == 1]), [0, 1])


@pytest.mark.parametrize(
    ("spacing", "gap", "segments"),
    [(0.02, 0.35, 1), (0.02, 1.5, 2), (1.0, 10.0, 1), (1.0, 90.0, 2)],
)
def test_slow_series_need_longer_gaps(
    spacing: float, gap: float, segments: int, tmp_path: Path
) -> None:
    times = np.concatenate([np.arange(50) * spacing, 49 * spacing + gap + np.arange(50) * spacing])
    lines = [f"{START + t:.4f},1.0{k % 3},0.01" for k, t in enumerate(times)]
    table = read_photometry(written(tmp_path, "a.csv", ["BJD,flux,err", *lines]))
    assert len(np.unique(table.night)) == segments


def test_tables_are_read_only(tmp_path: Path) -> None:
    table = read_photometry(written(tmp_path, "a.csv", [HEADER, *rows()]))
    with pytest.raises(ValueError, match="read-only"):
        table.flux[0] = 2.0


def test_rows_can_be_set_aside_and_brought_back(tmp_path: Path) -> None:
    lines = [HEADER, *rows(), f"{START + 0.5},nan,0.01"]
    table = read_photometry(written(tmp_path, "a.csv", lines))
    some = np.arange(61) < 5
    without = table.excluded(some | (np.arange(61) == 60), "clouds")
    assert np.count_nonzero(without.used) == 55
    assert without.reasons[without.why[0]] == "clouds"
    assert without.reasons[without.why[60]] == "no measurement"
    again = without.restored(np.ones(61, dtype=bool))
    np.testing.assert_array_equal(table.used, again.used)


def test_every_guess_is_recorded(tmp_path: Path) -> None:
    table = read_photometry(written(tmp_path, "a.csv", [HEADER, *rows()]))
    recorded = dict(table.files[0].columns)
    assert recorded["time"] == "BJD_TDB: the name says time"
    assert recorded["mag"] == "mag: the name says magnitude"
    assert recorded["time_system"].startswith("BJD_TDB: BJD by the column's name")


@pytest.mark.parametrize(
    ("name", "printed", "seconds"),
    [("exptime", "120", 120.0), ("exptime [min]", "2", 120.0), ("exposure [d]", "0.02", 1728.0)],
)
def test_exposures_are_read_in_seconds(
    name: str, printed: str, seconds: float, tmp_path: Path
) -> None:
    lines = [f"{HEADER},{name}", *(f"{row},{printed}" for row in rows())]
    table = read_photometry(written(tmp_path, "a.csv", lines))
    assert table.exposure is not None
    np.testing.assert_allclose(table.exposure, seconds)


def test_what_takes_no_part_is_listed_with_its_lines(tmp_path: Path) -> None:
    lines = [HEADER, *rows()]
    for number in (4, 9):
        lines[number] = f"{START + number * 1e-3},nan,0.01"
    lines[20] = "cloud,11.2,0.01"
    path = written(tmp_path, "a.csv", lines)
    notes = read_photometry(path).notes
    assert f"{path}: 2 rows set aside (no measurement; lines 5, 10)" in notes
    unreadable = "line 21: column 'BJD_TDB': expected a number, found 'cloud'"
    assert f"{path}: 1 unreadable ({unreadable})" in notes
