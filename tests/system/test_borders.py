"""Who may know whom: the contracts of pyproject.toml, and the engine without any window."""

import subprocess
import sys
from importlib import import_module
from pathlib import Path
from pkgutil import walk_packages

import pytest

import shadowscale
from commands import python

WITHOUT_QT = """
import sys
from importlib import import_module
from importlib.abc import MetaPathFinder
from pkgutil import walk_packages

class Block(MetaPathFinder):
    def find_spec(self, name, path=None, target=None):
        if name.split(".")[0] in ("PySide6", "shiboken6", "pyqtgraph", "shadowscale_app"):
            raise ImportError(f"{name} is blocked")

sys.meta_path.insert(0, Block())
import shadowscale
names = [item.name for item in walk_packages(shadowscale.__path__, "shadowscale.")]
for name in names:
    import_module(name)
print(len(names))
"""
LEFT_OUT = """
import sys
from shadowscale_app.__main__ import main
status = main(sys.argv[1:])
names = ("PySide6", "pyqtgraph")
print("loaded:", [name for name in sys.modules if name.split(".")[0] in names])
sys.exit(status)
"""
LIGHT_MODULES = """
import sys
import shadowscale, shadowscale.cli, shadowscale.session, shadowscale.sheet, shadowscale.fit.solution
print([name for name in ("scipy", "astropy", "numba", "emcee") if name in sys.modules])
"""


def test_the_contracts_of_the_borders_are_kept(root):
    program = Path(sys.executable).with_name("lint-imports")
    done = subprocess.run([program], cwd=root, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
    assert "0 broken" in done.stdout


def test_every_module_of_the_engine_loads_where_there_is_no_window():
    ran = python("-c", WITHOUT_QT)
    assert ran.status == 0, ran.err
    assert int(ran.out) > 50


def test_a_command_loads_nothing_of_the_window(tmp_path):
    (tmp_path / "bad.csv").write_text("nothing\n")
    ran = python("-c", LEFT_OUT, "solve", tmp_path / "bad.csv", "--out", tmp_path / "out")
    assert ran.status == 3
    assert ran.out.splitlines()[-1] == "loaded: []"


def test_what_a_window_needs_first_loads_no_solver():
    ran = python("-c", LIGHT_MODULES)
    assert (ran.status, ran.out.strip()) == (0, "[]"), ran.err


PACKAGES = sorted(
    item.name for item in walk_packages(shadowscale.__path__, "shadowscale.") if item.ispkg
)


@pytest.mark.parametrize("name", ["shadowscale", *PACKAGES])
def test_public_names_are_listed_sorted_and_exist(name):
    package = import_module(name)
    listed = getattr(package, "__all__", None)
    if listed is None:  # a package that offers modules only
        public = [item for item in vars(package) if not item.startswith("_")]
        modules = {item for item in public if f"{name}.{item}" in sys.modules}
        assert set(public) - {"annotations"} == modules
        return
    order = sorted(listed, key=lambda item: (not item.isupper(), not item[0].isupper(), item))
    assert list(listed) == order
    assert all(hasattr(package, item) for item in listed)
