"""Letters against fontTools, which comes with matplotlib and reads the same files."""

from io import BytesIO

import pytest
from fontTools.ttLib import TTFont

from shadowscale.sheet.report_text import FILES, FIXED_WIDTH, OTHERS
from shadowscale.sheet.truetype import letters

NAMES = (*FILES.values(), FIXED_WIDTH, OTHERS)


def opened(content):
    return TTFont(BytesIO(content))


@pytest.fixture(scope="module", params=NAMES)
def both(request):
    from pathlib import Path

    from matplotlib import get_data_path

    path = Path(get_data_path()) / "fonts" / "ttf" / request.param
    return letters(request.param), opened(path.read_bytes())


def test_every_character_has_its_letter_and_its_width(both):
    ours, theirs = both
    cmap = theirs.getBestCmap()
    expected = {code: theirs.getGlyphID(name) for code, name in cmap.items()}
    found = {code: number for code, number in ours.glyphs.items() if number}
    assert found == {code: number for code, number in expected.items() if number}
    widths = [theirs["hmtx"][name][0] for name in theirs.getGlyphOrder()]
    assert ours.advances == widths
    assert ours.per_em == theirs["head"].unitsPerEm


def test_only_the_letters_of_a_text_keep_their_outlines(both):
    """Also the parts that letters are put together from, such as those of u with a diaeresis."""
    ours, theirs = both
    numbers = {ours.glyphs[ord(letter)] for letter in "Mü±☉" if ord(letter) in ours.glyphs}
    part = opened(ours.with_only(numbers))
    assert part["maxp"].numGlyphs == theirs["maxp"].numGlyphs
    kept, order = part["glyf"], theirs.getGlyphOrder()
    wanted, waiting = set(), [order[number] for number in numbers | {0}]
    while waiting:
        name = waiting.pop()
        wanted.add(name)
        waiting += theirs["glyf"][name].getComponentNames(theirs["glyf"])
    for number, name in enumerate(order):
        mine = kept[part.getGlyphName(number)]
        if name in wanted:
            one, other = (
                glyph.getCoordinates(table)[0]
                for glyph, table in ((mine, kept), (theirs["glyf"][name], theirs["glyf"]))
            )
            assert list(one) == list(other), name
        else:
            assert mine.numberOfContours == 0, name
    assert len(ours.with_only(numbers)) < 80_000


def test_the_usual_signs_of_a_report_are_in_the_letters():
    signs = "MRLTKPeijkωαβγρσχμπ±×°☉⟨⟩−²³·ℓΔ "
    for sign in signs:
        assert any(ord(sign) in letters(name).glyphs for name in (FILES[False, True], OTHERS)), sign
