"""Text tables: every usual way to write the same numbers gives the same numbers."""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np
import pytest

from shadowscale.data import read_photometry
from shadowscale.data.files import read_table
from shadowscale.errors import InputError, TableError
from table_files import light, rows, written

HEADER = ["HJD", "mag", "err"]


def _variants() -> dict[str, str | bytes]:
    lines = rows()
    blank = [line.replace(",", "   ") for line in lines]
    head = ",".join(HEADER)
    return {
        "comma": "\n".join([head, *lines]) + "\n",
        "no newline at the end": "\n".join([head, *lines]),
        "semicolon": "\n".join([";".join(HEADER), *rows(";")]),
        "tab": "\n".join(["\t".join(HEADER), *rows("\t")]),
        "bars": "\n".join(["|".join(HEADER), *rows("|")]),
        "blanks": "\n".join(["  ".join(HEADER), *("  " + line for line in blank)]),
        "comma and blank": "\n".join([head, *rows(" , ")]),
        "decimal comma, semicolon": "\n".join([";".join(HEADER), *rows(";", decimal=",")]),
        "decimal comma, tab": "\n".join(["\t".join(HEADER), *rows("\t", decimal=",")]),
        "decimal comma, blanks": "\n".join([" ".join(HEADER), *rows("  ", decimal=",")]),
        "trailing separators": "\n".join([head + ",", *(line + "," for line in lines)]),
        "quotes": "\n".join(
            ['"HJD","mag","err"', *('"' + line.replace(",", '","') + '"' for line in lines)]
        ),
        "CRLF": "\r\n".join([head, *lines]) + "\r\n",
        "CR only": "\r".join([head, *lines]) + "\r",
        "byte-order mark": b"\xef\xbb\xbf" + "\n".join([head, *lines]).encode(),
        "UTF-16": "\n".join([head, *lines]).encode("utf-16"),
        "Windows-1252 comment": "\n".join(["# „Köln“ – 5 €", head, *lines]).encode("cp1252"),
        "Latin-1 comment": "\n".join(["# beobachtet in Köln", head, *lines]).encode("latin-1"),
        "commented header": "\n".join(["# HJD mag err", *blank]),
        "commented header with commas": "\n".join(["#HJD,mag,err", *lines]),
        "units below the header": "\n".join([head, "d,mag,mag", *lines]),
        "columns named in a comment": "\n".join(["# Columns: HJD, mag, err", *blank]),
        "a word after the header": "\n".join([head, "cloud", *lines]),
        "blank lines": "\n\n".join([head, *lines]) + "\n\n\n",
        "comments between": "\n".join([head, *lines[:20], "# clouds", *lines[20:]]),
        "comments behind": "\n".join([head, *(line + "  # ok" for line in lines)]),
        "mixed separators": "\n".join(
            [head, *(line if k % 3 else line.replace(",", "; ") for k, line in enumerate(lines))]
        ),
        "gzip": gzip.compress("\n".join([head, *lines]).encode()),
        "Fortran exponents": "\n".join(
            [
                head,
                *(
                    line.rsplit(",", 1)[0] + f",{e / 1e-2:.2f}D-02"
                    for line, e in zip(lines, light()[2])
                ),
            ]
        ),
    }


@pytest.mark.parametrize("name", list(_variants()))
def test_every_way_of_writing_gives_the_same_numbers(name: str, tmp_path: Path) -> None:
    content = _variants()[name]
    table = read_photometry(written(tmp_path, "night.txt", content))
    time, magnitude, error = light()
    np.testing.assert_array_equal(time, table.time)
    np.testing.assert_array_equal(magnitude, table.value)
    np.testing.assert_allclose(table.value_error, error, rtol=1e-12)
    assert table.magnitudes
    assert table.time_scale == "HJD"
    bad = 1 if name == "a word after the header" else 0
    assert len(table.unreadable) == bad
    assert table.files[0].rows == len(time) + bad
    assert table.files[0].used == len(time)


def test_line_numbers_are_those_of_the_file(tmp_path: Path) -> None:
    lines = ["# a title", "", "HJD,mag,err", *rows(count=30), "", "# end"]
    path = written(tmp_path, "night.csv", lines)
    table = read_photometry(path)
    for row, number in enumerate(table.line):
        assert lines[number - 1].startswith(f"{table.time[row]:.6f}")


