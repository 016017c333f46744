"""Coefficients for every limb-darkening law, published ones first."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import mpmath
from mpmath import mpf

# V at 5750 K, B and K at 4500 K, all log g 4.5: Claret & Bloemen 2011, A&A 529, A75, ATLAS, least
# squares (rows read in copies of the CDS tables). Power-2: fits to the four-parameter rows, computed.
PUBLISHED: dict[str, tuple[tuple[float, ...], ...]] = {
    "linear": ((0.6564,), (0.8968,), (0.3367,)),
    "quadratic": ((0.4650, 0.2565), (1.0121, -0.1546), (0.0861, 0.3359)),
    "square-root": ((0.2892, 0.5276), (1.0821, -0.2663), (-0.1718, 0.7306)),
    "logarithmic": ((0.7556, 0.2345), (0.8422, -0.1291), (0.4709, 0.3174)),
    "power-2": ((0.7829, 0.6910), (0.8035, 0.9755), (0.6841, 0.4921)),
    "four-parameter": (
        (0.4482, 0.2143, 0.3961, -0.2625),
        (0.6609, -1.0070, 1.7861, -0.5004),
        (0.7232, -0.1158, -0.0993, 0.0513),
    ),
}

# A limb that is dark, or as sharp as a law can make it.
EDGES: dict[str, tuple[tuple[float, ...], ...]] = {
    "linear": ((0.0,), (1.0,)),
    "quadratic": ((0.0, 0.0), (2.0, -1.0), (0.0, 1.0)),
    "square-root": ((0.0, 1.0),),
    "logarithmic": ((1.0, 0.5),),
    "power-2": ((1.0, 0.2), (0.9, 3.0)),
    "four-parameter": ((1.0, 0.0, 0.0, 0.0),),
}

ALL_CASES = [
    (name, c) for table in (PUBLISHED, EDGES) for name, rows in table.items() for c in rows
]


def exact_intensity(law: str, c: Sequence[float]) -> Callable[[mpf], mpf]:
    """I(mu)/I(1) in mpmath, written out once more so that it is independent of the register."""

    def intensity(mu: mpf) -> mpf:
        if law == "linear":
            return 1 - c[0] * (1 - mu)
        if law == "quadratic":
            return 1 - c[0] * (1 - mu) - c[1] * (1 - mu) ** 2
        if law == "square-root":
            return 1 - c[0] * (1 - mu) - c[1] * (1 - mpmath.sqrt(mu))
        if law == "logarithmic":
            return 1 - c[0] * (1 - mu) - (c[1] * mu * mpmath.log(mu) if mu > 0 else 0)
        if law == "power-2":
            return 1 - c[0] * (1 - mu ** mpf(c[1]))
        assert law == "four-parameter", law
        return 1 - sum(cn * (1 - mu ** (mpf(n) / 2)) for n, cn in enumerate(c, start=1))

    return intensity
