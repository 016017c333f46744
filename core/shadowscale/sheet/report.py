"""The report of a solution: what stands in it, main results first."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from math import isfinite

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Solution
from shadowscale.judge.finding import ABSENT, FAIL, PASS, WARN, Finding
from shadowscale.sheet.citing import Methods, listed
from shadowscale.sheet.document import (
    Block,
    Code,
    Column,
    Document,
    Paragraph,
    Picture,
    Result,
    Results,
    Section,
    Table,
    Verdict,
    Verdicts,
)
from shadowscale.sheet.figure_data import Shown
from shadowscale.sheet.figures import possible_figures
from shadowscale.sheet.file_names import file_names
from shadowscale.sheet.methods import methods_of
from shadowscale.sheet.references import bibliography
from shadowscale.sheet.report_tables import (
    band_blocks,
    contact_blocks,
    decision_blocks,
    quantity_blocks,
)
from shadowscale.sheet.report_words import glance, number, value_and_error
from shadowscale.sheet.sheet import Entry, Sheet
from shadowscale.sheet.symbols import marked, plain, unit_words

MAIN = ("M", "R", "logg", "L", "density", "r")
MAIN_ORBIT = ("period", "a", "mass_ratio", "inclination", "eccentricity")
SHOWN_MAIN = 4
CAPTIONS: Mapping[str, str] = {
    "system": (
        "The system to scale. Left, from above: orbits about the centre of mass (cross) and the stars "
        "at mid primary eclipse; arrows show which way they go. Right, both eclipses on the sky, with "
        "the path of the star in front (dashed). Yellow is the Sun where its size is known."
    ),
    "light_curve": (
        "Light curves with the model (line), nights brought to one level; below each, what the model "
        "leaves, with means over a hundredth of a cycle. Crosses take no part in the fit."
    ),
    "eclipses": (
        "The eclipses enlarged. Dashed and dotted lines are the outer and inner contacts of the model."
    ),
    "velocities": (
        "Radial velocities with the model, offsets of sources taken off; star 1 filled and full line, "
        "star 2 open and dashed. Below, what the model leaves."
    ),
    "minima": (
        "Single eclipses timed by moving the mean eclipse, against the ephemeris of the fit. A slope "
        "would be another period, a bend a third body or apsidal motion."
    ),
    "correlations": (
        "Correlations of fitted and main derived quantities: squares positive, circles negative, "
        "area the strength; below 0.03 nothing is drawn."
    ),
}


@dataclass(frozen=True, eq=False)
class Report:
    """A solved system, ready to be written about.

    Attributes
    ----------
    name : str
        Of the system, for the title.
    shown : Shown
        What its figures show.
    """

    name: str
    sheet: Sheet
    shown: Shown
    solution: Solution
    photometry: Photometry
    velocities: Velocities | None
    plan: Plan

    @cached_property
    def figures(self) -> tuple[str, ...]:
        """Names of the figures it has."""
        return possible_figures(self.shown)

    @cached_property
    def methods(self) -> Methods:
        """The methods paragraph and its works."""
        return methods_of(
            self.sheet,
            self.solution,
            self.photometry,
            velocities=self.velocities,
            plan=self.plan,
        )


def make_document(report: Report) -> Document:
    """The report as sections of blocks."""
    sheet = report.sheet
    made = sheet.provenance
    builders = (
        _glance, _quantities, _bands, _light, _velocities, _ephemeris, _audit, _decisions,
        _contact, _correlations, _methods, _references, _provenance,
    )  # fmt: skip
    sections = [section for builder in builders for section in builder(report)]
    subtitle = (
        f"Fitted-parameter report \N{MIDDLE DOT} {plain(made.program)} \N{MIDDLE DOT} "
        f"times in {plain(made.time_scale)} \N{MIDDLE DOT} {sheet.fit.points} measurements"
    )
    return Document(plain(report.name) or "An eclipsing binary", subtitle, tuple(sections))


def _picture(report: Report, name: str) -> tuple[Block, ...]:
    return (Picture(name, CAPTIONS[name]),) if name in report.figures else ()


def _glance(report: Report) -> Iterator[Section]:
    sheet = report.sheet
    given = sheet.quantities
    both = [stem for stem in MAIN if f"{stem}1" in given and f"{stem}2" in given]
    stems = [stem for stem in MAIN if stem in both[:SHOWN_MAIN]]
    rows = [
        (f"Star {star}", _results(given, [f"{stem}{star}" for stem in stems])) for star in (1, 2)
    ]
    moving = [name for name in MAIN_ORBIT if name in given and given[name].estimate.plus]
    rows.append(("Orbit", _results(given, moving)))
    blocks: list[Block] = [Results(tuple(row for row in rows if row[1]))]
    blocks.append(Paragraph(glance(sheet)))
    blocks += _picture(report, "system")
    yield Section("glance", "The system at a glance", tuple(blocks))


def _results(quantities: Mapping[str, Entry], names: Iterable[str]) -> tuple[Result, ...]:
    found = []
    for name in names:
        entry = quantities.get(name)
        if entry is not None and isfinite(entry.estimate.value):
            value, error = value_and_error(entry.estimate)
            if not error:
                error = entry.estimate.how
            quantity = entry.quantity
            found.append(
                Result(
                    marked(quantity.tex), value, error, unit_words(quantity.unit), quantity.meaning
                )
            )
    return tuple(found)


def _quantities(report: Report) -> Iterator[Section]:
    yield Section("quantities", "Quantities", quantity_blocks(report.sheet))


def _bands(report: Report) -> Iterator[Section]:
    yield Section("bands", "Bands and sources", band_blocks(report.sheet))


def _light(report: Report) -> Iterator[Section]:
    blocks = (*_picture(report, "light_curve"), *_picture(report, "eclipses"))
    if blocks:
        yield Section("light", "Light curves and eclipses", blocks)


def _velocities(report: Report) -> Iterator[Section]:
    blocks = _picture(report, "velocities")
    if blocks:
        yield Section("velocities", "Radial velocities", blocks)


def _ephemeris(report: Report) -> Iterator[Section]:
    sheet = report.sheet
    period, epoch = (sheet.quantities[name].estimate for name in ("period", "epoch"))
    first, second = (" ".join(value_and_error(each)).strip() for each in (epoch, period))
    words = (
        f"Mid primary eclipse = {plain(sheet.provenance.time_scale)} {first} + ({second}) d "
        f"\N{MULTIPLICATION SIGN} E."
    )
    shown = report.shown
    if 2 in shown.eclipses:
        words += f" Secondary eclipse is at phase {shown.secondary_phase:.6f}."
    names, matrix = sheet.correlation_names, sheet.correlations
    if {"period", "epoch"} <= set(names):
        value = matrix[names.index("period")][names.index("epoch")]
        words += f" Period and epoch are correlated by {number(value, 2)}."
    blocks: list[Block] = [Paragraph(words), *_picture(report, "minima")]
    yield Section("ephemeris", "Ephemeris", tuple(blocks))


def _correlations(report: Report) -> Iterator[Section]:
    blocks = _picture(report, "correlations")
    if blocks:
        yield Section("correlations", "Correlations", blocks)


def _audit(report: Report) -> Iterator[Section]:
    checks = [each for each in report.sheet.audit if not each.check.startswith(ABSENT)]
    counts = {kind: sum(each.verdict == kind for each in checks) for kind in (FAIL, WARN, PASS)}
    words = {FAIL: "failed", WARN: "warned", PASS: "passed"}
    text = listed([f"{count} {words[kind]}" for kind, count in counts.items() if count])
    order = {FAIL: 0, WARN: 1, PASS: 2}
    items = [
        Verdict(each.verdict, each.check, plain(each.words), _limits(each), plain(each.source))
        for each in sorted(checks, key=lambda each: order.get(each.verdict, 0))
    ]
    intro = Paragraph(
        f"Whether the model may speak. Of {len(checks)} checks {text or 'none was made'}."
    )
    yield Section("audit", "Audit", (intro, Verdicts(tuple(items))))


def _limits(finding: Finding) -> str:
    if finding.value is None or finding.limit is None or finding.value == finding.limit:
        return ""
    return f"{number(finding.value, 4)} against {number(finding.limit, 4)}"


def _decisions(report: Report) -> Iterator[Section]:
    yield Section("decisions", "Decisions and alternatives", decision_blocks(report.sheet))


def _contact(report: Report) -> Iterator[Section]:
    blocks = contact_blocks(report.sheet)
    if blocks:
        yield Section("contacts", "Contact solution beside the full fit", blocks)


def _methods(report: Report) -> Iterator[Section]:
    blocks = tuple(Paragraph(words) for words in report.methods.paragraphs)
    yield Section("methods", "Methods", blocks)


def _references(report: Report) -> Iterator[Section]:
    text = bibliography([*report.methods.cited, "hunter2007"])
    yield Section("references", "References", (Code(text),))


def _provenance(report: Report) -> Iterator[Section]:
    made = report.sheet.provenance
    names = file_names(file.path for file in made.inputs)
    columns = (
        Column("Input", 0.22),
        Column("Rows", 0.09),
        Column("Used", 0.09),
        Column("SHA-256", 0.6, small=True),
    )
    rows = tuple(
        (plain(names[file.path]), str(file.rows), str(file.used),
         file.sha256)
        for file in made.inputs
    )  # fmt: skip
    read = tuple(
        (plain(names[file.path]), role, plain(words))
        for file in made.inputs
        for role, words in file.columns
    )
    facts = [("Seed", str(made.seed)), ("Time scale", plain(made.time_scale))]
    facts += [(name, version) for name, version in made.versions.items()]
    blocks: list[Block] = [Table(columns, (("", rows),))]
    if read:
        reading = (
            Column("Input", 0.2),
            Column("Read as", 0.15),
            Column("Column", 0.65, small=True),
        )
        blocks.append(Table(reading, (("", read),)))
    blocks.append(Table((Column("What", 0.3), Column("Which", 0.7)), (("", tuple(facts)),)))
    if made.command:
        blocks += [Paragraph("Done again by"), Code(made.command)]
    yield Section("provenance", "Provenance", tuple(blocks))
