"""The help: five short pages, in the files beside this one, that the app and the README show alike. No Kivy.

The files are Markdown of a small kind, so that they read well anywhere: one title, headings, paragraphs, lists with
dashes and lists with numbers, each of them plain text without marks inside. `read_page` turns a file into blocks;
what does not fit this kind is refused, so that no page can look wrong on a tablet.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path

FOLDER = Path(__file__).parent
PAGES = ("logging", "verdict", "fault", "handing-over", "cautions-and-method")
"""The pages in the order in which they are offered."""

_MARKS = re.compile(r"[*_`<>\[\]|]")
_NUMBERED = re.compile(r"(\d+)\. (.*)")


class BlockKind(StrEnum):
    """What a block is."""

    HEADING = "heading"
    PARAGRAPH = "paragraph"
    ITEM = "item"  # of a list with dashes
    STEP = "step"  # of a list with numbers


@dataclass(frozen=True, slots=True)
class Block:
    """A piece of a page, as one line of plain text; `number` counts the steps of a list from 1."""

    kind: BlockKind
    text: str
    number: int = 0


@dataclass(frozen=True, slots=True)
class HelpPage:
    """A page: its name, its title and its blocks."""

    name: str
    title: str
    blocks: tuple[Block, ...]


def read_page(name: str) -> HelpPage:
    """Read one of the pages; raises ValueError for a name that is none."""
    if name not in PAGES:
        raise ValueError(f"there is no help page {name!r}; there are {', '.join(PAGES)}")
    return parse_page(name, (FOLDER / f"{name}.md").read_text(encoding="utf-8"))


def read_pages() -> tuple[HelpPage, ...]:
    """Read all pages, in their order."""
    return tuple(read_page(name) for name in PAGES)


def parse_page(name: str, text: str) -> HelpPage:
    """Turn the text of a page into its blocks; raises ValueError with the line that is of another kind."""
    title, blocks, may_continue = "", list[Block](), False
    for count, line in enumerate(text.splitlines(), start=1):
        bare = line.strip()
        fault = _fault(line, has_title=bool(title), may_continue=may_continue)
        if fault:
            raise ValueError(f"{name}, line {count}: {bare!r} {fault}")
        if not title:
            title = bare[2:].strip()
            continue
        block = _block(line)
        if block is None and bare and may_continue:
            last = blocks.pop()
            block = Block(last.kind, f"{last.text} {bare}", last.number)
        elif block is None and bare:
            block = Block(BlockKind.PARAGRAPH, bare)
        if block is not None:
            blocks.append(block)
        may_continue = block is not None and block.kind is not BlockKind.HEADING
    if not blocks:
        raise ValueError(f"{name}: an empty page")
    return HelpPage(name, title, tuple(blocks))


def _block(line: str) -> Block | None:
    """Give the block that a line begins; None for a line that begins none by itself."""
    if line.startswith("## "):
        return Block(BlockKind.HEADING, line[3:].strip())
    if line.startswith("- "):
        return Block(BlockKind.ITEM, line[2:].strip())
    if numbered := _NUMBERED.fullmatch(line):
        return Block(BlockKind.STEP, numbered[2].strip(), int(numbered[1]))
    return None


def _fault(line: str, *, has_title: bool, may_continue: bool) -> str:
    """Say why a line is none that help has; '' for one that is."""
    bare, block = line.strip(), _block(line)
    if _MARKS.search(bare):
        return "has a mark inside; help is plain text"
    if not has_title:
        titled = line.startswith("# ") and bare[2:].strip()
        return "" if titled else "stands before a title, as in '# Logging a fold'"
    if block is None and bare.startswith("#"):
        return "is no heading that help has"
    if block is not None and not block.text:
        return "is empty"
    if block is None and bare and line[0].isspace() and not may_continue:
        return "is indented but continues nothing"
    return ""
