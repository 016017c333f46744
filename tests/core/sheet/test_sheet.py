"""The sheet and its renderings, from an invented solution."""

import csv
import json
import re
from dataclasses import replace
from io import StringIO
from math import isnan, nan

import jsonschema
import numpy as np
import pytest

from made_up import made_up_findings, made_up_session
from shadowscale.fit.solution import DERIVED, Estimate
from shadowscale.judge.finding import PASS, Finding
from shadowscale.quantities import QUANTITIES, SYSTEM
from shadowscale.sheet import RENDERINGS, as_csv, as_ecsv, as_json, as_tex, make_sheet
from shadowscale.sheet.as_json import schema

# The names that people and scripts rely on, in the documented order.
NAMES = [
    "period",
    "epoch",
    "radius_sum",
    "radius_ratio",
    "r1",
    "r2",
    "inclination",
    "impact1",
    "impact2",
    "ecosw",
    "esinw",
    "eccentricity",
    "omega",
    "K1",
    "K2",
    "gamma1",
    "gamma2",
    "mass_ratio",
    "a",
    "M1",
    "M2",
    "R1",
    "R2",
    "logg1",
    "logg2",
    "density1",
    "density2",
    "vsync1",
    "vsync2",
    "teff1",
    "teff2",
    "L1",
    "L2",
    "Mbol1",
    "Mbol2",
    "distance",
    "T14_1",
    "T23_1",
    "T14_2",
    "T23_2",
    "depth1",
    "depth2",
]


def sheet_for(session, **changes):
    solution = replace(session.solution, **changes)
    return make_sheet(
        solution,
        session.photometry,
        velocities=session.velocities,
        audit=session.audit,
        command=session.command,
        seed=4,
    )


@pytest.fixture(scope="module")
def session():
    return made_up_session(("V", "I"))


@pytest.fixture(scope="module")
def sheet(session):
    return sheet_for(session)


@pytest.fixture(scope="module")
def document(sheet):
    return json.loads(as_json(sheet))


def test_a_tied_quantity_says_what_it_follows(session):
    solution = session.solution
    tied = replace(solution.system, ties={"gamma2": "gamma1"})
    estimates = {**solution.estimates, "gamma2": solution.estimates["gamma1"]}
    found = sheet_for(session, system=tied, estimates=estimates)

    (row,) = [each for each in csv.DictReader(StringIO(as_csv(found))) if each["name"] == "gamma2"]
    assert row["source"] == "tied to gamma1"
    assert '"tied to gamma1"' in as_json(found)


def test_the_json_sheet_follows_its_schema(document):
    jsonschema.validate(document, schema())


def test_every_promised_name_is_given_or_its_absence_told(document):
    checks = [item["check"] for item in document["audit"]]
    told = {name.removeprefix("absent: ") for name in checks if name.startswith("absent: ")}
    for name in NAMES:
        assert (name in document["quantities"]) != (name in told), name
    assert {name for name, item in QUANTITIES.items() if item.scope == SYSTEM} == set(NAMES)


def test_an_absence_says_why(document):
    (line,) = [item for item in document["audit"] if item["check"] == "absent: distance"]
    assert line["words"].startswith("distance is not given: needs a magnitude")
    assert (line["value"], line["verdict"]) == (None, "pass")


def test_what_the_audit_told_is_not_told_again(session):
    mine = Finding("absent: distance", None, None, PASS, "no distance", "x")
    sheet = make_sheet(session.solution, session.photometry, audit=(mine,))
    assert [item for item in sheet.audit if item.check == "absent: distance"] == [mine]


def test_a_number_has_its_unit_error_and_origin(document, session):
    estimate = session.solution.estimates["M1"]
    assert document["quantities"]["M1"] == {
        "value": estimate.value,
        "minus": estimate.minus,
        "plus": estimate.plus,
        "unit": "solMass",
        "how": "derived",
        "meaning": "mass of star 1",
        "source": QUANTITIES["M1"].source,
    }
    assert document["quantities"]["ecosw"]["minus"] is None
    assert document["quantities"]["radius_ratio"]["prior"] == {"value": 0.78, "sigma": 0.05}


def test_bands_hold_their_quantities_and_limb_darkening_by_name(document):
    band = document["bands"]["I"]
    assert band["surface_brightness_ratio"]["value"] == 0.74
    assert band["light_ratio"]["how"] == "derived"
    assert band["limb_darkening"]["law"] == "power-2"
    assert list(band["limb_darkening"]["star1"]) == ["c", "alpha"]
    assert band["limb_darkening"]["star2"]["c"]["value"] == 0.60
    assert band["rms"] == 0.004
    assert document["sources"]["south"]["offset1"]["value"] == 0.3


def test_rows_that_take_no_part_are_counted(document):
    assert document["outliers"] == {
        "quality flag 1": 1,
        "outlier of the fit": 1,
        "no measurement": 1,
        "unreadable": 2,
    }
    light, speed = document["provenance"]["inputs"]
    assert (light["name"], light["used"]) == ("nights.csv", 2 * 720 - 2)
    assert (speed["name"], speed["used"]) == ("velocities.csv", 24)


def test_provenance_says_what_made_the_sheet(document):
    made = document["provenance"]
    assert made["program"].startswith("shadowscale ")
    assert set(made["versions"]) >= {"shadowscale", "python", "numpy", "scipy", "numba", "astropy"}
    assert (made["seed"], made["time_scale"]) == (4, "BJD_TDB")
    assert made["command"].startswith("shadowscale solve")


