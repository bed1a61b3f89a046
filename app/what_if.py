"""What if: stated figures tried at other values, rated at once beside the case, adopted on request."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import streamlit as st

import engine
from app import fields, session
from app.display import AS_TYPED, NONE, plain
from app.fields import Path
from app.frame import listed, table

TRIED: tuple[Path, ...] = (("flow",), ("T_in",), ("fluid", "steam", "p"), ("R_fouling",))
"""Of each side, where it states them."""
FOULING_SPAN = 0.0006
"""Least span of the fouling slider [m²K/W]: the usual allowance for river water, twice over."""


@dataclass(frozen=True)
class Figure:
    """A stated figure that may be tried at other values, in the unit of its slider; a count has no quantity."""

    place: str
    side: str
    declared: Any
    quantity: str
    unit: str
    stated: float
    low: float
    high: float

    @property
    def box(self) -> str:
        return f"try {self.place}{session.view()}"

    @property
    def slider(self) -> str:
        return f"drag {self.place}{session.view()}"

    def written(self, value: float) -> str:
        return f"{value:.5g} {self.unit}" if self.quantity else f"{value}"

    def at(self, text: str) -> float:
        """Where the slider stands for a typed text: at the stated figure where the text cannot be shown on it."""
        if not self.quantity:
            tried = fields.entry(self.declared, text)
            return min(max(tried, self.low), self.high) if isinstance(tried, int) else self.stated
        try:
            figure = engine.parse(text, *self.declared.quantities)
        except engine.UnitError:
            return self.stated
        if figure.quantity != self.quantity:
            return self.stated
        return min(max(float(engine.to_unit(figure.value, self.quantity, self.unit)), self.low), self.high)


def figures(case: engine.Case) -> Iterator[Figure]:
    for side in engine.SIDES:
        for path in TRIED:
            part: Any = case.stream(side)
            for step in path[:-1]:
                part = getattr(part, str(step), None)
            value = getattr(part, str(path[-1]), None)
            if value is None:
                continue
            declared = type(part).declared()[path[-1]]
            quantity = getattr(value, "quantity", "") or declared.quantities[0]
            unit = _unit(value, quantity)
            stated, low, high = (
                float(engine.to_unit(x, quantity, unit)) for x in (float(value), *_span(path[-1], float(value)))
            )
            yield Figure(engine.dotted((side, *path)), side, declared, quantity, unit, stated, low, high)
    tubes, plugged = (getattr(case.exchanger, name, None) for name in ("tubes", "tubes_plugged"))
    if tubes is not None and plugged is not None and tubes > 1:
        declared = type(case.exchanger).declared()["tubes_plugged"]
        most = min(max(tubes // 5, 2 * plugged, 10), tubes - 1)
        yield Figure("exchanger.tubes_plugged", "inside", declared, "", "", plugged, 0, most)


def _unit(value: Any, quantity: str) -> str:
    units = session.display()
    if units.choice == AS_TYPED and getattr(value, "text", ""):
        return str(engine.parse(value.text, quantity).unit)
    return units.unit(quantity)


def _span(name: str | int, value: float) -> tuple[float, float]:
    """What a slider covers [SI]; any other figure can be typed."""
    if name == "flow":
        return 0.25 * value, 2.0 * value
    if name == "T_in":
        return value - 30.0, value + 30.0
    if name == "p":
        return value - 0.5 * abs(value), value + 0.5 * abs(value) + 1e5
    return 0.0, max(3.0 * value, FOULING_SPAN)


def show(found: session.Rated) -> None:
    st.subheader("What if", anchor=False)
    st.caption("Type a figure with its unit, or drag. The case stays as it is until you adopt the change.")
    names = found.case.exchanger.side_names
    for side, place in zip(engine.SIDES, st.columns(2, gap="large"), strict=True):
        with place:
            st.markdown(f"**{names[side]}**")
            for figure in figures(found.case):
                if figure.side == side:
                    entry(figure, names[side])
    if session.whatif():
        outcome(found)


def entry(figure: Figure, side: str) -> None:
    """A box and a slider that follow each other."""
    text = session.whatif().get(figure.place, "")
    st.text_input(
        figure.declared.name,
        text,
        key=figure.box,
        placeholder=figure.written(figure.stated),
        on_change=_typed,
        args=(figure,),
    )
    st.slider(
        ", ".join(word for word in (figure.declared.name, side.lower(), figure.unit) if word),
        figure.low,
        figure.high,
        figure.at(text),
        (figure.high - figure.low) / 200 if figure.quantity else 1,
        format=f"%.4g {figure.unit.replace('%', '%%')}".strip() if figure.quantity else "%d",
        key=figure.slider,
        label_visibility="collapsed",
        on_change=_dragged,
        args=(figure,),
    )


def _typed(figure: Figure) -> None:
    text = session.typed(figure.box).strip()
    session.try_out(figure.place, text)
    session.show_in(figure.slider, figure.at(text))


def _dragged(figure: Figure) -> None:
    text = figure.written(session.typed(figure.slider))
    session.try_out(figure.place, text)
    session.show_in(figure.box, text)


def outcome(found: session.Rated) -> None:
    trial = session.text_of(session.trial(session.case()))
    tried, problems = session.rated(trial), session.checked(trial).problems
    if tried is None:
        listed(problems)
    elif not tried.rating.states:
        st.error(plain(f"No answer: {tried.rating.problem}."))
    else:
        compared(found, tried)
    with st.container(horizontal=True):
        st.button(
            "Adopt this in the case",
            disabled=tried is None,
            type="primary",
            on_click=session.replace,
            args=(session.trial(session.case()), "what-if adopted"),
        )
        st.button("Back to the case", on_click=session.end_trial)


def compared(found: session.Rated, tried: session.Rated) -> None:
    units, names = session.display(), found.case.exchanger.side_names
    pair = (found.rating.fouled, tried.rating.fouled)
    rows = [_row("Duty", "heat_flow", [s.duty for s in pair])]
    for side in engine.SIDES:
        shift = pair[1].T_out[side] - pair[0].T_out[side]
        shown = [units.show(state.T_out[side], "temperature") for state in pair]
        rows.append([f"{names[side]} outlet", *shown, _signed(units.show(shift, "temperature_difference", 3))])
    rows.append(_row("U in service", "heat_transfer_coefficient", [s.U_dirty for s in pair], 3))
    if all(state.margin is not None for state in pair):
        rows.append(["Margin of U", *(f"{100 * state.margin:+.0f} %" for state in pair), ""])
    for side in engine.SIDES:
        rows.append(_row(f"{names[side]} drop", "pressure_difference", [s.sides[side].dp for s in pair], 3))
    table(("Fouled", "Case", "What if", "Change"), rows)


def _row(name: str, quantity: str, values: list[float], digits: int = 4) -> list[str]:
    shown = [session.display().show(value, quantity, digits) for value in values]
    change = 100 * (values[1] / values[0] - 1) if values[0] else math.nan
    return [name, *shown, f"{change:+.1f} %" if math.isfinite(change) else NONE]


def _signed(text: str) -> str:
    return text if text.startswith("-") else f"+{text}"
