"""The table of quantities: value, error, state, limits; typing or the slider changes the model at once."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QModelIndex, QPoint, Qt
from PySide6.QtGui import QAction, QGuiApplication, QKeySequence
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QMenu,
    QSlider,
    QTableView,
    QVBoxLayout,
    QWidget,
)

from shadowscale.session.session import Session
from shadowscale.view.rows import (
    FREE,
    HELD,
    TIED,
    WITH_PRIOR,
    Row,
    leaders,
    quantity_rows,
    with_state,
    with_tie,
    with_value,
)
from shadowscale.view.written import symbol
from shadowscale_app.desk import Change
from shadowscale_app.models.quantities import (
    ERROR,
    GRADE,
    LIMITS,
    STATE,
    SYMBOL,
    UNIT,
    VALUE,
    QuantityModel,
    as_text,
)
from shadowscale_app.naming import named
from shadowscale_app.panes.grade_bar import GradeBar
from shadowscale_app.panes.pane import Pane

NOTHING = "Choose a quantity to move it"
REACH = 100  # slider steps to either side of where it was taken up
WATCHED = frozenset({"system", "solution", "plan"})
WIDTHS = {SYMBOL: 82, VALUE: 112, ERROR: 130, UNIT: 38, STATE: 56, GRADE: 100}


class QuantitiesPane(Pane):
    """Table and slider."""

    title = "Quantities"
    about = (
        "Every number of the model and what follows from it. Free ones are fitted, held ones stay, a prior pulls, a tied one follows another. "
        "Type a value or use the slider below to see what it does to the curve; double-click the state to change it, or the correlation to see it as a picture. "
        "The bar shows the error relative to the value: green below 1 %, one sign above, two signs above 5 %."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.model = QuantityModel()
        self.table = QTableView()
        self.slider = QSlider(Qt.Orientation.Horizontal)
        self.name = QLabel(NOTHING)
        self.name.setObjectName("quiet")
        self._from = 0.0
        self._gesture = 0
        self._make_table()
        self._make_slider()
        row = QHBoxLayout()
        row.setContentsMargins(10, 5, 12, 6)
        row.setSpacing(12)
        row.addWidget(self.name)
        row.addWidget(self.slider, 1)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addWidget(self.table, 1)
        layout.addLayout(row)

    def refresh(self, names: frozenset[str]) -> None:
        """Show the rows anew."""
        if names & WATCHED:
            self.model.show_rows(quantity_rows(self.session))
            self._name_slider()

    def chosen(self) -> Row | None:
        """The row that the table has selected."""
        index = self.table.currentIndex()
        return (
            self.model.rows[index.row()]
            if index.isValid() and index.row() < len(self.model.rows)
            else None
        )

    def set_value(self, key: str, value: float, merge: str = "") -> None:
        """Ask for a value."""
        self._ask(f"Set {key}", lambda session: with_value(session, key, value), merge)

    def set_state(self, key: str, state: str) -> None:
        """Ask for a state: free, held, with prior."""
        self._ask(f"Make {key} {state}", lambda session: with_state(session, key, state))

    def tie(self, key: str, leader: str) -> None:
        """Ask for a quantity to follow another."""
        self._ask(f"Tie {key} to {leader}", lambda session: with_tie(session, key, leader))

    def untie(self, key: str) -> None:
        """Ask for a quantity that followed another to be free again."""
        self._ask(f"Untie {key}", lambda session: with_state(session, key, FREE))

    def _ask(self, label: str, change: Callable[[Session], Session], merge: str = "") -> None:
        try:
            session = change(self.session)
        except ValueError as problem:
            self.told.emit(str(problem))
            return
        self.wanted.emit(Change(label, session, merge))

    def _make_table(self) -> None:
        table = self.table
        table.setModel(self.model)
        table.setAccessibleName("Table of quantities")
        table.setAccessibleDescription(self.about)
        table.setItemDelegateForColumn(GRADE, GradeBar(table))
        table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        table.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        table.setAlternatingRowColors(True)
        table.setShowGrid(False)
        table.setWordWrap(False)
        table.setTabKeyNavigation(False)
        table.verticalHeader().hide()
        table.verticalHeader().setDefaultSectionSize(22)
        header = table.horizontalHeader()
        header.setHighlightSections(False)
        header.setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        for column, width in WIDTHS.items():
            header.resizeSection(column, width)
        header.setMinimumSectionSize(30)
        header.setSectionResizeMode(GRADE, QHeaderView.ResizeMode.Stretch)
        table.setColumnHidden(LIMITS, True)  # shown beside the slider and when resting the mouse
        table.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        table.customContextMenuRequested.connect(self._menu)
        table.doubleClicked.connect(self._double_clicked)
        table.selectionModel().currentChanged.connect(self._name_slider)
        self.model.typed.connect(self.set_value)
        self.model.refused.connect(self.told)
        copy = QAction("Copy rows", table)
        copy.setShortcut(QKeySequence.StandardKey.Copy)
        copy.setShortcutContext(Qt.ShortcutContext.WidgetShortcut)
        copy.triggered.connect(self.copy)
        table.addAction(copy)

    def _make_slider(self) -> None:
        self.slider.setRange(-REACH, REACH)
        named(
            self.slider,
            "Move the chosen quantity",
            "Moves the value of the chosen line and shows what that does to the curve; the arrow keys, too",
        )
        self.slider.setEnabled(False)
        self.slider.sliderPressed.connect(self._take_up)
        self.slider.valueChanged.connect(self._slid)
        self.slider.sliderReleased.connect(self._let_go)

    def copy(self) -> None:
        """Put the selected rows (all if none) on the clipboard."""
        numbers = sorted({index.row() for index in self.table.selectionModel().selectedRows()})
        rows = tuple(self.model.rows[number] for number in numbers) or self.model.rows
        QGuiApplication.clipboard().setText(as_text(rows))

    def _menu(self, place: QPoint) -> None:
        row = self.chosen()
        menu = QMenu(self)
        if row is not None and row.basic:
            for state, words in (
                (FREE, "Free: fit it"),
                (HELD, "Hold it here"),
                (WITH_PRIOR, "With prior at its present error"),
            ):
                if row.tied_to and state == FREE:
                    continue  # that is what untying does
                action = menu.addAction(words)
                action.setEnabled(row.state != state)
                action.triggered.connect(
                    lambda _=False, key=row.key, state=state: self.set_state(key, state)
                )
            menu.addAction(
                "Prior\N{HORIZONTAL ELLIPSIS}", lambda: self.asked.emit("prior", row.key)
            )
            self.add_ties(menu, row)
            menu.addSeparator()
        menu.addAction("Copy rows", self.copy)
        menu.exec(self.table.viewport().mapToGlobal(place))

    def add_ties(self, menu: QMenu, row: Row) -> None:
        """Lines that tie a row to each that can lead it, or untie it."""
        if row.state == TIED:
            menu.addAction(f"Untie from {symbol(row.tied_to)}", lambda: self.untie(row.key))
        for leader in leaders(self.session, row.key):
            menu.addAction(f"Tie to {symbol(leader)}").triggered.connect(
                lambda _=False, key=row.key, leader=leader: self.tie(key, leader)
            )

    def _double_clicked(self, index: QModelIndex) -> None:
        row = self.model.rows[index.row()]
        if index.column() == GRADE and row.partner:
            self.asked.emit("pair", (row.key, row.partner))
        if index.column() == STATE and row.basic:
            self.set_state(row.key, FREE if row.state in (HELD, TIED) else HELD)

    def _name_slider(self, *_: object) -> None:
        row = self.chosen()
        self.slider.setEnabled(row is not None and row.basic and not row.tied_to)
        self.name.setText(NOTHING if row is None else _beside_slider(row))
        if not self.slider.isSliderDown():
            self._centre()

    def _centre(self) -> None:
        row = self.chosen()
        self._from = row.value if row is not None else 0.0
        self.slider.blockSignals(True)
        self.slider.setValue(0)
        self.slider.blockSignals(False)

    def _take_up(self) -> None:
        self._centre()
        self._gesture += 1

    def _slid(self, steps: int) -> None:
        row = self.chosen()
        if row is None or not row.basic:
            return
        value = min(max(self._from + steps * row.step, row.lower), row.upper)
        self.set_value(row.key, value, merge=f"slide {row.key} {self._gesture}")

    def _let_go(self) -> None:
        self._centre()
        self.let_go.emit()


def _beside_slider(row: Row) -> str:
    if not row.basic:
        return f"{row.symbol} follows from the others"
    if row.tied_to:
        return f"{row.symbol} follows {symbol(row.tied_to)}"
    return f"{row.symbol}  ({row.bounds_text})" if row.bounds_text else row.symbol
