"""Figures: the right things at the right places, small files, nothing clipped; and the model's curve."""

import csv
from io import StringIO
from math import cos, radians
from xml.etree import ElementTree

import numpy as np
import pytest

from made_up import EPOCH, INCLINATION, PERIOD, R1, R2, made_up_photometry, made_up_session
from made_up import made_up_solution as solution_of
from pages import pdf_size, png_size
from shadowscale.sheet.figure_data import around, eclipse_window
from shadowscale.sheet.figure_frame import drawing_style
from shadowscale.sheet.figure_points import points_picture
from shadowscale.sheet.figures import DOTS_AN_INCH, FIGURES, FORMATS, make_figure, saved
from shadowscale.sheet.model_curve import model_curve
from shadowscale.sheet.showing import shown_of


@pytest.fixture(autouse=True)
def style():
    with drawing_style():
        yield


@pytest.fixture(scope="module")
def session():
    return made_up_session(("V", "I"))


@pytest.fixture(scope="module")
def shown(session):
    return shown_of(session.solution, session.photometry, session.velocities)


def drawn(name, shown):
    """A figure after it was drawn, when all places are settled, and what drew it."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg

    figure = make_figure(name, shown)
    canvas = FigureCanvasAgg(figure)
    canvas.draw()
    return figure, canvas.get_renderer()


def axes_of(name, shown):
    return make_figure(name, shown).axes


@pytest.mark.parametrize("name", FIGURES)
@pytest.mark.parametrize("kind", FORMATS)
def test_outside_readers_open_every_figure_at_its_size(name, kind, shown):
    width, height = FIGURES[name].size(shown)
    content = saved(make_figure(name, shown), kind)
    if kind == "png":
        expected = [round(DOTS_AN_INCH * each) for each in (width, height)]
        assert png_size(content) == pytest.approx(expected, abs=1)
    elif kind == "pdf":
        assert pdf_size(content) == pytest.approx((72 * width, 72 * height), abs=0.1)
    else:
        root = ElementTree.fromstring(content)
        assert float(root.get("width").removesuffix("pt")) == pytest.approx(72 * width)
        assert b"pixelated" not in content


@pytest.mark.parametrize("name", FIGURES)
def test_nothing_is_clipped_at_the_edge_of_a_figure(name, shown):
    figure, renderer = drawn(name, shown)
    width, height = figure.bbox.width, figure.bbox.height
    for axes in figure.axes:
        box = axes.get_tightbbox(renderer)
        assert box.x0 >= -0.5, name
        assert box.y0 >= -0.5, name
        assert box.x1 <= width + 0.5, name
        assert box.y1 <= height + 0.5, name


@pytest.mark.parametrize("name", ["light_curve", "eclipses", "velocities", "minima"])
def test_panels_do_not_overlap(name, shown):
    boxes = [axes.get_position() for axes in axes_of(name, shown)]
    for number, one in enumerate(boxes):
        for other in boxes[number + 1 :]:
            apart = (
                one.x1 <= other.x0 or other.x1 <= one.x0 or one.y1 <= other.y0 or other.y1 <= one.y0
            )
            assert apart


def test_axes_have_the_labels_of_the_trade(shown):
    light, residual = axes_of("light_curve", shown)[:2]
    assert light.get_ylabel() == "\N{GREEK CAPITAL LETTER DELTA} mag"
    low, high = light.get_ylim()
    assert low > high  # magnitudes grow downward
    assert np.diff(residual.get_ylim()) < 0
    speed = axes_of("velocities", shown)[0]
    assert "[km/s]" in speed.get_ylabel()
    assert axes_of("velocities", shown)[-1].get_xlabel() == "Phase"


def test_flux_is_shown_as_flux():
    session = made_up_session()
    from dataclasses import replace

    table = replace(session.photometry, magnitudes=False)
    light = axes_of("light_curve", shown_of(session.solution, table))[0]
    assert light.get_ylabel() == "Relative flux"
    low, high = light.get_ylim()
    assert low < high


def test_each_eclipse_is_drawn_between_its_contacts(shown):
    axes = axes_of("eclipses", shown)
    assert len(axes) == 2 * 2 * 2  # bands, eclipses, curve and residual
    left, right = axes[0].get_xlim()
    eclipse = shown.eclipses[1]
    assert left < eclipse.first < eclipse.fourth < right
    upright = [line.get_xdata()[0] for line in axes[0].lines if len(set(line.get_xdata())) == 1]
    contacts = (eclipse.first, eclipse.second, eclipse.third, eclipse.fourth)
    assert set(contacts) <= set(upright)


def test_the_system_is_to_scale(shown):
    """Sizes in the figure, in inches, stand to each other as the fractional radii do."""
    from matplotlib.patches import Circle

    figure, _ = drawn("system", shown)
    above = figure.axes[0]
    discs = [patch for patch in above.patches if isinstance(patch, Circle)]
    sizes = sorted(patch.get_window_extent().width for patch in discs)
    a = shown.values["a"]
    assert np.array(sizes) / sizes[-1] == pytest.approx(np.sort([1 / a, R2, R1]) / R1, rel=1e-6)
    for axes in figure.axes:
        x, y = axes.transData.transform([(0, 0), (1, 1)])[1] - axes.transData.transform((0, 0))
        assert x == pytest.approx(y, rel=1e-6)


def test_the_front_star_passes_at_the_impact_parameter(shown):
    """delta = cos i on a circular orbit [a] (any textbook); star 2 in front in primary eclipse."""
    from matplotlib.patches import Circle

    sky = make_figure("system", shown).axes[1]
    front = next(patch for patch in sky.patches if isinstance(patch, Circle) and patch.radius == R2)
    assert np.hypot(*front.center) == pytest.approx(cos(radians(INCLINATION)), rel=1e-3)


def test_correlations_say_their_sign_by_shape_and_their_strength_by_area(shown):
    """r1+r2 against k is -0.42, the only one that is not zero; circles are negative."""
    (mark,) = axes_of("correlations", shown)[0].patches
    assert mark.get_facecolor()[3] == 0
    box = mark.get_path().get_extents()
    assert ((box.x0 + box.x1) / 2, (box.y0 + box.y1) / 2) == pytest.approx((2.0, 3.0))
    assert box.width == pytest.approx(0.9 * 0.42**0.5)


def test_residuals_are_observed_less_model(shown, session):
    points = shown.bands[0]
    rows = np.flatnonzero(session.photometry.band == 0)
    light = session.solution.light
    expected = -2500 * np.log10(session.photometry.flux[rows] / light.model[rows])
    assert points.residual == pytest.approx(expected)


def test_velocities_are_shown_without_the_offsets_of_sources(shown, session):
    star = shown.stars[0]
    table = session.velocities
    offset = session.solution.system.value("offset1", "south")
    south = table.source == table.sources.index("south")
    assert star.velocity[south] == pytest.approx(table.rv1[south] - offset)
    assert star.velocity[~south] == pytest.approx(table.rv1[~south])


def test_phases_are_moved_next_to_an_eclipse(shown):
    window = eclipse_window(shown.eclipses[2])
    moved = around(np.array([-0.52, 0.1, 0.48, 1.49]), window)
    assert moved == pytest.approx([0.48, 0.1, 0.48, 0.49])


def test_minima_are_those_of_the_data(shown):
    cycles = {(item.eclipse, item.cycle) for item in shown.minima}
    assert len(cycles) >= 2
    for item in shown.minima:
        expected = EPOCH + PERIOD * (item.cycle + (0.5 if item.eclipse == 2 else 0.0))
        assert abs(item.time - expected) < 6 * item.error + 1e-4


# Many points


def test_every_point_leaves_its_mark():
    across, down = np.array([0.1, 0.5, 0.9]), np.array([0.9, 0.5, 0.1])
    picture = points_picture(across, down, width=200, height=100, colour="#102030")
    assert picture.shape == (100, 200, 4)
    assert set(map(tuple, picture[..., :3].reshape(-1, 3).tolist())) == {(16, 32, 48)}
    for x, y in zip(across, down):
        assert picture[int(100 * y), int(200 * x), 3] > 50
    assert picture[0, 0, 3] == 0


def test_more_points_are_darker_and_outside_ones_are_left_out():
    random = np.random.default_rng(5)
    thin, thick = 2000, 20000
    across = np.concatenate([random.uniform(0, 0.5, thin), random.uniform(0.5, 1, thick)])
    down = random.uniform(0, 1, across.size)
    alpha = points_picture(across, down, width=400, height=200, colour="#000000")[..., 3]
    assert alpha[:, 205:].mean() > 3 * alpha[:, :195].mean()
    empty = points_picture(across + 1, down, width=400, height=200, colour="#000000")
    assert not empty[..., 3].any()


@pytest.fixture(scope="module")
def many():
    table = made_up_photometry(nights=100, points=1000)
    return shown_of(solution_of(table), table)


@pytest.mark.parametrize("kind", FORMATS)
def test_a_hundred_thousand_points_give_small_files(kind, many):
    assert many.bands[0].phase.size == 100_000
    with_points = saved(make_figure("light_curve", many), kind)
    assert len(with_points) < 400_000
    assert len(saved(make_figure("eclipses", many), kind)) < 400_000


# The model's curve


def test_the_model_curve_reads_back(shown, session):
    rows = list(csv.DictReader(StringIO(model_curve(session.solution))))
    assert list(rows[0]) == ["phase", "light[V]", "light[I]", "rv1", "rv2"]
    phase = np.array([float(row["phase"]) for row in rows])
    assert np.all(np.diff(phase) > 0)
    assert (phase[0], phase[-1]) == (-0.25, 0.75)
    speed = np.array([float(row["rv1"]) for row in rows])
    system = session.solution.system
    # circular orbit: extremes gamma -+ K at the quadratures
    assert speed.min() == pytest.approx(system.value("gamma1") - system.value("K1"), abs=0.01)
    light = np.array([float(row["light[V]"]) for row in rows])
    assert phase[light.argmin()] == pytest.approx(0.0, abs=1e-3)
    inside = np.abs(phase) < shown.eclipses[1].duration / 2
    assert inside.sum() > 200
