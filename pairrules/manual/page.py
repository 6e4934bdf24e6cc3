"""A page of the manual as plain data, and its two looks: text for terminals, and Markdown."""

from __future__ import annotations

import re
import textwrap
from collections.abc import Callable, Sequence
from dataclasses import dataclass

WIDTH = 80


@dataclass(frozen=True, slots=True, kw_only=True)
class Paragraph:
    """Running text."""

    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Terms:
    """Terms, each with one or more texts that belong to it."""

    rows: tuple[tuple[str, tuple[str, ...]], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Code:
    """Lines to be copied as they stand; YAML."""

    text: str


Block = Paragraph | Terms | Code


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """A heading and what stands under it; without a heading it opens the page."""

    heading: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Page:
    """One rule, model or list of figures. `name`: as the user writes it, or a title."""

    name: str
    sections: tuple[Section, ...]


def plain(pages: Sequence[Page]) -> str:
    """The pages for a terminal, lines of at most `WIDTH` columns but for code that is longer."""
    return "\n\n".join("\n".join(_plain_page(page)) for page in pages) + "\n"


def markdown(title: str, opening: str, pages: Sequence[Page]) -> str:
    """The pages as one Markdown document with a table of contents."""
    lines = [f"# {title}", "", opening, ""]
    lines += [f"* [{page.name}](#{_anchor(page.name)})" for page in pages]
    for page in pages:
        lines += ["", f"## {page.name}"]
        for section in page.sections:
            lines += ["", f"### {section.heading}"] if section.heading else []
            for block in section.blocks:
                lines += ["", *_MARKDOWN[type(block)](block)]
    return "\n".join(lines) + "\n"


def _plain_page(page: Page) -> list[str]:
    lines = [page.name]
    for section in page.sections:
        indent = "  " if section.heading else ""
        lines += ["", section.heading] if section.heading else []
        for number, block in enumerate(section.blocks):
            lines += [""] if number and section.heading else []
            lines += _plain_block(block, indent)
    return lines


def _plain_block(block: Block, indent: str) -> list[str]:
    match block:
        case Paragraph():
            return _wrapped(block.text, indent, indent)
        case Terms():
            return [line for term, texts in block.rows for line in _plain_term(term, texts, indent)]
        case Code():
            return [f"{indent}{line}".rstrip() for line in block.text.splitlines()]


def _plain_term(term: str, texts: tuple[str, ...], indent: str) -> list[str]:
    lines = _wrapped(f"{term}: {texts[0]}", indent, indent + "    ")
    return lines + [line for text in texts[1:] for line in _wrapped(text, indent + "    ", indent + "    ")]


def _wrapped(text: str, first: str, later: str) -> list[str]:
    return textwrap.wrap(text, WIDTH, initial_indent=first, subsequent_indent=later, break_on_hyphens=False)


def _markdown_terms(block: Terms) -> list[str]:
    return [
        f"* **{_escaped(term)}**: {' '.join(_ended(_escaped(text)) for text in texts)}" for term, texts in block.rows
    ]


def _ended(text: str) -> str:
    return text if text.endswith((".", ":", ";")) else f"{text}."


def _escaped(text: str) -> str:
    """Text in which nothing but `code` is taken for markup."""
    parts = re.split(r"(`[^`]*`)", text)
    return "".join(part if part.startswith("`") else re.sub(r"([\\*_<>\[\]|])", r"\\\1", part) for part in parts)


def _anchor(name: str) -> str:
    return re.sub(r"[^a-z0-9 _-]", "", name.lower()).replace(" ", "-")


_MARKDOWN: dict[type[Block], Callable[..., list[str]]] = {
    Paragraph: lambda block: [_escaped(block.text)],
    Terms: _markdown_terms,
    Code: lambda block: ["```yaml", *block.text.splitlines(), "```"],
}
