"""Synthetic systems: what is asked for is what comes out."""

import json
from dataclasses import replace
from math import cos, radians, sin, sqrt

import numpy as np
import pytest

from shadowscale.data import read_photometry, read_velocities
from shadowscale.errors import InputError
from shadowscale.jobs.invented import invented_system
from shadowscale.jobs.simulate import simulate, write_simulation
from shadowscale.jobs.spec import read_spec

SYSTEM = """
[system]
period = 2.5
epoch = 2459000.3
radius_sum = 0.25
radius_ratio = 0.8
inclination = 87.0
K1 = 100.0
K2 = 125.0
gamma1 = -20.0

[bands.V]
surface_brightness_ratio = 0.6
limb_darkening1 = [0.6, 0.5]
limb_darkening2 = [0.6, 0.5]
"""
RUNS = """
[[photometry.runs]]
start = 2459001.0
hours = 60
cadence = 60
"""


def spec_of(tmp_path, text):
    path = tmp_path / "spec.toml"
    path.write_text(text)
    return read_spec(path)


def simulated(tmp_path, text):
    """Tables and truth of a description, read back from the files."""
    simulation = simulate(spec_of(tmp_path, text))
    written = write_simulation(simulation, tmp_path / "out", overwrite=True)
    names = {path.name: path for path in written}
    light = read_photometry([path for name, path in names.items() if name.startswith("photometry")])
    speed = read_velocities([names["velocities.csv"]]) if "velocities.csv" in names else None
    return light, speed, json.loads(names["truth.json"].read_text())["values"]


def test_the_same_seed_gives_the_same_files(tmp_path):
    text = SYSTEM + RUNS
    one = simulate(spec_of(tmp_path, "seed = 1\n" + text)).texts
    again = simulate(spec_of(tmp_path, "seed = 1\n" + text)).texts
    other = simulate(spec_of(tmp_path, "seed = 2\n" + text)).texts
    assert one == again
    assert one["photometry.csv"] != other["photometry.csv"]


def test_truth_has_masses_and_radii_of_keplers_third_law(tmp_path):
    """M sin^3 i with the constant of the IAU 2015 B3 nominal values, 1.03614907e-7."""
    _, _, truth = simulated(tmp_path, SYSTEM + RUNS)
    cubed = sin(radians(87.0)) ** 3
    assert truth["M1"] == pytest.approx(1.03614907e-7 * 2.5 * 225**2 * 125 / cubed, rel=1e-8)
    assert truth["M2"] == pytest.approx(1.03614907e-7 * 2.5 * 225**2 * 100 / cubed, rel=1e-8)
    assert truth["a"] == pytest.approx(1.97656850e-2 * 2.5 * 225 / sin(radians(87.0)), rel=1e-8)
    assert truth["R1"] == pytest.approx(truth["a"] * 0.25 / 1.8, rel=1e-12)
    assert truth["impact1"] == pytest.approx(cos(radians(87.0)) / (0.25 / 1.8), rel=1e-12)


@pytest.mark.parametrize(
    ("lines", "expected"),
    [
        ({"r1": 0.15, "r2": 0.12}, {"radius_sum": 0.27, "radius_ratio": 0.8}),
        (
            {"eccentricity": 0.2, "omega": 30.0},
            {"ecosw": 0.2 * sqrt(3) / 2, "esinw": 0.1},
        ),
        ({"K1": 90.0, "mass_ratio": 0.75}, {"K1": 90.0, "K2": 120.0}),
    ],
)
def test_the_other_form_of_a_quantity_means_the_same(tmp_path, lines, expected):
    spec = spec_of(tmp_path, SYSTEM + RUNS)
    replaced = {"r1": ("radius_sum", "radius_ratio"), "K1": ("K1", "K2")}.get(next(iter(lines)), ())
    values = {name: value for name, value in spec.system.items() if name not in replaced}
    system = invented_system(replace(spec, system={**values, **lines}), tmp_path)
    for name, value in expected.items():
        assert system.values[name] == pytest.approx(value, rel=1e-12)


def test_masses_in_the_description_come_back_as_derived_masses(tmp_path):
    text = SYSTEM.replace("K1 = 100.0\nK2 = 125.0", "M1 = 1.5\nM2 = 1.2\necosw = 0.1\nesinw = 0.2")
    _, _, truth = simulated(tmp_path, text + RUNS)
    assert (truth["M1"], truth["M2"]) == pytest.approx((1.5, 1.2), rel=1e-10)


