"""A sheet as a table of two columns, field and value with its unit, to read and to write as CSV or XLSX.

A third column may say what a field means; nothing reads it. Text that a spreadsheet would take for a formula is written
behind an apostrophe, which reading takes off again.
"""

from __future__ import annotations

import csv
import difflib
import io
import zipfile
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path
from typing import Any

import openpyxl
from openpyxl.utils.exceptions import InvalidFileException
from pydantic import ValidationError

from engine import units
from engine.sheet import PARTED, Sheet, sheet_fields
from engine.stated import CaseError, Choice, Count, Declaration, Figure, Problem, Stated, problems_of

HEADER = ("field", "value")
MEANING = "meaning"
LARGEST = 1 << 20
LARGEST_UNPACKED = 1 << 24
MOST_ROWS = 2000
FORMULA = ("=", "+", "-", "@", "\t", "\r", "\n")
ARCHIVE = b"PK\x03\x04"

GROUPS = {
    "inside": "Tube side or inner pipe: ",
    "outside": "Shell side or annulus: ",
    "inner_pipe": "Inner pipe: ",
    "outer_pipe": "Outer pipe: ",
}

Rows = Iterable[Sequence[Any]]


# --- writing ----------------------------------------------------------------------------------------------------------


def sheet_csv(sheet: Sheet) -> bytes:
    """What a sheet states, as typed, one field a row; UTF-8 with the mark that spreadsheets look for."""
    return as_csv([HEADER, *_stated(sheet)])


def sheet_xlsx(sheet: Sheet) -> bytes:
    """The same as a workbook of one sheet."""
    return _xlsx([HEADER, *_stated(sheet)])


def blank_csv() -> bytes:
    """Every field with what it means, values to be filled in."""
    return as_csv([(*HEADER, MEANING), *_blank()])


def blank_xlsx() -> bytes:
    return _xlsx([(*HEADER, MEANING), *_blank()])


def _stated(sheet: Sheet) -> Iterator[tuple[str, str]]:
    for path, value in sheet.stated().items():
        if isinstance(value, Figure):
            yield path, value.text or units.show(float(value), value.quantity, "si", digits=17)
        else:
            yield path, str(value)


def _blank() -> Iterator[tuple[str, str, str]]:
    for path, declared in sheet_fields().items():
        yield path, "", f"{GROUPS.get(path.partition('.')[0], '')}{_meaning(declared)}"


def _meaning(declared: Declaration) -> str:
    parts = [declared.name]
    if isinstance(declared, Stated) and declared.example:
        parts.append(f"for example {declared.example}")
    if isinstance(declared, Choice):
        parts.append(" or ".join(declared.options))
    if isinstance(declared, Count):
        parts.append("a whole number")
    if declared.help:
        parts.append(declared.help.rstrip("."))
    return "; ".join(parts)


def _neutral(text: str) -> str:
    """Text that no spreadsheet takes for a formula."""
    return f"'{text}" if text.startswith(FORMULA) else text


def as_csv(rows: Rows) -> bytes:
    """Any table for a spreadsheet; UTF-8 with the mark that spreadsheets look for, no cell a formula."""
    written = io.StringIO()
    csv.writer(written, lineterminator="\r\n").writerows([_neutral(str(cell)) for cell in row] for row in rows)
    return written.getvalue().encode("utf-8-sig")


def _xlsx(rows: Rows) -> bytes:
    book = openpyxl.Workbook()
    page = book.active
    assert page is not None
    page.title = "datasheet"
    for i, row in enumerate(rows, 1):
        for j, text in enumerate(row, 1):
            cell = page.cell(i, j)
            cell.value = _neutral(str(text))
            cell.data_type = "s"
    for column, width in (("A", 28), ("B", 24), ("C", 70)):
        page.column_dimensions[column].width = width
    page.freeze_panes = "A2"
    written = io.BytesIO()
    book.save(written)
    return written.getvalue()


# --- reading ----------------------------------------------------------------------------------------------------------


def read_sheet(data: bytes) -> Sheet:
    """The sheet in a CSV or XLSX table. Raises CaseError with every problem, each with its row and column."""
    if len(data) > LARGEST:
        _refuse("", f"the file holds {len(data) / LARGEST:.1f} MiB; allowed is up to {LARGEST >> 20} MiB")
    rows = list(_xlsx_rows(data) if data.startswith(ARCHIVE) else _csv_rows(data))
    if not rows:
        _refuse("", 'the file is empty; allowed is a table of "field" and "value"')
    if len(rows) > MOST_ROWS:
        _refuse("", f"the table holds {len(rows)} rows; allowed are up to {MOST_ROWS}")
    problems = list(_header_problems(rows[0]))
    if problems:
        raise CaseError(problems)
    raw: dict[str, Any] = {}
    places: dict[str, int] = {}
    for number, row in enumerate(rows[1:], 2):
        problems += _read_row(number, row, raw, places)
    try:
        sheet = Sheet.model_validate(raw, context={"file": True})
    except ValidationError as error:
        for problem in problems_of(error, Sheet, {}):
            place = _place(places[problem.path], 2) if problem.path in places else problem.path
            problems.append(Problem(path=place, says=f"{problem.path}: {problem.says}"))
    if problems:
        raise CaseError(problems)
    return sheet


