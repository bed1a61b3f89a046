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
from engine.report.blocks import Block, Bundle, Section, Table
from engine.report.datasheet import sheet_sections
from engine.report.drawings import BOLD, HAIR, INK, PALE, REGULAR, drawn, fitted
from engine.report.sections import sections
from engine.states import Rating
from engine.uncertainty import Intervals

FONTS = Path(__file__).parents[1] / "fonts"
MARGIN, HEAD, FOOT = 17 * mm, 17 * mm, 14 * mm
WIDTH = A4[0] - 2 * MARGIN
PADDING = 6.0
"""That the page's frame keeps free on each side."""
ROOM = 40 * mm
"""That must be left on a page for a longer table to begin there."""
KEPT = 500
"""A table of up to so many characters stays on one page, with its heading."""

BODY = ParagraphStyle("body", fontName=REGULAR, fontSize=7.8, leading=10.2, textColor=INK, spaceAfter=2)
LEAD = ParagraphStyle("lead", parent=BODY, fontSize=9.2, leading=12.6, spaceAfter=4)
CAPTION = ParagraphStyle("caption", parent=BODY, fontSize=7.0, leading=8.8)
CELL = ParagraphStyle("cell", parent=BODY, fontSize=6.9, leading=8.3, spaceAfter=0)
HEADER_CELL = ParagraphStyle("header cell", parent=CELL, fontName=BOLD)
TITLE = ParagraphStyle("title", parent=BODY, fontName=BOLD, fontSize=15, leading=19, spaceAfter=4)
HEADING = ParagraphStyle("heading", parent=BODY, fontName=BOLD, fontSize=9.6, leading=12, spaceBefore=6, spaceAfter=2)
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
    opening = [Paragraph(_markup(str(first)), LEAD)] if section.key == "answer" else _block(first)
    placed: list[Flowable] = (
        [KeepTogether([heading, *opening])] if _kept(first) else [CondPageBreak(ROOM), heading, *opening]
    )
    for block in rest:
        placed += [KeepTogether(_block(block))] if _kept(block) else [CondPageBreak(ROOM), *_block(block)]
    return placed


def _kept(block: Block) -> bool:
    return not isinstance(block, Table) or sum(len(cell) for row in block.rows for cell in row) <= KEPT


def _block(block: Block) -> list[Flowable]:
    if isinstance(block, str):
        return [Paragraph(_markup(block), BODY)]
    if isinstance(block, Table):
        title = [Paragraph(_markup(block.title), TABLE_TITLE)] if block.title else []
        return [*title, _grid(block), Spacer(0, 4)]
    if isinstance(block, Bundle):  # its legend is drawn beside it
        return [drawn(block, WIDTH), Spacer(0, 4)]
    return [drawn(block, WIDTH), Paragraph(_markup(block.alt), CAPTION)]


def _grid(table: Table) -> Grid:
    weights = table.widths or (1.0,) * len(table.header)
    widths = [WIDTH * weight / sum(weights) for weight in weights]
    cells = [[Paragraph(_markup(text), HEADER_CELL) for text in table.header]]
    cells += [[Paragraph(_markup(text), CELL) for text in row] for row in table.rows]
    heights = [None, *([8 * mm if table.roomy else None] * len(table.rows))]
    style = [
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        ("BACKGROUND", (0, 0), (-1, 0), PALE),
        ("LINEBELOW", (0, 0), (-1, -1), 0.35, HAIR),
        ("LEFTPADDING", (0, 0), (-1, -1), 3),
        ("RIGHTPADDING", (0, 0), (-1, -1), 3),
        ("TOPPADDING", (0, 0), (-1, -1), 0.9),
        ("BOTTOMPADDING", (0, 0), (-1, -1), 1.5),
    ]
    return Grid(cells, colWidths=widths, rowHeights=heights, style=style, repeatRows=1, hAlign="LEFT")
