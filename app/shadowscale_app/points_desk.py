"""What is done with points and stretches that a gesture chose, and the questions that go with it."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace
from typing import Any

from PySide6.QtCore import QObject, Signal
from PySide6.QtWidgets import QWidget

from shadowscale.view.markers import without_span
from shadowscale.view.rows import with_prior
from shadowscale.view.selecting import (
    everything_taken_back,
    light_set_aside,
    light_taken_back,
    velocities_set_aside,
    velocities_taken_back,
)
from shadowscale_app.desk import Change, Desk
from shadowscale_app.dialogs.brushing import BACK, ask_brush
from shadowscale_app.dialogs.prior import ask_prior


class PointsDesk(QObject):
    """Turns answers of small dialogs into steps. Signal `told(words)`."""

    told = Signal(str)

    def __init__(
        self,
        desk: Desk,
        window: QWidget,
        *,
        ask: Callable[[QWidget | None, int], str | None] = ask_brush,
    ) -> None:
        super().__init__(window)
        self._desk, self._window, self.ask = desk, window, ask

    def take_all_back(self) -> None:
        """All points that a person set aside take part again."""
        session = everything_taken_back(self._desk.session)
        self._desk.apply(Change("Take all points back", session))

    def drop_span(self, pictures: Iterable[Any]) -> None:
        """Remove the stretch whose edge has the keyboard."""
        session = self._desk.session
        names = [name for picture in pictures if (name := getattr(picture, "focused", ""))]
        if names and session.markers is not None:
            markers = without_span(session.markers, names[0])
            if markers is not session.markers:
                self._desk.apply(Change("Remove stretch", replace(session, markers=markers)))

    def brushed(self, rows: Any) -> None:
        """Points were drawn round: ask what is to become of them. `rows` is a mapping for velocities."""
        velocities = isinstance(rows, dict)
        count = sum(len(each) for each in rows.values()) if velocities else len(rows)
        answer = self.ask(self._window, count)
        if answer is None:
            return
        session = self._desk.session
        if answer == BACK:
            taken = velocities_taken_back if velocities else light_taken_back
            self._desk.apply(Change("Take points back", taken(session, rows)))
        else:
            aside = velocities_set_aside if velocities else light_set_aside
            self._desk.apply(Change(f"Set points aside: {answer}", aside(session, rows, answer)))

    def prior(self, key: str) -> None:
        """Ask for a prior on a quantity."""
        session = self._desk.session
        found = ask_prior(self._window, session, key)
        if found is not None:
            self._desk.apply(
                Change(f"Prior on {key}", with_prior(session, key, found[0], sigma=found[1]))
            )
