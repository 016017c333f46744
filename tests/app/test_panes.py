"""What the other panes show, and what they ask for."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from made_up import made_up_session
from shadowscale.geometry.published import PUBLISHED
from shadowscale.guide import page
from shadowscale.view.light_points import light_over_phase
from shadowscale.view.pairs import pair
from shadowscale_app import theme
from shadowscale_app.actions import MENUS, TABLE, keys
from shadowscale_app.bench import Bench
from shadowscale_app.desk import Change
from shadowscale_app.panes.kept import SIGMAS


@pytest.fixture
def bench(shared: Bench) -> Bench:
    """These tests leave the window as it was."""
    return shared


def test_the_stars_card_shows_masses_and_radii(bench: Bench) -> None:
    from PySide6.QtWidgets import QLabel

    text = " ".join(label.text() for label in bench.panes["The two stars"].findChildren(QLabel))

    for value in ("1.2734", "1.1099", "1.5372", "1.2013"):
        assert value in text


def test_without_velocities_no_masses_are_shown(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    from PySide6.QtWidgets import QLabel

    bench.desk.begin(made_up_session(velocities=False))
    QApplication.processEvents()

    text = " ".join(
        label.text()
        for label in bench.panes["The two stars"].findChildren(QLabel)
        if label.isVisible()
    )
    assert "mass" not in text
    assert "0.15100" in text
    assert bench.panes["Velocities"].nothing.isVisibleTo(bench.panes["Velocities"])
    asked: list[bool] = []
    monkeypatch.setattr(bench.opening, "ask_velocities", lambda: asked.append(True))
    bench.bring("Velocities")
    QTest.mouseClick(bench.panes["Velocities"].nothing.button, Qt.MouseButton.LeftButton)
    assert asked == [True]


def test_the_drawing_follows_the_phase_under_the_cursor(bench: Bench) -> None:
    pane = bench.panes["To scale"]
    bench.panes["Folded curve"].pointed.emit(0.25)

    scene = pane.sky.scene
    assert pytest.approx(pane.phase) == 0.25
    assert scene.words == "outside eclipse"
    assert pytest.approx(abs(scene.discs[0].x - scene.discs[1].x), abs=1e-3) == 1.0


def test_the_drawing_says_which_star_is_in_front(bench: Bench) -> None:
    pane = bench.panes["To scale"]

    pane.point(0.0)
    assert pane.sky.scene.words == "star 2 stands before star 1"
    pane.point(0.5)
    assert pane.sky.scene.words == "star 2 is hidden"


def test_play_moves_the_stars_and_pause_stops_them(bench: Bench, qtbot: object) -> None:
    pane = bench.panes["To scale"]
    before = pane.phase

    QTest.mouseClick(pane.play, Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: pane.phase > before)  # type: ignore[attr-defined]
    QTest.mouseClick(pane.play, Qt.MouseButton.LeftButton)

    assert not pane._timer.isActive()


def test_the_ellipse_throws_the_errors_as_its_shadows(bench: Bench) -> None:
    bench.bring("Correlation")
    pane = bench.panes["Correlation"]
    pane.choose("radius_sum", "radius_ratio")
    found = pair(bench.desk.session.solution, "radius_sum", "radius_ratio")

    assert found.correlation == -0.42
    assert pytest.approx((found.inner[:, 0].max() - found.inner[:, 0].min()) / 2, rel=1e-3) == 4e-4
    assert pytest.approx((found.inner[:, 1].max() - found.inner[:, 1].min()) / 2, rel=1e-3) == 6e-3
    assert "one raised, the other lowered" in pane.words.text()
    assert f"{1 / math.sqrt(1 - 0.42**2):.1f} times" in pane.words.text()


def test_settings_ask_for_the_plan_they_show(bench: Bench) -> None:
    pane = bench.panes["Settings"]
    box = pane.boxes["orbit"]

    box.setCurrentIndex(box.findData("eccentric"))
    box.activated.emit(box.currentIndex())
    pane.exposure.setValue(120.0)
    pane.teffs[0].setText("6350 110")
    pane.teffs[0].editingFinished.emit()

    plan = bench.desk.session.plan
    assert (plan.orbit, plan.exposure, plan.teff1) == ("eccentric", 120.0, (6350.0, 110.0))
    bench.desk.undo()
    bench.desk.undo()
    bench.desk.undo()
    assert pane.boxes["orbit"].currentData() == "auto"
    assert pane.exposure.value() == 0.0


def test_the_wheel_scrolls_past_the_settings_without_changing_them(bench: Bench) -> None:
    bench.bring("Settings")
    QApplication.processEvents()
    pane = bench.panes["Settings"]
    before = bench.desk.session
    for control in (*pane.boxes.values(), pane.exposure, *pane.waves.values()):
        middle = QPointF(control.rect().center())
        event = QWheelEvent(
            middle, control.mapToGlobal(middle), QPoint(), QPoint(0, -120), Qt.MouseButton.NoButton,
            Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
        )  # fmt: skip
        QApplication.sendEvent(control, event)
        assert not event.isAccepted()  # it goes on to what scrolls

    assert bench.desk.session is before


def test_every_setting_explains_itself(bench: Bench) -> None:
    pane = bench.panes["Settings"]

    for name, box in pane.boxes.items():
        assert len(box.toolTip()) > 30, name


def test_third_light_is_held_and_freed_by_band(bench: Bench) -> None:
    pane = bench.panes["Settings"]
    box = pane.boxes["third V"]
    assert box.currentData() == "free"

    for state, fixed in (("none", {"third_light[V]": (0.0,)}), ("free", {})):
        box.setCurrentIndex(box.findData(state))
        box.activated.emit(box.currentIndex())
        assert fixed == bench.desk.session.plan.fixed


def test_kept_solutions_stand_side_by_side(bench: Bench) -> None:
    pane = bench.panes["Kept"]
    bench.bring("Kept")
    pane.keep_as("before spots")

    headers = [pane.table.horizontalHeaderItem(n).text() for n in range(pane.table.columnCount())]
    assert headers == ["present", "first try", SIGMAS, "before spots", SIGMAS]
    bench.panes["Quantities"].set_value("inclination", 85.0)
    pane.table.setCurrentCell(0, 1)
    pane.back.click()
    assert bench.desk.session.system.value("inclination") == 89.1
    pane.table.setCurrentCell(0, 3)
    pane.drop.click()
    assert [kept.name for kept in bench.desk.session.kept] == ["first try"]


def test_doubts_are_listed_gravest_first(bench: Bench) -> None:
    bench.bring("Doubts")
    text = bench.panes["Doubts"].text.toPlainText()

    assert text.index("mirror solution") < text.index("fill-out")
    assert "Eggleton 1983" in text
    assert "distance:" in text
    assert "1 to think about" in bench.status.fit.text()


def test_the_mass_radius_picture_names_every_paper(bench: Bench) -> None:
    bench.bring("Mass and radius")
    pane = bench.panes["Mass and radius"]

    words = list(pane.others.data["data"])
    assert len(PUBLISHED) == len(words)
    assert all(star.paper in text for star, text in zip(PUBLISHED, words, strict=True))
    assert len(pane._ours) == 4


def test_bands_can_be_hidden(bench: Bench) -> None:
    bench.desk.begin(made_up_session(("V", "I")))
    pane = bench.panes["Folded curve"]
    layers = len(pane.pair.points.layers)

    pane.chips.buttons[1].click()

    assert bench.desk.session.view["hidden"] == ["I"]
    assert layers > len(pane.pair.points.layers)


def test_magnitudes_grow_downwards(bench: Bench) -> None:
    pair_ = bench.panes["Folded curve"].pair
    bench.actions_table.by_name["magnitudes"].trigger()

    top, foot = pair_.curve.place_of(0.0, 0.0), pair_.curve.place_of(0.0, 0.6)
    assert top.y() < foot.y()
    assert set(pair_.curve.lines)


def test_hours_are_hours(bench: Bench) -> None:
    bench.actions_table.by_name["hours"].trigger()

    axis = bench.panes["Folded curve"].pair.rest.getAxis("bottom")
    assert pytest.approx(axis.scale) == 2.4371926 * 24
    assert "hours" in axis.labelText


def test_help_explains_every_picture_and_every_key(bench: Bench) -> None:
    text = bench.panes["Help"].text.toPlainText()

    for pane in bench.panes.values():
        assert pane.title in text
    for key, words in keys():
        assert key in text, words


def test_no_two_actions_share_a_key() -> None:
    texts = [key for key, _ in keys()]

    assert len(set(texts)) == len(texts)
    assert {entry.menu for entry in TABLE} <= set(MENUS)


def test_the_right_click_menu_is_ours(bench: Bench) -> None:
    menu = bench.panes["Folded curve"].pair.curve.menu()

    assert [a.text() for a in menu.actions()] == [
        "Copy picture",
        "Save figure\N{HORIZONTAL ELLIPSIS}",
        "Reset view",
    ]
    menu.deleteLater()


@pytest.mark.parametrize("scheme", [theme.ALWAYS_DARK, theme.ALWAYS_LIGHT])
def test_the_scheme_reaches_every_picture(bench: Bench, scheme: str) -> None:
    bench.choose_scheme(scheme)

    ground = theme.colours().paper
    for picture in bench.pictures():
        assert picture.box.background.brush().color().name().upper() == ground.upper()
    bench.choose_scheme(theme.FOLLOW)


def test_before_a_solution_the_empty_panes_offer_to_solve(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked: list[str] = []
    monkeypatch.setattr(bench.work, "solve", lambda: asked.append("solve"))
    raw = made_up_session(solved=False)
    bench.desk.begin(replace(raw, plan=replace(raw.plan, period=None, epoch=None)))
    QApplication.processEvents()
    pane = bench.panes["Eclipses"]

    assert not pane.pairs["primary"].isVisible()
    QTest.mouseClick(pane.inviting.invitation.button, Qt.MouseButton.LeftButton)
    bench.desk.begin(made_up_session())

    assert asked == ["solve"]
    assert pane.pairs["primary"].isVisible()


def test_the_help_holds_the_guide(bench: Bench) -> None:
    pane = bench.panes["Help"]
    assert "F5" in pane.text.toPlainText()

    pane.choice.setCurrentIndex(pane.choice.findData("data"))

    heading = page("data").title
    assert pane.text.toPlainText().startswith(heading)


def test_a_pane_behind_catches_up_when_it_comes_to_the_front(bench: Bench) -> None:
    pane = bench.panes["Correlation"]
    bench.desk.begin(made_up_session(("V", "I")))

    def offers_band_i() -> bool:
        return pane.boxes[0].findData("surface_brightness_ratio[I]") >= 0

    solution = bench.desk.session.solution
    names = (*solution.correlation_names[:-1], "surface_brightness_ratio[I]")
    other = replace(solution, correlation_names=names)
    bench.desk.apply(Change("Solve", replace(bench.desk.session, solution=other)))
    assert not offers_band_i()

    bench.bring("Correlation")

    assert offers_band_i()
    assert pane.session is bench.desk.session


def test_each_eclipse_is_as_high_as_its_own_points(bench: Bench) -> None:
    pairs = bench.panes["Eclipses"].pairs
    light = light_over_phase(bench.desk.session)[0]

    for eclipse in pairs.values():
        left, right = eclipse.curve.home_x
        inside = light.y[light.used & (light.x >= left) & (light.x <= right)]
        low, high = eclipse.curve.home_y
        assert low < inside.min()
        assert high > inside.max()
        assert high - low < 1.5 * np.ptp(inside)
    assert pairs["secondary"].curve.home_y[0] > pairs["primary"].curve.home_y[0]  # it is shallower