def test_what_is_not_a_number_is_null_in_json_and_empty_in_tables(session):
    odd = {**session.solution.estimates, "M1": Estimate(nan, nan, nan, DERIVED)}
    sheet = sheet_for(session, estimates=odd)
    assert json.loads(as_json(sheet))["quantities"]["M1"]["value"] is None
    for text in (as_json(sheet), as_csv(sheet), as_ecsv(sheet)):
        assert not re.search(r"\bnan\b|\binf\b", text, re.IGNORECASE)


def test_a_fit_without_velocities_has_no_masses():
    sheet = sheet_for(made_up_session(velocities=False))
    document = json.loads(as_json(sheet))
    jsonschema.validate(document, schema())
    assert "M1" not in document["quantities"]
    assert document["sources"] == {}
    assert document["fit"]["rms_velocity"] == {}


def flat(document):
    """Key to number and errors, as the JSON sheet has them."""
    found = dict(document["quantities"])
    for label, band in document["bands"].items():
        limb = band["limb_darkening"]
        found |= {
            f"{name}[{label}]": item
            for name, item in band.items()
            if "value" in (item if isinstance(item, dict) else {})
        }
        for star in (1, 2):
            for number, item in enumerate(limb[f"star{star}"].values(), 1):
                found[f"limb_darkening{star}[{label}].{number}"] = item
    for label, source in document["sources"].items():
        found |= {f"{name}[{label}]": item for name, item in source.items()}
    return {
        name: tuple(item[part] for part in ("value", "minus", "plus"))
        for name, item in found.items()
    }


def test_the_csv_sheet_says_the_same(sheet, document):
    rows = list(csv.DictReader(StringIO(as_csv(sheet))))
    numbers = {
        row["name"]: tuple(
            float(row[part]) if row[part] else None for part in ("value", "minus", "plus")
        )
        for row in rows
        if row["section"] == "quantity"
    }
    assert numbers == flat(document)
    fit = {row["name"]: row["value"] for row in rows if row["section"] == "fit"}
    assert float(fit["chi2"]) == document["fit"]["chi2"]
    assert float(fit["rms_light[V]"]) == document["fit"]["rms_light"]["V"]
    verdicts = [row["how"] for row in rows if row["section"] == "audit"]
    assert verdicts == [item["verdict"] for item in document["audit"]]


def test_astropy_reads_the_ecsv_sheet(sheet, document):
    from astropy.table import Table

    table = Table.read(as_ecsv(sheet), format="ascii.ecsv")
    numbers = {}
    for row in table:
        cells = [row[part] for part in ("value", "minus", "plus")]
        numbers[str(row["name"])] = tuple(
            None if np.ma.is_masked(cell) else float(cell) for cell in cells
        )
    assert numbers == flat(document)
    assert table.meta["time_scale"] == "BJD_TDB"
    assert table["value"].dtype == np.float64


def test_the_tex_sheet_is_a_table_of_four_columns(sheet, document):
    text = as_tex(sheet)
    lines = [re.sub(r" % .*", "", line) for line in text.splitlines()]
    rows = [line for line in lines if line.endswith(r"\\")]
    data = [row for row in rows if not row.startswith(r"\multicolumn")]
    assert all(row.count("&") == 3 for row in data)
    assert len(data) == 1 + len(flat(document))
    assert text.count("{") == text.count("}")
    assert all(row.count("$") % 2 == 0 for row in rows)
    assert r"$M_1$ & $1.2734 \pm 0.0090$ & $\mathcal{M}^{\mathrm N}_{\odot}$ & derived \\" in rows
    assert r"$e\cos\omega$ & $\mathit{0}$ &  & fixed \\" in rows
    assert text.index(r"\begin{tabular}") < text.index(r"\toprule") < text.index(r"\end{tabular}")


def test_a_band_with_special_letters_is_escaped_for_tex():
    session = made_up_session(("g_%&#",))
    text = as_tex(sheet_for(session))
    assert r"Band g\_\%\&\#" in text


def test_unequal_errors_are_written_apart_for_tex(session):
    odd = {**session.solution.estimates, "M1": Estimate(1.2, 0.01, 0.02, DERIVED)}
    assert r"$1.200^{+0.020}_{-0.010}$" in as_tex(sheet_for(session, estimates=odd))


@pytest.mark.parametrize("name", RENDERINGS)
def test_every_rendering_is_text_that_ends_its_last_line(name, sheet):
    text = RENDERINGS[name](sheet)
    assert text.endswith("\n")
    assert "mass of star 1" in text
    assert "Kepler's third law" in text
    assert "0.78" in text  # the prior of k


def test_every_derived_number_has_the_source_of_its_formula_in_every_table(sheet, document):
    from astropy.table import Table

    derived = {
        entry.key: entry.source for entry in sheet.entries() if entry.estimate.how == DERIVED
    }
    assert len(derived) > 10
    assert all(derived.values())
    assert document["quantities"]["r1"]["source"] == derived["r1"]
    assert "source" not in document["quantities"]["period"]
    spread = {row["name"]: row for row in csv.DictReader(StringIO(as_csv(sheet)))}
    astro = {str(row["name"]): row for row in Table.read(as_ecsv(sheet), format="ascii.ecsv")}
    for name, source in derived.items():
        assert spread[name]["source"] == astro[name]["source"] == source
    for row in (spread["radius_ratio"], astro["radius_ratio"]):
        assert (float(row["prior"]), float(row["prior_sigma"])) == (0.78, 0.05)
    assert spread["M1"]["prior"] == ""
    assert np.ma.is_masked(astro["M1"]["prior"])


def test_findings_keep_their_order_before_the_absences(document):
    checks = [item["check"] for item in document["audit"]]
    assert checks[: len(made_up_findings())] == [item.check for item in made_up_findings()]
    assert not isnan(document["audit"][0]["value"])
