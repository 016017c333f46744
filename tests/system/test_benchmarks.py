"""The benchmarks run; what they measure is for people to read."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

BENCH = Path(__file__).parents[1] / "benchmarks"


def test_quick_run_fills_the_table(tmp_path):
    told = tmp_path / "told.json"

    done = subprocess.run(
        [sys.executable, str(BENCH), "--quick", "--works-only", "--json", str(told)],
        capture_output=True, text=True, timeout=300, check=False,
    )  # fmt: skip

    assert done.returncode == 0, done.stderr
    assert "fit of nine quantities" in done.stdout
    works = json.loads(told.read_text("utf-8"))["works"]
    assert all(seconds > 0 for work in works for seconds in (*work["ours"], *work["other"]))
    assert {"light curve, quadratic, e = 0.37", "likelihood of light and velocities"} <= {
        work["name"] for work in works
    }
