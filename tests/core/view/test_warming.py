"""What the desktop makes ready behind its window."""

from __future__ import annotations

import pytest

from shadowscale.errors import Stopped
from shadowscale.view import warming


class Impatient:
    """Stops the work at its first report."""

    def report(self, fraction: float, words: str) -> None:
        raise Stopped("enough")


def test_pictures_and_solver_are_made_ready():
    warming.warm()
    warming.warm_solver()


@pytest.mark.parametrize("work", [warming.warm, warming.warm_solver])
def test_closing_ends_it_between_two_steps(work):
    with pytest.raises(Stopped, match="enough"):
        work(Impatient())
