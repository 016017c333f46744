"""Names of bands."""

from __future__ import annotations

import pytest

from shadowscale.data.bands import WAVELENGTHS, band_name, wavelength_of


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("V", "V"),
        ("r", "r"),
        ("R", "R"),
        ("g'", "g"),
        ("SDSS i", "i"),
        ("Johnson V", "V"),
        ("tess", "TESS"),
        ("KEPLER", "Kepler"),
        ("Kp", "Kepler"),
        ("unfiltered", "clear"),
        ("rc", "Rc"),
        ("G_BP", None),
        ("all", None),
        ("", None),
        ("e", None),
    ],
)
def test_usual_names(text: str, name: str | None) -> None:
    assert band_name(text) == name


def test_wavelengths_rise_through_the_systems() -> None:
    for bands in ("UBVRI", "ugriz", "JHK", ("BP", "G", "RP")):
        values = [WAVELENGTHS[band] for band in bands]
        assert values == sorted(values)
    assert wavelength_of("nothing known") is None
    # Bessell 1990, PASP 102, 1181 (from memory): V near 545 nm
    assert wavelength_of("V") == pytest.approx(545, abs=10)
    # Ricker et al. 2015, JATIS 1, 014003: TESS is centred at 786.5 nm (from memory)
    assert wavelength_of("TESS") == pytest.approx(786.5, abs=5)
