"""The report: its page is whole and self-contained, its pages of PDF say the same, its methods are true."""

import re
from dataclasses import replace
from io import BytesIO

import numpy as np
import pytest

from made_up import made_up_photometry, made_up_session
from pages import Page, pdf_pages, pdf_size
from shadowscale.fit.plan import Plan, Prior
from shadowscale.fit.solution import PROFILE, Alternative, Decision
from shadowscale.jobs.reporting import report_of as make_report
from shadowscale.jobs.results import sheet_of
from shadowscale.quantities import QUANTITIES
from shadowscale.sheet.document import Table, Verdicts
from shadowscale.sheet.figures import FIGURES, all_figures, heights
from shadowscale.sheet.methods import methods_of
from shadowscale.sheet.references import REFERENCES, bibliography
from shadowscale.sheet.report import make_document
from shadowscale.sheet.report_html import as_html
from shadowscale.sheet.report_pages import PAPER, SIDE, heights_of
from shadowscale.sheet.report_pdf import FOOT, TOP, as_pdf, set_document
from shadowscale.sheet.report_tables import GROUPS
from shadowscale.sheet.report_text import text_width
from shadowscale.sheet.report_words import number, value_and_error
from shadowscale.sheet.symbols import flat, marked, runs, symbol_runs


def report_of(session):
    return make_report(session, sheet_of(session))


@pytest.fixture(scope="module")
def report():
    return report_of(made_up_session(("V", "I")))


@pytest.fixture(scope="module")
def document(report):
    return make_document(report)


@pytest.fixture(scope="module")
def figures(report):
    return all_figures(report.shown)


@pytest.fixture(scope="module")
def html(document, figures):
    return as_html(document, figures).decode()


@pytest.fixture(scope="module")
def page(html):
    return Page.read(html)


@pytest.fixture(scope="module")
def pages(document, figures):
    return pdf_pages(as_pdf(document, figures))


def test_the_page_is_well_formed_and_its_links_lead_somewhere(page):
    assert page.trouble == []
    assert len(set(page.ids)) == len(page.ids)
    assert {link.removeprefix("#") for link in page.links} <= set(page.ids)


def test_the_page_needs_no_other_file(page, html):
    assert [link[:15] for link in page.outside if not link.startswith("data:")] == []
    assert not re.search(r"url\((?!#)", html)
    assert "<script" not in html
    assert "@import" not in html


def test_every_local_reference_of_a_picture_stays_in_it(html):
    ids = set(re.findall(r'\bid="([^"]+)"', html))
    used = set(re.findall(r"url\(#([^)]+)\)", html))
    assert used
    assert used <= ids


def test_main_results_come_first(page):
    order = ["The system at a glance", "Quantities", "Bands and sources"]
    assert page.headings[:3] == order
    assert {"Audit", "Methods", "References", "Provenance"} <= set(page.headings)
    first = page.text.index("1.2734")
    assert first < page.text.index("Meaning")


def test_every_number_of_the_sheet_stands_in_the_page(page, report):
    cells = {cell.replace("\N{THIN SPACE}", " ").strip() for row in page.rows for cell in row}
    for entry in report.sheet.quantities.values():
        value, error = value_and_error(entry.estimate)
        assert value in cells
        assert error in cells
        assert entry.meaning in cells


def test_no_quantity_of_the_system_is_left_out_of_the_groups():
    grouped = [name for _, names in GROUPS for name in names]
    system = {name for name, item in QUANTITIES.items() if item.scope == "system"}
    assert set(grouped) == system
    assert len(grouped) == len(set(grouped))


def test_verdicts_are_told_by_sign_word_and_colour(html, report):
    for kind in ("pass", "warn"):
        assert re.search(rf'<li class="{kind}">\s*<svg', html)
        assert f'<strong class="verdict">{kind}</strong>' in html
        assert f"--{kind}:" in html
    assert html.index('<li class="warn">') < html.index('<li class="pass">')


