"""The report and the figures of a solved session, as files."""

from __future__ import annotations

from collections.abc import Mapping

from shadowscale.session.session import Session
from shadowscale.sheet.report import Report, make_document
from shadowscale.sheet.report_html import as_html
from shadowscale.sheet.report_pdf import as_pdf
from shadowscale.sheet.sheet import Sheet
from shadowscale.sheet.showing import shown_of


def report_of(session: Session, sheet: Sheet) -> Report:
    """The report of a solved session."""
    solution, photometry = session.solution, session.photometry
    assert solution is not None
    assert photometry is not None
    shown = shown_of(solution, photometry, session.velocities)
    return Report(
        session.name, sheet, shown, solution, photometry, session.velocities, session.plan
    )


def report_documents(
    report: Report, figures: Mapping[str, Mapping[str, bytes]]
) -> tuple[bytes, bytes]:
    """The report as HTML and as PDF, from its figures in every format."""
    document = make_document(report)
    pictures = {name: files["svg"].decode() for name, files in figures.items()}
    pages = {name: files["pdf"] for name, files in figures.items()}
    return as_html(document, pictures).encode("utf-8", "replace"), as_pdf(document, pages)