def test_light_outside_eclipse_has_the_magnitude_and_scatter_asked_for(tmp_path):
    noise = "[photometry.noise]\nscatter = 0.01\n"
    light, _, _ = simulated(
        tmp_path, SYSTEM.replace("[bands.V]", "[bands.V]\nmagnitude = 11.5") + RUNS + noise
    )
    phase = np.mod((light.time - 2459000.3) / 2.5, 1.0)
    outside = light.value[(abs(phase - 0.25) < 0.1) | (abs(phase - 0.75) < 0.1)]
    assert light.magnitudes
    # errors of mean and standard deviation of n points; five of them
    assert outside.mean() == pytest.approx(11.5, abs=5 * 0.01 / sqrt(outside.size))
    assert outside.std() == pytest.approx(0.01, rel=5 / sqrt(2 * outside.size))
    assert light.value_error == pytest.approx(np.full(light.time.size, 0.01))


def test_depths_are_those_of_the_truth(tmp_path):
    light, _, truth = simulated(tmp_path, SYSTEM + RUNS + "[photometry.noise]\nscatter = 1e-5\n")
    phase = np.mod((light.time - 2459000.3) / 2.5 + 0.25, 1.0) - 0.25
    for middle, name in ((0.0, "depth1"), (0.5, "depth2")):
        deepest = np.abs(phase - middle) < 60 / 86400 / 2.5
        lost = 1 - 10 ** (-0.4 * (light.value[deepest].max() - 12.0))
        assert lost == pytest.approx(truth[name], abs=1e-3)


def test_the_red_noise_is_exponentially_correlated(tmp_path):
    """An Ornstein-Uhlenbeck process: autocorrelation exp(-lag/scale) (textbook)."""
    text = SYSTEM.replace("inclination = 87.0", "inclination = 60.0") + RUNS.replace(
        "60\n", "600\n", 1
    )
    noise = "[photometry.noise]\nscatter = 1e-5\nred = 0.01\nred_time = 0.5\n"
    light, _, _ = simulated(tmp_path, text + noise)
    away = light.value - light.value.mean()
    assert away.std() == pytest.approx(0.01, rel=0.15)
    for lag in (15, 30):
        found = np.mean(away[lag:] * away[:-lag]) / np.mean(away**2)
        assert found == pytest.approx(np.exp(-lag / 30), abs=0.12)


def test_outliers_flags_gaps_and_missing_errors_are_as_described(tmp_path):
    text = SYSTEM + RUNS.replace("cadence = 60", "cadence = 60\ngaps = [[10, 20]]")
    text += "[photometry.noise]\nscatter = 0.002\noutliers = 0.02\nflagged = 0.01\n"
    light, _, _ = simulated(
        tmp_path, text.replace("[[photometry", "[photometry]\nerrors = false\n[[photometry", 1)
    )
    hours = (light.time - 2459001.0) * 24
    assert not np.any((hours > 10.001) & (hours < 19.999))
    assert light.errors_from_scatter == (True,)
    assert 10 < (~light.used).sum() < 60  # one in a hundred of 3001 carries a flag


def test_time_formats_are_read_back_as_full_dates(tmp_path):
    for scale, offset in (
        ("BJD_TDB", 2457000),
        ("HJD", 2450000),
        ("BTJD", 2457000),
        ("MJD", 2400000.5),
    ):
        head = f'[photometry]\ntime_scale = "{scale}"\ntime_offset = {offset}\n'
        light, _, _ = simulated(tmp_path, SYSTEM + head + RUNS)
        assert light.time[0] == pytest.approx(2459001.0, abs=1e-6)


def test_flux_is_printed_where_flux_is_asked_for(tmp_path):
    light, _, _ = simulated(tmp_path, SYSTEM + '[photometry]\nkind = "flux"\n' + RUNS)
    assert not light.magnitudes
    assert np.median(light.value) == pytest.approx(1.0, abs=0.01)


def test_two_bands_share_a_file_or_have_their_own(tmp_path):
    more = SYSTEM + SYSTEM[SYSTEM.index("[bands.V]") :].replace("bands.V", "bands.I")
    one, _, _ = simulated(tmp_path, more + RUNS)
    assert sorted(one.bands) == ["I", "V"]
    two, _, _ = simulated(tmp_path, more + '[photometry]\nfiles = "band"\n' + RUNS)
    assert sorted(two.bands) == ["I", "V"]
    assert len(two.files) == 2


VELOCITIES = """
[velocities]
start = 2459000
end = 2459100
[[velocities.sources]]
name = "north"
number = 200
error1 = 0.5
error2 = 1.0
[[velocities.sources]]
name = "south"
number = 150
error1 = 0.5
offset1 = 3.0
stars = 1
"""


