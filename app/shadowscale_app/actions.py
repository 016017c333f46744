"""The one table of actions: menus, tool bar, shortcuts and the help page are made from it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMenu, QToolBar, QToolButton

from shadowscale.session.session import Session
from shadowscale.view.looks import look_of
from shadowscale_app import theme, trouble
from shadowscale_app.desk import Change
from shadowscale_app.dialogs.about import tell_about

if TYPE_CHECKING:
    from shadowscale_app.bench import Bench

Std = QKeySequence.StandardKey
MENUS = ("File", "Edit", "Solve", "View", "Help")
ELLIPSIS = "\N{HORIZONTAL ELLIPSIS}"
FIGURE_PANES = (
    "Folded curve",
    "Whole series",
    "Eclipses",
    "Velocities",
    "Correlation",
    "Mass and radius",
    "To scale",
)


def _always(_: Session) -> bool:
    return True


def _has_light(session: Session) -> bool:
    return session.photometry is not None


def _is_solved(session: Session) -> bool:
    return session.solution is not None


def _has_markers(session: Session) -> bool:
    return session.markers is not None


@dataclass(frozen=True)
class Entry:
    """An action: its name, words, menu, keys, when it can be done, what it calls.

    checked : says from the bench whether a check mark stands; None: no check mark
    bar : words on the tool bar; empty: not there
    """

    name: str
    words: str
    menu: str
    call: Callable[[Bench], object]
    keys: str | Std = ""
    tip: str = ""
    enabled: Callable[[Session], bool] = _always
    checked: Callable[[Bench], bool] | None = None
    bar: str = ""
    rule_before: bool = False


def _look(name: str) -> Callable[[Bench], object]:
    def toggle(bench: Bench) -> None:
        bench.desk.look({name: not getattr(look_of(bench.desk.session.view), name)})

    return toggle


def _looks(name: str) -> Callable[[Bench], bool]:
    return lambda bench: bool(getattr(look_of(bench.desk.session.view), name))


def _group(name: str) -> Callable[[Bench], object]:
    def toggle(bench: Bench) -> None:
        groups = look_of(bench.desk.session.view).groups
        groups = tuple(g for g in groups if g != name) if name in groups else (*groups, name)
        bench.desk.look({"groups": list(groups)})

    return toggle


def _has_group(name: str) -> Callable[[Bench], bool]:
    return lambda bench: name in look_of(bench.desk.session.view).groups


def _scheme(name: str) -> Callable[[Bench], object]:
    return lambda bench: bench.choose_scheme(name)


def _is_scheme(name: str) -> Callable[[Bench], bool]:
    return lambda bench: bench.scheme == name


def _span(part: str) -> Callable[[Bench], object]:
    def add(bench: Bench) -> None:
        from shadowscale.view.markers import EFFECTS, SPANS, with_new_span

        session = bench.desk.session
        if session.markers is not None:
            markers = with_new_span(session.markers, part, bench.phase)
            bench.desk.apply(Change(f"Add {SPANS[part]}", replace(session, markers=markers)))
            words = EFFECTS[part]
            bench.status.tell(f"{words[:1].upper()}{words[1:]}. Pull its edges; Del removes it.")
            if part not in look_of(session.view).groups:
                _group(part)(bench)

    return add


TABLE: tuple[Entry, ...] = (
    Entry("open", f"Open{ELLIPSIS}", "File", lambda b: b.opening.ask_open(), Std.Open, "Open photometry or a session", bar="Open"),
    Entry("velocities", f"Add velocities{ELLIPSIS}", "File", lambda b: b.opening.ask_velocities(), "Ctrl+Shift+O", "Add a table of radial velocities", _has_light, bar="Velocities"),
    Entry("save", "Save", "File", lambda b: b.files.save(), Std.Save, "Save the session", _has_light, bar="Save", rule_before=True),
    Entry("save_as", f"Save as{ELLIPSIS}", "File", lambda b: b.files.save_as(), Std.SaveAs, "Save the session in another file", _has_light),
    Entry("pack", f"Pack with its data{ELLIPSIS}", "File", lambda b: b.files.ask_pack(), "", "One zip file with the session and all its tables, to be sent to a colleague", _has_light),
    Entry("export", f"Export sheet{ELLIPSIS}", "File", lambda b: b.work.export(b.files.ask_export()), "Ctrl+E", "Write the sheet, curves and session to a folder", _is_solved, bar="Export"),
    Entry("figure", f"Save figure{ELLIPSIS}", "File", lambda b: b.save_figure(), "Ctrl+Shift+E", "Of the picture that was clicked last, as PDF, SVG or PNG", _has_light),
    Entry("close", "Close session", "File", lambda b: b.files.close_session(), Std.Close, "Back to the start page", rule_before=True),
    Entry("quit", "Quit", "File", lambda b: b.close(), Std.Quit, "Close the window; asks about unsaved work"),
    Entry("undo", "Undo", "Edit", lambda b: b.desk.undo(), Std.Undo, "Take back the last step", bar="Undo"),
    Entry("redo", "Redo", "Edit", lambda b: b.desk.redo(), "Ctrl+Shift+Z", "Do again what was taken back", bar="Redo"),
    Entry("brush", "Brush", "Edit", lambda b: b.toggle_brush(), "B", "Draw round points to set them aside or take them back", _has_light, lambda b: b.brushing, bar="Brush", rule_before=True),
    Entry("restore", "Take back all points set aside by hand", "Edit", lambda b: b.points.take_all_back(), "", "They take part again; those that the fit or the file set aside do not", lambda s: bool(s.exclusions)),
    Entry("level", "Add stretch outside eclipse here", "Edit", _span("level"), "Ctrl+L", "At the phase under the cursor: only such stretches tell the light outside eclipse then", _has_markers, rule_before=True),
    Entry("excluded", "Add excluded stretch here", "Edit", _span("excluded"), "Ctrl+X", "At the phase under the cursor: its points take part in nothing", _has_markers),
    Entry("drop_span", "Remove the stretch that was clicked", "Edit", lambda b: b.points.drop_span(b.pictures()), "Del", "Outside eclipse or excluded; its edge was clicked, or reached with Tab", _has_markers),
    Entry("keep", f"Keep this solution{ELLIPSIS}", "Edit", lambda b: b.panes["Kept"].ask_name(), "Ctrl+K", "Remember it under a name", _is_solved, rule_before=True),  # type: ignore[attr-defined]
    Entry("compare", f"Compare with file{ELLIPSIS}", "Edit", lambda b: b.files.ask_compare(b.show_beside), "", "Put another session, a sheet or a typed table beside the solution", _is_solved),
    Entry("solve", "Solve", "Solve", lambda b: b.work.solve(), "F5", "Find masses and radii from the data", _has_light, bar="Solve"),
    Entry("follow", "Fit follows changes", "Solve", lambda b: b.toggle_follow(), "F6", "Fit again by itself after each change", _always, lambda b: b.live.following, bar="Follow"),
    Entry("period", "Search period", "Solve", lambda b: b.work.search_period(), "F7", "Period and epoch from the photometry", _has_light, rule_before=True),
    Entry("starts", "Search from many starts", "Solve", lambda b: b.work.search_starts(), "F8", "Look for other solutions that the data do not exclude", _is_solved),
    Entry("measure", "Measure contacts in the eclipse windows", "Solve", lambda b: b.work.measure_contacts(), "F9", "Put the contact markers where the points in the windows have them", _has_markers),
    Entry("stop", "Stop", "Solve", lambda b: b.work.stop(), "Ctrl+.", "Stop the work; what it found so far is kept where there is something"),
    Entry("magnitudes", "Magnitudes", "View", _look("magnitudes"), "M", "Magnitudes instead of light", _always, _looks("magnitudes"), bar="Mag"),
    Entry("hours", "Hours instead of phase", "View", _look("hours"), "H", "Hours from mid primary eclipse", _always, _looks("hours"), bar="Hours"),
    Entry("binned", "Binned points", "View", _look("binned"), "N", "Means of neighbouring points", _always, _looks("binned"), bar="Bins"),
    Entry("show_contact", "Contact markers", "View", _group("contact"), "Ctrl+1", "Where the discs touch: first to fourth contact of each eclipse", _always, _has_group("contact"), rule_before=True),
    Entry("show_window", "Eclipse windows", "View", _group("window"), "Ctrl+2", "Which points count as which eclipse", _always, _has_group("window")),
    Entry("show_level", "Stretches outside eclipse", "View", _group("level"), "Ctrl+3", "Which points tell the light outside eclipse; without any, all of them", _always, _has_group("level")),
    Entry("show_excluded", "Excluded stretches", "View", _group("excluded"), "Ctrl+4", "Which points take part in nothing", _always, _has_group("excluded")),
    Entry("reset", "Reset all views", "View", lambda b: b.reset_views(), "Ctrl+0", "Show everything again"),
    Entry("follow_system", "Colours follow the system", "View", _scheme(theme.FOLLOW), "", "Light or dark as the system has it", _always, _is_scheme(theme.FOLLOW), rule_before=True),
    Entry("light", "Light", "View", _scheme(theme.ALWAYS_LIGHT), "", "Dark ink on light paper", _always, _is_scheme(theme.ALWAYS_LIGHT)),
    Entry("dark", "Dark", "View", _scheme(theme.ALWAYS_DARK), "", "For the dome at night", _always, _is_scheme(theme.ALWAYS_DARK)),
    Entry("help", "What the pictures show, and keys", "Help", lambda b: b.bring("Help"), Std.HelpContents, "Explains each picture"),
    Entry("about", "About Shadowscale", "Help", lambda b: tell_about(b), "", "Version and purpose"),
)  # fmt: skip

TIPS = {entry.name: entry.tip for entry in TABLE}


class Actions:
    """The actions of one bench."""

    def __init__(self, bench: Bench) -> None:
        self._bench = bench
        self.by_name: dict[str, QAction] = {}
        for entry in TABLE:
            self.by_name[entry.name] = self._make(entry)

    def fill_menus(self) -> None:
        """Make the menu bar."""
        menus: dict[str, QMenu] = {name: self._bench.menuBar().addMenu(name) for name in MENUS}
        for menu in menus.values():
            menu.setToolTipsVisible(True)
        for entry in TABLE:
            if entry.rule_before:
                menus[entry.menu].addSeparator()
            menus[entry.menu].addAction(self.by_name[entry.name])
            if entry.name == "open":
                self.recent = menus["File"].addMenu("Open recent")
                self.recent.aboutToShow.connect(self._fill_recent)
            if entry.name == "figure":
                self._fill_figures(menus["File"].addMenu("Save figure of"))

    def fill_bar(self, bar: QToolBar) -> None:
        """Make the tool bar: words, no pictures to be guessed."""
        menu = ""
        for entry in TABLE:
            if not entry.bar:
                continue
            if menu and menu != entry.menu:
                bar.addSeparator()
            menu = entry.menu
            button = QToolButton()
            button.setDefaultAction(self.by_name[entry.name])
            button.setText(entry.bar)
            button.setAccessibleName(entry.words)
            if entry.name == "solve":
                button.setObjectName("lead")
            bar.addWidget(button)
            self.by_name[entry.name].changed.connect(
                lambda button=button, text=entry.bar: button.setText(text)
            )

    def update(self, session: Session) -> None:
        """Enable, check and name the actions as the session has it."""
        for entry in TABLE:
            action = self.by_name[entry.name]
            action.setEnabled(entry.enabled(session))
            if entry.checked is not None:
                action.setChecked(entry.checked(self._bench))
        history = self._bench.desk.history
        for name, label in (("undo", history.undo_label), ("redo", history.redo_label)):
            action = self.by_name[name]
            action.setEnabled(label is not None)
            words = name.capitalize()
            action.setText(f"{words}: {label}" if label else words)
            keys = action.shortcut().toString(QKeySequence.SequenceFormat.NativeText)
            action.setToolTip(f"{label or TIPS[name]} ({keys})")
        self.by_name["stop"].setEnabled(self._bench.work.running)
        self.figures.setEnabled(_has_light(session))

    def _make(self, entry: Entry) -> QAction:
        action = QAction(entry.words, self._bench)
        action.setObjectName(entry.name)
        if entry.keys:
            action.setShortcut(QKeySequence(entry.keys))
        keys = action.shortcut().toString(QKeySequence.SequenceFormat.NativeText)
        action.setToolTip(
            " ".join(
                part for part in (entry.tip or entry.words, f"({keys})" if keys else "") if part
            )
        )
        action.setCheckable(entry.checked is not None)
        call = trouble.guarded(
            entry.words.lower().rstrip(ELLIPSIS), lambda: entry.call(self._bench)
        )
        action.triggered.connect(lambda: self._run(call))
        self._bench.addAction(action)
        return action

    def _run(self, call: Callable[[], None]) -> None:
        call()
        self.update(self._bench.desk.session)

    def _fill_figures(self, menu: QMenu) -> None:
        self.figures = menu
        for title in FIGURE_PANES:
            save = partial(self._bench.save_pane, title)
            menu.addAction(f"{title}{ELLIPSIS}").triggered.connect(lambda _, save=save: save())

    def _fill_recent(self) -> None:
        self.recent.clear()
        for path in self._bench.files.recent():
            open_it = partial(self._bench.open_paths, [str(path)])
            self.recent.addAction(str(path)).triggered.connect(open_it)


def keys() -> tuple[tuple[str, str], ...]:
    """All shortcuts with their words, for the help page."""
    found = []
    for entry in TABLE:
        text = (
            QKeySequence(entry.keys).toString(QKeySequence.SequenceFormat.NativeText)
            if entry.keys
            else ""
        )
        if text:
            found.append((text, entry.words.rstrip(ELLIPSIS)))
    return tuple(found)
