"""What pulling a marker or drawing round points means: a change of the session."""

from __future__ import annotations

from dataclasses import replace

from shadowscale.view.looks import look_of
from shadowscale.view.markers import describe_move, moved
from shadowscale.view.selecting import outlined_light
from shadowscale_app.desk import Change
from shadowscale_app.panes.light_pair import LightPair
from shadowscale_app.panes.pane import Pane

NO_POINTS = "No points inside: draw round some."


class Marking:
    """Turns the gestures on some pictures of a pane into the pane's wishes."""

    def __init__(self, pane: Pane, pairs: tuple[LightPair, ...]) -> None:
        self._pane = pane
        for pair in pairs:
            pair.curve.pulled.connect(self._pulled)
            pair.curve.let_go.connect(lambda _: pane.let_go.emit())
            pair.curve.told.connect(pane.told)
            pair.curve.outlined.connect(lambda corners: self._outlined(corners, residuals=False))
            pair.rest.outlined.connect(lambda corners: self._outlined(corners, residuals=True))

    def _pulled(self, name: str, phase: float, one_side: bool, gesture: int) -> None:
        session = self._pane.session
        if session.markers is None:
            return
        symmetric = not one_side and _circular(self._pane)
        markers = moved(session.markers, name, phase, symmetric=symmetric)
        if markers == session.markers:
            return  # held by a neighbour, or let go where it was
        change = Change(
            describe_move(markers, name), replace(session, markers=markers), f"{name} {gesture}"
        )
        self._pane.wanted.emit(change)

    def _outlined(self, corners: tuple[tuple[float, float], ...], *, residuals: bool) -> None:
        rows = outlined_light(
            self._pane.session, corners, look=look_of(self._pane.session.view), residuals=residuals
        )
        if rows.size:
            self._pane.asked.emit("brushed", rows)
        else:
            self._pane.told.emit(NO_POINTS)


def _circular(pane: Pane) -> bool:
    """Whether the two sides of an eclipse mirror each other."""
    session = pane.session
    if session.system is not None:
        return "ecosw" not in session.system.free and session.system.value("esinw") == 0.0
    return session.plan.orbit != "eccentric"