def load_sheet(path: str | Path) -> Sheet:
    """The sheet in a CSV or XLSX file. Raises CaseError, also where the file cannot be read."""
    path = Path(path)
    try:
        size = path.stat().st_size
        if size > LARGEST:
            _refuse(str(path), f"holds {size / LARGEST:.1f} MiB; allowed is up to {LARGEST >> 20} MiB")
        data = path.read_bytes()
    except OSError as error:
        raise CaseError(
            [Problem(path=str(path), says=f"cannot be read: {(error.strerror or 'unknown reason').lower()}")]
        ) from None
    return read_sheet(data)


def _place(row: int, column: int) -> str:
    return f"row {row}, column {column}"


def _refuse(path: str, says: str) -> None:
    raise CaseError([Problem(path=path, says=says)])


def _header_problems(header: Sequence[Any]) -> Iterator[Problem]:
    allowed = (*HEADER, MEANING)
    cells = [_text(cell).strip() for cell in header]
    while cells and not cells[-1]:
        cells.pop()
    for i, wanted in enumerate(HEADER):
        given = cells[i] if i < len(cells) else ""
        if given.lower() != wanted:
            says = f'"{given[:40]}" stands where "{wanted}" must; allowed is a table of "field" and "value"'
            yield Problem(path=_place(1, i + 1), says=says)
    for i, given in enumerate(cells[2:], 2):
        if i >= len(allowed) or given.lower() != MEANING:
            yield Problem(path=_place(1, i + 1), says=f'"{given[:40]}" is no column of a datasheet table')


def _read_row(number: int, row: Sequence[Any], raw: dict[str, Any], places: dict[str, int]) -> Iterator[Problem]:
    cells = [_text(cell).strip() for cell in row]
    if not any(cells):
        return
    field, value = (*cells, "", "")[:2]
    if not field:
        yield Problem(path=_place(number, 1), says="names no field")
        return
    if any(cells[3:]):
        yield Problem(path=_place(number, 4), says="stands beyond the table; allowed are field, value and meaning")
    known = sheet_fields()
    if field not in known:
        near = difflib.get_close_matches(field, known, 1, 0.5)
        hint = f'; did you mean "{near[0]}"?' if near else ""
        yield Problem(path=_place(number, 1), says=f'"{field[:60]}" is no field of a datasheet{hint}')
        return
    if not value:
        return
    if field in places:
        yield Problem(path=_place(number, 1), says=f'"{field}" stands in row {places[field]} already')
        return
    if isinstance(row[1], str) and row[1].startswith("="):
        yield Problem(path=_place(number, 2), says="is a formula; allowed is a figure with its unit")
        return
    places[field] = number
    counted = isinstance(known[field], Count) and value.isascii() and value.isdigit() and len(value) < 10
    group, _, name = field.partition(".")
    at = raw.setdefault(group, {}) if group in PARTED else raw
    at[name or group] = int(value) if counted else value


def _text(cell: Any) -> str:
    if cell is None:
        return ""
    if isinstance(cell, float):
        return str(int(cell)) if cell.is_integer() and abs(cell) < 1e15 else repr(cell)
    text = str(cell)
    return text[1:] if text.startswith("'") and text[1:].startswith(FORMULA) else text


def _csv_rows(data: bytes) -> Iterator[Sequence[Any]]:
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError:
        _refuse("", "the file is not text; allowed is CSV in UTF-8, or XLSX")
        return
    if "\0" in text:
        _refuse("", "the file is not text; allowed is CSV in UTF-8, or XLSX")
    header = text.lstrip().partition("\n")[0]
    delimiter = max(",;\t", key=header.count)
    try:
        yield from csv.reader(io.StringIO(text, newline=""), delimiter=delimiter)
    except csv.Error as error:
        _refuse("", f"the file is no CSV table: {error}")


def _xlsx_rows(data: bytes) -> Iterator[Sequence[Any]]:
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            unpacked = sum(part.file_size for part in archive.infolist())
        if unpacked > LARGEST_UNPACKED:
            _refuse("", f"the workbook unpacks to {unpacked >> 20} MiB; allowed is up to {LARGEST_UNPACKED >> 20} MiB")
        book = openpyxl.load_workbook(io.BytesIO(data), read_only=True)
        page = book.worksheets[0]
        page.reset_dimensions()
        for i, row in enumerate(page.iter_rows(max_col=8, values_only=True)):
            if i > MOST_ROWS:
                _refuse("", f"the table holds more than the allowed {MOST_ROWS} rows")
            yield row
    except CaseError:
        raise
    except (zipfile.BadZipFile, InvalidFileException, KeyError, ValueError, IndexError, SyntaxError, OSError) as error:
        what = " ".join(str(error).split())[:80]
        raise CaseError([Problem(path="", says=f"the file is no workbook that can be read ({what})")]) from None


__all__ = ["as_csv", "blank_csv", "blank_xlsx", "load_sheet", "read_sheet", "sheet_csv", "sheet_xlsx"]
