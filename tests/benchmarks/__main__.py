"""`python tests/benchmarks`: what the engine does, how fast, beside what a practitioner writes today.

Prints one table of medians (in brackets: of the shortest runs, which a busy machine spoils least) and
writes it as JSON beside versions, cores and date.
"""

from __future__ import annotations

import argparse
import json
import os
import platform
from contextlib import suppress
from datetime import UTC, datetime
from importlib import import_module
from importlib.metadata import PackageNotFoundError, version
from importlib.util import find_spec
from pathlib import Path

from timing import CLOCKS, table, timed

PACKAGES = (
    "shadowscale", "numpy", "scipy", "numba", "llvmlite", "batman-package", "PySide6-Essentials",
    "pyqtgraph",
)  # fmt: skip
REPEATS = 9


def main() -> None:
    """Measure, print, write."""
    import_module("shadowscale_app")  # before numpy, so that its threads are those of the program
    from processes import timed_processes
    from works import all_works

    options = _options()
    repeats = 2 if options.quick else options.repeats
    results = []
    if not options.processes_only:
        for work in all_works(quick=options.quick):
            results.append(timed(work, repeats, CLOCKS[options.clock]))
    if not options.works_only and find_spec("PySide6") is not None:
        from desktop import desktop_results

        results += desktop_results(quick=options.quick)
    if not options.works_only:
        results += timed_processes(1 if options.quick else 3, quick=options.quick)
    print(f"{_machine()}, {os.cpu_count()} cores, {platform.system()}; "
          f"{datetime.now(UTC):%Y-%m-%d}; {options.clock} clock, load {_load()}")  # fmt: skip
    print(f"Python {platform.python_version()}, "
          + ", ".join(f"{name} {found}" for name, found in _versions().items()))  # fmt: skip
    print(table(results))
    if options.json is not None:
        about = {
            "date": datetime.now(UTC).isoformat(timespec="seconds"),
            "python": platform.python_version(),
            "platform": platform.platform(),
            "machine": _machine(),
            "cores": os.cpu_count(),
            "clock": options.clock,
            "load": _load(),
            "versions": _versions(),
            "works": [each.as_dict() for each in results],
        }
        options.json.write_text(json.dumps(about, indent=1) + "\n", encoding="utf-8")


def _machine() -> str:
    """The processor's name."""
    told = Path("/proc/cpuinfo")
    lines = told.read_text("utf-8").splitlines() if told.exists() else []
    names = [line.partition(":")[2].strip() for line in lines if line.startswith("model name")]
    return names[0] if names else platform.processor() or platform.machine()


def _versions() -> dict[str, str]:
    """Of what takes part, where it is installed."""
    found = {}
    for name in PACKAGES:
        with suppress(PackageNotFoundError):
            found[name] = version(name)
    return found


def _load() -> str:
    return f"{os.getloadavg()[0]:.1f}" if hasattr(os, "getloadavg") else "unknown"


def _options() -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="tests/benchmarks", description=__doc__)
    parser.add_argument("--quick", action="store_true", help="only show that everything runs")
    parser.add_argument(
        "--repeats", type=int, default=REPEATS, help=f"runs each, default {REPEATS}"
    )
    parser.add_argument("--clock", choices=CLOCKS, default="wall",
                        help="cpu: only what this process computed, where others are busy")  # fmt: skip
    parser.add_argument("--json", type=Path, help="file for all numbers")
    parser.add_argument("--works-only", action="store_true", help="no whole processes")
    parser.add_argument("--processes-only", action="store_true", help="whole processes alone")
    return parser.parse_args()


if __name__ == "__main__":
    main()
