"""Draws a form from declared fields. A box shows what was typed, and under it what the engine says to it."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from typing import Any

import streamlit as st

import engine
from app import fields, session
from app.display import plain
from app.fields import Part, Path

MISSING = "is missing"
KINDS = {
    "pure": "A fluid known by name",
    "solution": "A solution in water",
    "table": "My own table of properties",
    "constant": "Constant properties",
    "steam": "Condensing steam",
}
"""What a user calls the kinds of fluid; exchangers carry their own title."""
NOT_STATED = "not stated"
NOZZLES, DETAILS = "Nozzles", "Further details"


class Problems:
    """What the engine says to the case, handed out to the fields it belongs to."""

    def __init__(self, problems: Sequence[engine.Problem], raw: Any) -> None:
        self._left: dict[str, list[str]] = {}
        self.missing = 0
        for problem in problems:
            self._left.setdefault(problem.path, []).append(problem.says)
            stated = fields.get(raw, fields.steps(problem.path)) if problem.path else raw
            self.missing += stated in (None, "", {}, [])
        self.wrong = len(problems) - self.missing

    def take(self, *paths: Path) -> list[str]:
        return [says for path in paths for says in self._left.pop(engine.dotted(path), [])]

    def under(self, path: Path) -> list[str]:
        """What is said at a place and below it, and not taken yet."""
        place = engine.dotted(path)
        below = (f"{place}.", f"{place}[")
        return [text for at, says in self._left.items() if at == place or at.startswith(below) for text in says]

    def rest(self) -> dict[str, list[str]]:
        """Those that no field has taken."""
        return self._left


class Form:
    """One drawing of the form of the current case."""

    def __init__(self, problems: Problems) -> None:
        self.raw = session.case()
        self.problems = problems
        self.display = session.display()
        self.view = session.view()
        self.idle = engine.Case.idle(self.raw)
        self.tables: list[tuple[Part, Path]] = []
        """Tables met on the way: they are drawn across the page, by `rows`."""

    def key(self, path: Path) -> str:
        return engine.dotted(path) + self.view

    def stated(self, path: Path) -> Any:
        return fields.get(self.raw, path)

    # --- groups -------------------------------------------------------------------------------------------------------

    def group(self, model: type[engine.Input], path: Path, columns: int = 1, within: Path | None = None) -> None:
        """All fields of a model: what is usually stated first, the rest in folds."""
        self.said(path, model)
        boxes, folds = _arranged([part for part in fields.parts(model) if self.counts(part, (*path, part.name))], model)
        self.boxes(boxes, path, columns, within)
        for part in fields.parts(model):
            if part.shape == "kinds":
                self.kinds(part, (*path, part.name))
            elif part.shape == "rows":
                self.tables.append((part, (*path, part.name)))
        needed = [part for part in fields.parts(model) if part.shape == "group" and part.needed]
        for part, place in zip(needed, _side_by_side(len(needed)), strict=True):
            with place:
                st.markdown(f"**{part.title}**")
                self.group(part.models[0], (*path, part.name), 2)
        for title, inner in folds.items():
            self.fold(
                title, [(*path, part.name) for part in inner], lambda inner=inner: self.boxes(inner, path, columns)
            )
        for part in fields.parts(model):
            if part.shape == "group" and not part.needed:
                place = (*path, part.name)
                self.fold(part.title, [place], lambda p=part, at=place: self.optional(p.models[0], at, columns))

    def counts(self, part: Part, path: Path) -> bool:
        """Whether a field decides something beside the others; what is stated or wrong is shown all the same."""
        return engine.dotted(path) not in self.idle or self.stated(path) is not None or bool(self.problems.under(path))

    def optional(self, model: type[engine.Input], path: Path, columns: int) -> None:
        if model.__doc__:
            st.caption(model.__doc__.partition("\n\n")[0])
        self.group(model, path, columns, within=path)

    def fold(self, title: str, places: Sequence[Path], draw: Callable[[], None]) -> None:
        """Optional fields in an expander that is open where something is stated or wrong in it."""
        wrong = sum(len(self.problems.under(place)) for place in places)
        stated = sum(_count(self.stated(place)) for place in places)
        note = f" · {wrong} to fix" if wrong else f" · {stated} stated" if stated else ""
        with st.expander(f"{title}{note}", expanded=bool(wrong)):
            draw()

    def boxes(self, inner: Sequence[Part], path: Path, columns: int, within: Path | None = None) -> None:
        for first in range(0, len(inner), columns):
            row = inner[first : first + columns]
            said = any(says != MISSING for part in row for says in self.problems.under((*path, part.name)))
            for part, place in zip(row, _side_by_side(columns, "top" if said else "bottom"), strict=False):
                with place:
                    self.box(part, (*path, part.name), within)

    def kinds(self, part: Part, path: Path) -> None:
        """A choice between kinds of group, and the fields of the chosen one."""
        model = fields.kind_stated(part.models, self.stated(path))
        kinds = {fields.kind_of(m): m for m in part.models}
        widget = self.key((*path, "kind"))
        st.selectbox(
            "Type" if "type" in model.model_fields else f"{part.title} given as",
            list(kinds),
            list(kinds).index(fields.kind_of(model)),
            format_func=lambda kind: _kind_title(kinds[kind]),
            key=widget,
            on_change=_switched,
            args=(path, model, kinds, widget),
        )
        if fields.is_named(model):
            self.box(fields.parts(model)[0], path, named=True)
        else:
            self.group(model, path, 3 if "type" in model.model_fields else 2)

    def rows(self, part: Part, path: Path) -> None:
        """A table, row by row, with a place to paste a whole one."""
        stated = self.stated(path)
        count = len(stated) if isinstance(stated, list) else 0
        self.said(path, part.models[0])
        columns = fields.parts(part.models[0])
        for i in range(count):
            self.said((*path, i), part.models[0])
            with st.container(key=f"{'later' if i else 'first'} row {self.key((*path, i))}"):
                *places, last = st.columns([1] * len(columns) + [0.75], vertical_alignment="bottom")
            for column, place in zip(columns, places, strict=True):
                with place:
                    self.box(column, (*path, i, column.name))
            last.button(
                f"Remove row {i + 1}",
                key=self.key((*path, i, "remove")),
                type="tertiary",
                on_click=_row_removed,
                args=(path, i),
            )
        with st.container(horizontal=True):
            st.button("Add a row", key=self.key((*path, "add")), on_click=session.put, args=((*path, count), {}))
            with st.popover("Paste a table", key=self.key((*path, "paste out"))):
                order = ", ".join(column.declared.name.lower() for column in columns)
                st.markdown(
                    f"Columns in this order, or named in a first line: {order}. "
                    "Units beside the figures, or in brackets in the first line."
                )
                widget = self.key((*path, "paste"))
                st.text_area("Rows to paste", key=widget, placeholder=_example_table(columns), height=160)
                st.button(
                    "Put these rows in the table",
                    key=self.key((*path, "pasted")),
                    on_click=_rows_pasted,
                    args=(path, part, widget),
                )

    # --- one field ----------------------------------------------------------------------------------------------------

    def box(self, part: Part, path: Path, within: Path | None = None, named: bool = False) -> None:
        declared, widget = part.declared, self.key(path)
        value = self.stated(path)
        problems = self.problems.take(path, *([(*path, "name")] if named else []))
        if named and isinstance(value, dict):
            value = value.get("name")
        text = "" if value is None else str(value)
        needed = part.needed or MISSING in problems
        common = {"key": widget, "on_change": _edited, "help": _help(declared)}
        names = _suggestions(part, named)
        if isinstance(declared, engine.Choice):
            options = [None, *declared.options] if part.default is None and not part.needed else [*declared.options]
            value = next((o for o in declared.options if o.lower() == text.strip().lower()), text or part.default)
            if value not in options and value is not None:
                options.append(value)
            shown = value
            st.selectbox(
                declared.name,
                options,
                options.index(value) if value in options else None,
                placeholder="needed: choose",
                format_func=lambda option: NOT_STATED if option is None else option.capitalize(),
                **common,
                args=(path, widget, declared, shown, within),
            )
        else:
            shown = self.display.typed(text, declared.quantities) if isinstance(declared, engine.Stated) else text
            draw = st.text_area if getattr(declared, "lines", False) else st.text_input
            row = st.container(horizontal=True, wrap=False, vertical_alignment="bottom") if names else st.container()
            with row:
                draw(
                    declared.name,
                    shown,
                    placeholder=self._placeholder(part, needed, names),
                    **common,
                    args=(path, widget, declared, shown, within),
                )
                if names:
                    self._list_of(names, declared.name, path, widget)
        for says in problems:
            _said(says, part.owner, wrong=bool(text))

    def _list_of(self, names: Sequence[str], label: str, path: Path, widget: str) -> None:
        """Names to choose from, beside a box in which any other may be typed."""
        with st.popover("List", help=f"{label}: known names"):
            chosen = self.key((*path, "chosen"))
            st.selectbox(
                f"{label}: known names",
                names,
                None,
                key=chosen,
                placeholder="type a few letters",
                on_change=_chosen,
                args=(path, chosen, widget),
            )

    def _placeholder(self, part: Part, needed: bool, names: Sequence[str]) -> str:
        declared = part.declared
        example = declared.example or (names[0] if names else "")
        if needed:
            return f"needed, e.g. {example}" if example else "needed"
        if isinstance(declared, engine.Stated) and part.default is not None:
            return f"taken as {self.display.show(part.default, declared.quantities[0])}"
        if isinstance(declared, engine.Count) and part.default is not None:
            return f"taken as {part.default}"
        return f"e.g. {example}" if example else ""

    def said(self, path: Path, model: type[engine.Input]) -> None:
        """What the engine says to a whole group."""
        for says in self.problems.take(path):
            _said(says, model, wrong=bool(self.stated(path)))


def _side_by_side(count: int, aligned: str = "top") -> Sequence[Any]:
    return st.columns(count, vertical_alignment=aligned) if count > 1 else [st.container()] * count


def _said(says: str, model: type[engine.Input], wrong: bool) -> None:
    """A sentence of the engine, in red where it is about something stated, with fields called as in the form."""
    if says == MISSING:
        return
    says = fields.in_form_words(says, model)
    says = plain(f"{says[0].upper()}{says[1:]}")
    st.caption(f":red[✗ {says}]" if wrong else says)


def _help(declared: Any) -> str | None:
    said = [declared.help] if declared.help else []
    if isinstance(declared, engine.Stated):
        bounded = declared.above is not None or declared.low > -1e12
        if bounded:
            said.append(f"Allowed: {declared.allowed()}.")
    elif isinstance(declared, engine.Count):
        said.append(f"Allowed: {declared.low} to {declared.high}.")
    if getattr(declared, "assumed", ""):
        said.append(f"If left empty: {declared.assumed}.")
    return " ".join(said) or None


def _kind_title(model: type[engine.Input]) -> str:
    kind = fields.kind_of(model)
    return KINDS.get(kind) or str(getattr(model, "title", kind))


def _arranged(parts: Sequence[Part], model: type[engine.Input]) -> tuple[list[Part], dict[str, list[Part]]]:
    """Boxes in the open, and those in folds by title: nozzles, and what is assumed where it is not stated."""
    boxes = [part for part in parts if part.shape == "box"]
    if "type" not in model.model_fields:
        return boxes, {}
    folds: dict[str, list[Part]] = {NOZZLES: [], DETAILS: []}
    first = []
    for part in boxes:
        if "nozzle" in part.name:
            folds[NOZZLES].append(part)
        elif part.needed or part.default is None or isinstance(part.declared, engine.Choice):
            first.append(part)
        else:
            folds[DETAILS].append(part)
    return first, {title: inner for title, inner in folds.items() if inner}


def _count(stated: Any) -> int:
    if isinstance(stated, dict):
        return sum(map(_count, stated.values()))
    return stated is not None


def _suggestions(part: Part, named: bool) -> Sequence[str]:
    if named:
        return session.fluid_names()["fluid"]
    if part.name == "solution":
        return session.fluid_names()["solution"]
    return tuple(engine.METALS) if part.name == "material" else ()


# --- callbacks --------------------------------------------------------------------------------------------------------


def _edited(path: Path, widget: str, declared: Any, shown: Any, within: Path | None) -> None:
    given = session.typed(widget)
    if given == shown:
        return
    text = given.strip() if isinstance(given, str) and not getattr(declared, "lines", False) else given
    if not text:
        # A key that says of which kind its group is stays, however empty.
        tells_kind = path[-1] == "solution"
        session.put(path, "" if tells_kind else None, within)
    else:
        session.put(path, fields.entry(declared, text), within)
        if isinstance(declared, engine.Stated):
            session.show_in(widget, session.display().typed(text, declared.quantities))


def _chosen(path: Path, chosen: str, widget: str) -> None:
    name = session.typed(chosen)
    if name is not None:
        session.put(path, name)
        session.show_in(widget, name)


def _switched(path: Path, model: type[engine.Input], kinds: Mapping[str, type[engine.Input]], widget: str) -> None:
    new = kinds[session.typed(widget)]
    if new is not model:
        session.switch_kind(path, model, new)


def _row_removed(path: Path, i: int) -> None:
    raw = fields.put(session.case(), (*path, i), None)
    session.replace(raw, f"row {i + 1} removed")


def _rows_pasted(path: Path, part: Part, widget: str) -> None:
    rows = pasted(session.typed(widget) or "", part.models[0])
    if rows:
        session.replace(fields.put(session.case(), path, rows), "table pasted")
    else:
        session.say("Nothing was pasted: the box holds no row.")


# --- pasted tables ----------------------------------------------------------------------------------------------------


def pasted(text: str, model: type[engine.Input]) -> list[dict[str, str]]:
    """Rows of a pasted table. A first line may name the columns, with units in brackets for the figures below."""
    lines = [cells for line in text.splitlines() if (cells := _cells(line))]
    names = [part.name for part in fields.parts(model)]
    units = [""] * len(names)
    if lines and not any(cell[:1].isdigit() or cell[:1] in "+-.−" for cell in lines[0]):
        header = [re.fullmatch(r"([^\[(]*)[\[(]?([^\])]*)[\])]?", cell) for cell in lines.pop(0)]
        known = {word.lower(): part.name for part in fields.parts(model) for word in (part.name, part.declared.name)}
        found = [known.get(cell[1].strip().lower()) if cell else None for cell in header]
        units = [cell[2].strip() if cell else "" for cell in header]
        if all(found):
            names = [name for name in found if name]
    return [
        {
            name: f"{cell} {unit}" if unit and re.fullmatch(r"[\d.,eE+−-]+", cell) else cell
            for name, cell, unit in zip(names, cells, [*units, *[""] * len(names)], strict=False)
            if cell
        }
        for cells in lines
    ]


def _cells(line: str) -> list[str]:
    separator = next((mark for mark in ("\t", ";", "|") if mark in line), None)
    if separator is None:
        separator = "," if re.search(r",\s", line) else None
    if separator is None:
        return re.split(r"\s{2,}", line.strip()) if re.search(r"\S\s{2,}\S", line) else line.split()
    return [cell.strip() for cell in line.strip().strip("|").split(separator)]


def _example_table(columns: Sequence[Part]) -> str:
    figures = [column.declared.example.split(" ", 1) for column in columns]
    header = "; ".join(f"{column.name} [{unit}]" for column, (_, unit) in zip(columns, figures, strict=True))
    return f"{header}\n" + "; ".join(figure for figure, _ in figures)
