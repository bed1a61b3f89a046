"""Sections as a PDF to print, check and sign. The same input gives the same bytes."""

from __future__ import annotations

import hashlib
import io
import json
from collections.abc import Mapping, Sequence
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any
from xml.sax.saxutils import escape

from reportlab.lib.pagesizes import A4
from reportlab.lib.styles import ParagraphStyle
from reportlab.lib.units import mm
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont
from reportlab.platypus import CondPageBreak, Flowable, KeepTogether, Paragraph, SimpleDocTemplate, Spacer
from reportlab.platypus import Table as Grid

from engine import __version__
from engine.datasheet import Audit
from engine.findings import Verdict
from engine.report.blocks import Block, Bundle, Chart, Columns, Section, Table
from engine.report.datasheet import sheet_sections
from engine.report.drawings import BOLD, HAIR, INK, PALE, REGULAR, drawn, fitted
from engine.report.sections import sections
from engine.states import Rating
from engine.uncertainty import Intervals

FONTS = Path(__file__).parents[1] / "fonts"
MARGIN, HEAD, FOOT = 17 * mm, 16 * mm, 14 * mm
WIDTH = A4[0] - 2 * MARGIN
PADDING = 6.0
"""That the page's frame keeps free on each side."""
ROOM = 40 * mm
"""That must be left on a page for a longer table to begin there."""
KEPT = 500
"""A table of up to so many characters stays on one page, with its heading."""

GAP, GUTTER = 4.0, 12.0
"""Below a table, and between two side by side."""

BODY = ParagraphStyle("body", fontName=REGULAR, fontSize=7.6, leading=9.8, textColor=INK, spaceAfter=2)
LEAD = ParagraphStyle("lead", parent=BODY, fontSize=9.2, leading=12.2, spaceAfter=4)
CAPTION = ParagraphStyle("caption", parent=BODY, fontSize=7.0, leading=8.8)
CELL = ParagraphStyle("cell", parent=BODY, fontSize=6.8, leading=8.0, spaceAfter=0)
FINE_CELL = ParagraphStyle("fine cell", parent=CELL, fontSize=6.2, leading=7.2)
HEADER_CELL = ParagraphStyle("header cell", parent=CELL, fontName=BOLD)
FINE_HEADER_CELL = ParagraphStyle("fine header cell", parent=FINE_CELL, fontName=BOLD)
TITLE = ParagraphStyle("title", parent=BODY, fontName=BOLD, fontSize=15, leading=19, spaceAfter=4)
HEADING = ParagraphStyle("heading", parent=BODY, fontName=BOLD, fontSize=9.6, leading=12, spaceBefore=5, spaceAfter=1.5)
TABLE_TITLE = ParagraphStyle(
    "table title", parent=BODY, fontName=BOLD, fontSize=7.2, leading=9.4, spaceBefore=2, spaceAfter=1
)


def report_pdf(
    rating: Rating,
    intervals: Mapping[str, Intervals],
    verdicts: Sequence[Verdict],
    system: str = "si",
    studies: Sequence[Section] = (),
) -> bytes:
    """The report of a rated case on A4, figures in a system of units ("si", "us", "metric").

    `studies` as in `sections`. Raises ValueError for an unknown system.
    """
    written = sections(rating, intervals, verdicts, system, studies)
    case = rating.case
    name = f"{case.tag or 'No tag'}{', revision ' + case.revision if case.revision else ''}"
    _, pages = _laid_out(written, name, case.input_hash, 0)
    return _laid_out(written, name, case.input_hash, pages)[0]


def sheet_pdf(audit: Audit, system: str = "si") -> bytes:
    """The audit of a datasheet on A4, with the questions to send back. Raises ValueError for an unknown system."""
    first, *rest = sheet_sections(audit, system)
    written = (replace(first, key="identity"), *rest)
    sheet = audit.sheet
    name = f"{sheet.item or 'No item'}{', revision ' + sheet.revision if sheet.revision else ''}"
    stated = sorted((path, getattr(value, "text", "") or str(value)) for path, value in sheet.stated().items())
    input_hash = hashlib.sha256(json.dumps(stated).encode()).hexdigest()[:16]
    _, pages = _laid_out(written, name, input_hash, 0)
    return _laid_out(written, name, input_hash, pages)[0]


@cache
def _fonts() -> None:
    for name in (REGULAR, BOLD):
        pdfmetrics.registerFont(TTFont(name, FONTS / f"{name}.ttf"))
    pdfmetrics.registerFontFamily(REGULAR, normal=REGULAR, bold=BOLD, italic=REGULAR, boldItalic=BOLD)


