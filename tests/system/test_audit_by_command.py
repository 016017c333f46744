"""The audit as a person meets it: simulated pairs with one fault each, solved by the command."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from shadowscale.cli import main

SPEC = """
seed = 3
light_time = true
[system]
period = 2.4371926
epoch = 2459000.3127
M1 = {M1}
M2 = {M2}
r1 = {r1}
r2 = {r2}
inclination = {i}
gamma1 = -14.2
[bands.V]
surface_brightness_ratio = {J}
limb_darkening1 = [0.66, 0.62]
limb_darkening2 = {limb2}
ellipsoidal1 = {tide1}
ellipsoidal2 = {tide2}
third_light = {third}
[photometry]
files = "band"
[photometry.noise]
scatter = {scatter}
red = {red}
red_time = 0.7
[[photometry.runs]]
start = 2459000.0
hours = 8
cadence = {cadence}
repeat = 22
[velocities]
start = 2459000
end = 2459080
[[velocities.sources]]
name = "north"
number = 18
"""
GOOD = {
    "M1": 1.4, "M2": 1.15, "r1": 0.15, "r2": 0.117, "i": 88.2, "J": 0.62, "limb2": [0.69, 0.64],
    "tide1": 0.0037, "tide2": 0.0032, "third": 0.0, "scatter": 0.003, "red": 0.0, "cadence": 600,
}  # fmt: skip
EPHEMERIS = ("--period", "2.4371926", "--epoch", "2459000.3127")
TIDES = ("--effect", "ellipsoidal=predicted")
NO_THIRD = ("--fix", "third_light=0")
LIMB = ("--fix", "limb_darkening1=0.66,0.62", "--fix", "limb_darkening2=0.69,0.64")


@dataclass(frozen=True)
class Faulty:
    """What differs from the pair without fault, the command's words, what the audit must say."""

    changes: dict[str, Any]
    words: tuple[str, ...]
    check: str
    verdict: str
    says: str
    velocities: bool = True


FAULTY = {
    "half the period": Faulty(
        {"J": 1.0, "r1": 0.13, "r2": 0.13, "limb2": [0.66, 0.62], "tide1": 0.0, "tide2": 0.0},
        EPHEMERIS, "period", "warn", "could be half of this one", velocities=False,
    ),
    "twice the period": Faulty(
        {}, ("--period", "4.8743852", "--epoch", "2459000.3127"), "period", "fail",
        "the true period is half of this one", velocities=False,
    ),
    "mirror or not": Faulty(
        {"i": 81.5, "r1": 0.14, "r2": 0.13, "scatter": 0.005}, EPHEMERIS, "ratio of radii", "fail",
        "only their sum is measured",
    ),
    "correlated residuals": Faulty(
        {"red": 0.004, "scatter": 0.001, "cadence": 300}, EPHEMERIS, "slow noise", "warn",
        "there is slow noise",
    ),
    "errors too small": Faulty(
        {"red": 0.004, "scatter": 0.001, "cadence": 300}, EPHEMERIS, "size of the errors", "warn",
        "times as large as the errors given",
    ),
    "neighbours alike": Faulty(
        {"red": 0.004, "scatter": 0.001, "cadence": 300}, EPHEMERIS, "neighbouring residuals",
        "warn", "are alike",
    ),
    "not round": Faulty(
        {"r1": 0.34, "r2": 0.3, "i": 82}, EPHEMERIS, "oblateness", "fail", "too much for two spheres",
    ),
    "nearly full lobe": Faulty(
        {"r1": 0.36, "r2": 0.33, "i": 82}, EPHEMERIS, "fill-out", "warn", "drawn out towards the other",
    ),
    "tides left out": Faulty(
        {"r1": 0.22, "r2": 0.18, "i": 86, "tide1": 0.012, "tide2": 0.010, "scatter": 0.001}, EPHEMERIS,
        "ellipsoidal variation", "warn", "Switch the effect on",
    ),
    "few in ingress": Faulty(
        {"cadence": 7200, "scatter": 0.03}, EPHEMERIS, "points in ingress", "warn",
        "More points in ingress and egress",
    ),
    "too heavy": Faulty(
        {"M1": 150, "M2": 130, "r1": 0.1, "r2": 0.09, "tide1": 0.0, "tide2": 0.0}, EPHEMERIS, "masses",
        "fail", "is no star's",
    ),
    "third light or inclination": Faulty(
        {"r1": 0.16, "r2": 0.08, "i": 86, "third": 0.1, "scatter": 0.001},
        (*EPHEMERIS, *LIMB, "--free", "third_light"), "third light and inclination", "warn",
        "hardly tells them apart",
    ),
    "limb darkening rules": Faulty(
        {"i": 83.5, "scatter": 0.001},
        (*EPHEMERIS, *NO_THIRD, "--free", "limb_darkening1", "--free", "limb_darkening2"),
        "limb darkening and radii", "warn", "more than all else together",
    ),
}  # fmt: skip


def audit_of(
    folder: Path, changes: dict[str, Any], words: tuple[str, ...], *, velocities: bool = True
) -> dict[str, dict[str, Any]]:
    """Every check of the sheet of a simulated pair, by name; status 4 as the check `refused`."""
    (folder / "pair.toml").write_text(SPEC.format(**GOOD | changes))
    assert main(["simulate", str(folder / "pair.toml"), "--out", str(folder), "--quiet"]) == 0
    command = ["solve", str(folder / "photometry_V.csv"), "--out", str(folder / "out")]
    command += ["--velocities", str(folder / "velocities.csv")] if velocities else []
    assert main([*command, *words, "--quiet", "--report", "no"]) == 0
    sheet = json.loads((folder / "out" / "sheet.json").read_text())
    return {finding["check"]: finding for finding in sheet["audit"]}


def test_a_pair_without_fault_passes_every_check(tmp_path: Path) -> None:
    audit = audit_of(tmp_path, {}, (*EPHEMERIS, *TIDES, *NO_THIRD))
    assert not [finding["words"] for finding in audit.values() if finding["verdict"] != "pass"]
    assert {faulty.check for faulty in FAULTY.values()} <= set(audit)


@pytest.mark.parametrize("name", FAULTY)
def test_the_fault_is_told(name: str, tmp_path: Path) -> None:
    faulty = FAULTY[name]
    audit = audit_of(tmp_path, faulty.changes, faulty.words, velocities=faulty.velocities)
    finding = audit[faulty.check]
    assert finding["verdict"] == faulty.verdict, finding["words"]
    assert faulty.says in finding["words"]
    assert finding["source"]


def test_touching_stars_get_no_sheet(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """r1 and r2 above their lobes: refused in words that name the reason, and nothing is written."""
    changes = {"r1": 0.42, "r2": 0.38, "i": 80, "tide1": 0.0, "tide2": 0.0}
    (tmp_path / "pair.toml").write_text(SPEC.format(**GOOD | changes))
    assert main(["simulate", str(tmp_path / "pair.toml"), "--out", str(tmp_path), "--quiet"]) == 0
    light = str(tmp_path / "photometry_V.csv")
    words = ["solve", light, "--out", str(tmp_path / "out"), *EPHEMERIS, "--report", "no"]
    assert main(words) == 4
    said = capsys.readouterr().err
    assert "no radii can be quoted as measured" in said or "stars that touch" in said
    assert not (tmp_path / "out").exists()
