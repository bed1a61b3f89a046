"""Trust: what this program reproduces, computed anew in front of the reader."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import streamlit as st

import engine
from app import figures, session
from app.display import plain
from app.frame import plot, table

TITLE = "Trust"
ALL = "All subjects"
METHODS = {"bell_delaware_film": "Bell-Delaware", "kern_film": "Kern"}
GLUE = "\N{NO-BREAK SPACE}"
"""Keeps a figure and its unit on one line."""
Line = Mapping[str, Any]


def show() -> None:
    st.title(TITLE, anchor=False)
    lines = computed()
    totals(lines)
    if any(not line["holds"] for line in lines):
        st.subheader("Values that do not hold", anchor=False)
        values([line for line in lines if not line["holds"]])
    measured()
    convergence()
    properties()
    everything(lines)


@st.cache_data(show_spinner="Computing every value anew. The first time takes some seconds.")
def computed() -> list[dict[str, Any]]:
    return engine.proof_table()


def totals(lines: Sequence[Line]) -> None:
    held = sum(line["holds"] for line in lines)
    verdict = "all hold" if held == len(lines) else f"{len(lines) - held} of them off"
    st.markdown(
        f"**{len(lines)} values that did not come from this program stand beside ours: {verdict}.** "
        "They were computed by the program that rates your case; its tests read the same list."
    )
    counts = Counter(line["kind"] for line in lines)
    table(
        ("Kind", "Values", "What it is worth"),
        [(kind.capitalize(), str(counts[kind]), says) for kind, says in engine.PROOF_KINDS.items()],
    )


# --- what was measured ------------------------------------------------------------------------------------------------


def measured() -> None:
    st.subheader("Against a measured exchanger", anchor=False)
    found = _measured()
    units, quantity = session.display(), found.quantity
    names = [METHODS[name] for name in found.ours]
    band = tuple(float(units.values(end, quantity)) for end in (found.low, found.high))
    ours = [tuple(float(units.values(x, quantity)) for x in span) for span in found.ours.values()]
    said = f"{found.what[:1].upper()}{found.what[1:]}: measured {units.show(found.low, quantity)} to "
    said += f"{units.show(found.high, quantity)} ({found.why})."
    st.markdown(plain(said))
    told = "; ".join(
        f"{name} {at:.4g}, 95 % from {low:.4g} to {high:.4g}" for name, (low, at, high) in zip(names, ours, strict=True)
    )
    plot(figures.ranges(names, ours, band, "measured", units.unit(quantity)), f"{said} Ours: {told}.", "measured")
    table(
        ("Shell side by", f"Ours, {units.unit(quantity)}", "95 % of ours", "Ours over measured"),
        [
            (name, f"{at:.0f}", f"{low:.0f} to {high:.0f}", f"{at / band[1]:.2f} to {at / band[0]:.2f}")
            for name, (low, at, high) in zip(names, ours, strict=True)
        ],
    )
    st.caption(plain(found.source))


@st.cache_data(show_spinner="Rating the measured exchanger.")
def _measured() -> Any:
    return engine.measured_exchanger()


# --- convergence ------------------------------------------------------------------------------------------------------


def convergence() -> None:
    st.subheader("How the march converges", anchor=False)
    st.markdown(
        "Halving the cells of a second-order method divides its difference by four: order 2. "
        "The difference that is left at the cells of a rating is far below any other doubt."
    )
    units = session.display()
    for place, study in zip(st.columns(2, gap="large"), _refinements(), strict=True):
        with place:
            st.markdown(f"**{plain(study.what)}**")
            rows = zip(study.cells, study.duty, study.differences, study.orders, strict=True)
            table(
                ("Cells", f"Duty, {units.unit('heat_flow')}", "Difference, ppm", "Order"),
                [
                    (
                        str(cells),
                        units.number(duty, "heat_flow", 7),
                        "–" if difference is None else f"{1e6 * difference / duty:+.3g}",
                        "–" if order is None else f"{order:.2f}",
                    )
                    for cells, duty, difference, order in rows
                ],
            )


@st.cache_data(show_spinner="Marching on ever finer cells.")
def _refinements() -> tuple[Any, ...]:
    return engine.refinements()


# --- properties -------------------------------------------------------------------------------------------------------


def properties() -> None:
    st.subheader("Properties against themselves", anchor=False)
    st.markdown("Two ways to the same property, and the largest relative difference between them over a span.")
    checks = _properties()
    compared = dict.fromkeys((check.what, check.allowed) for check in checks)
    found = {(check.fluid, check.what): check for check in checks}
    table(
        ("Fluid", *(f"{_words(what)}, allowed {allowed:.0g}" for what, allowed in compared)),
        [
            (_words(fluid), *(_told(found.get((fluid, what))) for what, _ in compared))
            for fluid in dict.fromkeys(check.fluid for check in checks)
        ],
    )


def _told(check: Any) -> str:
    return "–" if check is None else f"{check.found:.1g} {'✓' if check.holds else '✗ does not hold'}"


@st.cache_data(show_spinner="Comparing properties.")
def _properties() -> tuple[Any, ...]:
    return engine.property_checks()


# --- every value ------------------------------------------------------------------------------------------------------


def everything(lines: Sequence[Line]) -> None:
    st.subheader("Every value", anchor=False)
    left, right = st.columns(2, vertical_alignment="bottom")
    with left:
        subjects = dict.fromkeys(line["subject"] for line in lines)
        subject = st.selectbox("Subject", [ALL, *sorted(subjects)], format_func=_words, key="trust subject")
    with right:
        kinds = st.pills("Kinds", list(engine.PROOF_KINDS), selection_mode="multi", key="trust kinds")
    chosen = [line for line in lines if (subject in (ALL, line["subject"])) and (not kinds or line["kind"] in kinds)]
    if not chosen:
        st.markdown("No value of this kind for this subject.")
    elif subject != ALL:
        values(chosen)
    else:
        for part in dict.fromkeys(line["part"] for line in chosen):
            inner = [line for line in chosen if line["part"] == part]
            lost = sum(not line["holds"] for line in inner)
            label = f"{_words(part)} · {len(inner)} values" + (f", {lost} do not hold" if lost else "")
            # Drawn only while open: hundreds of rows would make the page slow to open.
            fold = st.expander(label, key=f"trust {part}", on_change="rerun")
            if fold.open:
                with fold:
                    values(inner)


def values(lines: Sequence[Line]) -> None:
    """Values by subject, those that do not hold first, each group of one source and reason under one table."""
    by_subject: dict[str, list[Line]] = {}
    for line in sorted(lines, key=lambda line: bool(line["holds"])):
        by_subject.setdefault(line["subject"], []).append(line)
    for subject, held in by_subject.items():
        st.markdown(f"**{plain(_words(subject))}**")
        groups: dict[tuple[str, ...], list[Line]] = {}
        for line in held:
            groups.setdefault((line["kind"], line["source"], line["reason"]), []).append(line)
        for (kind, source, reason), group in groups.items():
            table(("Value", kind.capitalize(), "Ours", "Off by", "Allowed", ""), _rows(group))
            st.caption(plain(f"{source}. Allowance: {reason}."))


def _rows(lines: Iterable[Line]) -> list[tuple[str, ...]]:
    rows = []
    for line in lines:
        unit = "" if line["unit"] == "-" else f"{GLUE}{line['unit']}"
        scale, of = (100.0, f"{GLUE}%") if line["relative"] else (1.0, unit)
        rows.append(
            (
                line["what"],
                f"{line['value']:.6g}{unit}",
                f"{line['ours']:.6g}{unit}",
                f"{scale * line['difference']:+.2g}{of}",
                f"±{scale * line['tolerance']:.2g}{of}",
                "✓" if line["holds"] else "✗ off",
            )
        )
    return rows


def _words(name: str) -> str:
    words = name.replace("_", " ")
    return f"{words[:1].upper()}{words[1:]}"
