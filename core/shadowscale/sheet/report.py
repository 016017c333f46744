"""The report of a solution: what stands in it, main results first."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from math import isfinite, sqrt

from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Decision, Estimate
from shadowscale.judge.finding import FAIL, PASS, WARN, Finding
from shadowscale.light.laws import LAWS
from shadowscale.quantities import QUANTITIES, decimals_for
from shadowscale.sheet.document import (
    RIGHT,
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
from shadowscale.sheet.methods import Methods, listed, methods_of
from shadowscale.sheet.references import bibliography
from shadowscale.sheet.report_words import glance, number, value_and_error
from shadowscale.sheet.sheet import ABSENT, Entry, Sheet
from shadowscale.sheet.symbols import marked, plain, unit_words

GROUPS: tuple[tuple[str, tuple[str, ...]], ...] = (
    ("Stars", ("M1", "M2", "R1", "R2", "logg1", "logg2", "density1", "density2", "teff1", "teff2",
               "L1", "L2", "Mbol1", "Mbol2", "vsync1", "vsync2", "distance")),
    ("Orbit", ("period", "epoch", "a", "mass_ratio", "inclination", "eccentricity", "omega",
               "ecosw", "esinw", "K1", "K2", "gamma1", "gamma2")),
    ("Geometry", ("radius_sum", "radius_ratio", "r1", "r2", "impact1", "impact2")),
    ("Eclipses", ("T14_1", "T23_1", "T14_2", "T23_2", "depth1", "depth2")),
)  # fmt: skip
MAIN = ("M", "R", "logg", "L", "density", "r")
MAIN_ORBIT = ("period", "a", "mass_ratio", "inclination", "eccentricity")
SHOWN_MAIN = 4
CONTACT_NAMES = (
    "r1", "r2", "radius_sum", "radius_ratio", "inclination", "ecosw", "esinw",
    "T14_1", "T23_1", "T14_2", "T23_2", "depth1", "depth2",
)  # fmt: skip
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
        Solution and tables.
    """

    name: str
    sheet: Sheet
    shown: Shown
    plan: Plan

    @cached_property
    def figures(self) -> tuple[str, ...]:
        """Names of the figures it has."""
        return possible_figures(self.shown)

    @cached_property
    def methods(self) -> Methods:
        """The methods paragraph and its works."""
        shown = self.shown
        return methods_of(
            self.sheet,
            shown.solution,
            shown.photometry,
            velocities=shown.velocities,
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


SHEET_COLUMNS = (
    Column("Quantity", 0.11),
    Column("Meaning", 0.25, small=True),
    Column("Value", 0.16, RIGHT),
    Column("Error", 0.14),
    Column("Unit", 0.09),
    Column("How", 0.10, small=True),
    Column("Source", 0.15, small=True),
)


def _quantities(report: Report) -> Iterator[Section]:
    entries = report.sheet.quantities
    groups = []
    for title, names in GROUPS:
        rows = tuple(_sheet_row(entries[name]) for name in names if name in entries)
        if rows:
            groups.append((title, rows))
    blocks: list[Block] = [Table(SHEET_COLUMNS, tuple(groups))]
    blocks.append(
        Paragraph(
            "Errors are 68.3 % limits. Solar units are nominal (IAU 2015 Resolution B3). Fixed "
            "quantities were held; assumed ones come from outside these data.",
            quiet=True,
        )
    )
    absent = [finding for finding in report.sheet.audit if finding.check.startswith(ABSENT)]
    if absent:
        columns = (Column("Not given", 0.2), Column("Why", 0.8, small=True))
        rows = tuple((_absent_symbol(finding), plain(finding.words)) for finding in absent)
        blocks.append(Table(columns, (("", rows),)))
    yield Section("quantities", "Quantities", tuple(blocks))


def _sheet_row(entry: Entry) -> tuple[str, ...]:
    estimate, quantity = entry.estimate, entry.quantity
    value, error = value_and_error(estimate)
    how = estimate.how
    if estimate.prior is not None:
        centre, sigma = estimate.prior
        how += f"; prior {number(centre)} \N{PLUS-MINUS SIGN} {number(sigma)}"
    symbol = marked(quantity.tex) + (f" {entry.name}" if entry.name else "")
    source = quantity.source if estimate.how == "derived" else ""
    return symbol, entry.meaning, value, error, unit_words(quantity.unit), how, source


def _absent_symbol(finding: Finding) -> str:
    name = finding.check.removeprefix(ABSENT)
    return marked(QUANTITIES[name].tex) if name in QUANTITIES else plain(name)


def _bands(report: Report) -> Iterator[Section]:
    sheet = report.sheet
    labels = list(sheet.bands)
    rows = _band_rows(report, labels)
    share = 0.62 / max(len(labels), 1)
    columns = (
        Column("Quantity", 0.12),
        Column("Meaning", 0.26, small=True),
        *(Column(plain(label), share) for label in labels),
    )
    blocks: list[Block] = [Table(columns, (("", rows),))]
    law = LAWS[report.shown.solution.system.law]
    words = f"Limb darkening: {law.name} law, I(mu)/I(1) = {law.formula}."
    blocks.append(Paragraph(words, quiet=True))
    blocks += _sources(report)
    yield Section("bands", "Bands and sources", tuple(blocks))


def _band_rows(report: Report, labels: list[str]) -> tuple[tuple[str, ...], ...]:
    sheet, fit = report.sheet, report.sheet.fit
    columns = []
    for label in labels:
        band = sheet.bands[label]
        entries = dict(band.quantities)
        for star, coefficients in band.limb_darkening.items():
            entries |= {f"limb {star} {name}": entry for name, entry in coefficients.items()}
        columns.append(entries)
    rows = []
    for name in dict.fromkeys(name for entries in columns for name in entries):
        entry = next(entries[name] for entries in columns if name in entries)
        cells = [_cell(entries[name].estimate) if name in entries else "" for entries in columns]
        rows.append((_sheet_row(entry)[0], entry.meaning, *cells))
    unit = "relative flux"
    for title, words, numbers in (
        ("rms", f"scatter about the model, {unit}", fit.rms_light),
        ("error scale", "factor on the errors given", fit.error_scale),
        (marked(r"\chi^2_{\rm red}"), "reduced, with the errors as given", fit.raw_reduced_chi2),
    ):
        cells = [f"{numbers[label]:.4g}" if label in numbers else "" for label in labels]
        rows.append((title, words, *cells))
    return tuple(rows)


def _cell(estimate: Estimate) -> str:
    """A value with its error in one cell; a word where it was not fitted."""
    value, error = value_and_error(estimate)
    if error:
        joined = f"{value} {error}"
        return joined if estimate.how != "assumed" else f"{joined} (assumed)"
    return f"{value} ({estimate.how})"


def _sources(report: Report) -> tuple[Block, ...]:
    sheet = report.sheet
    rows = []
    for label, entries in sheet.sources.items():
        for entry in entries.values():
            value, error = value_and_error(entry.estimate)
            rows.append((plain(label), marked(entry.quantity.tex), entry.meaning,
                         f"{value} {error}".strip(), "km/s"))  # fmt: skip
    for label, value in sheet.fit.jitter.items():
        rows.append((plain(label), "jitter", "added in quadrature", f"{value:.3g}", "km/s"))
    for label, value in sheet.fit.rms_velocity.items():
        rows.append((plain(label), "rms", "scatter about the model", f"{value:.3g}", "km/s"))
    if not rows:
        return ()
    columns = (
        Column("Velocities", 0.22),
        Column("Quantity", 0.12),
        Column("Meaning", 0.36, small=True),
        Column("Value", 0.2),
        Column("Unit", 0.1),
    )
    return (Table(columns, (("", tuple(rows)),)),)


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
        words += f" Secondary eclipse is at phase {shown.eclipses[2].middle:.6f}."
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
    if finding.value is None or finding.limit is None:
        return ""
    return f"{number(finding.value, 4)} against {number(finding.limit, 4)}"


def _decisions(report: Report) -> Iterator[Section]:
    sheet = report.sheet
    blocks: list[Block] = []
    if sheet.decisions:
        columns = (
            Column("What", 0.18),
            Column("Chosen", 0.2, small=True),
            Column("Why", 0.62, small=True),
        )
        rows = tuple(
            (plain(each.what), plain(each.chosen), plain(each.words) + _predicted(each))
            for each in sheet.decisions
        )
        blocks.append(Table(columns, (("", rows),)))
    blocks += _alternatives(sheet)
    if sheet.outliers:
        aside = (Column("Rows set aside", 0.7), Column("Number", 0.3))
        counted = tuple((plain(why), str(count)) for why, count in sheet.outliers.items())
        blocks.append(Table(aside, (("", counted),)))
    if sheet.notes:
        rows = tuple((plain(note),) for note in sheet.notes)
        blocks.append(Table((Column("Notes", 1.0, small=True),), (("", rows),)))
    if blocks:
        yield Section("decisions", "Decisions and alternatives", tuple(blocks))


def _predicted(decision: Decision) -> str:
    """The predicted amplitudes of small effects, to be read beside fitted ones."""
    if "fitted" not in decision.chosen:
        return ""
    shown = [
        f"{key} {number(value, 3)}"
        for key, value in decision.numbers.items()
        if key.split("[")[0] in QUANTITIES
    ]
    return f"; predicted: {plain(listed(shown))}" if shown else ""


def _alternatives(sheet: Sheet) -> Iterator[Block]:
    if not sheet.alternatives:
        yield Paragraph("The search found no other solution that the data do not exclude.")
        return
    columns = (
        Column("Also possible", 0.3),
        Column("Chi-squared worse by", 0.2),
        Column("There", 0.5, small=True),
    )
    rows = []
    for each in sheet.alternatives:
        values = listed(
            [
                f"{marked(QUANTITIES[name].tex) if name in QUANTITIES else name} = {number(value, 5)}"
                for name, value in each.values.items()
            ]
        )
        rows.append((plain(each.words), number(each.delta_chi2, 4), values))
    yield Table(columns, (("", tuple(rows)),))


def _contact(report: Report) -> Iterator[Section]:
    contact, quantities = report.sheet.contact, report.sheet.quantities
    if contact is None:
        return
    rows = []
    for name in CONTACT_NAMES:
        if name not in contact.values:
            continue
        value, error = contact.values[name], contact.errors.get(name)
        places = decimals_for(error) if error else 6
        text = (
            f"{value:.{places}f} \N{PLUS-MINUS SIGN} {error:.{places}f}"
            if error
            else f"{value:.6g}"
        )
        entry = quantities.get(name)
        full = _cell(entry.estimate) if entry is not None else ""
        apart = _apart(value, error, entry.estimate if entry is not None else None)
        quantity = QUANTITIES[name]
        rows.append((marked(quantity.tex), quantity.meaning, _signed(text), full, apart,
                     unit_words(quantity.unit)))  # fmt: skip
    columns = (
        Column("Quantity", 0.1),
        Column("Meaning", 0.28, small=True),
        Column("Contacts alone", 0.2),
        Column("Full fit", 0.24),
        Column("Apart", 0.08),
        Column("Unit", 0.1),
    )
    blocks: list[Block] = [
        Paragraph(
            "What contact times and depths alone say, beside the fit of everything; the last but one "
            "column is their difference in standard deviations of both."
        ),
        Table(columns, (("", tuple(rows)),)),
    ]
    blocks += [Paragraph(plain(note), quiet=True) for note in contact.notes]
    yield Section("contacts", "Contact solution beside the full fit", tuple(blocks))


def _apart(value: float, error: float | None, full: Estimate | None) -> str:
    if full is None or not error:
        return ""
    other = max(full.minus or 0.0, full.plus or 0.0)
    return f"{abs(value - full.value) / sqrt(error**2 + other**2):.1f}"


def _signed(text: str) -> str:
    return text.replace("-", "\N{MINUS SIGN}")


def _methods(report: Report) -> Iterator[Section]:
    blocks = tuple(Paragraph(words) for words in report.methods.paragraphs)
    yield Section("methods", "Methods", blocks)


def _references(report: Report) -> Iterator[Section]:
    text = bibliography([*report.methods.cited, "hunter2007"])
    yield Section("references", "References", (Code(text),))


def _provenance(report: Report) -> Iterator[Section]:
    made = report.sheet.provenance
    columns = (
        Column("Input", 0.22),
        Column("Rows", 0.09),
        Column("Used", 0.09),
        Column("SHA-256", 0.6, small=True),
    )
    rows = tuple(
        (plain(file.path.replace("\\", "/").rsplit("/", 1)[-1]), str(file.rows), str(file.used),
         file.sha256)
        for file in made.inputs
    )  # fmt: skip
    read = tuple(
        (plain(file.path.replace("\\", "/").rsplit("/", 1)[-1]), role, plain(words))
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
