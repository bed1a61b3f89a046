"""The current case and the cached engine calls. The only file that touches the session's state.

All that a user has typed is one document: the case as a case file holds it, what was put aside, the choice of units,
the what-if entries. Widgets are views of it; it is kept under a token in the address (see `drafts`).
"""

from __future__ import annotations

import copy
import json
import logging
import re
import sqlite3
from dataclasses import dataclass
from typing import Any

import streamlit as st

import engine
from app import drafts, fields
from app.display import AS_TYPED, Display, display_of, plain
from app.fields import Path

ADDRESS_KEY = "draft"
_DOUBT = re.compile(r"(±|\+/-|\+-).*$")
log = logging.getLogger("countercheck")


def empty_case() -> dict[str, Any]:
    keys = {name: engine.Case.model_fields[name].default for name in ("format", "version")}
    return {**keys, "inside": {}, "outside": {}, "exchanger": {}}


# --- the document -----------------------------------------------------------------------------------------------------


def begin() -> None:
    """Find or start this window's document, and see that the address names it."""
    state = st.session_state
    if "document" not in state:
        _open_document(str(st.query_params.get(ADDRESS_KEY, "")))
    if st.query_params.get(ADDRESS_KEY) != state.token:
        st.query_params[ADDRESS_KEY] = state.token


def _open_document(token: str) -> None:
    state = st.session_state
    state.notices, state.generation, state.unkept = [], 0, ""
    kept = None
    try:
        kept = drafts.read(token)
        document = json.loads(kept[0]) if kept else None
    except (OSError, sqlite3.Error, ValueError) as error:
        log.error("a draft cannot be read: %s", error)
        document = None
    if kept and isinstance(document, dict):
        state.document, state.token, state.revision = document, token, kept[1]
        return
    # A token that is not known here is not taken over: somebody else may know it.
    state.document, state.token, state.revision = {"case": empty_case()}, drafts.new_token(), 0
    if token:
        say(
            "The draft that this address names is not kept here, or is older than "
            f"{drafts.DAYS_KEPT} days. An empty case was started."
        )


def _keep(**changes: Any) -> None:
    """Change the document and keep it; nothing is written where nothing changes."""
    state = st.session_state
    document = {key: value for key, value in {**state.document, **changes}.items() if value not in (None, {}, "")}
    if document == state.document:
        return
    if "case" in changes:
        _keep_last_good(document, state.document)
    state.document = document
    text = json.dumps(document, ensure_ascii=False)
    try:
        revision = drafts.write(state.token, text, state.revision)
        if revision is None:
            state.token, state.revision = drafts.new_token(), 0
            revision = drafts.write(state.token, text, 0)
            say("This case was changed in another window too. This window goes on with a copy of its own.")
        state.revision, state.unkept = revision, ""
    except (OSError, sqlite3.Error, ValueError) as error:
        log.error("a draft cannot be kept: %s", error)
        state.unkept = "The draft cannot be kept on this computer: save the case as a file."


def _keep_last_good(document: dict[str, Any], before: dict[str, Any]) -> None:
    if not checked(text_of(document["case"])).problems:
        document.pop("good", None)
    elif "good" not in document and not checked(text_of(before["case"])).problems:
        document["good"] = before["case"]


def say(sentence: str) -> None:
    """Show a sentence once, at the top of the next page drawn."""
    st.session_state.notices.append(sentence)


def notices() -> list[str]:
    said, st.session_state.notices = st.session_state.notices, []
    return said


def unkept() -> str:
    """Why the draft is not kept; empty when it is."""
    return str(st.session_state.unkept)


# --- the case ---------------------------------------------------------------------------------------------------------


def case() -> dict[str, Any]:
    """The case as typed. Not to be changed in place."""
    raw: dict[str, Any] = st.session_state.document["case"]
    return raw


def put(path: Path, value: Any, group: Path | None = None) -> None:
    """State one entry, or take it away with None. A `group` that this empties goes too."""
    raw = fields.put(case(), path, value)
    if group is not None and fields.get(raw, group) == {}:
        raw = fields.put(raw, group, None)
    _keep(case=raw)


