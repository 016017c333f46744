"""The content of the fitted-parameter sheet, put together once; every rendering starts from it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace

from shadowscale._version import __version__
from shadowscale.data.photometry import USED, InputFile, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.solution import (
    DERIVED,
    Alternative,
    Decision,
    Estimate,
    FitSummary,
    Solution,
)
from shadowscale.geometry.contacts import ContactSolution
from shadowscale.judge.finding import ABSENT, PASS, Finding
from shadowscale.light.laws import LAWS
from shadowscale.quantities import BAND, QUANTITIES, SOURCE, SYSTEM, Quantity, key, quantity_of
from shadowscale.versions import library_versions


@dataclass(frozen=True)
class Entry:
    """One number of the sheet with all that is said about it."""

    key: str
    quantity: Quantity
    estimate: Estimate
    name: str = ""  # of a limb-darkening coefficient, as its law calls it
    tied_to: str = ""  # the key that it follows

    @property
    def meaning(self) -> str:
        """The register's words, with the coefficient's name where there are several."""
        words = self.quantity.meaning
        return f"{words}, coefficient {self.name}" if self.name else words

    @property
    def source(self) -> str:
        """Where the formula of a derived number is from, or what it follows; empty for all others."""
        if self.tied_to:
            return f"tied to {self.tied_to}"
        return self.quantity.source if self.estimate.how == DERIVED else ""


@dataclass(frozen=True)
class BandSheet:
    """What belongs to one band: its quantities, limb darkening by star, scatter about the model."""

    quantities: Mapping[str, Entry]
    law: str
    limb_darkening: Mapping[int, Mapping[str, Entry]]
    rms: float | None


@dataclass(frozen=True)
class Provenance:
    """What made the sheet, from what."""

    command: str = ""
    seed: int = 0
    time_scale: str = "unknown"
    inputs: tuple[InputFile, ...] = ()
    program: str = f"shadowscale {__version__}"
    versions: Mapping[str, str] = field(default_factory=library_versions)
    plan: Mapping[str, object] = field(
        default_factory=dict
    )  # what was wished, where not the default


@dataclass(frozen=True, eq=False)
class Sheet:
    """Everything that the sheet says.

    Attributes
    ----------
    quantities : mapping of name to Entry
        Of the system, in the register's order.
    bands, sources : mapping of label to its entries
    correlation_names, correlations
        Of the fitted and the main derived quantities.
    audit : tuple of Finding
        The checks, and one line for each quantity that the data cannot give.
    outliers : mapping of reason to number of rows
        Rows of all tables that do not take part.
    """

    quantities: Mapping[str, Entry]
    bands: Mapping[str, BandSheet]
    sources: Mapping[str, Mapping[str, Entry]]
    correlation_names: tuple[str, ...]
    correlations: tuple[tuple[float, ...], ...]
    fit: FitSummary
    alternatives: tuple[Alternative, ...]
    audit: tuple[Finding, ...]
    contact: ContactSolution | None
    decisions: tuple[Decision, ...]
    notes: tuple[str, ...]
    outliers: Mapping[str, int]
    provenance: Provenance

    def entries(self) -> Iterator[Entry]:
        """Every number: of the system, then band by band, then source by source."""
        yield from self.quantities.values()
        for band in self.bands.values():
            yield from band.quantities.values()
            for star in band.limb_darkening.values():
                yield from star.values()
        for source in self.sources.values():
            yield from source.values()


def make_sheet(
    solution: Solution,
    photometry: Photometry,
    *,
    velocities: Velocities | None = None,
    audit: tuple[Finding, ...] = (),
    command: str = "",
    seed: int = 0,
    versions: Mapping[str, str] | None = None,
    plan: Mapping[str, object] | None = None,
) -> Sheet:
    """The sheet of a solution.

    Parameters
    ----------
    solution : Solution
    photometry, velocities
        The tables that were solved.
    audit : tuple of Finding
        What `shadowscale.judge.audit` found.
    command : str
        What would do this again.
    seed : int
        Of every random step.
    versions : mapping of library to version, or None
        That the solution was made with; None: the present ones.
    plan : mapping, or None
        What was wished of the solution, in plain numbers and words.
    """
    inputs = _inputs(solution, photometry, velocities)
    return Sheet(
        quantities=_system_entries(solution),
        bands={band: _band_sheet(solution, band) for band in solution.system.bands},
        sources=_source_entries(solution),
        correlation_names=solution.correlation_names,
        correlations=tuple(tuple(map(float, row)) for row in solution.correlations),
        fit=solution.fit,
        alternatives=solution.alternatives,
        audit=(*audit, *_absences(solution, audit)),
        contact=solution.contact,
        decisions=solution.decisions,
        notes=all_notes(solution, photometry, velocities),
        outliers=rows_set_aside(solution, photometry, velocities),
        provenance=Provenance(
            command,
            seed,
            photometry.time_scale,
            inputs,
            versions=versions or library_versions(),
            plan=plan or {},
        ),
    )


def _entry(solution: Solution, text: str, name: str = "") -> Entry | None:
    """The entry of a key; None if the solution has no number for it."""
    estimate = solution.estimates.get(text)
    tied_to = solution.system.ties.get(text, "")
    return None if estimate is None else Entry(text, quantity_of(text), estimate, name, tied_to)


def _entries(solution: Solution, scope: str, label: str | None) -> dict[str, Entry]:
    """All quantities of one scope and label, in the register's order."""
    found: dict[str, Entry] = {}
    for name, quantity in QUANTITIES.items():
        if quantity.scope == scope and (entry := _entry(solution, key(name, label))):
            found[name] = entry
    return found


