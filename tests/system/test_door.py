"""The one door: files open a window, commands do not, and a missing library is told plainly."""

import sys

import pytest

from commands import python

BLOCKED = """
import sys
from importlib.abc import MetaPathFinder

class Block(MetaPathFinder):
    def find_spec(self, name, path=None, target=None):
        if name.split(".")[0] == "PySide6":
            raise ImportError(MESSAGE)

MESSAGE = sys.argv.pop(1)
sys.meta_path.insert(0, Block())
from shadowscale_app.__main__ import main
sys.exit(main(sys.argv[1:]))
"""
LOADER = "libEGL.so.1: cannot open shared object file: No such file or directory"
ASKED = """
import sys, types
program = types.ModuleType("shadowscale_app.program")
program.run = lambda paths: print("window:", paths) or 0
sys.modules["shadowscale_app.program"] = program
from shadowscale_app.__main__ import main
sys.exit(main(sys.argv[1:]))
"""


def test_a_missing_system_library_is_told_with_the_package_that_has_it():
    ran = python("-c", BLOCKED, LOADER, QT_QPA_PLATFORM="offscreen")
    assert ran.status == 1
    assert "the window needs the system package libegl1" in ran.err
    assert "sudo apt-get install libegl1" in ran.err
    assert "Traceback" not in ran.err


def test_an_unknown_reason_is_told_as_it_is():
    ran = python("-c", BLOCKED, "No module named 'PySide6'", QT_QPA_PLATFORM="offscreen")
    assert ran.status == 1
    assert "the window cannot open (No module named 'PySide6')" in ran.err


def test_commands_work_without_the_window():
    ran = python("-c", BLOCKED, LOADER, "--version", QT_QPA_PLATFORM="offscreen")
    assert (ran.status, ran.err) == (0, "")
    assert ran.out.startswith("shadowscale ")


@pytest.mark.parametrize("names", [(), ("a.csv",), ("a.csv", "b.csv")])
def test_files_or_nothing_open_the_window(tmp_path, names):
    for name in names:
        (tmp_path / name).write_text("")
    ran = python("-c", ASKED, *names, folder=tmp_path, QT_QPA_PLATFORM="offscreen")
    assert (ran.status, ran.err) == (0, "")
    assert ran.out == f"window: {list(names)}\n"


def test_a_file_named_like_a_command_does_not_hide_the_command(tmp_path):
    (tmp_path / "solve").write_text("")
    ran = python("-c", ASKED, "solve", folder=tmp_path, QT_QPA_PLATFORM="offscreen")
    assert ran.status == 2
    assert "window" not in ran.out


@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="other systems have one display")
def test_no_display_is_told():
    """Qt itself would abort."""
    ran = python("-c", ASKED, DISPLAY="", WAYLAND_DISPLAY="", QT_QPA_PLATFORM="")
    assert ran.status == 1
    assert "the window needs a display" in ran.err
    assert "window:" not in ran.out
