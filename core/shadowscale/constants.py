"""Nominal solar and physical constants, in SI and in the units of the trade.

Nominal solar values: IAU 2015 Resolution B3 (Prsa et al. 2016, AJ 152, 41); bolometric zero
point: IAU 2015 Resolution B2; the rest: CODATA 2018/2022 and SI definitions. Masses come from
GM alone, so the value of G enters densities only.
"""

from __future__ import annotations

from math import log10, pi

GM_SUN = 1.3271244e20  # [m3 s-2] nominal solar mass parameter
R_SUN = 6.957e8  # [m] nominal solar radius
L_SUN = 3.828e26  # [W] nominal solar luminosity
TEFF_SUN = 5772.0  # [K] nominal solar effective temperature
L_BOL_ZERO = 3.0128e28  # [W] luminosity of absolute bolometric magnitude zero (IAU 2015 B2)

G = 6.67430e-11  # [m3 kg-1 s-2] CODATA 2018/2022
C = 299792458.0  # [m s-1] exact
C_KM_S = C / 1e3  # [km s-1]
H_PLANCK = 6.62607015e-34  # [J s] exact
K_BOLTZMANN = 1.380649e-23  # [J K-1] exact
SIGMA_SB = 2 * pi**5 * K_BOLTZMANN**4 / (15 * H_PLANCK**3 * C**2)  # [W m-2 K-4]

DAY = 86400.0  # [s]
AU = 149597870700.0  # [m] IAU 2012 B2
PC = 648000 / pi * AU  # [m]

# P in days, K in km/s: M sin3 i = MASS_FACTOR (1-e^2)^(3/2) (K1+K2)^2 K P  [nominal solar masses]
MASS_FACTOR = DAY * 1e9 / (2 * pi * GM_SUN)
# a sin i = AXIS_FACTOR sqrt(1-e^2) (K1+K2) P  [nominal solar radii]
AXIS_FACTOR = DAY * 1e3 / (2 * pi * R_SUN)
# a^3 = KEPLER_FACTOR^3 M P^2  [nominal solar radii, nominal solar masses, days]
KEPLER_FACTOR = (GM_SUN * DAY**2 / (4 * pi**2)) ** (1 / 3) / R_SUN
# v = SPIN_FACTOR R / P  [km/s, nominal solar radii, days]
SPIN_FACTOR = 2 * pi * R_SUN / DAY / 1e3
# g in cgs from K in km/s, P in days and fractional radius: 2 pi/P K / (r^2 sin i)
GRAVITY_FACTOR = 2 * pi * 1e5 / DAY
LOGG_SUN = log10(100 * GM_SUN / R_SUN**2)  # [dex cgs]
DENSITY_SUN = 3 * GM_SUN / (4 * pi * G * R_SUN**3)  # [kg m-3]
MBOL_SUN = -2.5 * log10(L_SUN / L_BOL_ZERO)  # [mag]
