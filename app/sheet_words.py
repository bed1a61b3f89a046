"""What the audit of a datasheet says, in words ready to be drawn, and the files to take along.

Each is a function of the text of a case with its sheet, or of a sheet alone, and is kept.
"""

from __future__ import annotations

import json
import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import streamlit as st

import engine
from app import session, sheet_form

MOST_REPAIRS = 6


@dataclass(frozen=True)
class Line:
    """One check in words."""

    id: str
    title: str
    grade: str
    says: str
    arithmetic: tuple[str, ...]
    figures: tuple[tuple[str, str], ...]
    consequence: str
    question: str
    missing: str
    source: str


@dataclass(frozen=True)
class Told:
    """An audit in words, in one system of units."""

    counts: dict[str, int]
    found: tuple[Line, ...]
    missing: tuple[Line, ...]
    clear: tuple[tuple[str, ...], ...]
    gains: tuple[tuple[str, int], ...]
    """Fields that are lacking, and how many checks each would help to make."""
    slips: tuple[str, ...]
    repairs: tuple[tuple[str, ...], ...]
    side_names: dict[str, str]
    problems: tuple[engine.Problem, ...]


def own_case(text: str) -> engine.Case | None:
    return session.checked(text).case


def audit_of(text: str) -> tuple[Any, tuple[engine.Problem, ...]]:
    """The audit of what can be read of a sheet, and what cannot."""
    read, problems = engine.sheet_as_typed(json.loads(text).get("sheet") or {})
    case = own_case(text)
    return engine.check_datasheet(case.model_copy(update={"sheet": read}) if case else read), problems


@st.cache_data(max_entries=256, show_spinner="Checking the sheet …")
def audited(text: str, system: str) -> Told:
    audit, problems = audit_of(text)
    about = audit.subject
    lacking = [c for c in audit.checks if c.outcome == "not possible"]
    return Told(
        counts=dict(audit.counts),
        found=tuple(_line(c, system) for c in audit.found),
        missing=tuple(_line(c, system) for c in lacking),
        clear=tuple(
            (c.check.id, c.title(), c.shown(c.line.sheet, system), c.expected(system))
            for c in audit.checks
            if c.outcome == "clear" and c.line is not None
        ),
        gains=tuple(gains([c.missing for c in lacking], about)),
        slips=tuple(f"{_capital(about.label(slip.field))}: {slip.name}" for slip in audit.slips),
        repairs=tuple(
            (_capital(r.change(about, system)), f"{r.clears} of {r.of}", str(r.breaks), r.slip or "–")
            for r in audit.repairs[:MOST_REPAIRS]
        ),
        side_names=dict(engine.EXCHANGERS[about.values["type"]].side_names),
        problems=problems,
    )


def _line(c: Any, system: str) -> Line:
    about = c.subject
    return Line(
        id=c.check.id,
        title=c.title(),
        grade=c.grade or "",
        says=c.says(system),
        arithmetic=engine.arithmetic(c, system),
        figures=tuple(
            (
                _capital(about.label(path)),
                _as_typed(about.values[path]) + (" (our case)" if path in c.from_case else ""),
            )
            for path in c.fields
            if path != "type"
        ),
        consequence=c.consequence(system),
        question=c.question(system),
        missing=in_words(c.missing, about.label),
        source=c.check.source,
    )


def _as_typed(value: Any) -> str:
    return getattr(value, "text", "") or str(value)


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _fields_in(missing: str) -> list[str]:
    known = engine.sheet_fields()
    return [name for name in dict.fromkeys(re.findall(r"[\w.]+", missing.partition("(")[0])) if name in known]


def in_words(missing: str, label: Any) -> str:
    """What is lacking, with fields called as on the form; a key that is a word as well only where no sentence is."""
    known = engine.sheet_fields()
    bare = set(re.findall(r"[\w.]+", missing)) <= {*known, "or", "and"}

    def called(found: re.Match[str]) -> str:
        name = found[0]
        return str(label(name)) if name in known and (bare or "." in name or "_" in name) else name

    return re.sub(r"\w+(?:\.\w+)*", called, missing)


def gains(missing: Sequence[str], about: Any) -> list[tuple[str, int]]:
    """Fields that checks wait for, those that most wait for first; of phases only where the sheet speaks of some."""
    phases = set(sheet_form.SIDE_GROUPS[sheet_form.PHASES])
    if any(path.rpartition(".")[2] in phases for path in about.sheet_values):
        phases = set()
    counted = Counter(name for text in missing for name in set(_fields_in(text)))
    return [
        (_capital(about.label(name)), count)
        for name, count in counted.most_common()
        if count > 1 and name.rpartition(".")[2] not in phases
    ]


@st.cache_data(max_entries=32, show_spinner=False)
def checks_csv(text: str, system: str) -> bytes:
    return engine.check_csv(audit_of(text)[0], system)


@st.cache_data(max_entries=16, show_spinner="Writing the PDF …")
def pdf(text: str, system: str) -> bytes:
    return engine.sheet_pdf(audit_of(text)[0], system)


@st.cache_data(max_entries=32, show_spinner=False)
def sheet_files(text: str) -> tuple[bytes, bytes, int]:
    """The sheet as CSV and as XLSX, and how many entries they leave out since they do not read."""
    read, problems = engine.sheet_as_typed(json.loads(text).get("sheet") or {})
    return engine.sheet_csv(read), engine.sheet_xlsx(read), len(problems)


@st.cache_data(show_spinner=False)
def blank_files() -> tuple[bytes, bytes]:
    """The form with nothing filled in, as CSV and as XLSX."""
    return engine.blank_csv(), engine.blank_xlsx()
