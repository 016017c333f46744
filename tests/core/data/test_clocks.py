"""Julian dates: kinds, scales, offsets, and what is not settled."""

from __future__ import annotations

import re
from collections.abc import Mapping
from pathlib import Path

import numpy as np
import pytest

from shadowscale.data import check_zero_points, read_photometry, read_velocities
from shadowscale.data.clocks import recognised_clock
from shadowscale.errors import TimeScaleError
from table_files import light, written

FULL = np.linspace(2459000.0, 2459010.0, 50)


@pytest.mark.parametrize(
    ("name", "unit", "headers", "comments", "offset", "scale"),
    [
        ("BJD_TDB", "", {}, (), 0.0, "BJD_TDB"),
        ("TIME", "d", {"bjdrefi": "2457000", "timesys": "TDB"}, (), 2457000.0, "BJD_TDB"),
        ("HJD", "", {"time system": "HJD_UTC"}, (), 0.0, "HJD_UTC"),
        ("JD_UTC", "", {}, (), 0.0, "JD_UTC"),
        ("BJD(TDB)", "", {}, (), 0.0, "BJD_TDB"),
        ("BJD-2457000", "", {}, (), 2457000.0, "BJD"),
        ("BJD_TDB - 2450000", "", {}, (), 2450000.0, "BJD_TDB"),
        ("HJD-2400000", "", {}, (), 2400000.0, "HJD"),
        ("HJD (2450000+)", "", {}, (), 2450000.0, "HJD"),
        ("HJD2450000+", "", {}, (), 2450000.0, "HJD"),
        # Modified Julian Date: JD - 2400000.5 (IAU 1997 resolution B1)
        ("MJD", "", {}, (), 2400000.5, "JD"),
        ("BMJD_TDB", "", {}, (), 2400000.5, "BJD_TDB"),
        # TESS: BJD - 2457000 in TDB; Kepler: BJD - 2454833 in TDB (archive manuals, from memory)
        ("BTJD", "", {}, (), 2457000.0, "BJD_TDB"),
        ("BKJD", "", {}, (), 2454833.0, "BJD_TDB"),
        ("TIME", "BJD - 2457000, days", {"timesys": "TDB"}, (), 2457000.0, "BJD_TDB"),
        ("TIME", "d", {"bjdrefi": "2454833", "bjdreff": "0.5", "timesys": "TDB", "timeunit": "BJD"}, (), 2454833.5, "BJD_TDB"),
        ("TIME", "d", {"mjdrefi": "50000", "mjdreff": "0.0", "timesys": "TT"}, (), 2450000.5, "unknown"),
        ("time", "", {}, ("Times are HJD - 2450000",), 2450000.0, "HJD"),
        ("time", "", {}, ("times in BJD_TDB, 2450000 subtracted",), 2450000.0, "BJD_TDB"),
        ("time", "", {"time offset": "2457000"}, ("barycentric julian dates",), 2457000.0, "BJD"),
        ("MJD-50000", "", {}, (), 2450000.5, "JD"),
        ("time (MJD)", "", {}, (), 2400000.5, "JD"),
        ("HJD", "", {}, ("TT Hya: times and magnitudes",), 0.0, "HJD"),
        ("HJD", "", {}, ("times in the TT scale", "HJD TT"), 0.0, "HJD_TT"),
        ("time", "", {"mjd-obs": "59000.5", "date-obs": "2020-05-31"}, (), 0.0, "unknown"),
        ("RJD", "", {}, (), 2400000.0, "JD"),
        ("date", "", {"jd offset": "2450000"}, (), 2450000.0, "JD"),
    ],
)  # fmt: skip
def test_offsets_and_scales(
    name: str,
    unit: str,
    headers: Mapping[str, str],
    comments: tuple[str, ...],
    offset: float,
    scale: str,
) -> None:
    clock = recognised_clock(
        FULL - offset, name=name, unit=unit, headers=headers, comments=comments
    )
    assert clock.scale == scale
    assert clock.offset == offset
    assert clock.reason
    np.testing.assert_allclose(clock.full(FULL - offset), FULL, rtol=0, atol=1e-9)


