"""Masses and radii of well-studied detached pairs, as published, to see one's own stars among them.

Each value with the paper that measured it; values marked "catalogue" were taken from the catalogue of
well-studied detached eclipsing binaries (Southworth 2015, ASP Conf. 496, 164), which quotes that paper.
Nothing here enters a solution.
"""

from __future__ import annotations

from dataclasses import dataclass

_CATALOGUE = "; error or value as in the catalogue of Southworth 2015, ASP Conf. 496, 164"


@dataclass(frozen=True)
class PublishedStar:
    """A star [nominal solar masses and radii], its errors, and the paper; None: no error seen."""

    name: str
    mass: float
    mass_error: float | None
    radius: float
    radius_error: float | None
    paper: str


def _pair(
    name: str,
    paper: str,
    first: tuple[float, float | None, float, float | None],
    second: tuple[float, float | None, float, float | None],
) -> tuple[PublishedStar, PublishedStar]:
    return PublishedStar(f"{name} 1", *first, paper), PublishedStar(f"{name} 2", *second, paper)


PUBLISHED: tuple[PublishedStar, ...] = (
    *_pair(
        "LL Aqr",
        "Graczyk et al. 2016, A&A 594, A92",
        (1.1949, 0.0007, 1.321, 0.006),
        (1.0337, 0.0007, 1.002, 0.005),
    ),
    *_pair(
        "AR Aur",
        "Southworth 2025, arXiv 2507.21781",
        (2.5444, 0.0086, 1.8433, 0.0022),
        (2.3581, 0.0085, 1.7658, 0.0026),
    ),
    *_pair(
        "AI Phe",
        "Maxted et al. 2020, MNRAS 498, 332",
        (1.1938, 0.0008, 1.8050, 0.0022),
        (1.2438, 0.0008, 2.9332, 0.0023),
    ),
    *_pair(
        "TZ For",
        "Gallenne et al. 2016, A&A 586, A35",
        (2.057, 0.001, 8.28, 0.22),
        (1.958, 0.001, 3.94, 0.17),
    ),
    *_pair(
        "beta Aur",
        "Southworth, Bruntt & Buzasi 2007, A&A 467, 1215" + _CATALOGUE,
        (2.376, 0.027, 2.762, 0.017),
        (2.291, 0.027, 2.568, 0.017),
    ),
    *_pair(
        "zeta Phe",
        "Southworth 2020, arXiv 2012.05559" + _CATALOGUE,
        (3.908, 0.057, 2.835, 0.019),
        (2.536, 0.031, 1.885, 0.011),
    ),
    *_pair(
        "V436 Per",
        "Janik et al. 2003, A&A 408, 611",
        (6.95, None, 3.29, None),
        (7.42, None, 3.86, None),
    ),
    *_pair(
        "DI Her",
        "Popper 1982 and Albrecht et al. 2009" + _CATALOGUE,
        (5.185, 0.108, 2.680, 0.046),
        (4.534, 0.060, 2.477, 0.045),
    ),
    *_pair(
        "TZ Men",
        "Andersen et al. 1987" + _CATALOGUE,
        (2.487, 0.025, 2.016, 0.020),
        (1.504, 0.010, 1.432, 0.015),
    ),
    *_pair(
        "WW Aur",
        "Southworth et al. 2005, MNRAS 363, 529",
        (1.964, 0.007, 1.927, 0.011),
        (1.814, 0.007, 1.841, 0.011),
    ),
    *_pair(
        "CM Dra",
        "Morales et al. 2009, ApJ 691, 1400",
        (0.2310, 0.0009, 0.2534, 0.0019),
        (0.2141, 0.0010, 0.2396, 0.0015),
    ),
    *_pair(
        "YY Gem",
        "Torres & Ribas 2002, ApJ 567, 1140" + _CATALOGUE,
        (0.5975, 0.0047, 0.6196, 0.0057),
        (0.6009, 0.0047, 0.6035, 0.0057),
    ),
    *_pair(
        "YZ Cas",
        "Pavlovski et al. 2014, MNRAS 438, 590",
        (2.263, 0.012, 2.525, 0.011),
        (1.325, 0.007, 1.331, 0.006),
    ),
    *_pair(
        "GU Boo",
        "Lopez-Morales & Ribas 2005, ApJ 631, 1120",
        (0.610, 0.007, 0.623, 0.016),
        (0.599, 0.006, 0.620, 0.020),
    ),
)
