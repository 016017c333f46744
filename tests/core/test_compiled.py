"""The cache of machine code: never old, never an error."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

import shadowscale
from shadowscale import _compiled, _machine_code

PACKAGE = Path(shadowscale.__file__).parent
CALLEE = """
from shadowscale._compiled import compiled

STEP = 1

@compiled
def step(x):
    return x + STEP
"""
CALLER = """
from shadowscale._compiled import compiled
from shadowscale.callee import step

@compiled
def twice(x):
    return step(step(x))
"""
RUN = """
from shadowscale.caller import twice
code = twice.dispatcher
print(twice(10), sum(code.stats.cache_hits.values()), getattr(code._cache, "cache_path", None))
"""


@pytest.fixture
def small_package(tmp_path):
    """A package of two kernels, one of which calls the other, compiled as the engine is."""
    package = tmp_path / "install" / "shadowscale"
    package.mkdir(parents=True)
    for name in ("__init__.py", "_version.py", "_compiled.py", "_machine_code.py"):
        shutil.copy(PACKAGE / name, package / name)
    (package / "callee.py").write_text(CALLEE)
    (package / "caller.py").write_text(CALLER)
    return package


def run(package, **environment):
    """What a fresh process prints: result, hits of the cache, folder of the cache."""
    told = {"PYTHONPATH": str(package.parent), "PYTHONDONTWRITEBYTECODE": "1", **environment}
    kept = {name: value for name, value in os.environ.items() if name in ("PATH", "SYSTEMROOT")}
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", RUN],
        env={**kept, "HOME": str(package.parent / "home"), **told},
        capture_output=True, text=True, timeout=120, check=False,
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    value, hits, folder = done.stdout.split()
    return int(value), int(hits), folder


def no_folder_beside(package):
    """Make it impossible, even for root, to write beside the sources."""
    (package / "__pycache__").write_text("a file where the folder should be")


def test_code_is_kept_beside_the_sources(small_package):
    first = run(small_package)
    second = run(small_package)

    assert (12, 0, str(small_package / "__pycache__")) == first
    assert (12, 1, str(small_package / "__pycache__")) == second


def test_a_change_of_a_callee_in_another_file_is_noticed(small_package):
    assert run(small_package)[0] == 12

    (small_package / "callee.py").write_text(CALLEE.replace("x + STEP", "x + 5"))

    assert run(small_package)[:2] == (20, 0)


def test_a_change_of_a_constant_of_another_file_is_noticed(small_package):
    assert run(small_package)[0] == 12

    (small_package / "callee.py").write_text(CALLEE.replace("STEP = 1", "STEP = 7"))

    assert run(small_package)[:2] == (24, 0)


def test_another_version_of_the_program_compiles_anew(small_package):
    run(small_package)

    (small_package / "_version.py").write_text('__version__ = "99.0"\n')

    assert run(small_package)[:2] == (12, 0)


@pytest.mark.skipif(sys.platform != "linux", reason="the cache folder of a Linux user")
def test_where_sources_are_read_only_code_goes_to_the_users_cache(small_package):
    no_folder_beside(small_package)

    first, second = run(small_package), run(small_package)

    assert first[:2] == (12, 0)
    assert second[:2] == (12, 1)
    assert Path(second[2]).is_relative_to(small_package.parent / "home" / ".cache")


@pytest.mark.skipif(not hasattr(os, "getuid"), reason="users without a home are POSIX")
def test_users_without_a_home_get_a_private_temporary_folder(small_package, tmp_path):
    no_folder_beside(small_package)

    where = {"HOME": "/dev/null/none", "TMPDIR": str(tmp_path)}
    first, second = run(small_package, **where), run(small_package, **where)

    private = tmp_path / f"shadowscale-{os.getuid()}"
    assert first[:2] == (12, 0)
    assert second[:2] == (12, 1)
    assert Path(second[2]).is_relative_to(private)
    assert private.stat().st_mode & 0o777 == 0o700


@pytest.mark.skipif(not hasattr(os, "getuid"), reason="users without a home are POSIX")
def test_a_temporary_folder_open_to_others_is_not_trusted(small_package, tmp_path):
    no_folder_beside(small_package)
    private = tmp_path / f"shadowscale-{os.getuid()}"
    private.mkdir()
    private.chmod(0o777)

    found = run(small_package, HOME="/dev/null/none", TMPDIR=str(tmp_path))

    assert found == (12, 0, "None")
    assert list(private.iterdir()) == []


def test_a_damaged_file_is_replaced(small_package):
    run(small_package)
    for file in (small_package / "__pycache__").glob("*.nb[ic]"):
        file.write_bytes(file.read_bytes()[:25])

    assert run(small_package)[:2] == (12, 0)
    assert run(small_package)[:2] == (12, 1)


def test_a_disk_that_cannot_be_written_to_costs_nothing_but_time(monkeypatch, tmp_path):
    monkeypatch.setattr(_machine_code._Entry, "_locator_classes", ())

    @_compiled.compiled
    def plus_one(x):
        return x + 1

    assert plus_one(1) == 2


def test_whoever_waits_for_a_compiler_is_told_once(small_package):
    told = """
from shadowscale._compiled import when_compiling
from shadowscale.caller import twice
when_compiling(lambda: print("wait"))
print(twice(10), twice(10.0))
"""
    place = {**os.environ, "PYTHONPATH": str(small_package.parent)}
    said = [
        subprocess.run(
            [sys.executable, "-c", told], env=place, capture_output=True, text=True, check=True
        ).stdout.split()
        for _ in range(2)
    ]

    assert said == [["wait", "12", "12.0"], ["12", "12.0"]]


def test_the_engine_loads_without_its_compiler():
    told = "import shadowscale.fit.solve, sys; print([n for n in ('numba', 'scipy') if n in sys.modules])"
    done = subprocess.run(
        [sys.executable, "-c", told], capture_output=True, text=True, check=False
    )  # fmt: skip

    assert (done.stdout.strip(), done.stderr) == ("[]", "")


def test_linear_algebra_is_spared_but_not_taken_away(small_package):
    (small_package / "caller.py").write_text(
        CALLER + "\n@compiled\ndef dot(x):\n    return x @ x\n"
    )
    told = """
import sys
import numpy as np
from shadowscale.caller import dot, twice
twice(10)
print("scipy.linalg" in sys.modules, dot(np.arange(3.0)), "scipy.linalg" in sys.modules)
"""
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", told], capture_output=True, text=True, check=False,
        env={**os.environ, "PYTHONPATH": str(small_package.parent)},
    )  # fmt: skip

    assert done.stdout.split() == ["False", "5.0", "True"], done.stderr


def test_the_fingerprint_follows_imports_of_imports():
    names = {path.relative_to(PACKAGE).as_posix() for path in closure("light/_band.py")}

    # _band reads the grid, which is filled by the kernels, which know the laws.
    expected = {"light/_grid.py", "light/_kernels.py", "light/laws.py"}
    assert expected <= names
    assert "orbit/_kernels.py" in names
    assert "cli/parser.py" not in names


def closure(name):
    found, waiting = set(), [PACKAGE / name]
    while waiting:
        source = waiting.pop()
        if source not in found:
            found.add(source)
            waiting += _machine_code._imported(source)
    return found


def test_every_kernel_is_compiled_through_this_door():
    strangers = [
        path.relative_to(PACKAGE).as_posix()
        for path in PACKAGE.rglob("*.py")
        if path.name != "_machine_code.py"
        and re.search(r"\bn?jit\b|^from numba|^import numba", path.read_text("utf-8"), re.MULTILINE)
    ]

    assert strangers == []
