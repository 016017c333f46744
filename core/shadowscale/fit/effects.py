"""The small effects as physics predicts them, for `predicted` and beside `fitted`."""

from __future__ import annotations

import numpy as np

from shadowscale.fit.plan import EFFECTS
from shadowscale.fit.system import System
from shadowscale.light import proximity
from shadowscale.light.laws import LAWS
from shadowscale.quantities import key


def predicted_amplitudes(
    system: System, *, teff1: float, teff2: float, mass_ratio: float | None
) -> dict[str, float]:
    """Amplitudes of every effect, star and band by key; a mass ratio of one is assumed where None."""
    ratio = 1.0 if mass_ratio is None or not np.isfinite(mass_ratio) else mass_ratio
    total, k = system.value("radius_sum"), system.value("radius_ratio")
    radii = total / (1 + k), total * k / (1 + k)
    found: dict[str, float] = {}
    for band in system.bands:
        shares = _shares(system, band)
        for star, teff in ((1, teff1), (2, teff2)):
            companion = ratio if star == 1 else 1 / ratio
            numbers = _star(system, star, band, radius=radii[star - 1], companion=companion,
                            other_share=shares[2 - star], teff=teff)  # fmt: skip
            found |= {key(f"{effect}{star}", band): numbers[effect] for effect in EFFECTS}
    return found


def _star(
    system: System,
    star: int,
    band: str,
    *,
    radius: float,
    companion: float,
    other_share: float,
    teff: float,
) -> dict[str, float]:
    wavelength = system.wavelengths.get(band, 600.0)
    # The linear law of the same mean intensity stands in for u.
    law = LAWS[system.law]
    mean = float(law.mean_intensity(np.array(system.limb_darkening(star, band))))
    return {
        "ellipsoidal": proximity.ellipsoidal_amplitude(
            radius, companion, inclination=system.value("inclination"),
            linear_limb=3 * (1 - mean), gravity_darkening=proximity.gravity_darkening(teff, wavelength),
        ),
        "reflection": proximity.reflection_amplitude(radius, other_share),
        "beaming": proximity.beaming_amplitude(
            system.values.get(f"K{star}", 0.0), teff=teff, wavelength=wavelength
        ),
    }  # fmt: skip


def _shares(system: System, band: str) -> tuple[float, float]:
    law = LAWS[system.law]
    means = [
        float(law.mean_intensity(np.array(system.limb_darkening(star, band)))) for star in (1, 2)
    ]
    ratio = (
        system.value("surface_brightness_ratio", band)
        * system.value("radius_ratio") ** 2
        * means[1]
        / means[0]
    )
    return 1 / (1 + ratio), ratio / (1 + ratio)
