"""Make what in the guide is made: `quantities.md` from the register, pictures of a report from a sample.

`python -m shadowscale.guide [HERON]`; HERON is the session file of that sample, for the pictures.
"""

from __future__ import annotations

import sys
from pathlib import Path

from shadowscale.guide import quantities_page

HERE = Path(__file__).parent
PICTURES = ("eclipses", "system")


def write_pictures(session: Path) -> None:
    """Solve a sample and keep some figures of its report."""
    from shadowscale.jobs.solve import solve_session
    from shadowscale.session.store import open_session
    from shadowscale.sheet.figures import all_figures
    from shadowscale.sheet.showing import shown_of

    solved = solve_session(open_session(session))
    assert solved.solution is not None
    assert solved.photometry is not None
    shown = shown_of(solved.solution, solved.photometry, solved.velocities)
    for name, figure in all_figures(shown, PICTURES).items():
        (HERE / "pictures" / f"report_{name}.png").write_bytes(figure["png"])


if __name__ == "__main__":
    (HERE / "quantities.md").write_text(quantities_page(), encoding="utf-8")
    if sys.argv[1:]:
        write_pictures(Path(sys.argv[1]))
