"""Do random systems come back? `python tests/recovery --count 200`

Draws detached binaries over the whole range the program claims, with data of 200 to 100,000 points
in one to four bands, solves each with no manual start, and compares with the truth: how many are
solved, the spread of the pulls (estimate less truth in sigmas), and the reported sigmas against
the Cramer-Rao bound (the inverse of Fisher's information, priors included; at the truth, and at the
solution, since along a curved valley the bound itself differs).
"""

from __future__ import annotations

import argparse
import json
import sys
import time
from concurrent.futures import ProcessPoolExecutor
from dataclasses import replace
from functools import partial
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parent))

from draw import draw_case

PULLED = (
    "period", "epoch", "radius_sum", "radius_ratio", "inclination", "ecosw", "esinw", "K1", "K2",
    "gamma1", "surface_brightness_ratio", "third_light", "r1", "r2", "M1", "M2", "R1", "R2",
)  # fmt: skip
SOLVED_WITHIN = 6.0  # sigmas, of every pulled quantity: beyond it, another minimum was taken


def run_case(number: int, *, told: bool, limb_known: bool) -> dict[str, object]:
    """Solve one case, `told` the ephemeris or nothing; what came of it, ready for JSON."""
    from shadowscale.errors import ShadowscaleError
    from shadowscale.fit.plan import Plan
    from shadowscale.fit.solve import solve
    from shadowscale.quantities import key

    case = draw_case(number)
    plan = Plan(exposure=case.truth.exposure)
    if told:
        plan = replace(
            plan,
            period=case.truth.value("period") * (1 + 1e-6),
            epoch=case.truth.value("epoch"),
        )
    if limb_known:
        plan = replace(
            plan,
            fixed={
                key(f"limb_darkening{star}", band): case.truth.limb_darkening(star, band)
                for star in (1, 2) for band in case.truth.bands
            },
        )  # fmt: skip
    began = time.perf_counter()
    try:
        solution = solve(case.photometry, case.velocities, plan)
    except ShadowscaleError as error:
        return {"case": number, "words": case.words, "error": str(error)}
    spent = time.perf_counter() - began
    return {
        "case": number,
        "words": case.words,
        "seconds": spent,
        "pulls": _pulls(case.truth, solution),
        "bound": _bound_ratios(case, solution, plan),
        "sides": [alternative.values["radius_ratio"] > 1 for alternative in solution.alternatives],
        "side": case.truth.value("radius_ratio") > 1,
        "decisions": [each.words for each in solution.decisions if each.what != "limb darkening"],
        "reduced_chi2": solution.fit.reduced_chi2,
        "values": {n: solution.system.values[n] for n in PULLED if n in solution.system.values},
    }


def _pulls(truth, solution) -> dict[str, float]:
    from shadowscale.fit.derived import derived_values

    true = dict(truth.values) | derived_values(truth)
    found = {}
    for name, estimate in solution.estimates.items():
        if name.split("[")[0] not in PULLED or not estimate.plus:
            continue
        difference = estimate.value - true[name]
        if name == "epoch":
            difference -= round(difference / true["period"]) * true["period"]
        side = estimate.plus if difference < 0 else estimate.minus
        found[name] = difference / side
    return found


def _bound_ratios(case, solution, plan) -> dict[str, dict[str, float]]:
    """Sigmas of the sheet over the Cramer-Rao bound at the truth and at the solution."""
    system = solution.system
    cycles = round(
        (system.values["epoch"] - case.truth.value("epoch")) / case.truth.value("period")
    )
    true = {**system.values, **case.truth.values}
    true["epoch"] += cycles * case.truth.value("period")
    found = {}
    for where, values in (("truth", true), ("solution", dict(system.values))):
        bound = _bound(case, replace(system, values=values), plan)
        found[where] = {
            name: _half_width(solution.estimates[name], name) / sigma
            for name, sigma in bound.items()
            if name.split("[")[0] in PULLED
        }
    return found


def _bound(case, system, plan) -> dict[str, float]:
    """The Cramer-Rao bound of the same data, priors included, at the values of `system`."""
    from shadowscale.fit.least_squares import covariance
    from shadowscale.fit.limb import grey_errors
    from shadowscale.fit.objective import Constraint
    from shadowscale.fit.priors import prior_constraints
    from shadowscale.fit.problem import Problem

    problem = Problem(case.photometry, case.velocities)
    common, own = grey_errors(blind=True)
    rules = [
        Constraint(name, 0.0, own, coordinate=True, common=name[-1], common_sigma=common)
        for name in system.free
        if name.startswith("limb_darkening")
    ]
    rules += prior_constraints(plan, system)
    objective = problem.objective(system, problem.weighting(), rules)
    matrix, _ = covariance(objective(objective.vector.pack(dict(system.values))))
    return dict(zip(system.free, np.sqrt(np.diag(matrix)).tolist(), strict=True))