def _system_entries(solution: Solution) -> dict[str, Entry]:
    return _entries(solution, SYSTEM, None)


def _source_entries(solution: Solution) -> dict[str, dict[str, Entry]]:
    found = {source: _entries(solution, SOURCE, source) for source in solution.system.sources}
    return {source: entries for source, entries in found.items() if entries}


def _band_sheet(solution: Solution, band: str) -> BandSheet:
    law = solution.system.law
    names = LAWS[law].coefficients
    limb: dict[int, dict[str, Entry]] = {1: {}, 2: {}}
    for star, entries in limb.items():
        for number, name in enumerate(names, 1):
            text = key(f"limb_darkening{star}", band, number)
            if entry := _entry(solution, text, name):
                entries[name] = entry
    rms = solution.fit.rms_light.get(band)
    return BandSheet(_entries(solution, BAND, band), law, limb, rms)


def _absences(solution: Solution, audit: tuple[Finding, ...]) -> Iterator[Finding]:
    """A line for each quantity that is neither given nor told of by the audit."""
    told = {finding.check for finding in audit}
    for name, quantity in QUANTITIES.items():
        check = f"{ABSENT}{name}"
        if quantity.scope != SYSTEM or name in solution.estimates or check in told:
            continue
        reason = solution.absent.get(name, "this solution does not give it")
        words = f"{name} is not given: {reason}."
        yield Finding(check, None, None, PASS, words, "what the data can give")


def _inputs(
    solution: Solution, photometry: Photometry, velocities: Velocities | None
) -> tuple[InputFile, ...]:
    """The files, with the rows that took part in the end."""
    found = _used(photometry.files, photometry.file[solution.light.why == USED].tolist())
    if velocities is not None and solution.velocity is not None:
        used = (solution.velocity.why1 == USED) | (solution.velocity.why2 == USED)
        found += _used(velocities.files, velocities.file[used].tolist())
    return found


def _used(files: tuple[InputFile, ...], numbers: list[int]) -> tuple[InputFile, ...]:
    counts = Counter(numbers)
    return tuple(replace(file, used=counts[number]) for number, file in enumerate(files))


def all_notes(
    solution: Solution, photometry: Photometry, velocities: Velocities | None
) -> tuple[str, ...]:
    """Doubts of the fit and of the readers, each once."""
    tables = photometry.notes + (velocities.notes if velocities is not None else ())
    return tuple(dict.fromkeys((*solution.notes, *tables)))


def rows_set_aside(
    solution: Solution, photometry: Photometry, velocities: Velocities | None
) -> dict[str, int]:
    """How many rows were set aside for each reason, unreadable ones included."""
    counts: dict[str, int] = {}
    result = solution.light
    _count(counts, result.why.tolist(), result.reasons)
    unreadable = len(photometry.unreadable)
    if solution.velocity is not None:
        for why in (solution.velocity.why1, solution.velocity.why2):
            _count(counts, why.tolist(), solution.velocity.reasons)
    if velocities is not None:
        unreadable += len(velocities.unreadable)
    if unreadable:
        counts["unreadable"] = unreadable
    return counts


def _count(counts: dict[str, int], codes: list[int], reasons: tuple[str, ...]) -> None:
    for code in codes:
        if code:
            counts[reasons[code]] = counts.get(reasons[code], 0) + 1