def test_the_page_has_dark_print_and_narrow_styles(html):
    for words in (
        "prefers-color-scheme: dark",
        "@media print",
        "max-width: 42rem",
        "width=device-width",
    ):
        assert words in html
    # lines and letters of the figures follow the page's colour
    assert "var(--ink)" in html.split("<main>", 1)[1]


def test_names_of_people_cannot_break_the_page(figures):
    session = replace(made_up_session(), name="<b>A & B</b> \x02x\x03", command="solve '<i>'")
    document = make_document(report_of(session))
    page = Page.read(as_html(document, figures).decode())
    assert page.trouble == []
    assert "<b>A & B</b> x" in page.text
    assert "solve '<i>'" in page.text


def test_the_pdf_says_the_same_on_pages_of_a4(pages, document, report, figures):
    width, height = pdf_size(as_pdf(document, figures))
    assert (width, height) == pytest.approx((595.28, 841.89), abs=0.01)  # ISO 216
    text = " ".join(" ".join(pages).split())
    for section in document.sections:
        assert section.title in text
    for entry in report.sheet.quantities.values():
        value, error = value_and_error(entry.estimate)
        assert value in text
        assert error in text
    for finding in report.sheet.audit:
        assert " ".join(finding.words.split()) in text
    assert all(f"{number} / {len(pages)}" in text for number, text in enumerate(pages, 1))


def test_the_same_solution_gives_the_same_bytes_at_any_time(document, figures, monkeypatch):
    first = as_pdf(document, figures)
    monkeypatch.setattr("time.time", lambda: 4.0e9)
    assert as_pdf(document, figures) == first
    again = all_figures(report_of(made_up_session(("V", "I"))).shown)
    assert again == figures


def test_a_pdf_keeps_its_words_inside_the_margins(document, figures):
    for page in set_document(document, heights_of(figures)).pages:
        for piece in page.pieces:
            assert piece.x >= SIDE - 1
            assert piece.x + text_width(piece.text, piece.face) <= PAPER[0] - SIDE + 2, piece.text
            assert TOP <= piece.y <= PAPER[1] - FOOT + 12


def test_a_reader_finds_titles_and_every_letter_in_the_file(document, figures):
    """ISO 32000-1 as pypdf reads it: bookmarks lead to their pages, no font is left outside."""
    from pypdf import PdfReader

    reader = PdfReader(BytesIO(as_pdf(document, figures)), strict=True)
    assert reader.metadata == {"/Title": document.title, "/Creator": "shadowscale"}
    assert [item.title for item in reader.outline] == [each.title for each in document.sections]
    for item in reader.outline:
        place = reader.pages[reader.get_destination_page_number(item)]
        assert item.title in place.extract_text()
    embedded = 0
    for resources in every_resource(reader):
        for font in resources["/Font"].values():
            about = font.get_object()
            if about["/Subtype"] == "/Type3":  # matplotlib's, each letter a drawing in the file
                assert about["/CharProcs"]
                continue
            described = about["/DescendantFonts"][0].get_object()["/FontDescriptor"]
            assert described["/FontFile2"].get_data()[:4] == b"\0\1\0\0"
            embedded += 1
    assert embedded


def every_resource(reader):
    """Those of the pages, and of each figure on them."""
    for page in reader.pages:
        yield page["/Resources"]
        for form in page["/Resources"].get("/XObject", {}).values():
            yield form["/Resources"]


def test_the_heights_of_figures_are_known_before_they_are_drawn(report, figures):
    assert heights(report.shown) == pytest.approx(heights_of(figures), abs=1e-6)


def test_figures_stand_as_they_were_drawn_on_their_pages(document, figures):
    """The words of each figure, read by pypdf, are among those of one page."""
    texts = pdf_pages(as_pdf(document, figures))
    for name, files in figures.items():
        (alone,) = pdf_pages(files["pdf"])
        words = {word for word in alone.split() if len(word) > 2}
        assert any(words <= set(text.split()) for text in texts), name


