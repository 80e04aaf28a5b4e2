"""The bundled font holds every sign that the app can show, and its licence lies beside it."""

from __future__ import annotations

import ast
import importlib.util
import re
from pathlib import Path

import pytest
from fontTools.ttLib import TTFont

import analysis
import fieldapp
from fieldapp.look.fonts import (
    BOLD_FILE,
    FONT_FOLDER,
    FONT_NAME,
    REGULAR_FILE,
    WIDE_FILE,
    WIDE_FONT_NAME,
    font_for,
)

PACKAGES = [
    Path(fieldapp.__file__).parent,
    Path(analysis.__file__).parent / "fold",
    Path(analysis.__file__).parent / "orient",
]


# These hold signs that are read from what somebody typed, and are never shown.
ONLY_READ = {"forms.py", "position_text.py"}


def python_strings(path):
    """Give the strings of a Python file that are not docstrings."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    docs = {
        id(node.body[0].value)
        for node in ast.walk(tree)
        if isinstance(node, ast.Module | ast.ClassDef | ast.FunctionDef)
        and node.body
        and isinstance(node.body[0], ast.Expr)
    }
    for node in ast.walk(tree):
        if isinstance(node, ast.Constant) and isinstance(node.value, str) and id(node) not in docs:
            yield node.value


def texts():
    """Give the app's own words and those of the checks it shows, each with its file's name."""
    for package in PACKAGES:
        for path in package.rglob("*.py"):
            if path.name not in ONLY_READ:
                yield from ((text, path.name) for text in python_strings(path))
        for path in package.rglob("*.kv"):
            yield from (
                (text, path.name) for text in re.findall(r'"[^"\n]*"', path.read_text(encoding="utf-8"))
            )


def signs_used():
    """Give every sign outside ASCII in those words, with a file that has it."""
    return {sign: name for text, name in texts() for sign in text if ord(sign) > 126}


@pytest.mark.parametrize("path", [REGULAR_FILE, BOLD_FILE], ids=lambda path: path.stem)
def test_every_sign_used_is_in_the_font(path):
    """Every sign in the app's own words, and all of printable ASCII, has a glyph in this weight."""
    held = TTFont(path).getBestCmap()
    assert {sign: where for sign, where in signs_used().items() if ord(sign) not in held} == {}
    assert [chr(code) for code in range(0x20, 0x7F) if code not in held] == []


@pytest.mark.parametrize("path", [REGULAR_FILE, BOLD_FILE], ids=lambda path: path.stem)
def test_what_is_set_in_our_font_is_in_it(path):
    """Of all signs below the surrogates, those that are given to this font have a glyph in this weight."""
    held = set(TTFont(path).getBestCmap()) | {ord(sign) for sign in "\n\r\t"}
    given = {
        code for code in range(1, 0xD800) if not chr(code).isascii() and font_for(chr(code)) == FONT_NAME
    }
    assert len(given) > 100
    assert [chr(code) for code in sorted(given - held)] == []


@pytest.mark.parametrize(
    "name",
    ["Łódź", "Čierna", "Söğüt", "Kővágó", "Αθήναι", "Обнажение 4", "מחשוף", "محجر", "Ħaż-Żebbuġ", "Mỏ đá"],
)
def test_names_in_other_letters_are_set_in_the_wide_font(name):
    """Letters that ours lacks are in the font that comes with Kivy."""
    folder = Path(importlib.util.find_spec("kivy").origin).parent / "data" / "fonts"
    held = TTFont(folder / WIDE_FILE).getBestCmap()
    assert font_for(name) == WIDE_FONT_NAME
    assert [sign for sign in name if ord(sign) not in held] == []


def test_signs_are_found():
    """The search for signs finds the degree sign and the plus-minus, so that it can fail."""
    assert {"°", "±"} <= set(signs_used())


def test_a_sign_the_font_lacks_would_be_seen():
    """The font has no pencil (U+270E): one in a word would fail the test above."""
    assert 0x270E not in TTFont(REGULAR_FILE).getBestCmap()


def test_the_licence_lies_beside_the_font():
    """The SIL Open Font License and the copyright notices are shipped with the files."""
    text = (FONT_FOLDER / "OFL.txt").read_text(encoding="utf-8")
    assert "SIL OPEN FONT LICENSE Version 1.1" in text
    assert "Copyright 2012 AIRBUS" in text
