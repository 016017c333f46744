"""When the orbit reaches a given true longitude: closed forms, regular in circular orbits.

h = e sin w and k = e cos w of star 1's orbit; L = nu + w, pi/2 at primary conjunction. No solver is
needed in this direction: L gives the place, the place the eccentric longitude, that the time.
"""

from __future__ import annotations

from math import atan2, cos, hypot, pi, sin, sqrt


def eccentricity_and_omega(ecosw: float, esinw: float) -> tuple[float, float]:
    """Eccentricity, and argument of periastron [rad] in 0...2 pi (0 for a circular orbit).

    Raises
    ------
    ValueError
        If the eccentricity is not below 1.
    """
    e = hypot(ecosw, esinw)
    if not e < 1:
        raise ValueError(f"ecosw, esinw: expected an eccentricity below 1, found {e}")
    return e, atan2(esinw, ecosw) % (2 * pi) if e > 0 else 0.0


def distance_at(longitude: float, *, ecosw: float, esinw: float) -> float:
    """Distance of the stars [a] at a true longitude L = nu + w [rad]."""
    return (1 - ecosw**2 - esinw**2) / (1 + ecosw * cos(longitude) + esinw * sin(longitude))


def cycles_at(longitude: float, *, ecosw: float, esinw: float) -> float:
    """Time from primary conjunction at which the orbit is at a true longitude.

    Parameters
    ----------
    longitude : float [rad]
        L = nu + w; pi/2 is primary conjunction, -pi/2 secondary.
    ecosw, esinw : float

    Returns
    -------
    float [cycles]
        In -0.5...0.5, light time left out.
    """
    eccentricity_and_omega(ecosw, esinw)
    cycles = (_mean(longitude, ecosw, esinw) - _mean(pi / 2, ecosw, esinw)) / (2 * pi)
    return cycles - round(cycles)


def _mean(longitude: float, k: float, h: float) -> float:
    """Mean longitude [rad] of a true longitude, up to whole turns."""
    eta = sqrt(1 - h * h - k * k)
    b = 1 / (1 + eta)
    rho = distance_at(longitude, ecosw=k, esinw=h)
    x, y = rho * cos(longitude), rho * sin(longitude)
    cos_f = k + ((1 - k * k * b) * x - h * k * b * y) / eta
    sin_f = h + ((1 - h * h * b) * y - h * k * b * x) / eta
    return atan2(sin_f, cos_f) + h * cos_f - k * sin_f


def secondary_phase(ecosw: float, esinw: float) -> float:
    """Phase of secondary conjunction after primary, exact but for light time.

    1/2 + [atan(e cos w/sqrt(1-e^2)) + e cos w sqrt(1-e^2)/(1 - e^2 sin^2 w)]/pi

    References
    ----------
    Kopal 1959, Close Binary Systems (after Sterne 1940), from memory; checked by Kepler's equation.
    """
    e, _ = eccentricity_and_omega(ecosw, esinw)
    eta = sqrt(1 - e * e)
    return 0.5 + (atan2(ecosw, eta) + ecosw * eta / (1 - esinw**2)) / pi


def ecosw_of_phase(phase: float, *, esinw: float = 0.0) -> float:
    """The e cos w that puts secondary conjunction at a phase: `secondary_phase` inverted.

    Parameters
    ----------
    phase : float [cycles]
        Between 0 and 1; what no orbit of e < 0.99 reaches gives the nearest one.
    esinw : float
    """
    if not 0 < phase < 1:
        raise ValueError(f"phase: expected a number between 0 and 1, found {phase}")
    if not abs(esinw) < 0.99:
        raise ValueError(f"esinw: expected a number between -0.99 and 0.99, found {esinw}")
    high = sqrt(0.99**2 - esinw**2)
    low = -high
    for _ in range(50):  # the phase grows with e cos w
        middle = (low + high) / 2
        if secondary_phase(middle, esinw) < phase:
            low = middle
        else:
            high = middle
    return (low + high) / 2
