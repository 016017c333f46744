"""Doubts: the checks of the solution with number, limit and words; what the data decided; what is absent."""

from __future__ import annotations

from html import escape

from PySide6.QtWidgets import QTextBrowser, QVBoxLayout, QWidget

from shadowscale.judge.finding import FAIL, PASS, WARN
from shadowscale.view.doubts import Doubt, doubts
from shadowscale_app import theme
from shadowscale_app.panes.pane import Pane

SIGNS = {PASS: "\N{CHECK MARK}", WARN: "!", FAIL: "\N{MULTIPLICATION X}", "": "\N{MIDDLE DOT}"}


class DoubtsPane(Pane):
    """A readable list, gravest first."""

    patient = True
    title = "Doubts"
    about = (
        "Is the model allowed to speak? Each check has its number, its limit and the source of the limit. A cross "
        "means: do not publish before this is understood. Below: what the data decided, and what they cannot give."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._words = ""
        self.text = QTextBrowser()
        self.text.setFrameShape(QTextBrowser.Shape.NoFrame)
        self.text.setAccessibleName("Doubts about the solution")
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.text)

    def refresh(self, names: frozenset[str]) -> None:
        """Write the list anew."""
        if names & {"solution", "audit", "contact", "view"}:
            found = doubts(self.session)
            words = "".join(_line(doubt) for doubt in found)
            words = words or "<p>Nothing yet: there is no solution.</p>"
            if words != self._words:
                self._words = words
                self.text.setHtml(words)


def _line(doubt: Doubt) -> str:
    now = theme.colours()
    if doubt.heading:
        return f"<h4 style='color:{now.quiet}; margin:10px 0 2px 0'>{escape(doubt.heading)}</h4>"
    tint = {PASS: now.well, WARN: now.fairly, FAIL: now.badly}.get(doubt.verdict, now.quiet)
    numbers = (
        f" <span style='color:{now.quiet}'>{escape(doubt.numbers)}</span>" if doubt.numbers else ""
    )
    source = (
        f"<br><span style='color:{now.quiet}; font-size:small'>{escape(doubt.source)}</span>"
        if doubt.source
        else ""
    )
    return (
        f"<p style='margin:3px 0'><span style='color:{tint}; font-weight:700'>{SIGNS[doubt.verdict]}</span> "
        f"<b>{escape(doubt.name)}</b> {escape(doubt.words)}{numbers}{source}</p>"
    )
