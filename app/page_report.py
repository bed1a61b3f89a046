"""The report: what will be handed over, and the files to take along."""

from __future__ import annotations

import streamlit as st

from app import session
from app.display import plain
from app.frame import blocks
from app.page_case import case_file, file_name
from app.page_rating import nothing_yet, stale

TITLE = "Report"


def show() -> None:
    raw, present = session.current()
    problems = session.checked(session.text_of(session.case())).problems
    st.title("Report", anchor=False)
    if raw is None:
        nothing_yet(problems)
        return
    if not present:
        stale(problems)
    text, system = session.text_of(raw), session.display().system
    with st.container(horizontal=True):
        st.download_button(
            "Report (PDF)",
            session.pdf(text, system),
            file_name(raw, "pdf"),
            "application/pdf",
            on_click="ignore",
            type="primary",
            icon=":material/picture_as_pdf:",
        )
        st.download_button(
            "Case (file)",
            case_file(),
            file_name(session.case(), "json"),
            "application/json",
            on_click="ignore",
            icon=":material/download:",
        )
    with st.container(key="present" if present else "former"):
        for section in session.report(text, system):
            st.subheader(plain(section.title), anchor=False)
            blocks(section.blocks, section.key)
