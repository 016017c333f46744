"""What the solution is asked to do: law, orbit, levels, small effects, exposure, bands; each explained."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QComboBox,
    QDoubleSpinBox,
    QFileDialog,
    QFormLayout,
    QGroupBox,
    QLabel,
    QLineEdit,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from shadowscale.data.photometry import Photometry
from shadowscale.fit.plan import EFFECT_STATES, EFFECTS, LEVELS, ORBITS, Plan
from shadowscale.quantities import QUANTITIES
from shadowscale.view.wishes import (
    EFFECT_WORDS,
    LAW_NAMES,
    LEVEL_WORDS,
    ORBIT_WORDS,
    read_pair,
    third_light_wish,
    with_third_light,
    with_wavelength,
    written_pair,
)
from shadowscale_app.calm import Calm
from shadowscale_app.desk import Change
from shadowscale_app.naming import named
from shadowscale_app.panes.pane import Pane

THIRD = ("free", "none", "held")
LABEL = 116  # [pixels], the widest of the words beside the fields


class SettingsPane(Pane):
    """Controls over the plan."""

    title = "Settings"
    about = (
        "What the fit may do. Every choice has its sentence when you rest the mouse on it. A change starts the fit "
        "anew and can be undone."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.boxes: dict[str, QComboBox] = {}
        self._calm = Calm(self)
        self.exposure = QDoubleSpinBox()
        self._calm.keep(self.exposure)
        self.teffs = (QLineEdit(), QLineEdit())
        self.table = QPushButton()
        self.waves: dict[str, QDoubleSpinBox] = {}
        self._bands: tuple[str, ...] = ()
        self._filling = False
        inner = QWidget()
        self._column = QVBoxLayout(inner)
        self._column.setContentsMargins(10, 10, 10, 8)
        self._make_model_group()
        self._make_effects_group()
        self._make_stars_group()
        self._band_group = QGroupBox("Bands")
        self._band_form = QFormLayout(self._band_group)
        self._column.addWidget(self._band_group)
        self._column.addStretch(1)
        area = QScrollArea()
        area.setWidget(inner)
        area.setWidgetResizable(True)
        area.setFrameShape(QScrollArea.Shape.NoFrame)
        area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(area)

    def refresh(self, names: frozenset[str]) -> None:
        """Show the plan."""
        if "photometry" in names:
            self._make_bands(self.session.photometry)
        if not names & {"plan", "photometry", "system"}:
            return
        plan = self.session.plan
        self._filling = True
        self._select("law", plan.law)
        self._select("orbit", plan.orbit)
        self._select("levels", plan.levels)
        self._select("light_time", plan.light_time)
        for effect in EFFECTS:
            self._select(effect, plan.effects.get(effect, "off"))
        for band in self._bands:
            self._select(f"third {band}", third_light_wish(plan, band))
            self.waves[band].setValue(plan.wavelengths.get(band, 0.0))
        self.exposure.setValue(plan.exposure)
        for name, field in zip(("teff1", "teff2"), self.teffs, strict=True):
            field.setText(written_pair(getattr(plan, name)))
        table = plan.limb_table
        self.table.setText(
            "Choose\N{HORIZONTAL ELLIPSIS}" if table is None else f"Drop {Path(table).name}"
        )
        self._filling = False

    def _make_model_group(self) -> None:
        group = QGroupBox("Model")
        form = QFormLayout(group)
        _add(
            form,
            "Limb darkening",
            self._box(
                "law",
                LAW_NAMES,
                "Limb-darkening law of both stars: how their discs fade towards the edge.",
                lambda plan, text: replace(plan, law=text),
            ),
        )
        _add(
            form,
            "Orbit",
            self._box(
                "orbit",
                ORBITS,
                "Circular, eccentric, or as the data decide; the sheet says how they did.",
                lambda plan, text: replace(plan, orbit=text),
                ORBIT_WORDS,
            ),
        )
        _add(
            form,
            "Light level",
            self._box(
                "levels",
                LEVELS,
                "What is solved beside the model: one level a band, one a night, or a level and a slope a night.",
                lambda plan, text: replace(plan, levels=text),
                LEVEL_WORDS,
            ),
        )
        _add(
            form,
            "Light time",
            self._box(
                "light_time",
                ("auto", "off"),
                "Each star is seen where its own light left it; needs velocities.",
                lambda plan, text: replace(plan, light_time=text),
            ),
        )
        self.exposure.setRange(0.0, 86400.0)
        self.exposure.setDecimals(1)
        self.exposure.setSuffix(" s")
        self.exposure.setKeyboardTracking(False)
        named(
            self.exposure,
            "Exposure time",
            "The model is averaged over each exposure; long ones smear ingress and egress.",
        )
        self.exposure.valueChanged.connect(
            lambda value: self._ask("Set exposure", replace(self.session.plan, exposure=value))
        )
        _add(form, "Exposure", self.exposure)
        self._column.addWidget(group)

    def _make_effects_group(self) -> None:
        group = QGroupBox("Small effects")
        form = QFormLayout(group)
        for effect in EFFECTS:
            _add(
                form,
                effect.capitalize(),
                self._box(
                    effect,
                    EFFECT_STATES,
                    EFFECT_WORDS[effect] + " " + QUANTITIES[f"{effect}1"].effect,
                    partial(_with_effect, effect),
                ),
            )
        self._column.addWidget(group)

    def _make_stars_group(self) -> None:
        group = QGroupBox("Stars and limb darkening")
        form = QFormLayout(group)
        tip = "Effective temperature with its sigma in K, for luminosities and limb darkening; empty: unknown."
        for name, field in zip(("teff1", "teff2"), self.teffs, strict=True):
            field.setPlaceholderText("such as 6350 \N{PLUS-MINUS SIGN} 110")
            named(field, f"Temperature of star {name[-1]}", tip)
            field.editingFinished.connect(partial(self._take_teff, name, field))
            _add(form, f"Temperature {name[-1]} [K]", field)
        named(
            self.table,
            "Limb-darkening table",
            "A file of published limb-darkening coefficients; without one a grey atmosphere is taken.",
        )
        self.table.clicked.connect(self._choose_table)
        _add(form, "Limb table", self.table)
        self._column.addWidget(group)

    def _take_teff(self, name: str, field: QLineEdit) -> None:
        try:
            pair = read_pair(field.text())
        except ValueError as problem:
            self.told.emit(str(problem))
            return
        if pair != getattr(self.session.plan, name):
            plan = self.session.plan
            plan = replace(plan, teff1=pair) if name == "teff1" else replace(plan, teff2=pair)
            self._ask(f"Set temperature {name[-1]}", plan)

    def _choose_table(self) -> None:
        if self.session.plan.limb_table is not None:
            self._ask("Drop limb table", replace(self.session.plan, limb_table=None))
            return
        path, _ = QFileDialog.getOpenFileName(self, "Limb-darkening table")
        if path:
            self._ask("Set limb table", replace(self.session.plan, limb_table=path))

    def _make_bands(self, photometry: Photometry | None) -> None:
        bands = () if photometry is None else photometry.bands
        if bands == self._bands:
            return
        while self._band_form.rowCount():
            self._band_form.removeRow(0)
        for band in self._bands:
            self.boxes.pop(f"third {band}", None)
            self.waves.pop(band, None)
        self._bands = bands
        for band in bands:
            tip = (
                QUANTITIES["third_light"].effect
                + " Third light and inclination are hard to tell apart."
            )
            box = self._box(
                f"third {band}",
                THIRD,
                tip,
                partial(self._with_third_light, band),
            )
            _add(self._band_form, f"Third light in {band}", box)
            wave = QDoubleSpinBox()
            self._calm.keep(wave)
            wave.setRange(0.0, 30000.0)
            wave.setDecimals(0)
            wave.setSuffix(" nm")
            wave.setSpecialValueText("by its name")
            wave.setKeyboardTracking(False)
            named(
                wave,
                f"Wavelength of {band}",
                "Where the band lies; sets where limb darkening starts.",
            )
            wave.valueChanged.connect(partial(self._take_wavelength, band))
            self.waves[band] = wave
            _add(self._band_form, f"Wavelength of {band}", wave)

    def _take_wavelength(self, band: str, value: float) -> None:
        self._ask(f"Set wavelength of {band}", with_wavelength(self.session.plan, band, value))

    def _box(
        self,
        name: str,
        values: tuple[str, ...],
        tip: str,
        change: Callable[[Plan, str], Plan],
        words: dict[str, str] | None = None,
    ) -> QComboBox:
        box = QComboBox()
        self._calm.keep(box)
        for value in values:
            box.addItem((words or {}).get(value, value), value)
        named(box, name.replace("_", " ").capitalize(), tip)
        label = f"Set {name.replace('_', ' ')}"
        box.activated.connect(
            lambda _: self._ask(
                f"{label} to {box.currentText()}", change(self.session.plan, box.currentData())
            )
        )
        self.boxes[name] = box
        return box

    def _select(self, name: str, value: str) -> None:
        box = self.boxes[name]
        box.setCurrentIndex(max(0, box.findData(value)))

    def _with_third_light(self, band: str, plan: Plan, state: str) -> Plan:
        """Free, none, or held at the value it has now."""
        system = self.session.system
        now = 0.0 if system is None else system.value("third_light", band)
        held = {"free": None, "none": 0.0}.get(state, now)
        return with_third_light(plan, band, held=held)

    def _ask(self, label: str, plan: Plan) -> None:
        if not self._filling and plan != self.session.plan:
            self.wanted.emit(Change(label, replace(self.session, plan=plan)))


def _add(form: QFormLayout, words: str, field: QWidget) -> None:
    """A line whose words are as wide as all others', beside the middle of the field."""
    label = QLabel(words)
    label.setMinimumWidth(LABEL)
    label.setMinimumHeight(field.sizeHint().height())
    label.setBuddy(field)
    form.addRow(label, field)


def _with_effect(effect: str, plan: Plan, state: str) -> Plan:
    return replace(plan, effects={**plan.effects, effect: state})
