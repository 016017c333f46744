"""What each picture shows, the keys, and the guide that comes with the program."""

from __future__ import annotations

from collections.abc import Iterable
from html import escape

from PySide6.QtWidgets import QComboBox, QTextBrowser, QVBoxLayout, QWidget

from shadowscale.guide import page, pages
from shadowscale_app.naming import named
from shadowscale_app.panes.pane import Pane

MARKER_KEYS = (
    ("Tab, Shift+Tab", "next, previous marker in a picture"),
    (
        "\N{LEFTWARDS ARROW} \N{RIGHTWARDS ARROW}",
        "move the marker; with Shift coarse, with Alt fine, with Ctrl one side alone",
    ),
    ("click, double click", "give a marker the keys; type its phase"),
    ("Ctrl and drag", "move one side of an eclipse alone, where both would move"),
    ("Enter", "type the marker's phase"),
    ("Escape", "put the marker back"),
    (
        "wheel, drag",
        "zoom, move a picture; Shift and drag zooms into a rectangle; double click shows everything",
    ),
)
PICTURES = "The pictures and the keys"


class HelpPane(Pane):
    """A page made from the panes' own words and the table of actions; the guide's pages behind it."""

    title = "Help"
    about = "What each picture shows, all keys, and the guide."

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._own = ""
        self.choice = QComboBox()
        named(self.choice, "Page of the help", "The pictures and keys, or a page of the guide")
        self.choice.addItem(PICTURES, "")
        self.choice.currentIndexChanged.connect(self._show)
        self.text = QTextBrowser()
        self.text.setOpenLinks(False)
        self.text.setFrameShape(QTextBrowser.Shape.NoFrame)
        self.text.setAccessibleName("Help")
        layout = QVBoxLayout(self)
        layout.setContentsMargins(8, 8, 0, 0)
        layout.addWidget(self.choice)
        layout.addWidget(self.text)

    def write(self, panes: Iterable[Pane], keys: Iterable[tuple[str, str]]) -> None:
        """Write the page."""
        parts = ["<h3>What each picture shows</h3>"]
        parts += [f"<p><b>{escape(pane.title)}.</b> {escape(pane.about)}</p>" for pane in panes]
        parts.append("<h3>Keys</h3><table cellpadding='2'>")
        for key, words in (*keys, *MARKER_KEYS):
            parts.append(
                f"<tr><td><b>{escape(key)}</b>&nbsp;&nbsp;</td><td>{escape(words)}</td></tr>"
            )
        parts.append("</table>")
        self._own = "".join(parts)
        if self.choice.count() == 1:
            for each in pages():
                self.choice.addItem(each.title, each.name)
        self._show()

    def _show(self, _index: int = 0) -> None:
        name = self.choice.currentData()
        if name:
            self.text.setMarkdown(page(name).words)
        else:
            self.text.setHtml(self._own)
