"""A kill in the middle of saving: what was there is whole, old or new."""

from __future__ import annotations

import random
import subprocess
import sys
import time
from pathlib import Path

from shadowscale.session.store import open_session

SAVES = """
import sys
from dataclasses import replace
from itertools import count
from pathlib import Path
from shadowscale.session.store import open_session, save_session

path = Path(sys.argv[1])
session = open_session(path)
for number in count():
    save_session(replace(session, name=f"saved {number} " + "x" * 200_000), path)
    print(number, flush=True)
"""
KILLS = 6
SAMPLE = Path(__file__).parents[3] / "sample_sessions" / "heron"


def test_a_kill_while_saving_never_leaves_half_a_session(tmp_path: Path) -> None:
    dice = random.Random(3)
    for name in ("session.json", "photometry.csv", "velocities.csv"):
        (tmp_path / name).write_bytes((SAMPLE / name).read_bytes())
    path = tmp_path / "session.json"
    for _ in range(KILLS):
        command = [sys.executable, "-c", SAVES, str(path)]
        with subprocess.Popen(command, stdout=subprocess.PIPE, text=True) as process:
            assert process.stdout is not None
            assert process.stdout.readline() == "0\n"
            time.sleep(dice.uniform(0.0, 0.03))
            process.kill()

        assert open_session(path, same_files=True).name.startswith("saved ")