def test_decimal_commas_are_reported(tmp_path: Path) -> None:
    table = read_photometry(written(tmp_path, "a.csv", rows(";", decimal=",")))
    assert any("decimal marks" in note for note in table.notes)


def test_latin_1_is_reported(tmp_path: Path) -> None:
    content = "\n".join(["# Köln", *rows()]).encode("latin-1")
    assert any(
        "Latin-1" in note for note in read_photometry(written(tmp_path, "a.csv", content)).notes
    )


def test_a_dash_of_a_word_processor_is_a_minus(tmp_path: Path) -> None:
    lines = ["HJD,dmag", *(f"{t:.6f},\N{EN DASH}0.{k:03d}" for k, t in enumerate(light()[0]))]
    for encoding in ("utf-8", "cp1252"):
        table = read_photometry(
            written(tmp_path, f"{encoding}.csv", "\n".join(lines).encode(encoding))
        )
        np.testing.assert_allclose(table.value, -np.arange(60) / 1000, atol=1e-12)


def test_decimal_commas_beside_a_column_of_bands(tmp_path: Path) -> None:
    lines = [";".join([*HEADER, "filter"]), *(row + ";V" for row in rows(";", decimal=","))]
    table = read_photometry(written(tmp_path, "a.csv", lines))
    plain = read_photometry(written(tmp_path, "b.csv", rows()))
    assert table.bands == ("V",)
    assert np.array_equal(table.time, plain.time)


def test_calendar_dates_are_told_apart_from_other_words(tmp_path: Path) -> None:
    lines = ["date,mag", *(f"2021-03-{1 + k % 28:02d},11.{k}" for k in range(40))]
    with pytest.raises(TableError, match=r"line 1: .*turn calendar dates into Julian dates first"):
        read_photometry(written(tmp_path, "a.csv", lines))


def test_comments_with_keys_are_kept(tmp_path: Path) -> None:
    lines = ["# time system: BJD_TDB", "# band = V", "# by hand", *rows()]
    table = read_table(written(tmp_path, "a.csv", lines))
    assert table.headers == {"time system": "BJD_TDB", "band": "V"}
    assert table.comments == ("by hand",)


def test_columns_of_words_and_quoted_separators(tmp_path: Path) -> None:
    lines = [
        "HJD,mag,remark",
        *(line.rsplit(",", 1)[0] + ',"thin, high clouds"' for line in rows()),
    ]
    table = read_table(written(tmp_path, "a.csv", lines))
    assert table.columns[2].labels == ("thin, high clouds",)
    assert table.columns[2].cell(5) == "thin, high clouds"


def test_a_bad_line_in_a_large_file_is_found_and_the_rest_kept(tmp_path: Path) -> None:
    lines = [f"{2459000 + k * 1e-3:.4f},{1 + (k % 7) * 1e-3:.4f},0.001" for k in range(45_000)]
    lines[31_337] = "2459031.3370,cloud,0.001"
    table = read_photometry(written(tmp_path, "a.csv", ["BJD,flux,err", *lines]))
    assert len(table.time) == 44_999
    (bad,) = table.unreadable
    assert bad.line == 31_339
    assert bad.reason == "column 'flux': expected a number, found 'cloud'"
    assert bad.text == "2459031.337 cloud 0.001"


@pytest.mark.parametrize(
    ("line", "reason"),
    [
        ("2459000.3;12,43;0.01", "found '12,43'; is the comma a decimal mark"),
        ("2459000.3;<12.4;0.01", "found '<12.4', a limit"),
        ("cloudy;12.1;0.01", "column 'HJD': expected a number, found 'cloudy'"),
        (";12.1;0.01", "column 'HJD': no time"),
        ("2459000.3;12.1;0.01;7;8", "expected 3 cells, found 5"),
        ("2459000.3", "expected 3 cells, found 1"),
        ("2459000.3;12.1;1_0", "column 'err': expected a number, found '1_0'"),
        ("2459000.3;12.1;bad", "column 'err': expected a number, found 'bad'"),
    ],
)
def test_unreadable_lines_say_why(line: str, reason: str, tmp_path: Path) -> None:
    lines = ["HJD;mag;err", *rows(";")[:40], line, *rows(";")[40:]]
    table = read_photometry(written(tmp_path, "a.csv", lines))
    (bad,) = table.unreadable
    assert reason in bad.reason
    assert bad.line == 42
    assert table.files[0].rows == 61
    assert table.files[0].used == 60


