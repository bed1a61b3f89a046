"""The check of a vendor's datasheet: what contradicts what, and what to ask."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import streamlit as st

import engine
from app import bids, session, sheet_form
from app.display import plain
from app.frame import table
from app.page_case import file_name, fold_out
from app.page_rating import GRADES
from app.sheet_words import Line, Told, audited, blank_files, checks_csv, own_case, pdf, sheet_files

TITLE = "Datasheet check"
FOUND, FIGURES, BIDS = "What was found", "Figures of the sheet", "Bids side by side"
VIEWS = (FOUND, FIGURES, BIDS)
BESIDE = "sheet beside the case"
XLSX = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"
LEFT = "pasted and not understood"


def show() -> None:
    st.title(TITLE, anchor=False)
    tidy()
    text, system = session.text_of(subject()), session.display().system
    told = audited(text, system)
    with st.container(horizontal=True):
        uploading()
        pasting()
        saving(text, system)
        turning()
    beside()
    stated = sheet() != {}
    if stated:
        st.markdown(summary(told))
    else:
        st.markdown(
            "Upload or paste a datasheet, open an example that holds one on the page Case, or type figures below. "
            "Every two figures that belong together are checked at once; nothing has to be complete."
        )
    if not stated and not session.chosen("sheet view"):
        # Or the first figure typed would turn the page.
        session.choose("sheet view", FIGURES)
    widget, view = f"view of the sheet{session.view()}", session.chosen("sheet view") or FOUND
    st.segmented_control(
        "View",
        VIEWS,
        default=view,
        required=True,
        key=widget,
        label_visibility="collapsed",
        on_change=lambda: session.choose("sheet view", session.typed(widget)),
    )
    if view == FIGURES:
        sheet_form.show(told.problems, told.side_names)
    elif view == BIDS:
        bids.show(own_case(text), system)
    else:
        misread(told)
        results(told, text, system)


# --- the sheet --------------------------------------------------------------------------------------------------------


def sheet() -> dict[str, Any]:
    """As typed."""
    stated = session.case().get("sheet")
    return stated if isinstance(stated, dict) else {}


def tidy() -> None:
    """A file may name figures of a side by dotted keys; the form has them in their group."""
    grouped = engine.nested_sheet(sheet())
    if grouped != sheet():
        session.put(("sheet",), grouped)


def subject() -> dict[str, Any]:
    """The sheet beside the case, or by itself."""
    return session.case() if session.chosen(BESIDE) is not False else {"sheet": sheet()}


# --- entering ---------------------------------------------------------------------------------------------------------


def uploading() -> None:
    with fold_out("Upload", ":material/upload_file:"):
        widget = f"sheet file{session.view()}"
        st.file_uploader(
            "A datasheet as CSV or XLSX, up to 1 MB",
            type=["csv", "xlsx"],
            key=widget,
            max_upload_size=1,
            on_change=_uploaded,
            args=(widget,),
        )
        st.caption("A table of two columns, field and value with its unit. The blank form names every field.")
        as_csv, as_xlsx = blank_files()
        _download("Blank form (XLSX)", as_xlsx, "datasheet.xlsx", XLSX)
        _download("Blank form (CSV)", as_csv, "datasheet.csv", "text/csv")


def _download(label: str, content: bytes | str, name: str, kind: str, **look: Any) -> None:
    st.download_button(label, content, name, kind, on_click="ignore", **look)


def _uploaded(widget: str) -> None:
    file = session.typed(widget)
    if file is None:
        return
    try:
        read = engine.read_sheet(file.getvalue())
    except engine.CaseError as error:
        refused(file.name, error.problems)
        return
    _replace(engine.raw_sheet(read), f"sheet {file.name} read")
    session.choose("sheet view", FOUND)


def refused(name: str, problems: Sequence[engine.Problem], most: int = 8) -> None:
    """Why a file was not taken, each problem with its row."""
    said = [f"- {plain(problem)}" for problem in problems[:most]]
    more = [f"- and {len(problems) - most} more"] if len(problems) > most else []
    session.say("\n".join([f"{plain(name)} was not taken:", *said, *more]))


def _replace(raw: Mapping[str, Any], what: str) -> None:
    session.replace({**session.case(), "sheet": dict(raw)}, what)


def pasting() -> None:
    with fold_out("Paste", ":material/content_paste:"):
        widget = f"sheet pasted{session.view()}"
        st.markdown(
            "One field a row, its name or key first, then its figure with its unit. With columns headed “tube side” "
            "and “shell side” a row may hold the figures of both. A unit may stand in brackets behind the name."
        )
        st.text_area(
            "Rows to paste",
            session.chosen(LEFT) or "",
            key=widget,
            height=180,
            placeholder="\tTube side\tShell side\nTemperature, in [degC]\t27\t68\nTotal flow\t42 m3/h\t18 t/h\n"
            "Heat exchanged\t1240 kW",
        )
        st.button("Put these in the sheet", key=f"{widget} taken", on_click=_pasted, args=(widget,))


def _pasted(widget: str) -> None:
    """Take what is understood; the other rows stay in the box."""
    text = session.typed(widget) or ""
    raw, problems = engine.pasted_sheet(text)
    lines = text.splitlines()
    rows = [int(problem.path.removeprefix("line ")) for problem in problems if problem.path]
    session.choose(LEFT, "\n".join(lines[row - 1] for row in dict.fromkeys(rows)))
    merged = {**sheet()}
    for key, value in raw.items():
        at = merged.get(key)
        merged[key] = {**at, **value} if isinstance(value, dict) and isinstance(at, dict) else value
    count = sum(len(value) if isinstance(value, dict) else 1 for value in raw.values())
    if count:
        _replace(merged, "figures pasted")
    if problems:
        said = "\n".join(f"- {plain(problem)}" for problem in problems[:12])
        session.say(f"{count} figures were taken. What was not understood stays in the box to paste:\n{said}")
    else:
        session.say(f"{count} figures were taken." if count else "Nothing was pasted: the box holds no row.")


def saving(text: str, system: str) -> None:
    if not sheet():
        return
    with fold_out("Save", ":material/download:"):
        name, (as_csv, as_xlsx, unread) = _name(), sheet_files(text)
        _download("Sheet (XLSX)", as_xlsx, f"{name}.xlsx", XLSX)
        _download("Sheet (CSV)", as_csv, f"{name}.csv", "text/csv")
        _download("All checks (CSV)", checks_csv(text, system), f"{name}-checks.csv", "text/csv")
        left = f" Left out, since they do not read: {unread}." if unread else ""
        st.caption(f"The sheet is saved with the case too, on the page Case.{left}")
        st.button("Empty this sheet", on_click=_emptied, key=f"empty{session.view()}")


def _emptied() -> None:
    session.replace({key: value for key, value in session.case().items() if key != "sheet"}, "sheet emptied")


def _name() -> str:
    raw = sheet()
    return file_name({"tag": raw.get("item") or session.case().get("tag") or "datasheet"}, "").rstrip(".")


def turning() -> None:
    """A case of the sheet, and a sheet of the rating."""
    with fold_out("Turn into", ":material/swap_horiz:"):
        st.button("A case of this sheet", on_click=_made_case, disabled=not sheet(), key=f"case{session.view()}")
        st.caption(
            "Streams, exchanger and limits as the sheet states them, its outlets as required outlets: rate it on the "
            "page Rating. It takes the place of the present case."
        )
        found = session.rated(session.text_of(session.case()))
        ready = found is not None and bool(found.rating.states)
        st.button("A sheet of our rating", on_click=_made_sheet, disabled=not ready, key=f"made{session.view()}")
        st.caption("The rating of the present case, printed as a datasheet. It takes the place of the present sheet.")


def _made_case() -> None:
    read, _ = engine.sheet_as_typed(sheet())
    session.replace({**engine.case_of_sheet(read), "sheet": sheet()}, "case made of the sheet")
    lacking = len(session.checked(session.text_of(session.case())).problems)
    more = f" {lacking} entries are still missing or to correct: see the page Case." if lacking else ""
    session.say(f"The sheet was made a case.{more or ' It can be rated.'}")


def _made_sheet() -> None:
    found = session.rated(session.text_of(session.case()))
    if found is None:
        return
    try:
        _replace(engine.sheet_of_rating(found.rating, session.display().system), "sheet made of the rating")
    except ValueError as error:
        session.say(f"No sheet was made: {plain(error)}.")


def beside() -> None:
    """Whether the case takes part, where there is one."""
    case = own_case(session.text_of(session.case()))
    if case is None or not sheet():
        return
    widget = f"beside{session.view()}"
    st.checkbox(
        plain(f"Beside our case{' ' + case.tag if case.tag else ''}: its data and our own rating take part"),
        session.chosen(BESIDE) is not False,
        key=widget,
        on_change=lambda: session.choose(BESIDE, session.typed(widget)),
    )


# --- results ----------------------------------------------------------------------------------------------------------


def summary(told: Told) -> str:
    counts = told.counts
    graded = ", ".join(f"{counts[grade]} {word[2:].lower()}" for grade, (word, _) in GRADES.items() if counts[grade])
    run = counts["clear"] + counts["found"]
    found = f"{counts['found']} found something ({graded})" if counts["found"] else "none found anything"
    return f"**{run} checks run · {found} · {counts['not possible']} not possible**"


def misread(told: Told) -> None:
    if told.problems:
        count = len(told.problems)
        what = "One entry does not read and takes" if count == 1 else f"{count} entries do not read and take"
        st.warning(f"{what} no part; see “{FIGURES}”.", icon=":material/edit:")


def results(told: Told, text: str, system: str) -> None:
    if not sheet():
        return
    for slip in told.slips:
        st.markdown(f":orange-badge[Looks like a slip] **{plain(slip)}**")
    loud = [line for line in told.found if line.grade != "note"]
    quiet = [line for line in told.found if line.grade == "note"]
    st.subheader("Contradictions", anchor=False)
    if not loud:
        st.markdown("None: what can be recomputed agrees within rounding and its allowance.")
    for i, line in enumerate(loud):
        contradiction(line, i)
    if quiet:
        with st.expander(f"{GRADES['note'][0]} · {len(quiet)}, within reach of rounding or not stated"):
            for line in quiet:
                st.markdown(f"**{plain(line.says)}**  \n{_told(line)}")
    repairs(told)
    questions(told, text, system)
    missing(told)
    if told.clear:
        with st.expander(f"Lines that close · {len(told.clear)}"):
            table(("Check", "", "Sheet", "Expected"), told.clear)


def contradiction(line: Line, i: int) -> None:
    word, colour = GRADES[line.grade]
    with st.container(border=True):
        st.markdown(f":{colour}-badge[{word}] **{plain(line.says)}**")
        if line.consequence:
            st.markdown(plain(f"If it is real: {line.consequence}."))
        with st.expander("Arithmetic", expanded=i == 0):
            if line.arithmetic:
                st.markdown("  \n".join(plain(part) for part in line.arithmetic))
            if line.figures:
                table(("Took part", "As stated"), line.figures)
            st.caption(plain(f"Allowance: {line.source}."))
        st.caption(plain(f"{line.id} {line.title}"))


def _told(line: Line) -> str:
    return "  \n".join(plain(part) for part in (*line.arithmetic, f"{line.id} {line.title}"))


def repairs(told: Told) -> None:
    if not told.repairs:
        return
    st.subheader("What would clear them", anchor=False)
    st.markdown("One figure changed at a time. Nothing is changed here: ask first.")
    table(("Change", "Failures that vanish", "New ones", "Slip"), told.repairs)


def questions(told: Told, text: str, system: str) -> None:
    asked = question_text(told)
    st.subheader("Questions to the vendor", anchor=False)
    if asked:
        st.code(asked, language=None, wrap_lines=True)
    else:
        st.markdown("None.")
    with st.container(horizontal=True):
        _download(
            "Check (PDF)", pdf(text, system), f"{_name()}-check.pdf", "application/pdf", type="primary",
            icon=":material/picture_as_pdf:",
        )  # fmt: skip
        if asked:
            _download("Questions (text)", asked, f"{_name()}-questions.txt", "text/plain", icon=":material/download:")


def question_text(told: Told) -> str:
    """Ready to be pasted into a letter."""
    lines = [f"{line.title}: {line.question}" for line in told.found if line.question]
    if not lines:
        return ""
    raw = sheet()
    about = ", ".join(str(raw[key]) for key in ("item", "revision", "date") if raw.get(key))
    head = f"Questions on the datasheet{' ' + about if about else ''}"
    return "\n\n".join([head, *(f"{i}. {line}" for i, line in enumerate(lines, 1))])


def missing(told: Told) -> None:
    if not told.missing:
        return
    st.subheader("What cannot be checked", anchor=False)
    if told.gains:
        most = "; ".join(f"{name} ({count} checks)" for name, count in told.gains[:6])
        st.markdown(plain(f"Most would be gained by: {most}."))
    with st.expander(f"Checks that are not possible · {len(told.missing)}"):
        table(("Check", "", "Would need"), [(line.id, line.title, line.missing) for line in told.missing])
