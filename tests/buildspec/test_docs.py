"""What README and DEVELOPERS say agrees with the code."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from analysis.files.columns import DIP_DIRECTION, NAMES

ROOT = Path(__file__).resolve().parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")


def section(text, heading):
    """Return the part of a document under one heading."""
    return re.split(r"^## ", text.split(f"\n## {heading}\n")[1], flags=re.MULTILINE)[0]


def first_cells(text):
    """Return the names in code type in the first cells of a part's table."""
    rows = [line.split("|")[1] for line in text.splitlines() if line.startswith("| `")]
    return [name for row in rows for name in re.findall(r"`([^`]+)`", row)]


def test_every_column_is_in_the_readme():
    """The table of the CSV names each column that is read, and no other."""
    names = first_cells(section(README, "The CSV"))
    assert sorted(names) == sorted({*NAMES, DIP_DIRECTION.name})


@pytest.mark.parametrize("package", ["analysis", "fieldapp"])
def test_every_room_is_in_the_developers_page(package):
    """Each room of the two packages has its row in DEVELOPERS.md."""
    rooms = {f"{package}/{path.parent.name}/" for path in (ROOT / package).glob("*/__init__.py")}
    assert rooms
    assert rooms - set(first_cells(section(DEVELOPERS, "Layout"))) == set()


@pytest.mark.parametrize("page", ["README.md", "DEVELOPERS.md", "CHANGELOG.md"])
def test_every_file_that_a_page_points_to_exists(page):
    """No link within the project is dead."""
    links = re.findall(r"\]\(([^)\s#]+)\)", (ROOT / page).read_text(encoding="utf-8"))
    local = [link for link in links if "://" not in link]
    assert [link for link in local if not (ROOT / link).exists()] == []


CITATION = re.compile(
    r"\b(?P<last>[A-Z][a-z]{2,})(?:\s+et\s+al\.)?(?:'s)?\s+\(?(?P<year>1[89]\d\d|20\d\d)\b(?:-\d+)?"
)
NO_AUTHORS = {"Model"}


def uncited(text, references):
    """Return the citations in a text, as last author and year, that a list of references lacks."""
    entries = references.splitlines()
    cited = {(found["last"], found["year"]) for found in CITATION.finditer(text)}
    return sorted(
        f"{author} {year}"
        for author, year in cited
        if author not in NO_AUTHORS and not any(author in entry and year in entry for entry in entries)
    )


@pytest.mark.parametrize("package", ["analysis", "fieldapp"])
def test_every_citation_is_among_the_references(package):
    """Each author and year named in the code stands in the list of DEVELOPERS.md."""
    references = section(DEVELOPERS, "References")
    missing = {
        path.relative_to(ROOT).as_posix(): found
        for path in sorted((ROOT / package).rglob("*.py"))
        if (found := uncited(path.read_text(encoding="utf-8"), references))
    }
    assert missing == {}


def test_a_missing_reference_is_found():
    """The checker of citations finds an author and year that the list lacks, and lets listed ones be."""
    text = "after Adams & Baker (1984), Carter et al. 2021-24, and Dunn's (1959) form"
    assert uncited(text, "- Adams & Baker 1984.") == ["Carter 2021", "Dunn 1959"]
