"""Colours, fonts and spacing, once; light and dark.

Data colours are those of Okabe and Ito 2008 (Color Universal Design), told apart by people with any
kind of colour vision; every use has a second cue (shape of the point, dash of the line).
"""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QFont, QFontDatabase, QGuiApplication, QPalette, QPen
from PySide6.QtWidgets import QApplication

ORANGE, SKY, GREEN, YELLOW = "#E69F00", "#56B4E9", "#009E73", "#F0E442"
BLUE, VERMILION, PURPLE, BLACK = "#0072B2", "#D55E00", "#CC79A7", "#000000"

BAND_SHAPES = ("o", "t1", "s", "d", "t", "p", "h")
STYLED = "shadowscale-styled"  # property of the application: its style is set
CHOICE = "shadowscale-scheme"  # property of the application: `light`, `dark` or empty
FOLLOW, ALWAYS_LIGHT, ALWAYS_DARK = "", "light", "dark"


@dataclass(frozen=True)
class Colours:
    """The colours of one scheme, as #rrggbb."""

    dark: bool
    window: str
    raised: str
    paper: str
    ink: str
    quiet: str
    line: str
    grid: str
    accent: str
    accent_ink: str
    points: str
    aside: str
    model: str
    contact: str
    star1: str
    star2: str
    well: str
    fairly: str
    badly: str
    shadow: str
    bands: tuple[str, ...]

    def band(self, number: int, of: int) -> str:
        """Colour of a band's points: neutral where there is only one."""
        return self.points if of < 2 else self.bands[number % len(self.bands)]


LIGHT = Colours(
    dark=False,
    window="#ECEAE4",
    raised="#F7F5F0",
    paper="#FFFEFB",
    ink="#20242B",
    quiet="#5F6672",
    line="#C9C5BA",
    grid="#E7E3D9",
    accent="#0A5E7D",
    accent_ink="#FFFFFF",
    points="#4A5566",
    aside="#B3765A",
    model=VERMILION,
    contact=BLUE,
    star1="#B86E00",
    star2=BLUE,
    well=GREEN,
    fairly=ORANGE,
    badly=VERMILION,
    shadow="#DAD5C8",
    bands=(BLUE, GREEN, PURPLE, ORANGE, SKY, VERMILION),
)
DARK = Colours(
    dark=True,
    window="#171A20",
    raised="#1F232B",
    paper="#12151A",
    ink="#E4E1D8",
    quiet="#9BA1AC",
    line="#3A404B",
    grid="#262B34",
    accent="#6CC3DC",
    accent_ink="#0D1116",
    points="#B9C0CB",
    aside="#A9775F",
    model="#FF8A3D",
    contact=SKY,
    star1=ORANGE,
    star2=SKY,
    well="#2FC79B",
    fairly=ORANGE,
    badly="#FF7A3C",
    shadow="#2B303A",
    bands=(SKY, "#2FC79B", PURPLE, ORANGE, YELLOW, "#FF8A3D"),
)


def colours() -> Colours:
    """The colours of the present scheme."""
    application = QGuiApplication.instance()
    choice = (application.property(CHOICE) if application is not None else None) or FOLLOW
    if choice == FOLLOW:
        scheme = QGuiApplication.styleHints().colorScheme()
        return DARK if scheme == Qt.ColorScheme.Dark else LIGHT
    return DARK if choice == ALWAYS_DARK else LIGHT


def dress(application: QApplication) -> None:
    """Give the application its look; call again when the scheme changes."""
    if not application.property(STYLED):
        application.setStyle("Fusion")
        application.setProperty(STYLED, True)
    now = colours()
    palette, sheet = _palette(now), _sheet(now)
    if application.palette() != palette:
        application.setPalette(palette)
    if application.styleSheet() != sheet:
        application.setStyleSheet(sheet)  # every widget is gone through: slow


def small_font(step: float = -1.0) -> QFont:
    """The application's font, a little smaller (or larger)."""
    font = QFont(QApplication.font())
    font.setPointSizeF(max(7.0, font.pointSizeF() + step))
    return font


def number_font() -> QFont:
    """A font whose figures stand under one another."""
    font = QFontDatabase.systemFont(QFontDatabase.SystemFont.FixedFont)
    font.setPointSizeF(max(8.0, QApplication.font().pointSizeF() - 0.5))
    return font


def colour(text: str, opacity: float = 1.0) -> QColor:
    """A QColor with an opacity of 0 to 1."""
    found = QColor(text)
    found.setAlphaF(opacity)
    return found


def pen(tint: str | QColor, width: float = 1.0, style: Qt.PenStyle = Qt.PenStyle.SolidLine) -> QPen:
    """A pen for lines in a picture, as wide whatever the view shows, and on fine screens no thinner."""
    screen = QGuiApplication.primaryScreen()
    fine = 1.0 if screen is None else screen.devicePixelRatio()
    found = QPen(QColor(tint), width * fine, style)
    found.setCosmetic(True)
    return found


