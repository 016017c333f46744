"""The report and the figures of a solved session, as files."""

from __future__ import annotations

from shadowscale.session.session import Session
from shadowscale.sheet.figure_data import Shown
from shadowscale.sheet.figures import FIGURES, FORMATS, all_figures
from shadowscale.sheet.sheet import Sheet

HTML_FILE, PDF_FILE, FOLDER = "report.html", "report.pdf", "figures"


def report_files(session: Session) -> tuple[str, ...]:
    """The names of all files that a report may have; which figures there are the solution decides."""
    figures = [name for name in FIGURES if name != "velocities" or session.velocity_sources]
    drawn = (f"{FOLDER}/{name}.{kind}" for name in figures for kind in FORMATS)
    return (HTML_FILE, PDF_FILE, *drawn)


def report_contents(session: Session, sheet: Sheet, shown: Shown) -> dict[str, bytes]:
    """Report and figures of a solved session by name of file."""
    from shadowscale.sheet.report import Report, make_document
    from shadowscale.sheet.report_html import as_html
    from shadowscale.sheet.report_pdf import as_pdf

    document = make_document(Report(session.name, sheet, shown, session.plan))
    figures = all_figures(shown)
    inline = {name: files["svg"].decode("utf-8") for name, files in figures.items()}
    found = {
        HTML_FILE: as_html(document, inline).encode("utf-8"),
        PDF_FILE: as_pdf(document, shown),
    }
    for name, files in figures.items():
        found |= {f"{FOLDER}/{name}.{kind}": content for kind, content in files.items()}
    return found