def test_velocities_follow_the_orbit_with_errors_and_offsets(tmp_path):
    _, speed, truth = simulated(tmp_path, SYSTEM + RUNS + VELOCITIES)
    angle = 2 * np.pi * (speed.time - 2459000.3) / 2.5
    north = speed.source == speed.sources.index("north")
    # circular orbit: star 1 approaches after its own eclipse (model conventions)
    away1 = speed.rv1 - (-20.0 - 100.0 * np.sin(angle))
    away2 = speed.rv2 - (-20.0 + 125.0 * np.sin(angle))
    assert away1[north].mean() == pytest.approx(0.0, abs=5 * 0.5 / sqrt(200))
    assert away1[~north].mean() == pytest.approx(3.0, abs=5 * 0.5 / sqrt(150))
    assert away1[north].std() == pytest.approx(0.5, rel=5 / sqrt(400))
    assert away2[north].std() == pytest.approx(1.0, rel=5 / sqrt(400))
    assert np.isnan(speed.rv2[~north]).all()
    assert truth["offset1[south]"] == 3.0
    assert np.all((speed.time > 2459000) & (speed.time < 2459103))


WRONG = [
    ("perod = 1.0\n" + SYSTEM + RUNS, r"column 'perod': expected 'period|column 'perod'"),
    (
        SYSTEM.replace("inclination", "inclinaton") + RUNS,
        r"column 'system\.inclinaton': expected 'inclination'",
    ),
    (SYSTEM.replace("limb_darkening1", "limb_darkning1") + RUNS, r"expected 'limb_darkening1'"),
    (SYSTEM.replace("inclination = 87.0", "inclination = 97.0") + RUNS, "to 90, found 97"),
    (
        SYSTEM.replace("inclination = 87.0", 'inclination = "high"') + RUNS,
        "expected a number, found 'high'",
    ),
    (SYSTEM.replace("period = 2.5\n", "") + RUNS, "a value for 'period', found none"),
    (SYSTEM.replace("[0.6, 0.5]", "[0.6]", 1) + RUNS, r"2 coefficients \(c, alpha\)"),
    (
        SYSTEM.replace("K1 =", "r1 = 0.1\nK1 =") + RUNS,
        "either radius_sum, radius_ratio or r1, r2, found both",
    ),
    (SYSTEM.replace("K1 =", "ecosw = 0.9\nK1 =") + RUNS, "stars that do not touch"),
    (
        SYSTEM.replace("K2 = 125.0\n", "") + RUNS + VELOCITIES,
        "a value for 'K2', since north measures it",
    ),
    ('law = "cubic"\n' + SYSTEM + RUNS, "column 'law': expected one of"),
    (SYSTEM + RUNS.replace("60\n", "60\nbands = ['B']\n", 1), r"bands of V, found B"),
    (SYSTEM + RUNS.replace("cadence = 60", "cadence = 0"), "cadence and repeat above 0"),
    (SYSTEM + RUNS.replace("hours = 60", "hours = 6e9"), "at most 5000000 points"),
    (SYSTEM + '[photometry]\nkind = "counts"\n' + RUNS, "magnitude or flux, found 'counts'"),
    ("seed = -5\n" + SYSTEM + RUNS, "column 'seed': expected a whole number, 0 or more, found -5"),
    (SYSTEM + "third_light = 1.0\n" + RUNS, "less than all of the light, 1, found 1"),
    (
        SYSTEM.replace("ratio = 0.6", "ratio = -0.6") + RUNS,
        r"column 'bands\.V\.surface_brightness_ratio': expected 0 or more",
    ),
    (SYSTEM, r"column 'photometry'|a value for 'photometry'"),
    ("a = [1,\n", r"line 2: expected TOML, found Invalid value"),
    ("a = 1\nb = =\n", r"line 2, column '5': expected TOML"),
    ('{"a": }', r"line 1, column '7': expected JSON"),
]


@pytest.mark.parametrize(("text", "words"), WRONG, ids=[words for _, words in WRONG])
def test_a_wrong_description_says_where(tmp_path, text, words):
    with pytest.raises(InputError, match=words):
        simulate(spec_of(tmp_path, text))


def test_no_description_at_all(tmp_path):
    with pytest.raises(InputError, match="a description of a system, found no such file"):
        read_spec(tmp_path / "none.toml")


def test_json_is_taken_as_well(tmp_path):
    path = tmp_path / "spec.json"
    band = {
        "surface_brightness_ratio": 0.6,
        "limb_darkening1": [0.6, 0.5],
        "limb_darkening2": [0.6, 0.5],
    }
    system = {"period": 2.5, "epoch": 2459000.3, "r1": 0.1, "r2": 0.1, "inclination": 88}
    runs = [{"start": 2459001, "hours": 5, "cadence": 60}]
    path.write_text(
        json.dumps({"system": system, "bands": {"V": band}, "photometry": {"runs": runs}})
    )
    texts = simulate(read_spec(path)).texts
    assert set(texts) == {"photometry.csv", "truth.json"}
    assert "M1" not in json.loads(texts["truth.json"])["values"]
