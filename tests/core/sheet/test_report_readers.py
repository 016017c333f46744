"""The sheet's table through TeX and astropy, the report through poppler, as readers would use them."""

import shutil
import subprocess

import pytest

from made_up import made_up_session
from shadowscale.jobs.reporting import report_of
from shadowscale.jobs.results import sheet_of
from shadowscale.quantities import QUANTITIES
from shadowscale.sheet import as_ecsv, as_tex
from shadowscale.sheet.figures import all_figures
from shadowscale.sheet.references import REFERENCES, bibliography
from shadowscale.sheet.report import make_document
from shadowscale.sheet.report_pdf import as_pdf

ARTICLE = r"\documentclass{article}\usepackage{booktabs}\begin{document}\input{sheet}\end{document}"


@pytest.fixture(scope="module")
def sheet():
    return sheet_of(made_up_session(("V", "I_%&#")))


def test_tex_sets_the_table_in_a_plain_article(sheet, tmp_path):
    engine = shutil.which("pdflatex")
    if engine is None:
        pytest.skip("no pdflatex here; apt-get install texlive-latex-recommended")
    (tmp_path / "sheet.tex").write_text(as_tex(sheet))
    (tmp_path / "paper.tex").write_text(ARTICLE)
    done = subprocess.run(
        [engine, "-interaction=nonstopmode", "-halt-on-error", "paper.tex"],
        cwd=tmp_path,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stdout[-2000:]
    assert "Overfull" not in done.stdout
    assert (tmp_path / "paper.pdf").stat().st_size > 10_000


def test_bibtex_takes_every_reference_without_a_warning(tmp_path):
    engine = shutil.which("bibtex")
    if engine is None:
        pytest.skip("no bibtex here; apt-get install texlive-binaries")
    (tmp_path / "works.bib").write_text(bibliography(REFERENCES))
    (tmp_path / "paper.aux").write_text(
        "\\relax\n\\citation{*}\n\\bibstyle{plain}\n\\bibdata{works}\n"
    )
    done = subprocess.run(
        [engine, "paper"], cwd=tmp_path, capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stdout
    assert "Warning" not in done.stdout
    made = (tmp_path / "paper.bbl").read_text()
    assert made.count("\\bibitem") == len(REFERENCES)


def test_astropy_gives_every_number_its_unit(sheet):
    from astropy import units
    from astropy.table import Table

    table = Table.read(as_ecsv(sheet), format="ascii.ecsv")
    given = {str(row["name"]): row["value"] * units.Unit(str(row["unit"])) for row in table}
    assert given["M1"].to_value("kg") == pytest.approx(
        sheet.quantities["M1"].estimate.value * 1.98841e30, rel=1e-5
    )  # nominal solar mass, IAU 2015 B3 with CODATA 2018 G
    assert given["radius_ratio"].unit == units.dimensionless_unscaled
    for name, quantity in given.items():
        if name in QUANTITIES and QUANTITIES[name].unit:
            assert quantity.unit == units.Unit(QUANTITIES[name].unit)


def test_poppler_reads_the_pages_with_every_letter_from_the_file(tmp_path):
    """A reader that has no part in the writing: no complaint, no font of the machine, Greek as Greek."""
    if shutil.which("pdffonts") is None or shutil.which("pdftotext") is None:
        pytest.skip("no poppler here; apt-get install poppler-utils")
    session = made_up_session(("V",))
    report = report_of(session, sheet_of(session))
    figures = all_figures(report.shown)
    (tmp_path / "report.pdf").write_bytes(as_pdf(make_document(report), figures))

    def said(*command):
        done = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, check=True)
        assert done.stderr == ""
        return done.stdout

    fonts = said("pdffonts", "report.pdf").splitlines()
    column = fonts[0].index("emb")
    assert len(fonts) > 5
    assert {line[column : column + 3] for line in fonts[2:]} == {"yes"}
    text = said("pdftotext", "-enc", "UTF-8", "report.pdf", "-")
    for sign in "αρ☉±−Δ":
        assert sign in text, sign
