"""Load and compile everything that pictures, contact solutions and a fit need, on one small example."""

from __future__ import annotations

import numpy as np

from shadowscale.data.photometry import InputFile, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import Plan
from shadowscale.fit.system import System
from shadowscale.geometry.contacts import EclipseTiming, contact_solution
from shadowscale.progress import SILENT, Progress

_FILE = InputFile("example", "", 0, 0)

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


def warm(progress: Progress = SILENT) -> None:
    """Compute each picture once; where it was compiled before, this only loads it.

    A compiler cannot be interrupted: `progress` may stop the work between two of them.
    """
    import shadowscale.fit.solve  # noqa: F401 - loads the solver
    from shadowscale.fit.curves import model_curves
    from shadowscale.view.density import density_picture

    phases = np.linspace(-0.25, 0.75, 50)
    model_curves(_system(), phases)
    progress.report(0.6, "making ready to draw")
    density_picture(phases, phases, rectangle=(0.0, 1.0, 0.0, 1.0), width=4, height=4)
    progress.report(0.7, "making ready to measure")
    timing = EclipseTiming(0.0, 0.08, 0.03, 0.03, 0.3, True, np.diag([1e-4] * 5) ** 2)
    contact_solution(timing, None, period=2.0)


def warm_solver(progress: Progress = SILENT) -> None:
    """Solve a small example, so that the first solution waits for no compiler either."""
    from shadowscale.fit.model import model_light, model_velocities
    from shadowscale.fit.solve import solve

    random, system = np.random.default_rng(1), _system()
    time = _VALUES["epoch"] + np.linspace(0.0, 6.0, 900)
    none = np.zeros(time.size, dtype=np.int64)
    flux = model_light(system, "V", time) + 0.002 * random.standard_normal(time.size)
    error = np.full(time.size, 0.002)
    photometry = Photometry(
        time, flux, error, none, none, none, np.arange(1, time.size + 1), flux, error, none, ("V",),
        (_FILE,), errors_from_scatter=(False,),
    )  # fmt: skip
    when, few, ones = time[::90], none[::90], np.ones(time[::90].size)
    rv1, rv2 = (
        model_velocities(system, star, when) + random.standard_normal(when.size) for star in (1, 2)
    )
    velocities = Velocities(
        when, rv1, ones, rv2, ones, few, few, few + 1, few, few, ("example",), (_FILE,)
    )
    plan = Plan(period=_VALUES["period"], epoch=_VALUES["epoch"])
    solve(photometry, velocities, plan, progress=progress)


def _system() -> System:
    return System(values=_VALUES, free=(), law="power-2", bands=("V",))
