"""What every page has around it: the sidebar, notices, the state of the case, and a sentence where something fails."""

from __future__ import annotations

import logging
from collections.abc import Callable, Sequence

import streamlit as st

from app import session
from app.display import AS_TYPED, CHOICES, plain
from app.inputs import Problems

log = logging.getLogger("countercheck")


def drawn(show: Callable[[], None]) -> Callable[[], None]:
    """A page within its frame."""

    def page() -> None:
        try:
            session.begin()
            sidebar()
            for sentence in session.notices():
                st.info(sentence)
            show()
        except Exception:
            log.exception("a page failed")
            st.error(
                "Something in the program went wrong on this page. What you typed is kept: go on with another page, "
                "change the last entry, or go one step back."
            )

    page.__name__ = show.__module__.rpartition(".")[2]
    return page


def sidebar() -> None:
    with st.sidebar:
        widget = f"units{session.view()}"
        choice = session.display().choice
        st.selectbox(
            "Show figures in",
            list(CHOICES),
            list(CHOICES).index(choice),
            format_func=CHOICES.__getitem__,
            key=widget,
            help="What you typed stays as you typed it; only the view changes.",
            on_change=lambda: session.choose_units(session.typed(widget)),
        )
        if choice == AS_TYPED:
            st.caption(f"Results in {CHOICES[session.display().system]}, after your own figures.")
        what = session.last_replaced()
        if what:
            st.button("One step back", help=f"Before: {what}", on_click=session.go_back, icon=":material/undo:")
        if session.unkept():
            st.warning(session.unkept())
        else:
            st.caption(
                "Your draft is kept for 30 days under the address of this page. Whoever has the address can open it."
            )


def state_line(problems: Problems) -> str:
    """In one line, whether the case is complete."""
    if not problems.missing and not problems.wrong:
        return "✓ Complete."
    parts = []
    if problems.missing:
        parts.append(f"{problems.missing} {'entry' if problems.missing == 1 else 'entries'} missing")
    if problems.wrong:
        parts.append(f"{problems.wrong} to correct")
    return f"✎ {', '.join(parts)}."


def table(header: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """A small table of text; figures stand to the right."""
    lines = [header, *rows]
    text = [f"| {' | '.join(plain(cell).replace(chr(10), '<br>') for cell in line)} |" for line in lines]
    marks = ["---", *["---:"] * (len(header) - 1)]
    st.markdown("\n".join([text[0], f"| {' | '.join(marks)} |", *text[1:]]))