def test_without_velocities_there_is_no_scale_and_no_masses():
    session = made_up_session(velocities=False)
    report = report_of(session)
    document = make_document(report)
    names = [section.name for section in document.sections]
    assert "velocities" not in names
    assert "velocities" not in report.figures
    words = flat(
        " ".join(block.words for block in document.sections[0].blocks if hasattr(block, "words"))
    )
    assert "the scale of the system is open" in words
    text = " ".join(pdf_pages(as_pdf(document, all_figures(report.shown))))
    assert "No radial velocities were used" in text


def table_rows(document, name):
    (section,) = [each for each in document.sections if each.name == name]
    tables = [block for block in section.blocks if isinstance(block, Table)]
    return [row for table in tables for _, rows in table.groups for row in rows]


def test_priors_and_origins_stand_beside_the_numbers(document):
    rows = {flat(row[0]): row for row in table_rows(document, "quantities")}
    assert "prior 0.78" in rows["k"][5]
    assert rows["Teff,1"][5] == "assumed"
    assert "Kepler" in rows["M1"][6]
    assert any("bolometric" in row[1] for key, row in rows.items() if key == "d")


def test_contact_solution_stands_beside_the_fit_with_its_distance(document, report):
    rows = {flat(row[0]): row for row in table_rows(document, "contacts")}
    contact, full = report.sheet.contact, report.sheet.quantities["r1"].estimate
    apart = abs(contact.values["r1"] - full.value) / np.hypot(contact.errors["r1"], full.plus)
    assert float(rows["r1"][4]) == pytest.approx(apart, abs=0.05)


def test_alternatives_and_predictions_are_listed():
    session = made_up_session()
    effects = Decision(
        "small effects", "ellipsoidal fitted", "as asked", {"ellipsoidal1[V]": 0.00381}
    )
    other = Alternative("radii exchanged", {"radius_ratio": 1.28}, 3.25)
    solution = replace(session.solution, decisions=(effects,), alternatives=(other,))
    document = make_document(report_of(replace(session, solution=solution)))
    cells = [flat(cell) for row in table_rows(document, "decisions") for cell in row]
    assert "as asked; predicted: ellipsoidal1[V] 0.00381" in cells
    assert "3.25" in cells
    assert "k = 1.28" in cells


def test_findings_that_fail_stand_before_all_others(document, report):
    (section,) = [each for each in document.sections if each.name == "audit"]
    (verdicts,) = [block for block in section.blocks if isinstance(block, Verdicts)]
    kinds = [item.kind for item in verdicts.items]
    assert kinds == sorted(kinds, key=("fail", "warn", "pass").index)
    assert len(kinds) == len([each for each in report.sheet.audit if "absent" not in each.check])


# The methods paragraph


def methods(session, **system):
    solution = replace(session.solution, system=replace(session.solution.system, **system))
    sheet = sheet_of(replace(session, solution=solution))
    return methods_of(
        sheet, solution, session.photometry, velocities=session.velocities, plan=session.plan
    )


def prose(found):
    return flat(" ".join(found.paragraphs))


@pytest.mark.parametrize(
    ("changes", "words", "paper"),
    [
        ({"light_time": True}, "where it was when its own light left it", "kaplan2010"),
        ({"exposure": 1800.0}, "averaged over exposures of 1800 s", None),
        ({"levels": "trend"}, "a brightness level and a linear trend for every night", "golub1973"),
        (
            {"effects": {"beaming": "fitted"}},
            "Doppler beaming (Loeb & Gaudi 2003), with fitted",
            "loeb2003",
        ),
        ({"effects": {"reflection": "predicted"}}, "as the theory predicts", "russell1916"),
        ({"law": "power-2"}, "follows the power-2 law (Hestroffer 1997)", "hestroffer1997"),
    ],
)
def test_methods_say_what_was_done_and_only_that(changes, words, paper):
    session = made_up_session()
    off = {"light_time": False, "exposure": 0.0, "levels": "one", "effects": {}, "law": "power-2"}
    done, undone = methods(session, **{**off, **changes}), methods(session, **off)
    assert words in prose(done)
    assert changes == {"law": "power-2"} or words not in prose(undone)
    if paper is not None:
        assert paper in done.cited


