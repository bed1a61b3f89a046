"""The rating: the answer first, then what stands behind it, then what would change it."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from typing import Any

import streamlit as st

import engine
from app import fields, figures, session, what_if
from app.display import plain
from app.frame import blocks, link, listed, plot

TITLE = "Rating"
GRADES = {
    "stop": ("■ Stop", "red"),
    "act": ("▲ Act", "orange"),
    "watch": ("● Watch", "blue"),
    "note": ("○ Note", "gray"),
}
"""Shape, word and colour of each grade, the gravest first."""


_PLACE = re.compile(r"\b(?:inside|outside|limits|exchanger)(?:\.\w+)+")
NARROW = 162
"""Least width of a figure's box, in pixels."""


def show() -> None:
    raw, present = session.current()
    problems = session.checked(session.text_of(session.case())).problems
    st.title(plain(session.case().get("tag") or "Rating"), anchor=False)
    if raw is None:
        nothing_yet(problems)
        return
    if not present:
        stale(problems)
    with st.container(key="present" if present else "former"):
        results(session.text_of(raw), present)


def results(text: str, present: bool) -> None:
    units = session.display()
    found = session.rated(text)
    written = {section.key: section for section in session.sections(text, units.system)}
    answer(written["answer"].blocks)
    if found.rating.states:
        key_figures(found)
    findings(text)
    if not found.rating.states:
        return
    part(written, "profile")
    left, right = st.columns(2, gap="large")
    with left:
        where_resistance_lies(found, written)
    with right:
        where_pressure_goes(found, written)
    if present:
        what_if.show(found)
    for key in ("results", "methods", "contributors", "sources"):
        part(written, key)


def nothing_yet(problems: Any) -> None:
    st.info("There is nothing to rate yet:")
    listed(problems)
    link("Case", "Go to the case", first=True)


def stale(problems: Any) -> None:
    st.warning(
        "**Not the present case.** What is shown here is the rating of the case before the last entries, "
        "which cannot be rated yet:",
        icon=":material/history:",
    )
    listed(problems)
    link("Case", "Go to the case", first=True)


def answer(said: tuple[Any, ...]) -> None:
    first, *rest = said
    with st.container(key="answer"):
        st.markdown(plain(first))
    blocks(rest, "answer")


def part(written: Mapping[str, Any], key: str) -> None:
    if key in written:
        st.subheader(written[key].title, anchor=False)
        blocks(written[key].blocks, key)


# --- key figures ------------------------------------------------------------------------------------------------------


def key_figures(found: session.Rated) -> None:
    """The fouled state in figures, each with its unit in the label and its interval below."""
    state, names = found.rating.fouled, found.case.exchanger.side_names
    doubt = found.intervals.get("fouled")
    figures_ = [("Duty", "duty", state.duty, "heat_flow", 3)]
    figures_ += [(f"{names[s]} outlet", f"{s}.T_out", state.T_out[s], "temperature", 4) for s in engine.SIDES]
    figures_.append(("U in service", "U_dirty", state.U_dirty, "heat_transfer_coefficient", 3))
    figures_ += [(f"{names[s]} drop", f"{s}.dp", state.sides[s].dp, "pressure_difference", 3) for s in engine.SIDES]
    units = session.display()
    with st.container(horizontal=True):
        for label, key, value, quantity, digits in figures_:
            if not math.isfinite(value):
                continue
            span = units.span(doubt.of[key], quantity, digits) if doubt and key in doubt.of else None
            label = f"{label}, {units.unit(quantity)}"
            st.metric(
                label,
                units.number(value, quantity, digits),
                span,
                delta_color="off",
                delta_arrow="off",
                border=True,
                # Wide enough for a long unit, which would be cut off.
                width=max(NARROW, 40 + round(6.1 * len(label))),
            )
        if state.margin is not None:
            clean = found.rating.clean.margin
            st.metric(
                "Margin of U, %",
                f"{100 * state.margin:+.0f}",
                f"clean {100 * clean:+.0f}" if clean is not None else None,
                delta_color="off",
                delta_arrow="off",
                border=True,
                width=NARROW,
            )
    st.caption("Fouled state. Below each figure: where it lies with a chance of 95 %.")


