"""The sample sessions that come with the program."""

from __future__ import annotations

import json
from importlib.resources import files
from pathlib import Path


def samples() -> list[tuple[str, str, Path]]:
    """Title, one sentence and file of each; empty where none are installed."""
    folder = _folder()
    if folder is None:
        return []
    found = []
    for path in sorted([*folder.glob("*/session.json"), *folder.glob("*.json")]):
        title = path.parent.name if path.name == "session.json" else path.stem
        found.append((title.replace("_", " ").replace("-", " ").capitalize(), _words(path), path))
    return found


def is_sample(path: Path) -> bool:
    """Whether a file is one of the samples, which nobody's work may change."""
    folder = _folder()
    return folder is not None and folder.resolve() in path.resolve().parents


def _words(path: Path) -> str:
    """What the sample shows, as the text beside it says in its first line; else the session's name."""
    note = path.parent / "README.md"
    if note.exists():
        lines = [
            line.strip("# ").strip()
            for line in note.read_text(encoding="utf-8").splitlines()
            if line.strip()
        ]
        return lines[min(1, len(lines) - 1)] if lines else ""
    try:
        return str(json.loads(path.read_text(encoding="utf-8")).get("name", ""))
    except (OSError, ValueError, AttributeError):
        return ""


def _folder() -> Path | None:
    beside = Path(str(files("shadowscale"))) / "sample_sessions"
    root = Path(str(files("shadowscale"))).parents[1] / "sample_sessions"
    for folder in (beside, root):
        if folder.is_dir() and any(folder.iterdir()):
            return folder
    return None