def _half_width(estimate, name: str) -> float:
    """Half the distance of the limits on the sheet; for the inclination in cos^2, as the bound is."""
    from shadowscale.orbit.elements import cos_squared

    low, high = estimate.value - estimate.minus, estimate.value + estimate.plus
    if name != "inclination":
        return (high - low) / 2
    if high < 90.0:
        return (cos_squared(low) - cos_squared(high)) / 2
    return cos_squared(low) - cos_squared(estimate.value)


def main() -> None:
    """Run the cases and print the table."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--count", type=int, default=200)
    parser.add_argument("--first", type=int, default=1)
    parser.add_argument("--given", choices=("nothing", "ephemeris"), default="nothing")
    parser.add_argument("--limb", choices=("grey", "known"), default="grey")
    parser.add_argument("--workers", type=int, default=2)
    parser.add_argument("--json", type=Path, help="write every case here")
    options = parser.parse_args()
    run = partial(run_case, told=options.given == "ephemeris", limb_known=options.limb == "known")
    numbers = range(options.first, options.first + options.count)
    if options.workers > 1:
        with ProcessPoolExecutor(options.workers) as pool:
            results = list(pool.map(run, numbers, chunksize=4))
    else:
        results = [run(number) for number in numbers]
    if options.json:
        options.json.write_text(json.dumps(results, indent=1))
    report(results)


def _of(name: str, numbers: list[dict[str, float]]) -> np.ndarray:
    """The numbers of a quantity, of all cases and bands."""
    return np.array([v for each in numbers for n, v in each.items() if n.split("[")[0] == name])


def report(results: list[dict]) -> None:
    """The table of rates, pulls and bounds."""
    refused = [each for each in results if "error" in each]
    fitted = [each for each in results if "error" not in each]
    good = [e for e in fitted if max(abs(p) for p in e["pulls"].values()) < SOLVED_WITHIN]
    said = [e for e in fitted if e not in good and e["side"] in e["sides"]]
    share = 100 * (len(good) + len(said)) / len(results)
    print(
        f"{len(results)} systems; truth within the errors {len(good)}; the data allow k and 1/k, and"
    )
    print(f"the truth is the one listed as alternative {len(said)}; together {share:.1f} %")
    for each in refused:
        print(f"  refused {each['case']}: {each['error']} [{each['words']}]")
    for each in fitted:
        if each not in good:
            worst = max(each["pulls"], key=lambda name: abs(each["pulls"][name]))
            print(f"  off {each['case']}: {worst} by {each['pulls'][worst]:.1f} sigma, "
                  f"{len(each['sides'])} alternatives [{each['words']}]")  # fmt: skip
    print(f"{'':65} at the truth: {'':9} at the solution:")
    print(
        f"{'quantity':26} {'n':>5} {'mean pull':>10} {'std':>6} {'mad std':>8}"
        + f" {'sigma/bound':>12} {'in 20 %':>8}" * 2
    )
    for name in PULLED:
        pulls = _of(name, [each["pulls"] for each in good])
        if pulls.size < 2:
            continue
        robust = 1.4826 * np.median(np.abs(pulls - np.median(pulls)))
        line = f"{name:26} {pulls.size:5d} {pulls.mean():10.2f} {pulls.std():6.2f} {robust:8.2f}"
        for where in ("truth", "solution"):
            ratio = _of(name, [each["bound"][where] for each in good])
            if ratio.size:
                within = np.mean((ratio > 0.8) & (ratio < 1.25))
                line += f" {np.median(ratio):12.3f} {100 * within:6.0f} %"
        print(line)
    everything = np.array([p for e in good for p in e["pulls"].values()])
    print(f"{'all':26} {everything.size:5d} {everything.mean():10.2f} {everything.std():6.2f}")
    seconds = [e["seconds"] for e in fitted]
    print(f"seconds a system: median {np.median(seconds):.2f}, largest {max(seconds):.2f}")


if __name__ == "__main__":
    main()