def _laid_out(written: Sequence[Section], name: str, input_hash: str, pages: int) -> tuple[bytes, int]:
    """The document whose footers say "of `pages`", and how many pages it has."""
    _fonts()
    out = io.BytesIO()
    document = SimpleDocTemplate(
        out,
        pagesize=A4,
        leftMargin=MARGIN - PADDING,
        rightMargin=MARGIN - PADDING,
        topMargin=HEAD - PADDING,
        bottomMargin=FOOT - PADDING,
        title=_clean(written[0].title),
        author="",
        subject=f"Input hash {input_hash}",
        creator=f"Countercheck {__version__}",
        lang="en",
        invariant=1,
    )

    def frame(canvas: Any, _: Any) -> None:
        canvas.saveState()
        canvas.setFillColor(INK)
        canvas.setStrokeColor(HAIR)
        canvas.setLineWidth(0.5)
        top, bottom, right = A4[1] - 12 * mm, 9 * mm, A4[0] - MARGIN
        canvas.setFont(BOLD, 7.2)
        canvas.drawString(MARGIN, top, fitted(_clean(name), WIDTH / 2, 7.2, BOLD))
        canvas.setFont(REGULAR, 7.2)
        canvas.drawRightString(right, top, f"Input hash {input_hash}")
        canvas.line(MARGIN, top - 4, right, top - 4)
        canvas.line(MARGIN, bottom + 9, right, bottom + 9)
        canvas.drawString(
            MARGIN, bottom, f"Countercheck {__version__}. A rating aid: the responsible engineer verifies and signs."
        )
        canvas.drawRightString(right, bottom, f"page {canvas.getPageNumber()} of {pages}")
        canvas.restoreState()

    document.build([part for section in written for part in _section(section)], onFirstPage=frame, onLaterPages=frame)
    return out.getvalue(), document.page


def _clean(text: str) -> str:
    """Without what a page cannot hold: halves of surrogate pairs."""
    return text.encode("utf-8", "replace").decode()


def _markup(text: str) -> str:
    return escape(_clean(text)).replace("\n", "<br/>")


def _section(section: Section) -> list[Flowable]:
    """A section's flowables; its heading stays with what follows."""
    if section.key == "identity":
        return [Paragraph(_markup(section.title), TITLE), *(part for block in section.blocks for part in _block(block))]
    heading, (first, *rest) = Paragraph(_markup(section.title), HEADING), section.blocks
    if section.key == "signatures":
        return [KeepTogether([heading, *(part for block in section.blocks for part in _block(block))])]
    opening = [heading, *([Paragraph(_markup(str(first)), LEAD)] if section.key == "answer" else _block(first))]
    kept = _kept(first)
    if isinstance(first, str) and rest and not isinstance(rest[0], str):  # words that lead to a table stay with it
        opening += _block(rest[0])
        kept = _kept(rest.pop(0))
    placed: list[Flowable] = [KeepTogether(opening)] if kept else [CondPageBreak(ROOM), *opening]
    for block in rest:
        placed += [KeepTogether(_block(block))] if _kept(block) else [CondPageBreak(ROOM), *_block(block)]
    return placed


def _kept(block: Block) -> bool:
    """Whether a block stays on one page."""
    tables = block.tables if isinstance(block, Columns) else (block,) if isinstance(block, Table) else ()
    return sum(len(cell) for table in tables for row in table.rows for cell in row) <= KEPT


def _block(block: Block, width: float = WIDTH) -> list[Flowable]:
    if isinstance(block, str):
        return [Paragraph(_markup(block), BODY)]
    if isinstance(block, Table):
        title = [Paragraph(_markup(block.title), TABLE_TITLE)] if block.title else []
        return [*title, _grid(block, width), Spacer(0, GAP)]
    if isinstance(block, Columns):
        return [_side_by_side(block)]
    if isinstance(block, Bundle):  # its legend is drawn beside it
        return [drawn(block, WIDTH), Spacer(0, GAP)]
    return [drawn(block, WIDTH), Paragraph(_markup(block.alt if isinstance(block, Chart) else block.caption), CAPTION)]


def _side_by_side(columns: Columns) -> Grid:
    room = WIDTH - GUTTER * (len(columns.columns) - 1)
    cells: list[Any] = []
    widths: list[float] = []
    for tables, share in zip(columns.columns, columns.widths, strict=True):
        width = room * share / sum(columns.widths)
        cells += ["", [part for table in tables for part in _block(table, width)]]
        widths += [GUTTER, width]
    style = [
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        *((f"{edge}PADDING", (0, 0), (-1, -1), 0) for edge in ("LEFT", "RIGHT", "TOP", "BOTTOM")),
    ]
    return Grid([cells[1:]], colWidths=widths[1:], style=style, hAlign="LEFT", splitInRow=1)


def _grid(table: Table, room: float) -> Grid:
    weights = table.widths or (1.0,) * len(table.header)
    widths = [room * weight / sum(weights) for weight in weights]
    header, cell = (FINE_HEADER_CELL, FINE_CELL) if table.fine else (HEADER_CELL, CELL)
    cells = [[Paragraph(_markup(text), header) for text in table.header]]
    cells += [[Paragraph(_markup(text), cell) for text in row] for row in table.rows]
    heights = [None, *([7.5 * mm if table.roomy else None] * len(table.rows))]
    style = [
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        ("BACKGROUND", (0, 0), (-1, 0), PALE),
        ("LINEBELOW", (0, 0), (-1, -1), 0.35, HAIR),
        ("LEFTPADDING", (0, 0), (-1, -1), 3),
        ("RIGHTPADDING", (0, 0), (-1, -1), 3),
        ("TOPPADDING", (0, 0), (-1, -1), 0.3 if table.fine else 0.6),
        ("BOTTOMPADDING", (0, 0), (-1, -1), 0.8 if table.fine else 1.2),
    ]
    return Grid(cells, colWidths=widths, rowHeights=heights, style=style, repeatRows=1, hAlign="LEFT")