def replace(raw: dict[str, Any], what: str) -> None:
    """Put another case in place of the present one, which one step back brings again."""
    before = {"case": case(), "what": what}
    st.session_state.generation += 1
    _keep(case=copy.deepcopy(raw), before=before, whatif=None)


def last_replaced() -> str:
    """What the last replacement was; empty where there is nothing to go back to."""
    return str(st.session_state.document.get("before", {}).get("what", ""))


def go_back() -> None:
    before = st.session_state.document.get("before")
    if before:
        st.session_state.generation += 1
        _keep(case=before["case"], before=None, whatif=None)


def switch_kind(path: Path, model: type[engine.Input], new: type[engine.Input]) -> None:
    """State another kind at a path. What the former kind had is put aside, and comes back with it."""
    aside = dict(st.session_state.document.get("aside", {}))
    place = engine.dotted(path)
    present = fields.get(case(), path)
    aside[place] = {**aside.get(place, {}), fields.kind_of(model): present}
    if fields.kind_of(new) in aside[place]:
        value = aside[place].pop(fields.kind_of(new))
    else:
        value = fields.fresh(new)
        if isinstance(value, dict) and isinstance(present, dict):
            shared = {name: present[name] for name in present if name in new.model_fields and name not in value}
            value = {**shared, **value} if "type" not in new.model_fields else {**value, **shared}
    st.session_state.generation += 1
    _keep(case=fields.put(case(), path, value), aside=aside)


def open_file(data: bytes, name: str) -> None:
    """Put the case of a file in place of the present one; say why where it is no case."""
    try:
        raw = engine.upgraded(engine.raw_of(data))
    except engine.CaseError as error:
        for problem in error.problems:
            say(f"{plain(name)} was not opened: {plain(problem)}.")
        return
    replace(raw, f"opened {name}")


# --- widgets ----------------------------------------------------------------------------------------------------------


def view() -> str:
    """Ends the key of every widget: a change of units or of the whole case makes new widgets from the document."""
    return f"@{st.session_state.document.get('units', AS_TYPED)}#{st.session_state.generation}"


def typed(widget: str) -> Any:
    return st.session_state[widget]


def show_in(widget: str, value: Any) -> None:
    """Set what a widget shows; in callbacks only."""
    st.session_state[widget] = value


# --- units ------------------------------------------------------------------------------------------------------------


def display() -> Display:
    choice = st.session_state.document.get("units", AS_TYPED)
    return _display(choice, text_of(case()))


@st.cache_data(max_entries=256, show_spinner=False)
def _display(choice: str, text: str) -> Display:
    return display_of(choice, fields.figures(engine.Case, json.loads(text)))


def choose_units(choice: str) -> None:
    _keep(units=choice)


# --- what if ----------------------------------------------------------------------------------------------------------


def whatif() -> dict[str, str]:
    """Entries of the trial by path, as typed."""
    return dict(st.session_state.document.get("whatif", {}))


def try_out(place: str, text: str) -> None:
    entries = {**whatif(), place: text}
    _keep(whatif={path: entry for path, entry in entries.items() if entry})


def end_trial() -> None:
    st.session_state.generation += 1
    _keep(whatif=None)


def trial(raw: dict[str, Any]) -> dict[str, Any]:
    """A case with the entries of the trial in place of its own. A stated ± stays unless another is typed."""
    for place, text in whatif().items():
        path = fields.steps(place)
        doubt = _DOUBT.search(str(fields.get(raw, path)))
        text = text if doubt is None or _DOUBT.search(text) else f"{text} {doubt[0]}"
        declared = fields.model_at(engine.Case, raw, path).declared().get(str(path[-1]))
        raw = fields.put(raw, path, fields.entry(declared, text))
    return raw


# --- choices on pages -------------------------------------------------------------------------------------------------


def chosen(what: str) -> Any:
    """What was last picked under a name; None where nothing was."""
    return st.session_state.document.get("chosen", {}).get(what)


def choose(what: str, pick: Any) -> None:
    _keep(chosen={**st.session_state.document.get("chosen", {}), what: pick})