# --- findings ---------------------------------------------------------------------------------------------------------


def findings(text: str) -> None:
    verdicts = session.judged(text, session.display().system)
    found = [finding for verdict in verdicts for finding in verdict.findings]
    st.subheader("Findings", anchor=False)
    if not found:
        st.markdown("None: every check that could be made is clear.")
    loud = [finding for finding in found if finding.grade != "note"]
    quiet = [finding for finding in found if finding.grade == "note"]
    for finding in sorted(loud, key=lambda f: list(GRADES).index(f.grade)):
        with st.container(border=True):
            one_finding(finding)
    if quiet:
        with st.expander(f"{GRADES['note'][0]} · {len(quiet)}, such as what was assumed"):
            for finding in quiet:
                one_finding(finding)
    missing = [verdict for verdict in verdicts if verdict.outcome == "not possible"]
    if missing:
        with st.expander(f"Checks that were not possible · {len(missing)}"):
            for verdict in missing:
                st.markdown(f"- {plain(verdict.rule.title)}{_at(verdict.where)}: {plain(_in_words(verdict.missing))}")


def one_finding(finding: Any) -> None:
    word, colour = GRADES[finding.grade]
    st.markdown(f":{colour}-badge[{word}] **{plain(finding.says)}**")
    because = "; ".join(f"{name} {figure}" for name, figure in finding.because.items())
    lines = [plain(line) for line in (because, f"→ {finding.do}" if finding.do else "") if line]
    st.markdown("  \n".join(lines))
    st.caption(plain(f"{finding.code}{_at(finding.where)} · {finding.source}"))


def _at(where: str) -> str:
    return f", {_words(where)}" if where else ""


def _in_words(missing: str) -> str:
    """What a check lacks, with the places in it as the form calls them."""
    return _PLACE.sub(lambda place: f"“{_words(place[0])}”", missing)


def _words(where: str) -> str:
    said = fields.words(engine.Case, session.case(), fields.steps(where))
    return f"{said[:1].lower()}{said[1:]}"


# --- where it goes ----------------------------------------------------------------------------------------------------


def where_resistance_lies(found: session.Rated, written: Mapping[str, Any]) -> None:
    st.subheader(written["resistances"].title, anchor=False)
    state, names = found.rating.fouled, found.case.exchanger.side_names
    labels = [_named(name, names) for name in state.resistances]
    whole = sum(state.resistances.values())
    told = ", ".join(f"{n} {100 * R / whole:.0f} %" for n, R in zip(labels, state.resistances.values(), strict=True))
    plot(figures.shares(labels, list(state.resistances.values())), f"Shares of the resistance: {told}.", "shares")
    with st.expander("In figures"):
        blocks(written["resistances"].blocks, "resistances")


def where_pressure_goes(found: session.Rated, written: Mapping[str, Any]) -> None:
    st.subheader("Where the pressure goes", anchor=False)
    units, names, sides = session.display(), found.case.exchanger.side_names, found.rating.fouled.sides
    # Condensing steam has no rated drop.
    drawn = [side for side in engine.SIDES if math.isfinite(sides[side].dp)]
    kinds = list(dict.fromkeys(kind for side in drawn for kind in sides[side].drops))
    shown = {
        kind.replace("_", " and ").capitalize(): [
            float(units.values(sides[side].drops.get(kind, 0.0), "pressure_difference")) for side in drawn
        ]
        for kind in kinds
        if any(sides[side].drops.get(kind) for side in drawn)
    }
    stated = [found.case.stream(side).dp_allowed for side in drawn]
    allowed = [None if a is None else float(units.values(float(a), "pressure_difference")) for a in stated]
    unit = units.unit("pressure_difference")
    told = "; ".join(f"{names[s]} {units.show(sides[s].dp, 'pressure_difference', 3)}" for s in drawn)
    bars = figures.stacked([names[side] for side in drawn], shown, allowed, unit)
    plot(bars, f"Pressure drops by part. In all: {told}.", "drops")
    with st.expander("In figures"):
        blocks(written["drops"].blocks, "drops")


def _named(place: str, names: Mapping[str, str]) -> str:
    side, _, rest = place.partition(" ")
    return f"{names[side]} {rest}" if side in names else place.capitalize()
