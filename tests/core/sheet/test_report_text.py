"""Letters of the pages: widths as FreeType measures them, signs that no file of letters has."""

from io import BytesIO

import pytest

from shadowscale.sheet.document import Document, Paragraph, Section
from shadowscale.sheet.report_pdf import as_pdf
from shadowscale.sheet.report_text import (
    FILES,
    FIXED_WIDTH,
    OTHERS,
    Face,
    font_path,
    letter_widths,
    spelled,
    text_width,
)

SIGNS = "MRLTKPeijkωαβγρσχμπ±×°☉⟨⟩−²³·ℓΔ"


@pytest.mark.parametrize("name", [*FILES.values(), FIXED_WIDTH, OTHERS])
def test_every_character_has_its_width(name):
    """Against FreeType, through matplotlib, which reads the same files."""
    from matplotlib.ft2font import FT2Font, LoadFlags

    font = FT2Font(str(font_path(name)))
    widths = letter_widths(name)
    assert {ord(each) for each in widths} == set(font.get_charmap())
    for code, glyph in list(font.get_charmap().items())[::7]:
        advance = font.load_glyph(glyph, LoadFlags.NO_SCALE).horiAdvance
        assert widths[chr(code)] == pytest.approx(advance / font.units_per_EM, abs=1e-4)


def test_the_usual_signs_of_a_report_are_in_the_letters():
    for sign in SIGNS:
        assert any(sign in letter_widths(name) for name in (FILES[False, True], OTHERS)), sign


def test_a_sign_that_a_face_lacks_comes_from_another_file():
    parts = spelled("R☉ V", Face(bold=True))
    assert [(part.file, part.text) for part in parts] == [
        (FILES[True, False], "R"),
        (OTHERS, "☉"),
        (FILES[True, False], " V"),
    ]
    assert text_width("R☉ V", Face(10.0, bold=True)) == pytest.approx(
        10 * sum(part.width for part in parts)
    )


def test_a_sign_of_no_file_is_seen_to_be_missing(capfd, recwarn):
    (part,) = spelled("\N{HANGUL SYLLABLE GA}\udc80", Face())
    assert part.text == "\N{REPLACEMENT CHARACTER}" * 2
    written("A \N{HANGUL SYLLABLE GA} star \udc80")
    assert capfd.readouterr() == ("", "")
    assert not recwarn.list


def test_words_can_be_searched_and_copied_whatever_their_letters():
    """As pypdf reads the file."""
    text = written(f"{SIGNS} Zoë, naïve Ångström, Ķ, łódź, Пример")
    for word in (*SIGNS, "Zoë,", "naïve", "Ångström,", "Ķ,", "łódź,", "Пример"):
        assert word in text, word


def written(words):
    """The text of a page that says these words, and whose title they are."""
    from pypdf import PdfReader

    document = Document(words, "", (Section("one", "One", (Paragraph(words),)),))
    reader = PdfReader(BytesIO(as_pdf(document, {})), strict=True)
    assert reader.metadata.title == words.encode("utf-16", "replace").decode("utf-16")
    return reader.pages[0].extract_text()
