"""Options to a plan, and what is said about wrong ones."""

import pytest

from shadowscale.cli import main
from shadowscale.cli.parser import Parser
from shadowscale.cli.plan_options import add_plan_options, given_options, plan_from
from shadowscale.errors import UsageError
from shadowscale.fit.plan import Plan, Prior
from shadowscale.light.laws import LAWS


def parsed(*words):
    parser = Parser(prog="shadowscale solve")
    add_plan_options(parser)
    return parser.parse_strictly(words)


def plan(*words):
    return plan_from(parsed(*words))


def test_no_options_make_the_default_plan():
    assert plan() == Plan()
    assert given_options(parsed()) == []


def test_every_option_reaches_the_plan():
    words = """--period 2.5 --epoch 2459000.25 --exposure 1800 --law quadratic --wavelength V=550
    --wavelength TESS=790 --limb-table t.csv --orbit eccentric --levels night --light-time off
    --effect ellipsoidal=predicted --free third_light[V] --fix ecosw=-0.01
    --fix limb_darkening1[V]=0.40,0.25 --prior K1=90,0.5 --prior limb_darkening2[V]=0.4,0.1,0.2,0.05
    --tie gamma2=gamma1 --tie third_light[I]=third_light[V] --intervals covariance --seed 7 --teff1 6200,100 --teff2 5900,120 --apparent-magnitude 9.1,0.02
    --bolometric-correction1 -0.05,0.02 --bolometric-correction2 -0.1,0.02 --extinction 0.1,0.03"""
    assert plan(*words.split()) == Plan(
        period=2.5,
        epoch=2459000.25,
        exposure=1800.0,
        law="quadratic",
        wavelengths={"V": 550.0, "TESS": 790.0},
        limb_table="t.csv",
        orbit="eccentric",
        levels="night",
        light_time="off",
        effects={"ellipsoidal": "predicted"},
        free=("third_light[V]",),
        fixed={"ecosw": (-0.01,), "limb_darkening1[V]": (0.40, 0.25)},
        priors=(
            Prior("K1", (90.0,), (0.5,)),
            Prior("limb_darkening2[V]", (0.4, 0.2), (0.1, 0.05)),
        ),
        ties={"gamma2": "gamma1", "third_light[I]": "third_light[V]"},
        seed=7,
        teff1=(6200.0, 100.0),
        teff2=(5900.0, 120.0),
        apparent_magnitude=(9.1, 0.02),
        bolometric_correction1=(-0.05, 0.02),
        bolometric_correction2=(-0.1, 0.02),
        extinction=(0.1, 0.03),
    )
    asked = {word for word in words.split() if word.startswith("--")}
    assert set(given_options(parsed(*words.split()))) == asked


@pytest.mark.parametrize("law", LAWS)
def test_every_law_may_be_asked_for(law):
    assert plan("--law", law).law == law


WRONG = [
    ("--period 0", "--period: expected a number above 0, found '0'"),
    ("--period two", "--period: expected a number above 0, found 'two'"),
    ("--period nan", "--period: expected a number above 0, found 'nan'"),
    ("--epoch inf", "--epoch: expected a number, found 'inf'"),
    ("--epoch", "--epoch: expected a value, found 'nothing'"),
    ("--exposure=-1", "--exposure: expected seconds, 0 or more, found '-1'"),
    ("--law quadratc", "did you mean 'quadratic'?"),
    ("--orbit round", "--orbit: expected one of circular, eccentric, auto, found 'round'"),
    ("--intervals bootstrap", "--intervals: expected one of covariance, found 'bootstrap'"),
    ("--levels nights", "did you mean 'night'?"),
    ("--light-time on", "--light-time: expected one of auto, off, found 'on'"),
    ("--effect tides=off", "--effect: expected one of ellipsoidal, reflection, beaming"),
    ("--effect beaming=yes", "expected one of off, predicted, fitted, found 'yes'"),
    ("--effect beaming", "--effect: expected NAME=STATE, found 'beaming'"),
    ("--wavelength V", "--wavelength: expected BAND=NANOMETRES, found 'V'"),
    ("--wavelength V=-5", "--wavelength: expected a number above 0, found '-5'"),
    ("--wavelength V=1 --wavelength V=2", "'V' only once"),
    ("--free third_ligth", "did you mean 'third_light'?"),
    ("--tie gamma2", "--tie: expected NAME=NAME"),
    (
        "--tie M2=M1",
        "--tie: expected a quantity that is fitted; of a derived one all that can be said is --prior",
    ),
    (
        "--free M1",
        "--free: expected a quantity that is fitted; of a derived one all that can be said is --prior",
    ),
    (
        "--fix r1=0.2",
        "--fix: expected a quantity that is fitted; of a derived one all that can be said is --prior",
    ),
    ("--fix inclination", "--fix: expected NAME=VALUE, found 'inclination'"),
    ("--fix inclination=95", "to 90, found '95'"),
    ("--fix ecosw=0.1,0.2", "--fix: expected one value, found 'ecosw=0.1,0.2'"),
    ("--fix ecosw=", "--fix: expected NAME=VALUE, found 'ecosw='"),
    ("--prior M1=1.2", "--prior: expected NAME=VALUE,SIGMA, found 'M1=1.2'"),
    ("--prior M1=1.2,0", "SIGMA above 0, found 'M1=1.2,0'"),
    ("--prior mass1=1,2", "--prior: expected one of period"),
    ("--prior limb_darkening1[V]=1,2,3", "VALUE,SIGMA for each coefficient"),
    ("--seed", "--seed: expected a value, found 'nothing'"),
    ("--seed -3", "--seed: expected a whole number, 0 or more, found '-3'"),
    ("--seed 1.5", "--seed: expected a whole number, 0 or more, found '1.5'"),
    ("--teff1 6000", "--teff1: expected VALUE,SIGMA, found '6000'"),
    ("--teff1 6000,-5", "--teff1: expected a number above 0, found '-5'"),
    ("--perod 2", "did you mean --period?"),
    ("--per 2", "expected options as --help shows them"),
]


@pytest.mark.parametrize(("words", "told"), WRONG, ids=[words for words, _ in WRONG])
def test_a_wrong_option_says_what_is_allowed(words, told, capsys, tmp_path):
    (tmp_path / "x.csv").write_text("")
    out = str(tmp_path / "out")
    status = main(["solve", str(tmp_path / "x.csv"), "--out", out, *words.split()])
    shown = capsys.readouterr()
    assert status == 2
    assert told in shown.err
    assert shown.out == ""
    with pytest.raises(UsageError, match="expected"):
        plan(*words.split())