def test_what_the_user_says_goes_first() -> None:
    clock = recognised_clock(FULL - 2457000, name="HJD", told="BJD_TDB - 2457000")
    assert (clock.scale, clock.offset) == ("BJD_TDB", 2457000.0)
    assert "the user" in clock.reason


def test_what_the_user_says_of_the_scale_keeps_the_offset_of_the_file() -> None:
    clock = recognised_clock(FULL - 2400000.5, name="MJD", told="HJD_UTC")
    assert (clock.scale, clock.offset) == ("HJD_UTC", 2400000.5)
    clock = recognised_clock(FULL - 2400000.5, name="time", told="MJD")
    assert (clock.scale, clock.offset) == ("JD", 2400000.5)
    clock = recognised_clock(FULL - 2457000, name="BTJD", told="unknown")
    assert (clock.scale, clock.offset) == ("unknown", 2457000.0)


def test_full_dates_need_no_offset_even_if_one_is_printed() -> None:
    clock = recognised_clock(FULL, name="BJD_TDB-2457000")
    assert (clock.scale, clock.offset) == ("BJD_TDB", 0.0)
    assert "offset 2457000 by the column's name, but the times are full" in clock.note


def test_short_dates_named_hjd_are_taken_as_reduced_and_it_is_said() -> None:
    clock = recognised_clock(FULL - 2400000, name="HJD")
    assert (clock.scale, clock.offset) == ("HJD", 2400000.0)
    assert "taken as HJD - 2400000 (not MJD" in clock.note


@pytest.mark.parametrize("name", ["time", "HJD"])
def test_numbers_without_a_zero_point_are_kept(name: str) -> None:
    clock = recognised_clock(np.linspace(3456.0, 3470.0, 20), name=name)
    assert (clock.scale, clock.offset) == ("unknown", 0.0)
    assert "no offset printed; they are kept" in clock.note


def test_an_offset_that_does_not_fit_is_not_used() -> None:
    clock = recognised_clock(np.linspace(5e5, 5.1e5, 20), name="BJD-2457000")
    assert (clock.scale, clock.offset) == ("unknown", 0.0)
    assert "does not turn times" in clock.note


def test_an_ephemeris_in_a_comment_is_no_offset() -> None:
    comments = ("epoch of minimum: HJD 2457001.2345, period 3.2 d",)
    clock = recognised_clock(np.linspace(100.0, 110.0, 20), name="time", comments=comments)
    assert clock.offset == 0.0


def test_seconds_become_days() -> None:
    headers = {"mjdrefi": "59000", "timesys": "TDB", "timeref": "BJD"}
    seconds = np.linspace(0.0, 864000.0, 50)
    clock = recognised_clock(seconds, name="TIME", unit="s", headers=headers)
    np.testing.assert_allclose(clock.full(seconds)[[0, -1]], [2459000.5, 2459010.5])


def _file(folder: Path, name: str, column: str, shift: float, *, seed: int) -> Path:
    time, magnitude, error = light(40, seed=seed)
    lines = [f"{t - shift:.6f},{m:.4f},{e:.4f}" for t, m, e in zip(time, magnitude, error)]
    return written(folder, name, [f"{column},mag,err", *lines])


def test_offsets_of_files_are_brought_together(tmp_path: Path) -> None:
    first = _file(tmp_path, "a.csv", "BJD_TDB", 0.0, seed=1)
    second = _file(tmp_path, "b.csv", "BTJD", 2457000.0, seed=2)
    table = read_photometry([first, second])
    assert table.time_scale == "BJD_TDB"
    assert np.ptp(table.time) < 0.21


