"""Have the real spreadsheet open and save the file handed over, in every way listed; see README.md here.

    python -m tests.analysis.files.spreadsheet.record       # from the project's root, all files anew

What the tokens of its CSV filter mean is in LibreOffice's help, "CSV Filter Options": 1 what parts cells (44
comma, 59 semicolon, 9 tab), 2 the quote, 3 the encoding (76 UTF-8, ANSI Windows-1252, 65535 UTF-16), 4 the first
line, 5 column/format pairs (2: text), 6 the language (1033 US English, 1031 German), 7 read quoted cells as text,
or quote all text, 8 look for dates and the like, or keep numbers bare, 9 write cells as shown, 13 run formulas.
"""

from __future__ import annotations

import copy
import io
import subprocess
import tempfile
import xml.etree.ElementTree as ET
import zipfile
from dataclasses import dataclass
from pathlib import Path

from tests.analysis.files.spreadsheet.invented import hand_over

HERE = Path(__file__).parent
ORIGINAL = HERE / "handed-over.csv"
FILTER = "Text - txt - csv (StarCalc)"
COLUMNS = 33  # of the file handed over
MARK = b"\xef\xbb\xbf"

_PROFILE = """<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema">
<item oor:path="/org.openoffice.Setup/L10N"><prop oor:name="ooSetupSystemLocale" oor:op="fuse">
<value>{language}</value></prop></item></oor:items>
"""
_CONTENT = "content.xml"
_TABLE = "{urn:oasis:names:tc:opendocument:xmlns:table:1.0}"
_REPEATED = f"{_TABLE}number-columns-repeated"


@dataclass(frozen=True)
class Way:
    """One way of opening and saving: the tokens of reading and writing, the language, and a file between."""

    opened: str = "44,34,76,1,,0,false,false"
    saved: str = "44,34,76,1,,0,false,true,true"
    language: str = "en-US"
    between: str = ""
    reordered: bool = False
    marked: bool = False


_GERMAN = {"saved": "59,34,76,1,,0,false,true,true", "language": "de-DE"}
_AS_TEXT = "44,34,76,1," + "/".join(f"{column}/2" for column in range(1, COLUMNS + 1)) + ",0,false,false"
WAYS = {
    "default": Way(opened="", saved=""),
    "comma": Way(),
    "dates-found": Way(opened="44,34,76,1,,0,false,true"),
    "formulas-run": Way(opened="44,34,76,1,,0,false,false,,,,,true"),
    "german": Way(opened="44,34,76,1,,1033,false,false", **_GERMAN),
    "german-dates-found": Way(opened="44,34,76,1,,1033,false,true", **_GERMAN),
    "german-numbers-unread": Way(opened="44,34,76,1,,0,false,true", **_GERMAN),
    "german-marked": Way(opened="44,34,76,1,,1033,false,false", **_GERMAN, marked=True),
    "french-dates-found": Way(
        opened="44,34,76,1,,1033,false,true", saved="59,34,76,1,,0,false,true,true", language="fr-FR"
    ),
    "swiss-dates-found": Way(
        opened="44,34,76,1,,0,false,true", saved="59,34,76,1,,0,false,true,true", language="de-CH"
    ),
    "tabs": Way(saved="9,34,76,1,,0,false,true,true"),
    "text-quoted": Way(opened="44,34,76,1,,0,true,false", saved="44,34,76,1,,0,true,true,true"),
    "all-quoted": Way(opened=_AS_TEXT, saved="44,34,76,1,,0,true,true,true"),
    "not-as-shown": Way(opened="44,34,76,1,,0,false,true", saved="44,34,76,1,,0,false,true,false"),
    "numbers-as-text": Way(saved="44,34,76,1,,0,true,false,false"),
    "through-ods": Way(opened="44,34,76,1,,0,false,true", between="ods"),
    "through-xlsx": Way(opened="44,34,76,1,,1033,false,true", between="xlsx", **_GERMAN),
    "reordered": Way(between="ods", reordered=True),
    "one-column": Way(opened="59,34,76,1,,0,false,false", **_GERMAN),
    "utf-16": Way(saved="9,34,65535,1,,0,false,true,true"),
    "windows-1252": Way(saved="59,34,ANSI,1,,0,false,true,true"),
}


