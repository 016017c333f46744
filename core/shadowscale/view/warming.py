"""Load and compile everything that a picture or a contact solution needs, on one small example."""

from __future__ import annotations

import numpy as np

from shadowscale.fit.system import System
from shadowscale.geometry.contacts import EclipseTiming, contact_solution

_VALUES = {
    "period": 2.0,
    "epoch": 2460000.0,
    "radius_sum": 0.25,
    "radius_ratio": 0.8,
    "inclination": 88.0,
    "ecosw": 0.0,
    "esinw": 0.0,
    "K1": 100.0,
    "K2": 110.0,
    "gamma1": 0.0,
    "gamma2": 0.0,
    "surface_brightness_ratio[V]": 0.7,
    "third_light[V]": 0.0,
    "limb_darkening1[V].1": 0.6,
    "limb_darkening1[V].2": 0.5,
    "limb_darkening2[V].1": 0.6,
    "limb_darkening2[V].2": 0.5,
}


def warm() -> None:
    """Compute each thing once; where it was compiled before, this only loads it."""
    import shadowscale.fit.solve  # noqa: F401 - loads the solver
    from shadowscale.fit.curves import model_curves
    from shadowscale.view.density import density_picture

    phases = np.linspace(-0.25, 0.75, 50)
    system = System(values=_VALUES, free=(), law="power-2", bands=("V",))
    model_curves(system, phases)
    density_picture(phases, phases, rectangle=(0.0, 1.0, 0.0, 1.0), width=4, height=4)
    timing = EclipseTiming(0.0, 0.08, 0.03, 0.03, 0.3, True, np.diag([1e-4] * 5) ** 2)
    contact_solution(timing, None, period=2.0)
