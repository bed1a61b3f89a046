"""What every page has around it: the sidebar, notices, the state of the case, and a sentence where something fails."""

from __future__ import annotations

import logging
import re
from collections.abc import Callable, Sequence
from typing import Any

import streamlit as st

import engine
from app import fields, figures, session
from app.display import AS_TYPED, CHOICES, plain
from app.inputs import MISSING, Problems

log = logging.getLogger("countercheck")

STYLE = """<style>
[data-testid="stMainBlockContainer"] {padding-top: 3.5rem}
[data-testid="stMarkdownContainer"] table {display: block; overflow-x: auto; width: fit-content; max-width: 100%}
[data-testid="stMarkdownContainer"] td:not(:first-child) {font-variant-numeric: tabular-nums}
[data-testid="stLayoutWrapper"]:has(> .st-key-bundle) {position: sticky; top: 4.5rem}
.st-key-former {border-left: 6px double #b9641a; padding-left: 0.9rem; opacity: 0.8}
.st-key-answer p {font-size: 1.25rem; font-weight: 600; line-height: 1.4}
@media (min-width: 641px) {
  [class*="st-key-later-row"] [data-testid="stWidgetLabel"] {display: none}
}
@media (hover: hover) {
  [data-testid="stWidgetLabel"] [data-testid="stTooltipIcon"] {visibility: hidden}
  [data-testid="stElementContainer"]:is(:hover, :focus-within) [data-testid="stTooltipIcon"] {visibility: visible}
}
@media (max-width: 640px) {
  [data-testid="stMarkdownContainer"] :is(td, th) {font-size: 0.8rem; padding: 0.25rem 0.4rem}
}
</style>"""
"""A wide table scrolls within itself, never the page. Results of a former case carry a mark along their whole length.
Rows of boxes that lie under one another are named by the first. The help of a box shows while the box is pointed at or
typed in, so that the tabulator key goes from box to box."""


def drawn(show: Callable[[], None]) -> Callable[[], None]:
    """A page within its frame."""

    def page() -> None:
        try:
            st.html(STYLE)
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
            st.button(
                "One step back", help=plain(f"Takes back: {what}"), on_click=session.go_back, icon=":material/undo:"
            )
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


def sentence(place: str, says: str) -> str:
    """A problem with its place as the form calls it."""
    path = fields.steps(place)
    says = fields.in_form_words(says, fields.model_at(engine.Case, session.case(), path))
    where = fields.words(engine.Case, session.case(), path)
    if not where:
        return f"{says[0].upper()}{says[1:]}."
    return f"{where} {says}." if says == MISSING else f"{where}: {says}."


def link(title: str, label: str, first: bool = False) -> None:
    """A way to another page of the table of pages, told by its title; `first` for the one that opens at the start."""
    st.page_link(
        st.Page(_elsewhere, title=title, url_path=title.lower().replace(" ", "-"), default=first),
        label=label,
        icon=":material/arrow_forward:",
    )


def _elsewhere() -> None:
    """Stands for a page that is only pointed to."""


def listed(problems: Sequence[engine.Problem], most: int = 12) -> None:
    """Problems as a list of sentences, the first of them."""
    said = [f"- {plain(sentence(problem.path, problem.says))}" for problem in problems]
    more = [f"- and {len(said) - most} more"] if len(said) > most else []
    st.markdown("\n".join([*said[:most], *more]))


def table(header: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
    """A small table of text; columns of figures stand to the right."""
    lines = [f"| {' | '.join(_cell(cell) for cell in line)} |" for line in (header, *rows)]
    marks = ["---:" if i and _figures([row[i] for row in rows]) else ":---" for i in range(len(header))]
    st.markdown("\n".join([lines[0], f"| {' | '.join(marks)} |", *lines[1:]]))


def _cell(text: str) -> str:
    """Text of a cell; a short unit stays on the line of its figure."""
    return plain(re.sub(r"(?<=\d) (?=[^\s\d]{1,4}$)", "\N{NO-BREAK SPACE}", text)).replace("\n", "<br>")


def _figures(cells: Sequence[str]) -> bool:
    stated = [cell for cell in cells if cell not in ("", "–")]
    return sum(bool(re.match(r"[±+−-]?\d", cell)) for cell in stated) > 0.8 * len(stated)


def blocks(blocks: Sequence[Any], place: str) -> None:
    """What a section of the report says, on the screen."""
    for i, block in enumerate(blocks):
        if isinstance(block, str):
            st.markdown(plain(block).replace("\n", "  \n"))
        elif isinstance(block, engine.Table):
            titled(block)
        elif isinstance(block, engine.Columns):
            for tables, column in zip(block.columns, st.columns(list(block.widths), gap="large"), strict=True):
                with column:
                    for one in tables:
                        titled(one)
        elif isinstance(block, engine.Chart):
            plot(figures.chart(block), block.alt, f"{place} {i}")
        elif isinstance(block, engine.Bundle):
            plot(figures.bundle(block), block.alt, f"{place} {i}")
        else:
            st.markdown(plain(block.alt))


def titled(block: Any) -> None:
    if block.title:
        st.markdown(f"**{plain(block.title)}**")
    table(block.header, block.rows)


def plot(figure: Any, alt: str, key: str) -> None:
    st.plotly_chart(figure, key=key, alt=alt, config={"displayModeBar": False, "scrollZoom": False})