# --- the engine -------------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Checked:
    """What the engine says to a case as typed."""

    case: engine.Case | None
    problems: tuple[engine.Problem, ...]


@dataclass(frozen=True)
class Rated:
    """A rating with its intervals; `case` is what it is of."""

    case: engine.Case
    rating: engine.Rating
    intervals: dict[str, Any]


def text_of(raw: dict[str, Any]) -> str:
    return json.dumps(raw, ensure_ascii=False)


# Every key is the whole text of the case, typed figures and names included: a result is shared by equal inputs alone.


@st.cache_data(max_entries=512, show_spinner=False)
def checked(text: str) -> Checked:
    """A case without its datasheet, which no rating reads: what is wrong on it is said on the page of the sheet."""
    raw = {name: value for name, value in json.loads(text).items() if name != "sheet"}
    try:
        return Checked(engine.parse_case(fields.filled(engine.Case, raw)), ())
    except engine.CaseError as error:
        return Checked(None, error.problems)


@st.cache_data(max_entries=256, show_spinner=False)
def rated(text: str) -> Rated | None:
    """None where the case has problems."""
    case = checked(text).case
    if case is None:
        return None
    rating = engine.rate(case)
    return Rated(case, rating, engine.propagate(case, rating))


@st.cache_data(max_entries=256, show_spinner=False)
def judged(text: str, system: str) -> tuple[Any, ...]:
    found = rated(text)
    return () if found is None else tuple(engine.judge(found.rating, found.intervals, system=system))


@st.cache_data(max_entries=128, show_spinner=False)
def sections(text: str, system: str) -> tuple[Any, ...]:
    found = rated(text)
    return () if found is None else tuple(engine.sections(found.rating, found.intervals, judged(text, system), system))


@st.cache_data(max_entries=64, show_spinner="Looking for the limits …")
def studied(text: str, system: str) -> tuple[Any, ...]:
    found = rated(text)
    return () if found is None else tuple(engine.studied(found.case, system))


@st.cache_data(max_entries=32, show_spinner=False)
def report(text: str, system: str) -> tuple[Any, ...]:
    """All sections that are handed over."""
    found, studies = rated(text), studied(text, system)
    if found is None:
        return ()
    return tuple(engine.sections(found.rating, found.intervals, judged(text, system), system, studies))


@st.cache_data(max_entries=32, show_spinner=False)
def pdf(text: str, system: str) -> bytes:
    found, studies = rated(text), studied(text, system)
    if found is None:
        return b""
    return bytes(engine.report_pdf(found.rating, found.intervals, judged(text, system), system, studies))


@st.cache_data(max_entries=256, show_spinner="Looking for the limit …")
def answered(text: str, question: engine.Question) -> Any:
    found = rated(text)
    return None if found is None else engine.answer(found.case, question)


@st.cache_data(max_entries=256, show_spinner=False)
def swept(text: str, path: str, value: float | None) -> Any:
    """A sweep around the stated value that shows another value too."""
    found = rated(text)
    if found is None:
        return None
    return engine.sweep(found.case, path, engine.around(engine.variables(found.case)[path], value))


@st.cache_data(max_entries=256, show_spinner=False)
def conditions(text: str) -> Any:
    found = rated(text)
    return None if found is None else engine.operating_table(found.case)


def current() -> tuple[dict[str, Any] | None, bool]:
    """The case whose results may be shown, and whether it is the present one; None where there never was one."""
    if not checked(text_of(case())).problems:
        return case(), True
    return st.session_state.document.get("good"), False


@st.cache_data(show_spinner=False)
def fluid_names() -> dict[str, tuple[str, ...]]:
    """Names to choose from, the commonest first; what lacks a property is left out."""
    offers = [offer for offer in engine.offered() if not offer.missing]
    fluids = [offer.name for offer in offers if offer.kind != "solution"]
    return {
        "fluid": tuple(dict.fromkeys(["water", *fluids])),
        "solution": tuple(offer.name for offer in offers if offer.kind == "solution"),
    }