def save_again(source: Path, target: Path, way: Way, profiles: Path) -> None:
    """Open a file in the spreadsheet and save it under another name; raises where nothing was saved."""
    profile = profiles / way.language
    profile.mkdir(parents=True, exist_ok=True)
    settings = profile / "user" / "registrymodifications.xcu"
    if not settings.exists():
        settings.parent.mkdir(exist_ok=True)
        settings.write_text(_PROFILE.format(language=way.language))
    with tempfile.TemporaryDirectory() as scratch:
        opened, tokens = source, way.opened
        if way.between:
            opened, tokens = _convert(profile, source, Path(scratch), way.between, tokens), ""
        if way.reordered:
            _reorder(opened)
        kind = f"csv:{FILTER}:{way.saved}" if way.saved else "csv"
        content = _convert(profile, opened, Path(scratch) / "saved", kind, tokens).read_bytes()
    if way.marked:
        # As on Windows; version 7.4 writes no mark, and ends lines as its system does.
        content = MARK + content.replace(b"\r\n", b"\n").replace(b"\n", b"\r\n")
    target.write_bytes(content)


def _reorder(sheet: Path) -> None:
    """Turn the columns and the rows of a sheet round, as a person does by dragging and sorting them.

    A column without a name comes first and an empty one named seen last.
    """
    with zipfile.ZipFile(sheet) as archive:
        parts = {part: archive.read(part) for part in archive.namelist()}
    # Written by the spreadsheet a moment ago, which wants the prefixes that it used itself.
    for _, (prefix, name) in ET.iterparse(io.BytesIO(parts[_CONTENT]), events=["start-ns"]):  # noqa: S314
        ET.register_namespace(prefix, name)
    tree = ET.fromstring(parts[_CONTENT])  # noqa: S314
    table = next(tree.iter(f"{_TABLE}table"))
    heading, *rows = table.findall(f"{_TABLE}table-row")
    for row in (heading, *rows):
        cells = []
        for cell in row.findall(f"{_TABLE}table-cell"):
            row.remove(cell)
            # The last cell of a row stands for all the empty ones after it.
            cells += [cell] * min(int(cell.attrib.pop(_REPEATED, "1")), COLUMNS - len(cells))
        empty = ET.Element(f"{_TABLE}table-cell")
        row.extend(map(copy.deepcopy, [empty, *reversed(cells), empty]))
    seen = heading.findall(f"{_TABLE}table-cell")[-1]
    ET.SubElement(seen, "{urn:oasis:names:tc:opendocument:xmlns:text:1.0}p").text = "seen"
    for row in rows:
        table.remove(row)
    table.extend(reversed(rows))
    parts[_CONTENT] = ET.tostring(tree, encoding="utf-8", xml_declaration=True)
    with zipfile.ZipFile(sheet, "w") as archive:
        for part, content in parts.items():
            archive.writestr(part, content)


def _convert(profile: Path, source: Path, folder: Path, kind: str, opened: str) -> Path:
    reading = [f"--infilter={FILTER}:{opened}"] if opened else []
    _run(profile, [*reading, "--convert-to", kind, "--outdir", str(folder), str(source)])
    return folder / f"{source.stem}.{kind.partition(':')[0]}"


def _run(profile: Path, arguments: list[str]) -> None:
    command = [
        "soffice",
        f"-env:UserInstallation={profile.as_uri()}",
        "--headless",
        "--norestore",
        *arguments,
    ]
    subprocess.run(command, check=True, capture_output=True, timeout=120)


def main() -> None:
    """Write all files of this folder anew."""
    hand_over(ORIGINAL)
    with tempfile.TemporaryDirectory() as profiles:
        for name, way in WAYS.items():
            save_again(ORIGINAL, HERE / f"{name}.csv", way, Path(profiles))


if __name__ == "__main__":
    main()
