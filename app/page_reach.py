"""What it would take: how far an input may go before a limit is hit, and the conditions the exchanger meets."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np
import streamlit as st

import engine
from app import fields, figures, session
from app.display import Display, plain
from app.frame import blocks, plot
from app.inputs import Form, Problems
from app.page_rating import nothing_yet, stale

TITLE = "What it would take"
EVERY = "Every limit"
PRESETS: dict[str, dict[str, str]] = {
    "Maximum": {},
    "Turndown": {},
    "Clean start": {"inside_R_fouling": "0 m2K/W", "outside_R_fouling": "0 m2K/W"},
    "Summer water": {},
    "Winter water": {},
    "Another": {},
}
"""Conditions to begin with, and what their name already says."""
MOST_CONDITIONS, WIDE = 12, 4


def show() -> None:
    raw, present = session.current()
    problems = session.checked(session.text_of(session.case())).problems
    st.title(TITLE, anchor=False)
    if raw is None:
        nothing_yet(problems)
        return
    if not present:
        stale(problems)
    text = session.text_of(raw)
    found = session.rated(text)
    with st.container(key="present" if present else "former"):
        if not found.rating.states:
            st.error(plain(f"The case itself has no answer: {found.rating.problem}."))
        else:
            asking(text, found.case)
        st.subheader("Operating conditions", anchor=False)
        if found.rating.states:
            table = session.conditions(text)
            for section in engine.study_sections(found.case, table, (), session.display().system):
                blocks(section.blocks, section.key)
    conditions(found.case)


# --- one question -----------------------------------------------------------------------------------------------------


def asking(text: str, case: engine.Case) -> None:
    question = picked(case)
    answer = session.answered(text, question)
    with st.container(key="answer"):
        st.markdown(plain(engine.told(answer, session.display().system)))
    excursions = dict.fromkeys(str(excursion) for excursion in answer.excursions)
    if excursions:
        st.caption(plain(f"There, beyond what is published: {'; '.join(excursions)}."))
    if answer.outcome == "no answer":
        return
    swept, units = session.swept(text, question.path, answer.value), session.display()
    plot(drawn(case, answer, swept, units), told_of(answer, swept, units), "sweep")
    with st.expander("In figures"):
        blocks([engine.swept(case, answer.variable, swept, units.system)], "swept")


def picked(case: engine.Case) -> engine.Question:
    """The question in plain words, the usual ones first, and the limits that count."""
    usual = engine.questions(case)
    rest = (engine.Question(path=path, way=way) for path in engine.variables(case) for way in ("least", "most"))
    offered = {f"{q.way} {q.path}": q for q in dict.fromkeys((*usual, *rest))}
    limits = {limit.key: limit.name for limit in engine.limits_of(case)}
    left, right = st.columns([3, 2], vertical_alignment="bottom")
    with left:
        asked = _pick("question", "Question", {key: engine.asked(case, q) for key, q in offered.items()})
    with right:
        names = {"": EVERY, **{key: f"Only {name}" for key, name in limits.items()}}
        kept = _pick("limit", "What must be kept", names)
    if not limits:
        st.caption(
            "No limit is stated: state a required outlet, an allowed drop or a limit of the equipment on the page "
            "Case. Until then, only boiling and freezing end the way."
        )
    question = offered[asked]
    return engine.Question(path=question.path, way=question.way, keys=(kept,) if kept else ())


def _pick(what: str, label: str, options: dict[str, str]) -> str:
    """A choice that outlives the page."""
    widget, keys = f"{what}{session.view()}", list(options)
    last = session.chosen(what)
    return str(
        st.selectbox(
            label,
            keys,
            keys.index(last) if last in keys else 0,
            format_func=lambda key: _capital(options[key]),
            key=widget,
            on_change=lambda: session.choose(what, session.typed(widget)),
        )
    )


def _capital(text: str) -> str:
    return f"{text[:1].upper()}{text[1:]}"


# --- the sweep --------------------------------------------------------------------------------------------------------


def drawn(case: engine.Case, answer: Any, swept: Any, units: Display) -> Any:
    variable = answer.variable
    marks = {"today": variable.today}
    if answer.value is not None:
        marks["limit"] = answer.value
    return figures.sweep(
        list(_x(variable, np.asarray(swept.frame.index, dtype=float), units)),
        f"{_capital(variable.name.removeprefix('the '))}{_unit(variable, units)}",
        list(panels(case, swept, units)),
        {name: float(_x(variable, value, units)) for name, value in marks.items()},
        [tuple(float(end) for end in _x(variable, np.array(run), units)) for run in passed(swept)],
    )


def _x(variable: Any, values: Any, units: Display) -> Any:
    return values if variable.whole else units.values(values / variable.density, variable.quantity)


def _unit(variable: Any, units: Display) -> str:
    return "" if variable.whole else f", {units.unit(variable.quantity)}"


def panels(case: engine.Case, swept: Any, units: Display) -> Iterator[figures.Panel]:
    """Outlets and drops of both sides, and whatever else a limit bounds; one panel a quantity."""
    names = case.exchanger.side_names
    shown = {"temperature": [], "pressure_difference": []}
    for column, quantity in (("T_out", "temperature"), ("dp", "pressure_difference")):
        shown[quantity] += [f"{side}.{column}" for side in engine.SIDES]
    for limit in swept.limits:
        columns = shown.setdefault(limit.quantity, [])
        columns += [limit.column] if limit.column not in columns else []
    labels = {"temperature": "Outlets", "pressure_difference": "Drop", "velocity": "Velocity"}
    for quantity, columns in shown.items():
        lines = []
        for column in columns:
            side, _, what = column.rpartition(".")
            word, dash = WORDS[what]
            name = ", ".join(part for part in (names.get(side, ""), word) if part)
            values = units.values(swept.frame[column].to_numpy(), quantity)
            lines.append(figures.Swept(name, values, _colour(case, side), dash))
        limits = [
            (
                _capital(limit.name.removeprefix("the ").split(" of the ")[0].split(", ")[0]),
                float(units.values(limit.value, quantity)),
                _colour(case, limit.column.rpartition(".")[0]),
            )
            for limit in swept.limits
            if limit.quantity == quantity
        ]
        yield figures.Panel(f"{labels[quantity]}, {units.unit(quantity)}", lines, limits)


def _colour(case: engine.Case, side: str) -> str:
    return {case.hot: figures.HOT, case.cold: figures.COLD}.get(side, figures.WALL)


WORDS = {
    "T_out": ("", "solid"),
    "dp": ("", "solid"),
    "velocity": ("", "solid"),
    "T_max": ("hottest", "longdash"),
    "surface_T_max": ("hottest surface", "dash"),
    "surface_T_min": ("coldest surface", "dashdot"),
    "metal_T_min": ("Coldest metal", "dashdot"),
}
"""Of the last step of a column: what it is called beside its side, and how it is drawn."""


def passed(swept: Any) -> Iterator[tuple[float, float]]:
    """Runs of the sweep in which a limit is passed or there is no answer, each to the middle of the next step."""
    values, inside = np.asarray(swept.frame.index, dtype=float), swept.within(swept.limits)
    edges = np.concatenate([values[:1], 0.5 * (values[:-1] + values[1:]), values[-1:]])
    bounds = np.flatnonzero(np.diff(np.concatenate([[True], inside, [True]]).astype(int)))
    for start, end in bounds.reshape(-1, 2):
        yield float(edges[start]), float(edges[end])


def told_of(answer: Any, swept: Any, units: Display) -> str:
    variable, values = answer.variable, swept.frame.index
    ends = " to ".join(variable.shown(float(end), units.system) for end in (values[0], values[-1]))
    return f"Outlets, drops and limits over {variable.name} from {ends}. {engine.told(answer, units.system)}"


# --- operating conditions ---------------------------------------------------------------------------------------------


def conditions(case: engine.Case) -> None:
    """Each condition as boxes; what is left empty stays as the case states it."""
    raw = session.case()
    form = Form(Problems(session.checked(session.text_of(raw)).problems, raw))
    part = next(part for part in fields.parts(engine.Case) if part.name == "operating")
    stated = form.stated((part.name,)) or []
    st.caption("Each is a column beside the case as stated. What is left empty stays as there.")
    form.said((part.name,), part.models[0])
    for i, row in enumerate(stated):
        parts = [
            p for p in fields.parts(part.models[0]) if p.name in row or p.needed or _of_case(case, p.name) is not None
        ]
        cells: list[fields.Part | None] = [*(_as_stated(case, p) for p in parts), None]
        with st.container(border=True):
            for first in range(0, len(cells), WIDE):
                for cell, place in zip(
                    cells[first : first + WIDE], st.columns(WIDE, vertical_alignment="bottom"), strict=False
                ):
                    with place:
                        if cell is not None:
                            form.box(cell, (part.name, i, cell.name))
                        else:
                            remove(form, i)
    with st.container(horizontal=True):
        for name in PRESETS if len(stated) < MOST_CONDITIONS else ():
            st.button(name, key=form.key(("add", name)), icon=":material/add:", on_click=_added, args=(name,))


def remove(form: Form, i: int) -> None:
    place = ("operating", i, "remove")
    st.button(f"Remove condition {i + 1}", key=form.key(place), type="tertiary", on_click=_removed, args=(i,))


def _of_case(case: engine.Case, name: str) -> Any:
    """What the case states in the place of an entry of a condition; None where there is no such entry."""
    side, _, entry = name.partition("_")
    if side in engine.SIDES:
        return getattr(case.stream(side), entry)
    return getattr(case.exchanger, name, None)


def _as_stated(case: engine.Case, part: fields.Part) -> fields.Part:
    """The entry under the trade name of its side, telling what it is where it is left empty."""
    side, _, entry = part.name.partition("_")
    value = _of_case(case, part.name)
    declared = part.declared
    if side in engine.SIDES:
        own = type(case.stream(side)).declared()[entry]
        quantity = getattr(value, "quantity", "") or own.quantities[0]
        first = (quantity, *(other for other in own.quantities if other != quantity))
        name = f"{case.exchanger.side_names[side]}, {own.name.lower()}"
        declared = replace(declared, name=name, quantity=first)
    return replace(part, declared=declared, default=value)


def _added(preset: str) -> None:
    stated = fields.get(session.case(), ("operating",)) or []
    taken = {str(row.get("name", "")).strip().lower() for row in stated}
    name = preset if preset != "Another" else "Condition"
    numbers = range(2, MOST_CONDITIONS + 2)
    free = next(n for n in (name, *(f"{name} {i}" for i in numbers)) if n.lower() not in taken)
    session.put(("operating", len(stated)), {"name": free, **PRESETS[preset]})


def _removed(i: int) -> None:
    stated = fields.get(session.case(), ("operating",))
    path = ("operating", i) if len(stated) > 1 else ("operating",)
    session.replace(fields.put(session.case(), path, None), f"condition {i + 1} removed")
