"""Small tables of an invented star, written as text in the ways that people write them."""

from __future__ import annotations

from pathlib import Path

import numpy as np

START = 2459000.25  # [d]


def light(count: int = 60, *, seed: int = 3) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Times [d], magnitudes and errors of a night with an eclipse, rounded as they are printed."""
    random = np.random.default_rng(seed)
    time = START + np.linspace(0.0, 0.2, count)
    dip = 0.6 * np.exp(-0.5 * ((time - START - 0.1) / 0.015) ** 2)
    magnitude = 11.2 + dip + random.normal(0.0, 0.005, count)
    error = random.uniform(0.004, 0.006, count)
    return np.round(time, 6), np.round(magnitude, 4), np.round(error, 4)


def rows(separator: str = ",", *, decimal: str = ".", count: int = 60) -> list[str]:
    """The night as lines of time, magnitude, error."""
    return [
        separator.join((f"{t:.6f}", f"{m:.4f}", f"{e:.4f}")).replace(".", decimal)
        for t, m, e in zip(*light(count), strict=True)
    ]


def written(folder: Path, name: str, text: str | bytes | list[str]) -> Path:
    """The file with that content; a list is written as lines."""
    if isinstance(text, list):
        text = "\n".join(text) + "\n"
    path = folder / name
    path.write_bytes(text if isinstance(text, bytes) else text.encode("utf-8"))
    return path
