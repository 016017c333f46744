"""Whether the fit itself came to an end that can be used, and what it could not give."""

from __future__ import annotations

from math import inf, isfinite

from shadowscale.judge.check import Check
from shadowscale.judge.evidence import Evidence
from shadowscale.judge.finding import ABSENT, PASS, WARN, Finding
from shadowscale.judge.words import counted, listed, number, sentence
from shadowscale.quantities import QUANTITIES, parse_key, quantity_of, written

AT_BOUND = 1e-6  # of the bound, or of 1 where it is smaller
HARMLESS_BOUNDS = ("inclination",)
MAIN = ("radius_sum", "radius_ratio", "inclination")
LEAST_SEEN = 4.0  # sigmas of the depth
USELESS = {"period": 0.05, "radius_sum": 0.5}  # relative errors that leave nothing measured
FROM_BOTH_CURVES = (
    "mass_ratio", "a", "M1", "M2", "R1", "R2", "logg1", "logg2", "vsync1", "vsync2",
)  # fmt: skip
FROM_LIGHT = (
    "r1",
    "r2",
    "radius_sum",
    "radius_ratio",
    "inclination",
    "period",
    "epoch",
    "T14_1",
    "depth1",
)


def convergence(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Whether the fit settled."""
    fit = evidence.solution.fit
    if not fit.converged:
        return check.failed(
            f"The fit had not settled after {counted(fit.iterations, 'step')}; its numbers are those of where it stopped. "
            "Start nearer (period, contacts), or hold fixed what the data do not fix.",
            fit.iterations,
            fatal=True,
        )
    return check.passed(f"The fit settled after {counted(fit.iterations, 'step')}.", fit.iterations)


def bounds(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Free quantities that stand at the edge of what the model accepts."""
    values = evidence.solution.system.values
    free = [name for name in evidence.solution.system.free if _known(name)]
    stuck = [name for name in free if _at_bound(name, values.get(name, 0.5))]
    if not stuck:
        return check.passed("No fitted quantity stands at the edge of its range.", 0.0)
    shown = listed([f"{name} = {number(evidence.solution.system.values[name])}" for name in stuck])
    if all(parse_key(name).name in HARMLESS_BOUNDS for name in stuck):
        return check.warned(
            f"{shown} degrees is the edge of its range: the true value lies on one side, so its error is one-sided, "
            "and so are those of the radii.",
            len(stuck),
        )
    return check.failed(
        f"{shown}: at the edge of the range, where the fit pushed it. The data do not fix it, or something else is "
        "wrong; hold it fixed at a known value.",
        len(stuck),
        fatal=any(parse_key(name).name in MAIN[:2] for name in stuck),
    )


def _known(name: str) -> bool:
    try:
        parse_key(name)
    except ValueError:
        return False
    return True


def _at_bound(name: str, value: float) -> bool:
    quantity = quantity_of(name)
    if not isfinite(value):
        return False
    return any(
        isfinite(bound) and abs(value - bound) <= AT_BOUND * max(1.0, abs(bound))
        for bound in (quantity.lower, quantity.upper)
    )


def usable_errors(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Free quantities without a finite, positive error."""
    free = evidence.solution.system.free
    bad = [
        name
        for name in free
        if not 0 < evidence.sigma_of(name) < inf
        or not isfinite(evidence.solution.system.values.get(name, float("nan")))
    ]
    if not bad:
        return _of_use(evidence, check)
    shown = listed(bad[:6]) + (f" and {len(bad) - 6} more" if len(bad) > 6 else "")
    return check.failed(
        f"No finite error for {shown}: the data do not fix it, or two quantities do the same. Hold it fixed or give a prior.",
        len(bad),
        fatal=any(name in MAIN for name in bad),
    )


def _of_use(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Whether the errors leave anything of the period and of the sum of the radii."""
    for name, most in USELESS.items():
        value, sigma = evidence.value(name), evidence.sigma(name)
        if evidence.is_free(name) and sigma > most * abs(value):
            return check.failed(
                f"The {QUANTITIES[name].meaning} is {written(value, sigma, sigma)} {QUANTITIES[name].unit}".rstrip()
                + ": these data do not measure it. Hold it fixed at a known value, or observe more eclipses.",
                sigma / abs(value) if value else None,
                limit=most,
                fatal=True,
            )
    depths = [(evidence.value(name), evidence.sigma(name)) for name in ("depth1", "depth2")]
    seen = [(value / sigma, value, sigma) for value, sigma in depths if sigma > 0]
    if seen and max(seen)[0] < LEAST_SEEN:
        away, value, sigma = max(seen)
        return check.failed(
            f"The eclipse that is seen best takes {written(100 * value, 100 * sigma, 100 * sigma)} % of the light: "
            "there may be none.",
            away,
            limit=LEAST_SEEN,
            fatal=True,
        )
    return check.passed("Every fitted quantity has a finite error.", 0.0)


def absent_quantities(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """One finding for every quantity that the solution could not give."""
    return tuple(
        Finding(
            f"{ABSENT}{name}",
            None,
            None,
            WARN if _expected(evidence, name) else PASS,
            f"No value for the {_meaning(name)}. {sentence(reason)}",
            check.source,
        )
        for name, reason in evidence.solution.absent.items()
    )


def _meaning(name: str) -> str:
    bare = name.split("[")[0]
    return QUANTITIES[bare].meaning if bare in QUANTITIES else name


def _expected(evidence: Evidence, name: str) -> bool:
    """Whether the data that were given should have held that quantity."""
    bare = name.split("[")[0]
    table = evidence.velocities
    if bare in FROM_LIGHT:
        return True
    if table is None:
        return False
    seen = (bool(table.used1.any()), bool(table.used2.any()))
    if bare in ("K1", "K2", "gamma1", "gamma2"):
        return seen[int(bare[-1]) - 1]
    return bare in FROM_BOTH_CURVES and all(seen)


CHECKS = (
    Check(
        "convergence",
        "Did the fit settle?",
        convergence,
        None,
        "the fit's own test of its last step",
    ),
    Check(
        "edge of range",
        "Does a fitted quantity stand at the edge of what the model accepts?",
        bounds,
        0.0,
        "limits of the register of quantities",
    ),
    Check(
        "finite errors",
        "Has every fitted quantity an error?",
        usable_errors,
        0.0,
        "a covariance must be finite and positive to be quoted (by definition)",
    ),
    Check(
        "absent",
        "What could the data not give, and why?",
        absent_quantities,
        None,
        "what the formula of the quantity needs",
    ),
)
