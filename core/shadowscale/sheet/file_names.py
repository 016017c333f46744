"""What files are called in results: no folders of the one who made them, but no two alike."""

from __future__ import annotations

from collections.abc import Iterable


def file_names(paths: Iterable[str]) -> dict[str, str]:
    """A name for each path: the file's own, with as many folders before it as tell it from the others."""
    parts = {path: tuple(path.replace("\\", "/").strip("/").split("/")) for path in paths}

    def name(mine: tuple[str, ...]) -> str:
        others = [each for each in parts.values() if each != mine]
        lengths = range(1, len(mine) + 1)
        alone = (n for n in lengths if all(each[-n:] != mine[-n:] for each in others))
        return "/".join(mine[-next(alone, len(mine)) :])

    return {path: name(mine) for path, mine in parts.items()}
