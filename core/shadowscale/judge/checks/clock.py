"""Whether the times are on one known scale."""

from __future__ import annotations

from shadowscale.judge.check import Check
from shadowscale.judge.evidence import Evidence
from shadowscale.judge.finding import Finding


def clock(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Seconds by which the times may be off for want of a known, common time scale."""
    scales = {"photometry": evidence.photometry.time_scale}
    if evidence.velocities is not None:
        scales["velocities"] = evidence.velocities.time_scale
    unknown = [name for name, scale in scales.items() if not _known(scale)]
    if unknown:
        return check.warned(
            f"The time scale of the {' and of the '.join(unknown)} is not known. Times may be off by up to 8.3 minutes "
            "(if not reduced to the Sun) and 69 seconds (UTC against TDB); state it, "
            "above all before comparing times of minimum.",
            500.0,
        )
    if any(_geocentric(scale) for scale in scales.values()):
        return check.warned(
            "The times are not reduced to the Sun or the barycentre: eclipses come up to 8.3 minutes early or late "
            "through the year. Convert them to BJD_TDB.",
            500.0,
        )
    clocks = {_system(scale) for scale in scales.values()} - {""}
    if len(clocks) > 1:
        return check.warned(
            f"The photometry is in {scales['photometry']}, the velocities in {scales['velocities']}: up to 69 seconds apart. "
            "Convert both to BJD_TDB.",
            69.0,
        )
    shown = " and ".join(dict.fromkeys(scales.values()))
    if clocks == {"UTC"}:
        return check.passed(
            f"Times are in {shown}. UTC runs about a minute behind TDB; mind it when you compare times of minimum.",
            0.0,
        )
    return check.passed(f"Times are in {shown}.", 0.0)


def _known(scale: str) -> bool:
    return scale.strip() != "" and "unknown" not in scale.lower()


def _geocentric(scale: str) -> bool:
    return scale.upper().split("_")[0] in ("JD", "MJD")


def _system(scale: str) -> str:
    """`UTC`, `TDB` (or a scale that runs evenly beside it), or empty where not stated."""
    clock = scale.upper().partition("_")[2]
    if not clock:
        return ""
    return "UTC" if clock in ("UTC", "UT1") else "TDB"


CHECKS = (
    Check(
        "time scale",
        "Are the times on one known scale?",
        clock,
        1.0,
        "light crosses the Earth's orbit's radius in 499 s; TDB - UTC is 69.184 s since 2017 (IERS); "
        "one second is our choice",
    ),
)
