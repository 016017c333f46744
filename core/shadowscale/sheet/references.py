"""The papers that a solution rests on, and their BibTeX entries.

Only published works; identifiers are given where they are certain.

From memory, not looked up: all titles, last pages and identifiers. Also author, year, journal, volume and
first page of all works but these, which were checked against a list of sources: kaplan2010, mandel2002,
agol2020, kipping2013, maxted2018, morris1993, southworth2007, eggleton1983, pont2006, prsa2016,
claret2000, loeb2003.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType


@dataclass(frozen=True)
class Reference:
    """A published work: how it is cited in a sentence, and its BibTeX fields."""

    key: str
    cited: str
    kind: str
    author: str
    title: str
    year: int
    fields: Mapping[str, str] = field(default_factory=dict)

    def bibtex(self) -> str:
        """The entry."""
        rest = [f"{name} = {{{value}}}" for name, value in self.fields.items()]
        lines = (
            f"@{self.kind}{{{self.key},",
            f"  author = {{{self.author}}},",
            f"  title = {{{{{self.title}}}}},",
            f"  {', '.join([*rest, f'year = {{{self.year}}}'])}}}",
        )
        return "\n".join(lines)


AJ, APJ, MNRAS = "Astronomical Journal", "Astrophysical Journal", "Monthly Notices of the RAS"
APJL, AA = "Astrophysical Journal Letters", "Astronomy and Astrophysics"


def _paper(
    key: str, cited: str, author: str, title: str, *, where: tuple[str, str, str], doi: str = ""
) -> Reference:
    journal, volume, pages = where
    fields = {"journal": journal, "volume": volume, "pages": pages}
    if doi:
        fields["doi"] = doi
    return Reference(key, cited, "article", author, title, int(key[-4:]), fields)


def _register(*references: Reference) -> Mapping[str, Reference]:
    return MappingProxyType({each.key: each for each in references})


REFERENCES: Mapping[str, Reference] = _register(
    _paper(
        "prsa2016", "Prša et al. 2016",
        r"Pr{\v s}a, A. and Harmanec, P. and Torres, G. and others",
        "Nominal Values for Selected Solar and Planetary Quantities: IAU 2015 Resolution B3",
        where=(AJ, "152", "41"), doi="10.3847/0004-6256/152/2/41",
    ),
    _paper(
        "tiesinga2021", "Tiesinga et al. 2021",
        "Tiesinga, E. and Mohr, P. J. and Newell, D. B. and Taylor, B. N.",
        "CODATA recommended values of the fundamental physical constants: 2018",
        where=("Reviews of Modern Physics", "93", "025010"), doi="10.1103/RevModPhys.93.025010",
    ),
    Reference(
        "mamajek2015", "Mamajek et al. 2015", "misc",
        "Mamajek, E. E. and Torres, G. and Prsa, A. and others",
        "IAU 2015 Resolution B2 on Recommended Zero Points for the Absolute and Apparent "
        "Bolometric Magnitude Scales", 2015,
        MappingProxyType({"eprint": "1510.06262", "archivePrefix": "arXiv"}),
    ),
    _paper(
        "mandel2002", "Mandel & Agol 2002", "Mandel, K. and Agol, E.",
        "Analytic Light Curves for Planetary Transit Searches",
        where=(APJ, "580", "L171--L175"), doi="10.1086/345520",
    ),
    _paper(
        "agol2020", "Agol et al. 2020", "Agol, E. and Luger, R. and Foreman-Mackey, D.",
        "Analytic Planetary Transit Light Curves and Derivatives for Stars with Polynomial "
        "Limb Darkening", where=(AJ, "159", "123"), doi="10.3847/1538-3881/ab4fee",
    ),
    _paper(
        "kopal1950", "Kopal 1950", "Kopal, Z.",
        "Detailed effects of limb darkening upon light and velocity curves of close binary systems",
        where=("Harvard College Observatory Circular", "454", "1--12"),
    ),
    _paper(
        "schwarzschild1906", "Schwarzschild 1906", "Schwarzschild, K.",
        r"{\"U}ber das Gleichgewicht der Sonnenatmosph{\"a}re",
        where=("Nachrichten von der Gesellschaft der Wissenschaften zu G{\\\"o}ttingen",
               "1906", "41--53"),
    ),
    _paper(
        "diazcordoves1992", "Díaz-Cordovés & Giménez 1992",
        r"D{\'\i}az-Cordov{\'e}s, J. and Gim{\'e}nez, A.",
        "A new nonlinear approximation to the limb-darkening of hot stars",
        where=(AA, "259", "227--231"),
    ),
    _paper(
        "klinglesmith1970", "Klinglesmith & Sobieski 1970", "Klinglesmith, D. A. and Sobieski, S.",
        "Nonlinear Limb Darkening for Early-Type Stars", where=(AJ, "75", "175"),
    ),
    _paper(
        "hestroffer1997", "Hestroffer 1997", "Hestroffer, D.",
        "Centre to limb darkening of stars. New model and application to stellar interferometry",
        where=(AA, "327", "199--206"),
    ),
    _paper(
        "claret2000", "Claret 2000", "Claret, A.",
        "A new non-linear limb-darkening law for LTE stellar atmosphere models",
        where=(AA, "363", "1081--1190"),
    ),
    _paper(
        "kipping2013", "Kipping 2013", "Kipping, D. M.",
        "Efficient, uninformative sampling of limb darkening coefficients for two-parameter laws",
        where=(MNRAS, "435", "2152--2160"), doi="10.1093/mnras/stt1435",
    ),
    _paper(
        "maxted2018", "Maxted 2018", "Maxted, P. F. L.",
        "Comparison of the power-2 limb-darkening law from the STAGGER-grid to Kepler light "
        "curves of transiting exoplanets",
        where=(AA, "616", "A39"), doi="10.1051/0004-6361/201832944",
    ),
    Reference(
        "chandrasekhar1960", "Chandrasekhar 1960", "book", "Chandrasekhar, S.",
        "Radiative Transfer", 1960,
        MappingProxyType({"publisher": "Dover", "address": "New York"}),
    ),
    _paper(
        "kaplan2010", "Kaplan 2010", "Kaplan, D. L.",
        "Mass Constraints from Eclipse Timing in Double White Dwarf Binaries",
        where=(APJL, "717", "L108--L112"), doi="10.1088/2041-8205/717/2/L108",
    ),
    _paper(
        "morris1993", "Morris & Naftilan 1993", "Morris, S. L. and Naftilan, S. A.",
        "The Equations of Ellipsoidal Star Variability Applied to HR 8427",
        where=(APJ, "419", "344"), doi="10.1086/173488",
    ),
    _paper(
        "vonzeipel1924", "von Zeipel 1924", "von Zeipel, H.",
        "The radiative equilibrium of a rotating system of gaseous masses",
        where=(MNRAS, "84", "665--683"),
    ),
    _paper(
        "lucy1967", "Lucy 1967", "Lucy, L. B.",
        "Gravity-Darkening for Stars with Convective Envelopes",
        where=("Zeitschrift f{\\\"u}r Astrophysik", "65", "89"),
    ),
    _paper(
        "russell1916", "Russell 1916", "Russell, H. N.",
        "On the Albedo of the Planets and Their Satellites", where=(APJ, "43", "173--196"),
    ),
    _paper(
        "loeb2003", "Loeb & Gaudi 2003", "Loeb, A. and Gaudi, B. S.",
        "Periodic Flux Variability of Stars due to the Reflex Doppler Effect Induced by "
        "Planetary Companions", where=(APJ, "588", "L117--L120"), doi="10.1086/375551",
    ),
    _paper(
        "golub1973", "Golub & Pereyra 1973", "Golub, G. H. and Pereyra, V.",
        "The Differentiation of Pseudo-Inverses and Nonlinear Least Squares Problems Whose "
        "Variables Separate", where=("SIAM Journal on Numerical Analysis", "10", "413--432"),
        doi="10.1137/0710036",
    ),
    _paper(
        "wilks1938", "Wilks 1938", "Wilks, S. S.",
        "The Large-Sample Distribution of the Likelihood Ratio for Testing Composite Hypotheses",
        where=("Annals of Mathematical Statistics", "9", "60--62"), doi="10.1214/aoms/1177732360",
    ),
    _paper(
        "southworth2007", "Southworth, Wheatley & Sams 2007",
        "Southworth, J. and Wheatley, P. J. and Sams, G.",
        "A method for the direct determination of the surface gravities of transiting "
        "extrasolar planets", where=(MNRAS, "379", "L11--L15"),
        doi="10.1111/j.1745-3933.2007.00324.x",
    ),
    _paper(
        "eggleton1983", "Eggleton 1983", "Eggleton, P. P.",
        "Approximations to the radii of Roche lobes", where=(APJ, "268", "368--369"),
        doi="10.1086/160960",
    ),
    _paper(
        "pont2006", "Pont, Zucker & Queloz 2006", "Pont, F. and Zucker, S. and Queloz, D.",
        "The effect of red noise on planetary transit detection",
        where=(MNRAS, "373", "231--242"), doi="10.1111/j.1365-2966.2006.11012.x",
    ),
    _paper(
        "kovacs2002", "Kovács, Zucker & Mazeh 2002",
        r"Kov{\'a}cs, G. and Zucker, S. and Mazeh, T.",
        "A box-fitting algorithm in the search for periodic transits",
        where=(AA, "391", "369--377"), doi="10.1051/0004-6361:20020802",
    ),
    _paper(
        "schwarzenberg1989", "Schwarzenberg-Czerny 1989", "Schwarzenberg-Czerny, A.",
        "On the advantage of using analysis of variance for period search",
        where=(MNRAS, "241", "153--165"), doi="10.1093/mnras/241.2.153",
    ),
    _paper(
        "harris2020", "Harris et al. 2020", "Harris, C. R. and Millman, K. J. and others",
        "Array programming with NumPy", where=("Nature", "585", "357--362"),
        doi="10.1038/s41586-020-2649-2",
    ),
    _paper(
        "virtanen2020", "Virtanen et al. 2020", "Virtanen, P. and Gommers, R. and others",
        "SciPy 1.0: fundamental algorithms for scientific computing in Python",
        where=("Nature Methods", "17", "261--272"), doi="10.1038/s41592-019-0686-2",
    ),
    Reference(
        "lam2015", "Lam, Pitrou & Seibert 2015", "inproceedings",
        "Lam, S. K. and Pitrou, A. and Seibert, S.",
        "Numba: A LLVM-based Python JIT Compiler", 2015,
        MappingProxyType({
            "booktitle": "Proceedings of the Second Workshop on the LLVM Compiler "
                         "Infrastructure in HPC",
            "doi": "10.1145/2833157.2833162",
        }),
    ),
    _paper(
        "astropy2022", "Astropy Collaboration 2022", "{Astropy Collaboration}",
        "The Astropy Project: Sustaining and Growing a Community-oriented Open-source Project "
        "and the Latest Major Release (v5.0) of the Core Package",
        where=(APJ, "935", "167"), doi="10.3847/1538-4357/ac7c74",
    ),
    _paper(
        "hunter2007", "Hunter 2007", "Hunter, J. D.",
        "Matplotlib: A 2D Graphics Environment",
        where=("Computing in Science and Engineering", "9", "90--95"),
        doi="10.1109/MCSE.2007.55",
    ),
)  # fmt: skip

LIBRARIES: Mapping[str, str] = MappingProxyType(
    {
        "numpy": "harris2020",
        "scipy": "virtanen2020",
        "numba": "lam2015",
        "astropy": "astropy2022",
        "matplotlib": "hunter2007",
    }
)


def bibliography(keys: Iterable[str]) -> str:
    """BibTeX entries of some works, each once, in the order of their keys."""
    return "\n\n".join(REFERENCES[key].bibtex() for key in sorted(set(keys))) + "\n"
