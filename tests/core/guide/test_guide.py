"""The guide: whole, in step with the register and the command line, and in the wheel."""

import re
import shlex
from importlib.resources import files

import pytest

from shadowscale.cli.door import COMMANDS
from shadowscale.cli.parser import Parser, add_common
from shadowscale.guide import PAGES, page, pages, quantities_page
from shadowscale.quantities import QUANTITIES
from shadowscale.sheet.curves import LIGHT_HEADER
from shadowscale.sheet.figures import FIGURES


def test_every_file_of_the_guide_is_a_page_and_has_a_title():
    there = {
        path.name for path in files("shadowscale.guide").iterdir() if path.name.endswith(".md")
    }
    assert there == {f"{name}.md" for name in PAGES}
    for each in pages():
        assert each.text.startswith(f"# {each.title}\n")
        assert each.title
    with pytest.raises(KeyError, match="nothing"):
        page("nothing")


def test_the_page_of_quantities_is_the_register():
    """To make it again: `python -m shadowscale.guide`."""
    text = page("quantities").text
    assert text == quantities_page()
    names = re.findall(r"^\| `(\w+)` \|", text, re.MULTILINE)
    assert sorted(names) == sorted(QUANTITIES)
    assert all(item.meaning in text for item in QUANTITIES.values())


def commands():
    return [
        (each.name, line.strip())
        for each in pages()
        for line in each.text.splitlines()
        if line.startswith("    shadowscale ")
    ]


@pytest.mark.parametrize(("name", "line"), commands())
def test_every_command_of_the_guide_is_one_the_program_takes(name, line):
    words = shlex.split(line)[1:]
    if words[0] not in COMMANDS:
        assert len(words) == 1  # opens the desktop on a file
        return
    parser = Parser(prog=words[0])
    COMMANDS[words[0]].add_arguments(parser)
    add_common(parser)
    parser.parse_strictly(words[1:])


@pytest.mark.parametrize("each", pages(), ids=lambda each: each.name)
def test_options_and_quantities_that_are_named_exist(each):
    parser = Parser(prog="all")
    known = set()
    for command in COMMANDS.values():
        parser = Parser(prog="one")
        command.add_arguments(parser)
        add_common(parser)
        known |= set(parser.options())
    assert set(re.findall(r"(?<![\w-])--[a-z][a-z0-9-]*", each.text)) <= known
    for name in re.findall(r"`(\w+)\[[A-Za-z]+\]", each.text):
        assert name in QUANTITIES or name == "light"


def test_the_page_of_files_knows_columns_and_figures():
    text = page("files").text
    assert all(f"`{name}`" in text for name in (*LIGHT_HEADER, *FIGURES))


def test_samples_that_the_guide_uses_are_there(root):
    text = " ".join(each.text for each in pages())
    paths = set(re.findall(r"sample_sessions/[\w/.]+\w", text))
    assert paths
    assert all((root / path).exists() for path in paths)


def test_pictures_are_there_and_a_narrow_pane_does_without_them(root):
    folder = root / "core" / "shadowscale" / "guide"
    shown = {name: re.findall(r"!\[[^\]]+\]\(([^)]+)\)", page(name).text) for name in PAGES}
    assert shown["first_sheet"]
    for name, pictures in shown.items():
        assert all((folder / picture).is_file() for picture in pictures)
        assert "![" not in page(name).words
        assert page(name).words.startswith(f"# {page(name).title}\n")