def test_methods_tell_priors_outliers_jitter_and_the_period_search():
    session = made_up_session()
    text = prose(methods(session))
    assert "k = 0.78 \N{PLUS-MINUS SIGN} 0.05" in text
    assert "set aside 1 measurements as outliers" in text
    assert "0.1 km/s (north, star 1)" in text
    assert "The period was found" not in text
    searched = replace(session, plan=Plan())
    found = methods(searched)
    assert "The period was found in the photometry" in prose(found)
    assert "kovacs2002" in found.cited


def test_methods_admit_an_assumed_mass():
    session = made_up_session()
    assumed = replace(session.solution.estimates["M1"], how="assumed")
    estimates = {**session.solution.estimates, "M1": assumed}
    one = replace(session, solution=replace(session.solution, estimates=estimates))
    assert "the mass of star 1 was assumed" in prose(methods(one))
    assert "was assumed" not in prose(methods(session))


def test_methods_speak_of_errors_that_were_estimated():
    session = made_up_session()
    table = replace(made_up_photometry(), errors_from_scatter=(True,))
    text = prose(methods(replace(session, photometry=table)))
    assert "gave no errors for V" in text


def test_methods_say_where_limits_are_those_of_a_likelihood_profile():
    session = made_up_session()
    told = Decision("errors", PROFILE, "the ratio of the radii lies in a curved valley")
    decisions = (*session.solution.decisions, told)
    curved = replace(session, solution=replace(session.solution, decisions=decisions))
    assert "likelihood profile (Wilks 1938)" in prose(methods(curved))
    assert "likelihood profile" not in prose(methods(session))


def test_a_prior_in_a_unit_is_written_with_it():
    session = made_up_session()
    plan = replace(session.plan, priors=(Prior("M1", (1.12,), (0.06,)),))
    assert "M1 = 1.12 \N{PLUS-MINUS SIGN} 0.06 M\N{SUN}" in prose(
        methods(replace(session, plan=plan))
    )


# References


def test_every_reference_is_a_whole_bibtex_entry():
    for key, reference in REFERENCES.items():
        text = reference.bibtex()
        assert text.startswith(f"@{reference.kind}{{{key},")
        assert text.count("{") == text.count("}")
        assert str(reference.year) in reference.cited
        assert key.endswith(str(reference.year))
        if reference.kind == "article":
            assert {"journal", "volume", "pages"} <= set(reference.fields)


def test_identifiers_have_the_form_of_a_doi():
    # DOI Handbook, section 2.2: prefix 10.nnnn, a slash, a suffix
    found = [item.fields["doi"] for item in REFERENCES.values() if "doi" in item.fields]
    assert len(found) > 10
    assert len(set(found)) == len(found)
    assert all(re.fullmatch(r"10\.\d{4,5}/\S+", doi) for doi in found)


def test_a_bibliography_has_each_work_once():
    text = bibliography(["kipping2013", "agol2020", "kipping2013"])
    assert re.findall(r"@article\{(\w+),", text) == ["agol2020", "kipping2013"]


# Words and symbols


@pytest.mark.parametrize("quantity", QUANTITIES.values(), ids=lambda item: item.name)
def test_every_symbol_of_the_register_can_be_set(quantity):
    found = symbol_runs(quantity.tex)
    assert found
    assert not any(set(run.text) & set("\\{}_^$") for run in found)


def test_indices_lie_below_and_letters_slant():
    assert [(run.text, run.italic, run.level) for run in runs(f"so {marked('M_1')} is")] == [
        ("so ", False, 0),
        ("M", True, 0),
        ("1", False, -1),
        (" is", False, 0),
    ]
    assert [run.level for run in symbol_runs(r"\rm km\,s^{-1}")] == [0, 1]
    with pytest.raises(ValueError, match="not a sign that reports know"):
        symbol_runs(r"\unknown")


def test_numbers_have_a_true_minus():
    assert number(-0.25) == "\N{MINUS SIGN}0.25"


def test_every_figure_has_a_caption(report):
    from shadowscale.sheet.report import CAPTIONS

    assert set(CAPTIONS) == set(FIGURES)
    assert set(report.figures) == set(FIGURES)
