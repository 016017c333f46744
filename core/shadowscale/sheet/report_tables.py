"""The tables of the report: quantities, bands, decisions, contacts."""

from __future__ import annotations

from collections.abc import Iterator
from math import hypot

from shadowscale.fit.solution import DERIVED, Decision, Estimate
from shadowscale.geometry.contacts import ContactSolution
from shadowscale.judge.finding import ABSENT, Finding
from shadowscale.light.laws import LAWS
from shadowscale.quantities import QUANTITIES
from shadowscale.sheet.citing import listed
from shadowscale.sheet.document import RIGHT, Block, Column, Paragraph, Table
from shadowscale.sheet.report_words import number, value_and_error
from shadowscale.sheet.sheet import Entry, Sheet
from shadowscale.sheet.symbols import coefficient_sign, formula, marked, plain, unit_words

GROUPS: tuple[tuple[str, tuple[str, ...]], ...] = (
    ("Stars", ("M1", "M2", "R1", "R2", "logg1", "logg2", "density1", "density2", "teff1", "teff2",
               "L1", "L2", "Mbol1", "Mbol2", "vsync1", "vsync2", "distance")),
    ("Orbit", ("period", "epoch", "a", "mass_ratio", "inclination", "eccentricity", "omega",
               "ecosw", "esinw", "K1", "K2", "gamma1", "gamma2")),
    ("Geometry", ("radius_sum", "radius_ratio", "r1", "r2", "impact1", "impact2")),
    ("Eclipses", ("T14_1", "T23_1", "T14_2", "T23_2", "depth1", "depth2")),
)  # fmt: skip
CONTACT_NAMES = (
    "r1", "r2", "radius_sum", "radius_ratio", "inclination", "ecosw", "esinw",
    "T14_1", "T23_1", "T14_2", "T23_2", "depth1", "depth2",
)  # fmt: skip

SHEET_COLUMNS = (
    Column("Quantity", 0.11),
    Column("Meaning", 0.25, small=True),
    Column("Value", 0.16, RIGHT),
    Column("Error", 0.14),
    Column("Unit", 0.09),
    Column("How", 0.10, small=True),
    Column("Source", 0.15, small=True),
)


def quantity_blocks(sheet: Sheet) -> tuple[Block, ...]:
    """All quantities of the system in groups, and those that are not given."""
    entries = sheet.quantities
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
    absent = [finding for finding in sheet.audit if finding.check.startswith(ABSENT)]
    if absent:
        columns = (Column("Not given", 0.2), Column("Why", 0.8, small=True))
        rows = tuple((_absent_symbol(finding), plain(finding.words)) for finding in absent)
        blocks.append(Table(columns, (("", rows),)))
    return tuple(blocks)


def _sheet_row(entry: Entry) -> tuple[str, ...]:
    estimate, quantity = entry.estimate, entry.quantity
    value, error = value_and_error(estimate)
    how = estimate.how
    if estimate.prior is not None:
        centre, sigma = estimate.prior
        how += f"; prior {number(centre)} \N{PLUS-MINUS SIGN} {number(sigma)}"
    symbol = marked(quantity.tex) + (f" {coefficient_sign(entry.name)}" if entry.name else "")
    return (
        symbol,
        entry.meaning,
        value,
        error,
        unit_words(quantity.unit),
        how,
        formula(entry.source),
    )


def _absent_symbol(finding: Finding) -> str:
    name = finding.check.removeprefix(ABSENT)
    return marked(QUANTITIES[name].tex) if name in QUANTITIES else plain(name)


def band_blocks(sheet: Sheet) -> tuple[Block, ...]:
    """Quantities of the bands side by side, and of the sources of velocities."""
    labels = list(sheet.bands)
    rows = _band_rows(sheet, labels)
    share = 0.62 / max(len(labels), 1)
    columns = (
        Column("Quantity", 0.12),
        Column("Meaning", 0.26, small=True),
        *(Column(plain(label), share) for label in labels),
    )
    blocks: list[Block] = [Table(columns, (("", rows),))]
    for name in dict.fromkeys(band.law for band in sheet.bands.values()):
        words = f"Limb darkening: {name} law, {formula(f'I(mu)/I(1) = {LAWS[name].formula}')}."
        blocks.append(Paragraph(words, quiet=True))
    return (*blocks, *_sources(sheet))


def _band_rows(sheet: Sheet, labels: list[str]) -> tuple[tuple[str, ...], ...]:
    fit = sheet.fit
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


def _sources(sheet: Sheet) -> tuple[Block, ...]:
    rows = []
    for label, entries in sheet.sources.items():
        for entry in entries.values():
            value, error = value_and_error(entry.estimate)
            rows.append((plain(label), marked(entry.quantity.tex), entry.meaning,
                         f"{value} {error}".strip(), "km/s"))  # fmt: skip
    for label, speed in sheet.fit.jitter.items():
        rows.append((plain(label), "jitter", "added in quadrature", f"{speed:.3g}", "km/s"))
    for label, speed in sheet.fit.rms_velocity.items():
        rows.append((plain(label), "rms", "scatter about the model", f"{speed:.3g}", "km/s"))
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


def decision_blocks(sheet: Sheet) -> tuple[Block, ...]:
    """What the data decided, other solutions, rows set aside, notes."""
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
        notes = tuple((plain(note),) for note in sheet.notes)
        blocks.append(Table((Column("Notes", 1.0, small=True),), (("", notes),)))
    return tuple(blocks)


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


def contact_blocks(sheet: Sheet) -> tuple[Block, ...]:
    """What the contacts alone say beside the full fit; empty without contacts."""
    contact = sheet.contact
    if contact is None:
        return ()
    rows = tuple(
        _contact_row(name, contact, sheet.quantities.get(name))
        for name in CONTACT_NAMES
        if name in contact.values
    )
    columns = (
        Column("Quantity", 0.1),
        Column("Meaning", 0.28, small=True),
        Column("Contacts alone", 0.2),
        Column("Full fit", 0.24),
        Column("Apart", 0.08),
        Column("Unit", 0.1),
    )
    intro = Paragraph(
        "What contact times and depths alone say, beside the fit of everything; the last but one "
        "column is their difference in standard deviations of both."
    )
    notes = (Paragraph(plain(note), quiet=True) for note in contact.notes)
    return (intro, Table(columns, (("", rows),)), *notes)


def _contact_row(name: str, contact: ContactSolution, entry: Entry | None) -> tuple[str, ...]:
    quantity, error = QUANTITIES[name], contact.errors.get(name)
    alone = Estimate(contact.values[name], error, error, DERIVED)
    full = None if entry is None else entry.estimate
    return (
        marked(quantity.tex),
        quantity.meaning,
        " ".join(value_and_error(alone)).strip(),
        "" if full is None else _cell(full),
        _apart(alone, full),
        unit_words(quantity.unit),
    )


def _apart(alone: Estimate, full: Estimate | None) -> str:
    if full is None or not alone.plus:
        return ""
    other = max(full.minus or 0.0, full.plus or 0.0)
    return f"{abs(alone.value - full.value) / hypot(alone.plus, other):.1f}"
