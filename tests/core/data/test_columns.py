"""What columns mean: by name, by unit, by place and look, and as the user says."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

import numpy as np
import pytest

from shadowscale.data.files import read_table
from shadowscale.data.light_columns import photometry_columns
from shadowscale.data.raw_table import RawTable
from shadowscale.data.velocity_columns import velocity_columns
from shadowscale.errors import ColumnError, UsageError
from table_files import light, written

TIME, MAGNITUDE, ERROR = light(30)
FLUX = 10 ** (-0.4 * (MAGNITUDE - 11.2))
NUMBERS: Mapping[str, np.ndarray] = {
    "t": TIME,
    "m": MAGNITUDE,
    "f": FLUX,
    "e": ERROR,
    "x": np.linspace(1.0, 1.8, 30),
    "k": np.arange(1.0, 31.0),
    "0": np.zeros(30),
    "v": 60 * np.sin(np.arange(30.0)),
    "w": np.full(30, 0.7),
}


def table(folder: Path, header: str, kinds: str) -> RawTable:
    """A table with that header, its columns filled with numbers of those kinds."""
    lines = [header] if header else []
    for row in range(30):
        lines.append(",".join(f"{NUMBERS[kind][row]:.6f}" for kind in kinds))
    return read_table(written(folder, "table.csv", lines))


@pytest.mark.parametrize(
    ("header", "kinds", "expected"),
    [
        ("HJD,V,V_err", "tme", {"time": "HJD", "mag": "V", "error": "V_err"}),
        ("JD,mag,e_mag", "tme", {"time": "JD", "mag": "mag", "error": "e_mag"}),
        ("BJD_TDB,rel_flux_T1,rel_flux_err_T1,AIRMASS", "tfex", {"time": "BJD_TDB", "flux": "rel_flux_T1", "error": "rel_flux_err_T1", "airmass": "AIRMASS"}),
        ("mjd,mag,magerr,filt", "tme0", {"time": "mjd", "mag": "mag", "error": "magerr", "band": "filt"}),
        ("TIME,SAP_FLUX,SAP_FLUX_ERR,SAP_BKG,PDCSAP_FLUX,PDCSAP_FLUX_ERR,SAP_QUALITY", "tfeffe0", {"time": "TIME", "flux": "PDCSAP_FLUX", "error": "PDCSAP_FLUX_ERR", "quality": "SAP_QUALITY"}),
        ("TIME,SAP_FLUX,SAP_FLUX_ERR", "tfe", {"time": "TIME", "flux": "SAP_FLUX", "error": "SAP_FLUX_ERR"}),
        ("JD,HJD,BJD,Mag,Error,Airmass", "tttmex", {"time": "BJD", "mag": "Mag", "error": "Error", "airmass": "Airmass"}),
        ("number,date,V-C,sigma", "ktme", {"time": "date", "mag": "V-C", "error": "sigma"}),
        ("time [d],brightness [mag],unc [mag]", "tme", {"time": "time [d]", "mag": "brightness [mag]", "error": "unc [mag]"}),
        ("Julian Date,Magnitude,Uncertainty,Filter", "tme0", {"time": "Julian Date", "mag": "Magnitude", "error": "Uncertainty", "band": "Filter"}),
        ("HJD-2450000,Vmag,e_Vmag", "tme", {"time": "HJD-2450000", "mag": "Vmag", "error": "e_Vmag"}),
        ("BJD (TDB),flux,flux_err,exptime", "tfee", {"time": "BJD (TDB)", "flux": "flux", "error": "flux_err", "exposure": "exptime"}),
        ("time,flux,mag,mag_err", "tfme", {"time": "time", "mag": "mag", "error": "mag_err"}),
        ("time,flux,flux_err,mag,mag_err", "tfeme", {"time": "time", "flux": "flux", "error": "flux_err"}),
        ("time,flux,mag", "tfm", {"time": "time", "flux": "flux"}),
        ("HJD,UT Date,Camera,FWHM,Limit,mag,mag_err,flux(mJy),flux_err,Filter", "t000xmefe0", {"time": "HJD", "flux": "flux(mJy)", "error": "flux_err", "band": "Filter"}),
        ("#NAME,DATE,MAG,MERR,FILT,TRANS,CMAG,KMAG,AMASS", "0tme00mmx", {"time": "DATE", "mag": "MAG", "error": "MERR", "band": "FILT", "airmass": "AMASS"}),
        ("hjd,mjd,mag,magerr,catflags,filtercode", "ttme00", {"time": "hjd", "mag": "mag", "error": "magerr", "quality": "catflags", "band": "filtercode"}),
        ("TIME,RAW_FLUX,CORR_FLUX,FLUX_ERR,QUALITY", "tffe0", {"time": "TIME", "flux": "CORR_FLUX", "error": "FLUX_ERR", "quality": "QUALITY"}),
        ("TIME,SAP_FLUX,KSPSAP_FLUX,KSPSAP_FLUX_ERR,QUALITY", "tffe0", {"time": "TIME", "flux": "KSPSAP_FLUX", "error": "KSPSAP_FLUX_ERR", "quality": "QUALITY"}),
        ("t,f,s", "tfe", {"time": "t", "flux": "f", "error": "s"}),
    ],
)  # fmt: skip
def test_names_of_photometry(
    header: str, kinds: str, expected: Mapping[str, str], tmp_path: Path
) -> None:
    guesses = photometry_columns(table(tmp_path, header, kinds))
    assert {guess.role: guess.column for guess in guesses} == expected
    assert all(guess.reason for guess in guesses)


@pytest.mark.parametrize(
    ("header", "kinds", "expected"),
    [
        ("BJD,rv1,rv1_err,rv2,rv2_err", "tvwvw", ["BJD", "rv1", "rv1_err", "rv2", "rv2_err"]),
        ("HJD,RV_A,e_RV_A,RV_B,e_RV_B", "tvwvw", ["HJD", "RV_A", "e_RV_A", "RV_B", "e_RV_B"]),
        ("jd,v1,err1,v2,err2", "tvwvw", ["jd", "v1", "err1", "v2", "err2"]),
        ("time,rv1_err,rv1,rv2_err,rv2", "twvwv", ["time", "rv1", "rv1_err", "rv2", "rv2_err"]),
        ("BJD,RV,RV_err", "tvw", ["BJD", "RV", "RV_err", None, None]),
        ("BJD,RV [km/s],sigma", "tvw", ["BJD", "RV [km/s]", "sigma", None, None]),
        ("BJD,Vr1,Vr2", "tvv", ["BJD", "Vr1", None, "Vr2", None]),
        ("BJD,rv_pri,rv_pri_err,rv_sec,rv_sec_err", "tvwvw", ["BJD", "rv_pri", "rv_pri_err", "rv_sec", "rv_sec_err"]),
        ("Date,RV A (km/s),+-,RV B (km/s),+-", "tvwvw", ["Date", "RV A (km/s)", "+-", "RV B (km/s)", "+-"]),
        ("BJD,RV1,sig_RV1,RV2,sig_RV2", "tvwvw", ["BJD", "RV1", "sig_RV1", "RV2", "sig_RV2"]),
    ],
)  # fmt: skip
def test_names_of_velocities(
    header: str, kinds: str, expected: list[str | None], tmp_path: Path
) -> None:
    guesses = {g.role: g.column for g in velocity_columns(table(tmp_path, header, kinds))}
    roles = ("time", "rv1", "rv1_err", "rv2", "rv2_err")
    assert [guesses.get(role) for role in roles] == expected


@pytest.mark.parametrize(
    ("kinds", "roles", "reason"),
    [
        ("tme", {"time": 0, "mag": 1, "error": 2}, "as magnitudes do"),
        ("tfe", {"time": 0, "flux": 1, "error": 2}, "as flux in units of its level does"),
        ("ktme", {"time": 1, "mag": 2, "error": 3}, "as magnitudes do"),
        ("tm", {"time": 0, "mag": 1}, "follows the time"),
    ],
)
def test_without_names_place_and_look_decide(
    kinds: str, roles: Mapping[str, int], reason: str, tmp_path: Path
) -> None:
    guesses = photometry_columns(table(tmp_path, "", kinds))
    assert {guess.role: guess.index for guess in guesses} == roles
    assert reason in guesses[1].reason


@pytest.mark.parametrize(("sign", "role"), [(1.0, "mag"), (-1.0, "flux")])
def test_the_side_of_the_eclipse_tells_differential_magnitudes_from_flux(
    sign: float, role: str, tmp_path: Path
) -> None:
    values = 0.9 + sign * (MAGNITUDE - 11.2)
    lines = [f"{t:.6f} {v:.4f}" for t, v in zip(TIME, values)]
    guesses = photometry_columns(read_table(written(tmp_path, "a.txt", lines)))
    assert guesses[1].role == role


def test_velocities_without_names(tmp_path: Path) -> None:
    guesses = velocity_columns(table(tmp_path, "", "tvwvw"))
    assert [(g.role, g.index) for g in guesses] == [
        ("time", 0), ("rv1", 1), ("rv1_err", 2), ("rv2", 3), ("rv2_err", 4),
    ]  # fmt: skip
    two = velocity_columns(table(tmp_path, "", "tvv"))
    assert [g.role for g in two] == ["time", "rv1", "rv2"]


@pytest.mark.parametrize(
    ("columns", "time", "light", "role"),
    [
        ({"time": "a", "mag": "c"}, "a", "c", "mag"),
        ({"time": "A", "flux": "C"}, "a", "c", "flux"),
        ({"time": 1, "mag": 3}, "a", "c", "mag"),
        ({"time": "1", "mag": "3"}, "a", "c", "mag"),
    ],
)
def test_the_user_names_columns(
    columns: Mapping[str, str | int], time: str, light: str, role: str, tmp_path: Path
) -> None:
    guesses = {g.role: g for g in photometry_columns(table(tmp_path, "a,b,c", "tem"), columns)}
    assert guesses["time"].column == time
    assert guesses[role].column == light
    assert guesses[role].reason == "named by the user"


def test_an_empty_name_closes_a_role(tmp_path: Path) -> None:
    raw = table(tmp_path, "time,mag,err,quality", "tme0")
    roles = {g.role for g in photometry_columns(raw, {"quality": "", "error": ""})}
    assert roles == {"time", "mag"}


def test_a_name_that_is_not_there_offers_near_ones(tmp_path: Path) -> None:
    raw = table(tmp_path, "BJD_TDB,flux,err", "tfe")
    with pytest.raises(
        ColumnError, match=r"'BJD_TBD' for time, found none; did you mean 'BJD_TDB'"
    ):
        photometry_columns(raw, {"time": "BJD_TBD"})
    with pytest.raises(ColumnError, match="the columns are BJD_TDB, flux, err"):
        photometry_columns(raw, {"time": "zzzz"})


def test_an_unknown_role_is_wrong_usage(tmp_path: Path) -> None:
    raw = table(tmp_path, "time,mag", "tm")
    with pytest.raises(UsageError, match=r"expected one of time, mag, flux.*found 'magnitude'"):
        photometry_columns(raw, {"magnitude": "mag"})


@pytest.mark.parametrize(
    ("header", "kinds", "words"),
    [
        (
            "HJD,B,V",
            "tmm",
            "expected one column of mag, found 'B', 'V'; say which one is meant: --columns mag=B",
        ),
        ("HJD,flux_a,flux_b", "tff", "expected one column of flux, found 'flux_a', 'flux_b'"),
        ("HJD,airmass", "tx", "expected a column with a magnitude or flux, found none"),
    ],
)
def test_light_that_cannot_be_settled(header: str, kinds: str, words: str, tmp_path: Path) -> None:
    with pytest.raises(ColumnError, match=words):
        photometry_columns(table(tmp_path, header, kinds))


def test_the_only_column_with_an_error_is_preferred(tmp_path: Path) -> None:
    guesses = photometry_columns(table(tmp_path, "HJD,V,I,I_err", "tmme"))
    assert guesses[1].column == "I"
    assert "the only one with an error" in guesses[1].reason


def test_no_velocity(tmp_path: Path) -> None:
    with pytest.raises(ColumnError, match=r"a radial velocity \(such as rv1\), found none"):
        velocity_columns(table(tmp_path, "HJD,mag,err", "tme"))


@pytest.mark.parametrize("header", ["col1,col2,col3", "eins,zwei,drei", ",data,"])
def test_names_that_say_nothing_leave_it_to_place_and_look(header: str, tmp_path: Path) -> None:
    guesses = photometry_columns(table(tmp_path, header, "tme"))
    assert [(g.role, g.index) for g in guesses] == [("time", 0), ("mag", 1), ("error", 2)]
    guesses = velocity_columns(table(tmp_path, header, "tvw"))
    assert [(g.role, g.index) for g in guesses] == [("time", 0), ("rv1", 1), ("rv1_err", 2)]


def test_a_folded_light_curve_is_refused(tmp_path: Path) -> None:
    with pytest.raises(
        ColumnError, match=r"found phases \('phase'\); give the unfolded light curve"
    ):
        photometry_columns(table(tmp_path, "phase,mag", "xm"))
    guesses = photometry_columns(table(tmp_path, "phase,mag", "xm"), {"time": "phase"})
    assert guesses[0].column == "phase"


def test_calendar_dates_are_refused_with_advice(tmp_path: Path) -> None:
    lines = [
        "date,mag,err",
        *(f"2021-03-04T21:{k:02d}:00,{m:.3f},0.01" for k, m in enumerate(MAGNITUDE)),
    ]
    raw = read_table(written(tmp_path, "a.csv", lines))
    with pytest.raises(
        ColumnError, match="found dates such as '2021-03-04T21:00:00'; turn the dates"
    ):
        photometry_columns(raw)
