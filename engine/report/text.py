"""Sections as plain text for a terminal."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable

from engine.report.blocks import Block, Columns, Section, Table

WIDTH = 110
GAP = "  "


def report_text(sections: Iterable[Section], width: int = WIDTH) -> str:
    """Headings, wrapped paragraphs and aligned tables; a figure is told by its sentence."""
    parts = []
    for section in sections:
        parts.append(f"{section.title}\n{'-' * len(section.title)}")
        parts += [_block(block, width) for block in section.blocks]
    return "\n\n".join(parts) + "\n"


def _block(block: Block, width: int) -> str:
    if isinstance(block, Table):
        return _table(block, width)
    if isinstance(block, Columns):
        return "\n\n".join(_table(table, width) for table in block.tables)
    return _wrapped(block if isinstance(block, str) else block.alt, width)


def _wrapped(text: str, width: int) -> str:
    return "\n".join(_lines(text, width))


def _lines(text: str, width: int) -> list[str]:
    return [line for part in text.split("\n") for line in textwrap.wrap(part, width) or [""]]


def _table(table: Table, width: int) -> str:
    rows = [table.header, *table.rows]
    longest = [max(len(line) for row in rows for line in row[i].split("\n")) for i in range(len(table.header))]
    widths = _fitted(longest, width - len(GAP) * (len(longest) - 1))
    text = [_row(row, widths) for row in rows]
    text.insert(1, GAP.join("-" * w for w in widths))
    return "\n".join([table.title, *text] if table.title else text)


def _fitted(longest: list[int], room: int) -> list[int]:
    """Column widths within the room: narrow columns keep theirs, the wide ones share what is left."""
    widths, left, open_columns = list(longest), room, sorted(range(len(longest)), key=lambda i: longest[i])
    for n, i in enumerate(open_columns):
        widths[i] = min(longest[i], max(left // (len(open_columns) - n), 8))
        left -= widths[i]
    return widths


def _row(row: tuple[str, ...], widths: list[int]) -> str:
    cells = [_lines(cell, w) for cell, w in zip(row, widths, strict=True)]
    height = max(len(cell) for cell in cells)
    padded = [[*cell, *[""] * (height - len(cell))] for cell in cells]
    lines = (
        GAP.join(part.ljust(w) for part, w in zip(line, widths, strict=True)) for line in zip(*padded, strict=True)
    )
    return "\n".join(line.rstrip() for line in lines)
