"""Bids side by side, on one basis."""

from __future__ import annotations

import json
from typing import Any

import streamlit as st

import engine
from app import session
from app.display import plain
from app.frame import blocks

KEPT = "bids"


def show(case: engine.Case | None, system: str) -> None:
    st.markdown(
        f"Two to {engine.MOST_BIDS} sheets of the same service, as CSV or XLSX. "
        "Surfaces are those of the unit, transfer rates those of the outside surface."
    )
    bids = kept()
    widget = f"bid files{session.view()}{len(bids)}"
    st.file_uploader(
        "Datasheets of the bids, up to 1 MB each",
        type=["csv", "xlsx"],
        accept_multiple_files=True,
        key=widget,
        max_upload_size=1,
        on_change=_uploaded,
        args=(widget,),
    )
    present = session.case().get("sheet")
    with st.container(horizontal=True):
        if present and present not in bids.values() and len(bids) < engine.MOST_BIDS:
            st.button("Add the present sheet", key=f"own{session.view()}", on_click=_added)
        for name in bids:
            st.button(
                plain(f"Take {name} out"),
                key=f"out {name}{session.view()}",
                on_click=_taken_out,
                args=(name,),
                icon=":material/close:",
            )
    if len(bids) < 2:
        st.markdown(f"{len(bids)} of at least 2 sheets are here.")
        return
    enquiry = engine.dump_case(case) if case is not None else ""
    blocks(compared(json.dumps(bids, ensure_ascii=False), enquiry, system), "bids")


def kept() -> dict[str, Any]:
    """Sheets by name, as typed."""
    return dict(session.chosen(KEPT) or {})


@st.cache_data(max_entries=32, show_spinner="Rating each bid …")
def compared(bids: str, enquiry: str, system: str) -> tuple[Any, ...]:
    case = engine.parse_case(engine.raw_of(enquiry)) if enquiry else None
    sheets = {name: engine.sheet_as_typed(raw)[0] for name, raw in json.loads(bids).items()}
    audits = {name: engine.check_datasheet(sheet) for name, sheet in sheets.items()}
    return tuple(engine.bids_side_by_side(audits, case, system))


def _uploaded(widget: str) -> None:
    bids = kept()
    for file in session.typed(widget) or []:
        if len(bids) >= engine.MOST_BIDS:
            session.say(f"{plain(file.name)} was not taken: {engine.MOST_BIDS} bids stand side by side at most.")
            continue
        try:
            sheet = engine.read_sheet(file.getvalue())
        except engine.CaseError as error:
            said = "; ".join(plain(problem) for problem in error.problems[:4])
            session.say(f"{plain(file.name)} was not taken: {said}.")
            continue
        bids[_free(file.name.rpartition(".")[0] or file.name, bids)] = engine.raw_sheet(sheet)
    session.choose(KEPT, bids)


def _added() -> None:
    bids, present = kept(), session.case()["sheet"]
    bids[_free(str(present.get("item") or "present sheet"), bids)] = present
    session.choose(KEPT, bids)


def _free(name: str, bids: dict[str, Any]) -> str:
    """A name of its own, short enough for a column."""
    name = name[:24]
    return name if name not in bids else next(f"{name} {i}" for i in range(2, 9) if f"{name} {i}" not in bids)


def _taken_out(name: str) -> None:
    session.choose(KEPT, {other: raw for other, raw in kept().items() if other != name})
