"""The whole solution: from tables and wishes to a `Solution`, with no manual start."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from shadowscale.data.limb_tables import LimbTable, read_limb_table
from shadowscale.data.photometry import Floats, Ints, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.errors import NotConvergedError, NotDetachedError
from shadowscale.fit.alternatives import Branch, distinct_branches, mirrored, preference
from shadowscale.fit.build import build_system, named
from shadowscale.fit.check import check_plan, check_velocities_follow, check_wishes
from shadowscale.fit.decide import decision, needed
from shadowscale.fit.effects import predicted_amplitudes
from shadowscale.fit.least_squares import STALLED
from shadowscale.fit.limb import UNKNOWN_LOGGS, LimbChoice, limb_choices, teffs, wavelengths
from shadowscale.fit.objective import Constraint
from shadowscale.fit.plan import Plan
from shadowscale.fit.priors import prior_constraints
from shadowscale.fit.problem import Fitted, Problem, Weighting, fit_system, thinned
from shadowscale.fit.profile import valley
from shadowscale.fit.result import assemble
from shadowscale.fit.reweigh import reasons_with_outlier, reweighed, without_wild_rows
from shadowscale.fit.solution import PROFILE, Decision, Solution
from shadowscale.fit.start import Ground, find_ground, seen_once
from shadowscale.fit.system import System
from shadowscale.fit.third_light import third_light_told
from shadowscale.light.laws import LAWS
from shadowscale.progress import SILENT, Progress
from shadowscale.quantities import key

FIRST_STEPS = 10  # of each start, before the poor ones are dropped
KEPT_STARTS = 3
LIMB_ROUNDS = 4
THINNED_ROWS = 5000
EXPLORING_STEPS = 40
VALLEY_ROUNDS = 3
HOPELESS = 60.0  # in chi-squared of the thinned data: no full fit mends that


@dataclass(eq=False)
class _Work:
    """What the steps hand on to each other."""

    problem: Problem
    plan: Plan
    ground: Ground
    table: LimbTable | None
    progress: Progress
    weighting: Weighting
    limb: Mapping[tuple[int, str], LimbChoice] = field(default_factory=dict)
    decisions: list[Decision] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    _thin: tuple[Ints, Ints] | None = None

    def fit(self, system: System) -> Fitted:
        """Fit with the present weights and priors."""
        return fit_system(
            self.problem, system, weighting=self.weighting, constraints=self.constraints(system)
        )

    def explore(self, system: System, *, most: int) -> Fitted:
        """Fit roughly, to a thinned light curve."""
        why = self.weighting.why
        if self._thin is None or self._thin[0] is not why:
            self._thin = (why, thinned(self.problem.photometry, why, THINNED_ROWS))
        weighting = replace(self.weighting, why=self._thin[1])
        return fit_system(
            self.problem, system, weighting=weighting, constraints=self.constraints(system),
            most=most, rough=True,
        )  # fmt: skip

    def constraints(self, system: System) -> list[Constraint]:
        """All priors that act on the system."""
        rules = [rule for choice in self.limb.values() for rule in choice.constraints]
        return [*rules, *prior_constraints(self.plan, system)]


def solve(
    photometry: Photometry,
    velocities: Velocities | None,
    plan: Plan,
    *,
    progress: Progress = SILENT,
) -> Solution:
    """Solve a detached eclipsing binary.

    Parameters
    ----------
    photometry : Photometry
    velocities : Velocities or None
    plan : Plan
    progress : Progress
        Told of each step; may raise `Stopped`.

    Returns
    -------
    Solution

    Raises
    ------
    UsageError
        The plan names what the data do not have.
    NoSolutionError
        No eclipses, stars too close, or no minimum found.
    """
    check_plan(plan, photometry, velocities)
    table = None if plan.limb_table is None else read_limb_table(plan.limb_table)
    problem = Problem(photometry, velocities)
    weighting = without_wild_rows(problem, problem.weighting())
    reasons = reasons_with_outlier(photometry.reasons)
    tame = replace(photometry, why=weighting.why, reasons=reasons)
    ground = find_ground(tame, velocities, plan, progress)
    plan, held = _period_held(plan, ground, tame, velocities)
    work = _Work(problem, plan, ground, table, progress, weighting)
    work.decisions += [*_period_told(ground), *held]
    best, met = _explored(work)
    best = _with_effects(work, best)
    best = _weighed(work, best)
    best = _with_levels(work, best)
    best = _with_orbit(work, best)
    best = _weighed(work, best)
    best, branches = _against_others(work, best, met)
    best = _with_limb_darkening(work, best)
    best = _with_effects(work, best)
    if not best.minimum.converged:
        raise NotConvergedError(
            "the fit did not settle",
            {"steps": best.minimum.iterations, "chi-squared": best.chi2},
            "hold a quantity that the data do not determine, or give a better ephemeris",
        )
    check_velocities_follow(best)
    progress.report(0.9, "uncertainties")
    best, ends = _with_valley(work, best, [each.fitted for each in branches])
    branches = [Branch(each.fitted, each.fitted.chi2 - best.chi2) for each in branches]
    work.decisions += third_light_told(best, ends)
    return assemble(
        best, problem=problem, plan=plan, weighting=work.weighting, ground=ground,
        branches=branches, decisions=work.decisions, notes=[*ground.measured.notes, *work.notes],
        ends=ends,
    )  # fmt: skip


def _period_held(
    plan: Plan, ground: Ground, photometry: Photometry, velocities: Velocities | None
) -> tuple[Plan, list[Decision]]:
    """The plan with the period held as given where nothing that was measured could tell it."""
    told = any(prior.name == "period" for prior in plan.priors) or "period" in plan.free
    if told or velocities is not None or not seen_once(ground.measured, photometry):
        return plan, []
    period = ground.measured.period
    words = f"{period:.7g} d held as given: no eclipse was seen in two cycles"
    fixed = {**plan.fixed, "period": (period,)}
    return replace(plan, fixed=fixed), [Decision("period", f"{period:.7g} d", words)]


def _period_told(ground: Ground) -> list[Decision]:
    """How the period was settled, where it was searched."""
    search, used = ground.search, ground.measured.period
    if search is None:
        return []
    words = search.words
    if abs(used / search.period - 1.0) > 0.1:
        words = f"{used:.7g} d by the velocities, which do not swing in {search.period:.7g} d"
    elif search.ambiguous and search.other:
        words += f"; {search.other:.7g} d fits as well"
    return [Decision("period", f"{used:.7g} d", words)]


def _explored(work: _Work) -> tuple[Fitted, list[Fitted]]:
    """The best of several starts, and the other minima met on the way."""
    fitted: list[Fitted] = []
    bands = work.problem.photometry.bands
    starts = work.ground.starts
    if not all(named(work.plan.fixed, key("third_light", band)) for band in bands):
        starts = (*starts, *work.ground.dim_starts)
    for number, start in enumerate(starts):
        work.progress.report(
            0.25 + 0.3 * number / len(starts), f"start {number + 1} of {len(starts)}"
        )
        if number == 0:
            work.limb = _limb(work, start)
            check_wishes(work.plan, _system(work, start))
        try:
            fitted.append(work.explore(_system(work, start), most=FIRST_STEPS))
        except np.linalg.LinAlgError:
            continue
    fitted = sorted((each for each in fitted if np.isfinite(each.chi2)), key=preference)
    if not fitted:
        raise NotDetachedError(
            "no two separate stars make eclipses as long as these",
            {"r1 + r2": work.ground.contact.values.get("radius_sum", np.nan)},
            "a close pair needs a model of stars that touch",
        )
    chosen = distinct_branches(fitted)[:KEPT_STARTS]
    finished = [work.explore(each.system, most=EXPLORING_STEPS) for each in chosen]
    finished.sort(key=preference)
    return work.fit(finished[0].system), finished[1:]


def _system(work: _Work, start: Mapping[str, float]) -> System:
    plan = work.plan
    return build_system(
        plan,
        work.problem.photometry,
        work.problem.velocities,
        start=start,
        limb=work.limb,
        eccentric=plan.orbit != "circular",
        levels="one" if plan.levels == "auto" else plan.levels,
        wavelengths=wavelengths(plan, work.problem.photometry.bands),
    )


def _limb(
    work: _Work, values: Mapping[str, float], logg: Sequence[float] = UNKNOWN_LOGGS
) -> dict[tuple[int, str], LimbChoice]:
    """Choices for both stars in every band, told among the decisions."""
    bands = work.problem.photometry.bands
    choices, words = limb_choices(work.plan, bands, values, logg=logg, table=work.table)
    work.decisions = [each for each in work.decisions if each.what != "limb darkening"]
    work.decisions.append(Decision("limb darkening", work.plan.law, words))
    return choices


def _with_effects(work: _Work, best: Fitted) -> Fitted:
    """Small effects that are asked for: predicted from the stars as fitted, or fitted from there."""
    from shadowscale.fit.derived import derived_value

    states = {name: state for name, state in best.system.effects.items() if state != "off"}
    if not states:
        return best
    at = best.system.wavelengths
    for _ in range(2):
        brightness = {
            band: best.system.values[key("surface_brightness_ratio", band)]
            for band in best.system.bands
        }
        teff1, teff2, words = teffs(work.plan, brightness, at)
        ratio = derived_value(best.system, "mass_ratio", _assumed(work.plan, best.system))
        predicted = predicted_amplitudes(best.system, teff1=teff1, teff2=teff2, mass_ratio=ratio)
        fresh = not any(
            best.system.values[name] for name in predicted if name in best.system.values
        )
        moved = {
            name: value for name, value in predicted.items()
            if name in best.system.values and (fresh or name not in best.system.free)
        }  # fmt: skip
        best = work.fit(best.system.with_values(moved))
    said = ", ".join(f"{name} {state}" for name, state in states.items())
    assumed = "" if np.isfinite(ratio) else "; mass ratio taken as one for want of velocities"
    if any(states.get(name) == "fitted" for name in ("ellipsoidal", "beaming")):
        assumed += (
            "; the part of star 2 is held as predicted, since that of star 1 has the same shape"
        )
    work.decisions = [each for each in work.decisions if each.what != "small effects"]
    words = f"{said}; predictions at {teff1:.0f} K and {teff2:.0f} K ({words}){assumed}"
    work.decisions.append(Decision("small effects", said, words, predicted))
    return best


def _assumed(plan: Plan, system: System) -> dict[str, float]:
    from shadowscale.fit.derived import assumed_inputs

    return {name: value for name, (value, _) in assumed_inputs(plan, system).items()}


def _weighed(work: _Work, best: Fitted) -> Fitted:
    """Outliers set aside, errors scaled, jitter added; fitted again until nothing changes."""
    for _ in range(5):
        work.weighting, changed = reweighed(work.problem, best, work.weighting)
        best = work.fit(best.system)
        if not changed:
            break
    return best


def _with_levels(work: _Work, best: Fitted) -> Fitted:
    """One level a band, one a night, or a level and slope a night, as the data decide."""
    if work.plan.levels != "auto":
        return best
    chosen, held = "one", best
    for mode in ("night", "trend"):
        extra = _level_count(work, mode) - _level_count(work, chosen)
        if extra <= 0:
            continue
        other = work.fit(replace(held.system, levels=mode))
        gain = held.chi2 - other.chi2
        enough, limit = needed(gain, extra)
        subject = "a level a night" if mode == "night" else "a level and a slope a night"
        result = mode if enough else chosen
        work.decisions.append(
            decision("levels", chosen=result, gain=gain, extra=extra, limit=limit, subject=subject)
        )
        if not enough:
            break
        chosen, held = mode, other
    return _weighed(work, held) if chosen != "one" else held


def _level_count(work: _Work, mode: str) -> int:
    segments = sum(data.segments for data in work.problem.bands(mode, work.weighting.why))
    return 2 * segments if mode == "trend" else segments


def _with_orbit(work: _Work, best: Fitted) -> Fitted:
    """Circular unless the data demand an eccentricity."""
    shape = [name for name in ("ecosw", "esinw") if name in best.system.free]
    if work.plan.orbit == "eccentric" or not shape:
        words = f"{work.plan.orbit}, as asked"
        work.decisions.append(Decision("orbit", work.plan.orbit, words))
        return best
    told = {*work.plan.free, *(prior.name for prior in work.plan.priors)}
    if told & {"ecosw", "esinw", "eccentricity", "omega"}:
        work.decisions.append(Decision("orbit", "eccentric", "eccentric, as the wishes imply"))
        return best
    round_ = best.system.with_values(dict.fromkeys(shape, 0.0))
    other = work.fit(replace(round_, free=tuple(n for n in best.system.free if n not in shape)))
    gain = other.chi2 - best.chi2
    enough, limit = needed(gain, len(shape))
    work.decisions.append(
        decision("orbit", chosen="eccentric" if enough else "circular", gain=gain, extra=len(shape),
                 limit=limit, subject="an eccentric orbit")
    )  # fmt: skip
    return best if enough else other


def _against_others(
    work: _Work, best: Fitted, branches: list[Fitted]
) -> tuple[Fitted, list[Branch]]:
    """Fit the mirror solution and the other minima under the final weights; the best may change."""
    work.progress.report(0.75, "looking for other solutions")
    others = [mirrored(best.system), *(each.system.values for each in branches)]
    here = work.explore(best.system, most=FIRST_STEPS)
    rough = [work.explore(_moved(best.system, values), most=EXPLORING_STEPS) for values in others]
    hopeful = [each for each in rough if each.chi2 < here.chi2 + HOPELESS]
    candidates = [best]
    for each in distinct_branches([here, *sorted(hopeful, key=preference)])[1:]:
        candidates.append(work.fit(each.system))
    found = distinct_branches(sorted(candidates, key=preference))
    return found[0], [Branch(each, each.chi2 - found[0].chi2) for each in found[1:]]


def _with_valley(
    work: _Work, best: Fitted, others: Sequence[Fitted]
) -> tuple[Fitted, tuple[Floats, Floats] | None]:
    """The limits of k along its valley, where that is curved; the best may move to a lower place in it."""
    for _ in range(VALLEY_ROUNDS):
        found = valley(best, work.fit, others)
        if found is None:
            return best, None
        if found.best.chi2 >= best.chi2 - STALLED:
            words = (
                "the ratio of the radii lies in a curved valley: limits from its likelihood profile"
            )
            if found.tail:
                words += ", reaching out so far that 68.3 per cent of the likelihood lie between"
            work.decisions.append(Decision("errors", PROFILE, words))
            return best, (found.below, found.above)
        freed = replace(found.best.system, free=best.system.free)
        best = work.fit(freed)
    return best, None


def _moved(system: System, values: Mapping[str, float]) -> System:
    """The system with another's values of what is free, and of the orbit's shape where that is free."""
    taken = {name: value for name, value in values.items() if name in system.free}
    return system.with_values(taken)


def _with_limb_darkening(work: _Work, best: Fitted) -> Fitted:
    """Where a table is given: coefficients at the fitted gravity and temperature, until they agree."""
    if work.table is None:
        return best
    from shadowscale.fit.derived import derived_value

    for _ in range(LIMB_ROUNDS):
        logg = [derived_value(best.system, name) for name in ("logg1", "logg2")]
        held = [value if np.isfinite(value) else 4.2 for value in logg]
        before = {at: choice.coefficients for at, choice in work.limb.items()}
        work.limb = _limb(work, best.system.values, held)
        change = max(
            abs(new - old) for at, choice in work.limb.items()
            for new, old in zip(choice.coefficients, before[at], strict=True)
        )  # fmt: skip
        if change < 1e-3:
            break
        best = work.fit(_moved_limb(best.system, work.limb))
    return best


def _moved_limb(system: System, limb: Mapping[tuple[int, str], LimbChoice]) -> System:
    """Coefficients that are not free set to the new choice."""
    count = len(LAWS[system.law].coefficients)
    values = {
        key(f"limb_darkening{star}", band, n + 1): choice.coefficients[n]
        for (star, band), choice in limb.items() for n in range(count)
    }  # fmt: skip
    return system.with_values(
        {name: value for name, value in values.items() if name not in system.free}
    )
