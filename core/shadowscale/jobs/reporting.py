"""The report and the figures of a solved session, as files."""

from __future__ import annotations

from shadowscale.session.session import Session
from shadowscale.sheet.document import Code, Document, Paragraph, Section
from shadowscale.sheet.figure_data import Shown
from shadowscale.sheet.figures import all_figures, warm_up
from shadowscale.sheet.report import Report
from shadowscale.sheet.report_html import as_html
from shadowscale.sheet.report_pdf import as_pdf
from shadowscale.sheet.sheet import Sheet
from shadowscale.sheet.showing import shown_of
from shadowscale.sheet.symbols import marked

Made = tuple[dict[str, dict[str, bytes]], bytes, bytes]  # figures, the report as HTML and as PDF


def report_of(session: Session, sheet: Sheet) -> Report:
    """The report of a solved session."""
    solution, photometry = session.solution, session.photometry
    assert solution is not None
    assert photometry is not None
    shown = shown_of(solution, photometry, session.velocities)
    return Report(
        session.name, sheet, shown, solution, photometry, session.velocities, session.plan
    )


def made_here(shown: Shown, document: Document) -> Made:
    """Figures and report, one after the other in this process."""
    figures = all_figures(shown)
    return figures, as_html(document, figures), as_pdf(document, figures)


def make_ready() -> None:
    """Load all that `made_here` needs, so that the first report does not wait for it."""
    warm_up()
    words = Paragraph(f"A {marked(r'M_1')} \N{SUN}")  # letters of every file
    document = Document("A", "", (Section("a", "A", (words, Code("A"))),))
    as_html(document, {})
    as_pdf(document, {})