def test_text_above_the_header_is_listed(tmp_path: Path) -> None:
    lines = ["Night of 3 May, thin clouds", "HJD,mag,err", *rows()]
    table = read_photometry(written(tmp_path, "a.csv", lines))
    (bad,) = table.unreadable
    assert (bad.line, bad.reason) == (1, "text above the table")
    assert table.files[0].rows == 61


def test_text_above_the_header_may_speak_of_the_time(tmp_path: Path) -> None:
    lines = [f"{float(line[:14]) - 2450000:.6f}{line[14:]}" for line in rows()]
    text = ["All times are HJD - 2450000 (UTC)", "time,mag,err", *lines]
    table = read_photometry(written(tmp_path, "a.csv", text))
    np.testing.assert_allclose(table.time, light()[0], rtol=0, atol=1e-6)
    assert table.time_scale == "HJD_UTC"


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"", "an empty file"),
        (b"\n\n  \n", "blank lines"),
        (b"# nothing\n# at all\n", "2 lines of comments"),
        (b"time,mag,err\n", "a header only"),
        (b"a poem\nof two lines\n", "2 lines without two numbers"),
        (bytes(range(256)) * 8, "a binary file"),
        (b"PK\x03\x04" + bytes(100), "spreadsheet workbook"),
        (b"%PDF-1.4 ...", "a PDF document"),
        (b"\x1f\x8b\x08 broken", "a broken one"),
    ],
)
def test_files_that_are_no_tables(content: bytes, words: str, tmp_path: Path) -> None:
    path = written(tmp_path, "a.dat", content)
    with pytest.raises(TableError, match=words) as caught:
        read_photometry(path)
    assert caught.value.problems[0].file == str(path)
    assert caught.value.exit_status == 3


def test_a_missing_file_names_its_neighbour(tmp_path: Path) -> None:
    written(tmp_path, "night_3.csv", rows())
    with pytest.raises(TableError, match=r"no such file; did you mean 'night_3.csv'\?"):
        read_photometry(tmp_path / "night3.csv")


def test_a_directory_is_no_table(tmp_path: Path) -> None:
    with pytest.raises(TableError, match="found a directory; name the files in it"):
        read_photometry(tmp_path)


def test_problems_of_all_files_are_gathered(tmp_path: Path) -> None:
    paths = [tmp_path / "gone.csv", written(tmp_path, "empty.csv", b"")]
    with pytest.raises(InputError, match=r"gone.csv.*\n.*empty.csv") as caught:
        read_photometry(paths)
    assert len(caught.value.problems) == 2


def test_a_file_given_twice_is_refused(tmp_path: Path) -> None:
    first, second = (written(tmp_path, name, rows()) for name in ("a.csv", "b.csv"))
    with pytest.raises(TableError, match=r"the same content as in .*a.csv; name it once"):
        read_photometry([first, second])


def test_two_bands_side_by_side_are_read_by_naming_the_file_twice(tmp_path: Path) -> None:
    time, magnitude, _ = light()
    lines = [f"{t:.6f},{m + 0.7:.4f},{m:.4f}" for t, m in zip(time, magnitude)]
    path = written(tmp_path, "a.csv", ["HJD,B,V", *lines])
    table = read_photometry([path, path], columns=[{"mag": "B"}, {"mag": "V"}])
    assert table.bands == ("B", "V")
    np.testing.assert_allclose(table.value[table.band == 1], magnitude)


@pytest.mark.long
def test_two_million_rows_open(tmp_path: Path) -> None:
    count = 2_000_000
    time = 2459000 + np.arange(count) / 43200
    flux = 1 + 1e-3 * np.sin(time)
    path = tmp_path / "long.csv"
    with open(path, "w") as stream:
        stream.write("BJD_TDB,flux,flux_err\n")
        stream.writelines(f"{t:.6f},{f:.6f},0.0005\n" for t, f in zip(time, flux))
    table = read_photometry(path)
    assert table.files[0].rows == count
    np.testing.assert_allclose(table.time, time, rtol=0, atol=1e-6)
