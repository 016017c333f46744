"""The panes of the bench: each shows a session and says what is wanted; none knows another."""

from shadowscale_app.panes.doubts import DoubtsPane
from shadowscale_app.panes.eclipses import EclipsesPane
from shadowscale_app.panes.folded import FoldedPane
from shadowscale_app.panes.help import HelpPane
from shadowscale_app.panes.kept import KeptPane
from shadowscale_app.panes.mass_radius import MassRadiusPane
from shadowscale_app.panes.pairs import PairsPane
from shadowscale_app.panes.pane import Pane
from shadowscale_app.panes.periods import PeriodsPane
from shadowscale_app.panes.quantities import QuantitiesPane
from shadowscale_app.panes.series import SeriesPane
from shadowscale_app.panes.settings import SettingsPane
from shadowscale_app.panes.stars import StarsPane
from shadowscale_app.panes.to_scale import ToScalePane
from shadowscale_app.panes.velocities import VelocitiesPane

KINDS: tuple[type[Pane], ...] = (
    FoldedPane,
    SeriesPane,
    EclipsesPane,
    VelocitiesPane,
    PairsPane,
    PeriodsPane,
    MassRadiusPane,
    ToScalePane,
    StarsPane,
    QuantitiesPane,
    SettingsPane,
    DoubtsPane,
    KeptPane,
    HelpPane,
)


def all_panes() -> tuple[Pane, ...]:
    """One of each."""
    return tuple(kind() for kind in KINDS)
