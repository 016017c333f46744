"""What is measured as a whole process: seconds from start to end, and the most memory it held."""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from importlib.util import find_spec
from pathlib import Path

import numpy as np
from timing import Timed
from works import BAND, SPAN, VALUES, system_of, times_of, velocities

from shadowscale.constants import DAY
from shadowscale.data.photometry import Floats
from shadowscale.fit.model import model_light

SAMPLES = Path(__file__).parents[2] / "sample_sessions"
ROWS_OF_BIG_FILE = 2_000_000
NIGHT = np.arange(0.0, 8 / 24, 60 / DAY)
CADENCES: dict[str, Floats] = {
    "2 minutes": np.arange(20_000) * (120 / DAY),
    "half an hour": np.arange(20_000) * (1800 / DAY),
    "42 nights": np.concatenate([3.0 * night + NIGHT for night in range(42)])[:20_000],
}


@dataclass(frozen=True)
class Process:
    """A command line and what is said about it; `wanted` is told, never asserted; `data` in MB."""

    name: str
    size: str
    words: Sequence[str]
    wanted: str = ""
    data: float = 0.0


# Other parts of the project add functions here; each is given a folder for its files.
MORE: list[Callable[[Path], Sequence[Process]]] = []


def all_processes(folder: Path, *, quick: bool) -> list[Process]:
    """Every process, with its input files made in `folder`."""
    python = [sys.executable, "-c"]
    shadowscale = [sys.executable, "-m", "shadowscale_app"]
    found = [
        Process("import of the engine", "shadowscale.fit.solve",
                [*python, "import shadowscale.fit.solve"], "0.4 s"),
        Process("shadowscale --help", "", [*shadowscale, "--help"]),
    ]  # fmt: skip
    if find_spec("PySide6") is not None:
        script = str(Path(__file__).with_name("first_window.py"))
        found.append(
            Process("first window", "start to first paint", [sys.executable, script], "1.5 s")
        )
    if quick:
        return found
    light, rv = tables(folder, times_of(20_000), 30)
    big = big_file(folder)
    million = "import numpy as np; from works import *; t = times_of(1_000_000); " \
        "model_light(system_of(VALUES), BAND, t)"  # fmt: skip
    samples = [
        Process(f"solve, {path.parent.name}", "sample session",
                [*shadowscale, "solve", str(path), "--out", str(folder / path.parent.name),
                 "--overwrite", "--report", "no"])
        for path in sorted(SAMPLES.glob("*/session.json"))
    ]  # fmt: skip
    return [
        *found,
        Process("one light curve", "1,000,000 points", [*python, million], "250 MB", data=16.0),
        Process("opening a table", f"{ROWS_OF_BIG_FILE:,} rows",
                [*python, f"from shadowscale.data import read_photometry as r; r([{str(big)!r}])"]),
        *samples,
        Process("solve", "20,000 points, 30 velocity pairs, ephemeris given",
                [*shadowscale, "solve", str(light), "--velocities", str(rv), "--law", "quadratic",
                 "--period", str(VALUES["period"]), "--epoch", str(2459000 + VALUES["epoch"]),
                 "--out", str(folder / "both"), "--overwrite", "--report", "no"], "3 s"),
        *searching(folder, shadowscale),
        *(process for function in MORE for process in function(folder)),
    ]  # fmt: skip


def searching(folder: Path, shadowscale: Sequence[str]) -> list[Process]:
    """`solve` with nothing told but the files, without and with the report, at each cadence."""
    found = []
    for name, times in CADENCES.items():
        place = folder / name.replace(" ", "-")
        light, rv = tables(place, times, 30)
        words = [*shadowscale, "solve", str(light), "--velocities", str(rv), "--overwrite",
                 "--out", str(place / "out")]  # fmt: skip
        size = f"{times.size:,} points, 30 velocity pairs, {name}"
        found.append(Process("solve, period searched", size, [*words, "--report", "no"], "3 s"))
        found.append(Process("solve, period searched, report", size, words))
    return found


def timed_processes(repeats: int, *, quick: bool) -> list[Timed]:
    """Time them all after a warm run of each."""
    with tempfile.TemporaryDirectory() as name:
        return [_timed(process, repeats) for process in all_processes(Path(name), quick=quick)]


def _timed(process: Process, repeats: int) -> Timed:
    _run(process)
    runs = [_run(process) for _ in range(repeats)]
    checked = f"computing {min(run[1] for run in runs):.2f} s"
    checked += f"; wanted {process.wanted}" if process.wanted else ""
    peak = max(run[2] for run in runs)
    if process.data:
        checked += f" beyond the data, is {peak - process.data:.0f} MB"
    return Timed(
        process.name, process.size, "", None, False, checked, tuple(run[0] for run in runs),
        peak=peak,
    )  # fmt: skip


def _run(process: Process) -> tuple[float, float, float]:
    """Seconds, those of computing, and peak memory [MB] of one run; a failure ends the measurement with its words."""
    environment = {**os.environ, "PYTHONPATH": str(Path(__file__).parent)}
    environment.pop("PYTHONDONTWRITEBYTECODE", None)  # bytecode is kept, as where people work
    launcher = [sys.executable, "-I", "-S", str(Path(__file__).with_name("launcher.py"))]
    done = subprocess.run(
        [*launcher, *process.words], env=environment, capture_output=True, text=True, check=False
    )
    took, busy, peak, status = done.stderr.split()[-4:]
    if status != "0":
        raise SystemExit(f"{process.name}: {done.stderr[-2000:]}")
    return (
        float(took),
        float(busy),
        float(peak) / (1024 * 1024 if sys.platform == "darwin" else 1024),
    )


def tables(folder: Path, times: Floats, pairs: int) -> tuple[Path, Path]:
    """A light curve and velocities of the invented pair as files."""
    folder.mkdir(parents=True, exist_ok=True)
    random = np.random.default_rng(7)
    points = times.size
    flux = model_light(system_of(VALUES), BAND, times) + 1e-3 * random.standard_normal(points)
    light, rv = folder / "light.csv", folder / "velocities.csv"
    _write(light, "BJD_TDB,flux,flux_error", [2459000 + times, flux, np.full(points, 1e-3)])
    when = np.sort(random.uniform(0.0, SPAN, pairs))
    curves = [each + random.standard_normal(pairs) for each in velocities(VALUES, when)]
    ones = np.ones(pairs)
    _write(
        rv, "BJD_TDB,rv1,rv1_error,rv2,rv2_error",
        [2459000 + when, curves[0], ones, curves[1], ones],
    )  # fmt: skip
    return light, rv


def big_file(folder: Path) -> Path:
    """A table of many rows."""
    times = 2459000 + np.arange(ROWS_OF_BIG_FILE) * 20 / 86400
    path = folder / "big.csv"
    ones = np.ones(ROWS_OF_BIG_FILE)
    _write(path, "BJD_TDB,flux,flux_error", [times, ones + 1e-3 * np.sin(times), 1e-3 * ones])
    return path


def _write(path: Path, heading: str, columns: Sequence[np.ndarray]) -> None:
    rows = np.column_stack(columns)
    np.savetxt(path, rows, fmt="%.8f", delimiter=",", header=heading, comments="")
