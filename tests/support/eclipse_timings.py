"""Eclipse timings of known pairs, perfect or with noise."""

from __future__ import annotations

from math import isfinite

import numpy as np

from shadowscale.geometry.contacts import EclipseTiming, contact_phases
from shadowscale.geometry.discs import hidden_light

TIME_ERROR, DEPTH_ERROR = 2e-5, 1e-3  # [cycles], fraction of the light


def timings(
    radius_sum: float,
    radius_ratio: float,
    inclination: float,
    *,
    ecosw: float = 0.0,
    esinw: float = 0.0,
    brightness: float = 0.5,
    third_light: float = 0.0,
    noise: np.random.Generator | None = None,
) -> tuple[EclipseTiming | None, EclipseTiming | None]:
    """Primary and secondary eclipse of a pair, u = 0.5; None where there is none."""
    found = contact_phases(radius_sum, radius_ratio, inclination, ecosw, esinw)
    k = radius_ratio
    r1, r2 = radius_sum / (1 + k), radius_sum * k / (1 + k)
    light2 = brightness * k * k / (1 + brightness * k * k)
    eclipses = []
    for contacts, radius, ratio, light in (
        (found.primary, r1, k, 1 - light2),
        (found.secondary, r2, 1 / k, light2),
    ):
        if not isfinite(contacts.first):
            eclipses.append(None)
            continue
        flat = isfinite(contacts.second)
        hidden = hidden_light([contacts.separation / radius], [ratio])[0]
        numbers = np.array(
            [
                (contacts.first + contacts.fourth) / 2,
                contacts.duration,
                contacts.second - contacts.first if flat else contacts.duration / 2,
                contacts.fourth - contacts.third if flat else contacts.duration / 2,
                (1 - third_light) * light * hidden,
            ]
        )
        sigma = np.array([1.0, 2.0, 3.0, 3.0, 0.0]) * TIME_ERROR
        sigma[4] = DEPTH_ERROR
        if noise is not None:
            numbers += sigma * noise.standard_normal(5)
        eclipses.append(EclipseTiming(*map(float, numbers), flat, np.diag(sigma**2)))
    return eclipses[0], eclipses[1]