def test_different_scales_are_refused(tmp_path: Path) -> None:
    first = _file(tmp_path, "a.csv", "BJD_TDB", 0.0, seed=1)
    second = _file(tmp_path, "b.csv", "HJD_UTC", 0.0, seed=2)
    with pytest.raises(TimeScaleError, match=r"expected times in BJD_TDB, as in .*found HJD_UTC"):
        read_photometry([first, second])


def test_a_scale_half_said_is_put_together_with_a_note(tmp_path: Path) -> None:
    first = _file(tmp_path, "a.csv", "BJD_TDB", 0.0, seed=1)
    second = _file(tmp_path, "b.csv", "BJD", 0.0, seed=2)
    table = read_photometry([first, second])
    assert table.time_scale == "BJD"
    assert any("are put together" in note for note in table.notes)


def test_two_scales_that_agree_to_milliseconds(tmp_path: Path) -> None:
    first = _file(tmp_path, "a.csv", "BJD_TDB", 0.0, seed=1)
    second = _file(tmp_path, "b.csv", "BJD_TT", 0.0, seed=2)
    assert read_photometry([second, first]).time_scale == "BJD_TDB"


def test_zero_points_far_apart_are_refused(tmp_path: Path) -> None:
    first = _file(tmp_path, "a.csv", "time", 0.0, seed=1)
    second = _file(tmp_path, "b.csv", "time", 2400000.5, seed=2)
    with pytest.raises(TimeScaleError, match=r"times near 58999.*another zero point"):
        read_photometry([first, second])


def test_velocities_on_another_zero_point_than_the_light_are_refused(tmp_path: Path) -> None:
    light_file = _file(tmp_path, "a.csv", "BJD_TDB", 0.0, seed=1)
    lines = ["time,rv1", *(f"{59000 + k},{10 * (-1) ** k}" for k in range(12))]
    velocities = read_velocities(written(tmp_path, "v.csv", lines))
    with pytest.raises(
        TimeScaleError, match=r"v.csv: expected times near 2.459e\+06, as in .*a.csv.*zero point"
    ):
        check_zero_points(read_photometry(light_file), velocities)
    nearer = ["time,rv1", *(f"{2459000 - 20_000 + k},{10 * (-1) ** k}" for k in range(12))]
    older = read_velocities(written(tmp_path, "w.csv", nearer))  # spectra of half a century ago
    check_zero_points(read_photometry(light_file), older)


def test_what_the_complaint_advises_helps(tmp_path: Path) -> None:
    first = _file(tmp_path, "a.csv", "BJD_TDB", 0.0, seed=1)
    second = _file(tmp_path, "b.csv", "time", 2457000.0, seed=2)
    with pytest.raises(TimeScaleError, match="another zero point") as caught:
        read_photometry([first, second])
    (advice,) = re.findall("'(# .*)'", caught.value.problems[0].help)
    second.write_text(advice + "\n" + second.read_text())
    table = read_photometry([first, second])
    assert table.time_scale == "BJD_TDB"
    assert np.ptp(table.time) < 1


def test_two_zero_points_in_one_file_are_refused(tmp_path: Path) -> None:
    time, magnitude, _ = light(60)
    time = np.where(np.arange(60) % 4 == 3, time - 2400000.5, time)
    lines = [f"{t:.6f} {m:.4f}" for t, m in zip(time, magnitude)]
    with pytest.raises(TimeScaleError, match=r"line 4: .*two kinds of Julian dates"):
        read_photometry(written(tmp_path, "a.txt", lines))


def test_one_far_time_is_listed(tmp_path: Path) -> None:
    time, magnitude, _ = light(60)
    time[10] = 0.0
    lines = [f"{t:.6f} {m:.4f}" for t, m in zip(time, magnitude)]
    table = read_photometry(written(tmp_path, "a.txt", lines))
    assert table.files[0].used == 59
    assert [(row.line, row.reason) for row in table.unreadable] == [
        (11, "column 'column 1': the time is far from all others")
    ]
