"""The README, the CI and the desktop's libraries say the same."""

import os
import re
import subprocess

import pytest

from shadowscale.cli import COMMANDS
from shadowscale_app.__main__ import PACKAGES, missing_package


@pytest.fixture(scope="module")
def readme(root):
    return (root / "README.md").read_text(encoding="utf-8")


def commands(readme):
    """The lines of the README that are to be typed on a fresh machine."""
    return [
        line.strip() for line in readme.splitlines() if line.startswith("    ") and " && " in line
    ]


def test_the_readme_has_two_commands_and_one_of_them_is_the_tests(readme):
    job, tests = commands(readme)
    assert "shadowscale solve" in job
    assert tests.endswith("pytest -q -n 2")
    for line in (job, tests):
        assert subprocess.run(["bash", "-n", "-c", line], check=False).returncode == 0


def test_the_files_of_the_readme_exist(readme, root):
    (session,) = re.findall(r"sample_sessions/\S+\.json", commands(readme)[0])
    assert (root / session).is_file()


def test_the_readme_lists_every_command(readme):
    told = set(re.findall(r"^    shadowscale ([a-z]+) ", readme, re.MULTILINE))
    assert told == set(COMMANDS)


def test_the_ci_runs_the_command_of_the_readme(readme, root):
    """The very line that `.ci/run` extracts is the README's second command."""
    script = (root / ".ci" / "run").read_text(encoding="utf-8")
    (extract,) = [line for line in script.splitlines() if line.startswith("command=")]
    done = subprocess.run(
        ["bash", "-c", f'{extract}; echo "$command"'],
        cwd=root,
        capture_output=True,
        text=True,
        check=True,
    )
    assert done.stdout.strip() == commands(readme)[1]
    assert os.access(root / ".ci" / "run", os.X_OK)
    assert subprocess.run(["bash", "-n", root / ".ci" / "run"], check=False).returncode == 0


def test_the_ci_installs_what_the_window_may_miss(root):
    script = (root / ".ci" / "run").read_text(encoding="utf-8")
    for package in ("libegl1", "libgl1", "libxkbcommon0", "libxcb-cursor0", "xvfb"):
        assert re.search(rf"\b{package}\b", script)


def test_the_tests_of_the_window_run_here(qt_trouble):
    """Skipped on a person's machine without Qt's libraries, never where CI is set."""
    if not qt_trouble:
        return
    package = missing_package(qt_trouble)
    words = f"the desktop's tests are left out: {qt_trouble}"
    if package is not None:
        words += f"; sudo apt-get install {package}"
    if os.environ.get("CI"):
        pytest.fail(words)
    pytest.skip(words)


@pytest.mark.parametrize(
    ("message", "package"),
    [
        # the loader's own words (glibc), from memory
        ("libEGL.so.1: cannot open shared object file: No such file or directory", "libegl1"),
        ("libGL.so.1: cannot open shared object file", "libgl1"),
        ("libxkbcommon.so.0: cannot open shared object file", "libxkbcommon0"),
        ("libxkbcommon-x11.so.0: cannot open shared object file", "libxkbcommon-x11-0"),
        ("libfontconfig.so.1: cannot open shared object file", "libfontconfig1"),
        ("libglib-2.0.so.0: cannot open shared object file", "libglib2.0-0"),
        ("libdbus-1.so.3: cannot open shared object file", "libdbus-1-3"),
        ("libxcb-cursor.so.0: cannot open shared object file", "libxcb-cursor0"),
        ("libsomething.so.7: cannot open shared object file", None),
        ("No module named 'PySide6'", None),
    ],
)
def test_a_missing_library_is_told_by_its_package(message, package):
    assert missing_package(message) == package
    assert package is None or package in PACKAGES.values()
