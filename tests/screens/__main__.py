"""`python tests/screens [FOLDER]`: the pictures of the README, taken from the real window on the samples.

Without a screen run it as `xvfb-run -s "-screen 0 1440x900x24" python tests/screens`.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

from PySide6.QtCore import QBuffer, QIODevice, QSettings
from PySide6.QtGui import QImage
from PySide6.QtWidgets import QApplication

from shadowscale_app import theme
from shadowscale_app.bench import Bench
from shadowscale_app.warm import READY

ROOT = Path(__file__).parents[2]
PICTURES = ROOT / "core" / "shadowscale" / "guide" / "pictures"
WIDTH, HEIGHT = 1280, 780
MOST_BYTES = 300_000


@dataclass(frozen=True)
class Scene:
    """One picture: the sample, the scheme, the panes in front, the phase under the cursor."""

    name: str
    sample: str
    scheme: str
    panes: tuple[str, ...]
    phase: float


SCENES = (
    Scene("heron", "heron", theme.ALWAYS_LIGHT, ("Eclipses", "Quantities"), 0.012),
    Scene("lantern", "lantern", theme.ALWAYS_DARK, ("Velocities", "Quantities"), 0.006),
    Scene("mass_radius", "heron", theme.ALWAYS_LIGHT, ("Mass and radius", "Doubts"), 0.25),
)


def main(arguments: Sequence[str]) -> int:
    """Take all pictures; the names of those that are too large decide the exit status."""
    folder = Path(arguments[0]) if arguments else PICTURES
    folder.mkdir(parents=True, exist_ok=True)
    application = QApplication(["screens"])
    application.setApplicationName("Shadowscale")
    with TemporaryDirectory() as own:
        QSettings.setDefaultFormat(QSettings.Format.IniFormat)
        for kind in (QSettings.Format.IniFormat, QSettings.Format.NativeFormat):
            QSettings.setPath(kind, QSettings.Scope.UserScope, own)
        too_large = [scene.name for scene in SCENES if not take(application, scene, folder)]
    print("too large:", ", ".join(too_large) or "none")
    return 1 if too_large else 0


def take(application: QApplication, scene: Scene, folder: Path) -> bool:
    """One picture; whether it is small enough."""
    application.setProperty(theme.CHOICE, scene.scheme)
    theme.dress(application)
    READY.reach()
    bench = Bench()
    bench.resize(WIDTH, HEIGHT)
    bench.show()
    bench.open_sample(str(ROOT / "sample_sessions" / scene.sample / "session.json"))
    bench.files.errands.wait_until_idle()
    bench.long_lane.wait_until_idle()
    for pane in scene.panes:
        bench.bring(pane)
    bench.panes["Folded curve"].pointed.emit(scene.phase)
    bench.status.tell("")
    until = time.monotonic() + 0.6
    while time.monotonic() < until:
        application.processEvents()
    data = as_png(bench.grab().toImage())
    (folder / f"{scene.name}.png").write_bytes(data)
    bench.end()
    bench.hide()
    bench.deleteLater()
    application.processEvents()
    return len(data) < MOST_BYTES


def as_png(image: QImage) -> bytes:
    """The picture as a file, packed as closely as it goes."""
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    image.convertToFormat(QImage.Format.Format_RGB888).save(buffer, "PNG", 0)
    return bytes(buffer.data().data())


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