def _palette(now: Colours) -> QPalette:
    palette, role = QPalette(), QPalette.ColorRole
    for which, value in (
        (role.Window, now.window),
        (role.WindowText, now.ink),
        (role.Base, now.paper),
        (role.AlternateBase, now.raised),
        (role.Text, now.ink),
        (role.Button, now.raised),
        (role.ButtonText, now.ink),
        (role.ToolTipBase, now.raised),
        (role.ToolTipText, now.ink),
        (role.Highlight, now.accent),
        (role.HighlightedText, now.accent_ink),
        (role.PlaceholderText, now.quiet),
        (role.Link, now.accent),
        (role.Light, now.raised),
        (role.Midlight, now.grid),
        (role.Mid, now.line),
        (role.Dark, now.line),
        (role.Shadow, now.line),
    ):
        palette.setColor(which, QColor(value))
    for which in (role.Text, role.ButtonText, role.WindowText):
        palette.setColor(QPalette.ColorGroup.Disabled, which, colour(now.quiet, 0.6))
    palette.setColor(QPalette.ColorGroup.Disabled, role.Highlight, QColor(now.line))
    return palette


def _sheet(now: Colours) -> str:
    return f"""
    QMainWindow, QDialog {{ background: {now.window}; }}
    QToolBar {{ background: {now.window}; border: 0; border-bottom: 1px solid {now.line};
                spacing: 2px; padding: 3px 6px; }}
    QToolBar::separator {{ background: {now.line}; width: 1px; margin: 5px 5px; }}
    QToolButton {{ border: 1px solid transparent; border-radius: 4px; padding: 3px 8px; }}
    QToolButton:hover {{ background: {now.raised}; border-color: {now.line}; }}
    QToolButton:checked, QToolButton:pressed {{ background: {now.shadow}; border-color: {now.line}; }}
    QToolButton:focus {{ border-color: {now.accent}; }}
    QToolButton#lead {{ background: {now.accent}; color: {now.accent_ink}; font-weight: 600; }}
    QToolButton#lead:disabled {{ background: {now.shadow}; color: {now.quiet}; }}
    QStatusBar {{ background: {now.window}; border-top: 1px solid {now.line}; }}
    QStatusBar::item {{ border: 0; }}
    QStatusBar QToolButton {{ border-color: {now.line}; background: {now.raised}; }}
    QStatusBar QToolButton:hover {{ border-color: {now.accent}; }}
    QTabWidget::pane {{ border: 1px solid {now.line}; background: {now.raised}; top: -1px; }}
    QTabBar::tab {{ padding: 4px 11px; border: 0; border-bottom: 2px solid transparent;
                    color: {now.quiet}; background: transparent; }}
    QTabBar::tab:selected {{ color: {now.ink}; border-bottom-color: {now.accent}; }}
    QTabBar::tab:hover {{ color: {now.ink}; }}
    QTabBar::tab:focus {{ background: {now.shadow}; }}
    QSplitter::handle {{ background: {now.window}; }}
    QHeaderView {{ background: {now.raised}; border: 0; }}
    QHeaderView::section {{ background: {now.raised}; color: {now.quiet}; border: 0;
                            border-bottom: 1px solid {now.line}; padding: 3px 5px; }}
    QTableCornerButton::section {{ background: {now.raised}; border: 0;
                            border-bottom: 1px solid {now.line}; }}
    QTableView, QTreeView, QListView {{ border: 0; background: {now.paper};
                            alternate-background-color: {now.raised}; gridline-color: {now.grid}; }}
    QToolTip {{ background: {now.raised}; color: {now.ink}; border: 1px solid {now.line}; padding: 4px; }}
    QGroupBox {{ border: 0; border-top: 1px solid {now.line}; margin-top: 14px; padding-top: 6px;
                 font-weight: 600; }}
    QGroupBox::title {{ subcontrol-origin: margin; left: 0; padding: 0 6px 0 0; color: {now.quiet}; }}
    QPushButton#lead {{ background: {now.accent}; color: {now.accent_ink}; border: 0;
                        border-radius: 4px; padding: 7px 16px; font-weight: 600; }}
    QPushButton#lead:focus {{ border: 2px solid {now.ink}; padding: 5px 14px; }}
    QPushButton#card {{ text-align: left; background: {now.raised}; border: 1px solid {now.line};
                        border-radius: 6px; padding: 8px 12px; }}
    QPushButton#card:hover, QPushButton#card:focus {{ border-color: {now.accent}; }}
    QDialogButtonBox, QMessageBox {{ dialogbuttonbox-buttons-have-icons: 0; }}
    QCheckBox::indicator {{ width: 12px; height: 12px; border: 1px solid {now.quiet}; border-radius: 3px;
                            background: {now.paper}; }}
    QCheckBox::indicator:checked {{ background: {now.accent}; border-color: {now.ink}; }}
    QCheckBox::indicator:disabled {{ border-color: {now.line}; }}
    QSpinBox, QDoubleSpinBox {{ min-height: 22px; }}
    QLabel#quiet {{ color: {now.quiet}; }}
    QLabel#title {{ font-weight: 600; }}
    QFrame#card {{ background: {now.raised}; border: 1px solid {now.line}; }}
    QProgressBar {{ border: 1px solid {now.line}; border-radius: 4px; background: {now.paper};
                    text-align: center; max-height: 14px; }}
    QProgressBar::chunk {{ background: {now.accent}; border-radius: 3px; }}
    """
