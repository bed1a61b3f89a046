"""A sheet as it is being typed or pasted: read as far as it can be, every figure that cannot be named beside it."""

from __future__ import annotations

import copy
import re
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from pydantic import ValidationError

from engine import units
from engine.sheet import PARTED, Sheet, sheet_fields
from engine.stated import SIDES, Count, Figure, Problem, Side, problems_of

MOST_PASTED = 1 << 20
SIDE_WORDS: Mapping[str, Side] = {
    **dict.fromkeys(("inside", "tube side", "tubeside", "tube", "tubes", "inner pipe", "pipe"), "inside"),
    **dict.fromkeys(("outside", "shell side", "shellside", "shell", "annulus", "outer pipe"), "outside"),
}
"""What a column of a pasted table may be headed by."""


def sheet_as_typed(raw: Mapping[str, Any]) -> tuple[Sheet, tuple[Problem, ...]]:
    """The sheet of what can be read, and a problem for each entry that cannot; those are left out of the sheet."""
    kept = copy.deepcopy(dict(raw))
    problems: dict[str, Problem] = {}
    while True:
        try:
            return Sheet.model_validate(kept, context={"file": True}), tuple(problems.values())
        except ValidationError as error:
            found = {problem.path: problem for problem in problems_of(error, Sheet, {})}
        problems |= found
        for path in found:
            _drop(kept, path)


def _drop(keys: dict[str, Any], path: str) -> None:
    """Take an entry away, or the group it is in where the group itself is none."""
    group, _, name = path.partition(".")
    inner = keys.get(group)
    if name and isinstance(inner, dict) and name in inner:
        del inner[name]
    else:
        keys.pop(path if path in keys else group, None)


def nested_sheet(raw: Mapping[str, Any]) -> dict[str, Any]:
    """The same keys with "inside.T_out" under "inside"; a key given in both ways stays as it is."""
    found: dict[str, Any] = {key: copy.copy(value) for key, value in raw.items() if "." not in key}
    for key, value in raw.items():
        group, _, name = key.partition(".")
        if not name:
            continue
        inner = found.get(group, {})
        if group in PARTED and isinstance(inner, dict) and name not in inner:
            found[group] = {**inner, name: value}
        else:
            found[key] = value
    return found


# --- pasting ----------------------------------------------------------------------------------------------------------


def pasted_sheet(text: str) -> tuple[dict[str, Any], tuple[Problem, ...]]:
    """The keys of pasted rows, and a problem for each row that names no field, with its line.

    A row is a field and its figure, or a field and the figures of both sides when a line above heads those columns
    ("tube side", "shell side"). A field goes by its key, or by its name on the form; a unit may stand in brackets.
    """
    raw: dict[str, Any] = {}
    problems: list[Problem] = []
    columns: tuple[Side, ...] = ()
    if len(text) > MOST_PASTED:
        return {}, (Problem(path="", says=f"is too long; allowed are up to {MOST_PASTED >> 20} million characters"),)
    for number, line in enumerate(text.splitlines(), 1):
        cells = _cells(line)
        if not cells:
            continue
        heads = [SIDE_WORDS.get(cell.lower()) for cell in cells if cell]
        sides = tuple(head for head in heads if head)
        if len(set(sides)) == 2 and len(sides) >= len(heads) - 1:
            columns = sides
        elif cells[0].lower() == "field":
            continue
        else:
            for path, value, says in _entries(cells, columns):
                if says:
                    problems.append(Problem(path=f"line {number}", says=says))
                else:
                    _state(raw, path, value)
    return raw, tuple(problems)


def _cells(line: str) -> list[str]:
    """A line taken apart at tabs, semicolons or bars, else behind a key or a colon, else at wide gaps."""
    mark = next((mark for mark in ("\t", ";", "|") if mark in line), None)
    if mark:
        parts = line.strip("|").split(mark)
    elif (keyed := re.match(r"\s*([\w.]+)\s*[,=]\s*(.*)", line)) and keyed[1] in sheet_fields():
        parts = [*keyed.groups()]
    else:
        parts = re.split(r":\s+|\s{2,}", line.strip())
    cells = [part.strip().strip('"') for part in parts]
    while cells and not cells[-1]:
        cells.pop()
    return cells


def _entries(cells: Sequence[str], columns: Sequence[Side]) -> Iterator[tuple[str, str, str]]:
    """(path, value, "") of a row, or ("", "", why not)."""
    name, _, unit = cells[0].partition("[")
    name, unit = name.strip(), unit.strip(" ]")
    values = [f"{cell} {unit}" if unit and re.fullmatch(r"[\d.,eE+−-]+", cell) else cell for cell in cells[1:]]
    if not any(values):
        return
    whole = _path(name)
    if whole:
        yield whole, values[0], ""
        return
    of_side = [_path(name, side) for side in columns]
    if not any(of_side):
        if any(_path(name, side) for side in SIDES):
            says = f'"{name[:60]}" is of one side; head the columns "tube side" and "shell side", or write inside.…'
        else:
            says = f'"{name[:60]}" is no field of a datasheet'
        yield "", "", says
        return
    for path, value in zip(of_side, values, strict=False):
        if value:
            yield path, value, ""


def _path(name: str, side: Side | None = None) -> str:
    """The field that a key or a name of the form means, of a side or of the whole; empty where there is none."""
    folded = " ".join(name.lower().split())
    for path, declared in sheet_fields().items():
        group, _, last = path.rpartition(".")
        if side is None and path.lower() == folded:
            return path
        if group == (side or "") and folded in (last.lower(), declared.name.lower()):
            return path
    return ""


def _state(raw: dict[str, Any], path: str, value: str) -> None:
    counted = isinstance(sheet_fields()[path], Count) and re.fullmatch(r"\d{1,9}", value)
    group, _, name = path.rpartition(".")
    at = raw.setdefault(group, {}) if group else raw
    at[name or path] = int(value) if counted else value


def raw_sheet(sheet: Sheet) -> dict[str, Any]:
    """The keys of a sheet, figures as they were typed."""
    raw: dict[str, Any] = {}
    for path, value in sheet.stated().items():
        group, _, name = path.rpartition(".")
        at = raw.setdefault(group, {}) if group else raw
        shown = isinstance(value, Figure) and (value.text or units.show(float(value), value.quantity, "si", 17))
        at[name] = shown or value
    return raw


__all__ = ["nested_sheet", "pasted_sheet", "raw_sheet", "sheet_as_typed"]
