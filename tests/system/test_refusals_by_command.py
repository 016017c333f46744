"""Light that holds no two eclipsing spheres: status 4 with the reason, no sheet, no traceback."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from shadowscale.cli import main

Floats = np.ndarray
PERIOD, EPOCH, SIGMA = 1.234, 2459000.4, 0.003
TIME = np.sort(2459000 + np.random.default_rng(3).uniform(0, 27, 3000))
ANGLE = 2 * np.pi * (TIME - EPOCH) / PERIOD
GIVEN = ("--period", str(PERIOD), "--epoch", str(EPOCH))


def steps() -> Floats:
    """Light that wanders by itself: a sum of random steps."""
    return 5e-4 * np.cumsum(np.random.default_rng(8).standard_normal(TIME.size))


def one_dip() -> Floats:
    """A single eclipse in all the time."""
    return -0.2 * np.clip(1 - ((TIME - 2459012.2) / 0.1) ** 2, 0, 1)


LIGHT: dict[str, Callable[[], Floats]] = {
    "white noise": lambda: np.zeros(TIME.size),
    "touching stars": lambda: -0.15 * np.cos(2 * ANGLE) - 0.02 * np.cos(ANGLE) - 0.03 * np.cos(4 * ANGLE),
    "a sine": lambda: 0.1 * np.cos(2 * ANGLE),
    "a spotted star": lambda: 0.03 * np.cos(ANGLE) + 0.012 * np.cos(2 * ANGLE + 1),
    "a pulsating star": lambda: 0.2 * np.cos(ANGLE) + 0.1 * np.cos(2 * ANGLE + 1) + 0.05 * np.cos(3 * ANGLE + 2),
    "two pulsations": lambda: 0.05 * np.cos(30.1 * TIME) + 0.03 * np.cos(36.3 * TIME),
    "wandering light": steps,
    "a slow trend": lambda: 0.05 * (TIME - 2459010) / 27,
    "a single eclipse": one_dip,
}  # fmt: skip
REASONS = {
    "white noise": "no repeating eclipse is seen",
    "touching stars": "the light varies all the time",
    "a sine": "the light varies all the time",
    "a spotted star": "the light varies all the time",
    "a pulsating star": "the light varies all the time",
    "a single eclipse": "each eclipse was seen only once",
}


@pytest.mark.parametrize("words", [(), GIVEN], ids=["searched", "period given"])
@pytest.mark.parametrize("name", LIGHT)
def test_no_sheet(
    name: str, words: tuple[str, ...], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    flux = 1 + LIGHT[name]() + SIGMA * np.random.default_rng(1).standard_normal(TIME.size)
    rows = "".join(f"{t:.6f},{f:.6f},{SIGMA}\n" for t, f in zip(TIME, flux))
    path = tmp_path / "light.csv"
    path.write_text("BJD_TDB,flux,err\n" + rows)
    command = ["solve", str(path), "--out", str(tmp_path / "out"), "--json-errors"]
    assert main([*command, *words]) == 4
    error = json.loads(capsys.readouterr().err)
    assert error["exit_status"] == 4
    assert error["reason"]
    assert not (tmp_path / "out").exists()
    if not words:
        assert REASONS.get(name, "") in error["reason"]
