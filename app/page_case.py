"""The case: state it, open it, save it."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import streamlit as st

import engine
from app import fields, figures, session
from app.display import plain
from app.frame import link, plot, sentence, state_line
from app.inputs import Form, Problems

TITLE = "Case"
SAMPLES = Path(__file__).resolve().parent.parent / "sample_cases"
FIRST = ("tag", "service")
"""Of the words about the case; the others stand in a fold."""
SET_BY_STEAM = ("T_in", "p_in", "T_out")
"""What the pressure and superheat of condensing steam decide, so that no box asks for it."""


def show() -> None:
    problems = Problems(session.checked(session.text_of(session.case())).problems, session.case())
    form = Form(problems)
    st.title(plain(form.stated(("tag",)) or "New case"), anchor=False)
    with st.container(horizontal=True):
        opening()
        samples()
        saving()
        starting()
    st.markdown(f"**{state_line(problems)}** {plain(in_short())}")
    if not problems.missing and not problems.wrong:
        link("Rating", "See the rating")
    top = st.container()
    about(form)
    sides(form)
    st.subheader("Exchanger", anchor=False)
    exchanger(form)
    form.fold("Limits of the equipment", [("limits",)], lambda: _limits(form))
    with top:
        unplaced(problems)


def in_short() -> str:
    """The answer in a few words, while the case is typed; how to begin where nothing is stated."""
    if session.case() == session.empty_case():
        return "State the two streams and the exchanger, or open an example."
    found = session.rated(session.text_of(session.case()))
    if found is None:
        return ""
    if not found.rating.states:
        return f"But no answer: {found.rating.problem}."
    units, clean, fouled = session.display(), found.rating.clean, found.rating.fouled
    duties = [units.show(state.duty, "heat_flow", 3) for state in (fouled, clean)]
    margin = f", margin of U {100 * fouled.margin:+.0f} %" if fouled.margin is not None else ""
    return f"Duty fouled {duties[0]}, clean {duties[1]}{margin}."


def fold_out(label: str, icon: str) -> Any:
    """A popover that closes when another case takes the place of the present one."""
    return st.popover(label, icon=icon, key=f"{label}{session.view()}")


def opening() -> None:
    with fold_out("Open", ":material/folder_open:"):
        widget = f"upload{session.view()}"
        st.file_uploader(
            "A case file (JSON)",
            type="json",
            key=widget,
            max_upload_size=1,
            on_change=_uploaded,
            args=(widget,),
        )


def _uploaded(widget: str) -> None:
    file = session.typed(widget)
    if file is not None:
        session.open_file(file.getvalue(), file.name)


def samples() -> None:
    known = _samples()
    if not known:
        return
    with fold_out("Examples", ":material/menu_book:"):
        for name, sample in known.items():
            st.button(
                plain(f"{sample.get('tag') or name}: {sample.get('service') or 'a case'}"),
                key=f"sample {name}{session.view()}",
                on_click=session.replace,
                args=({key: value for key, value in sample.items()}, f"example {name}"),
                width="stretch",
            )
            if sample.get("teaches"):
                st.caption(plain(sample["teaches"]))


@st.cache_data(show_spinner=False, ttl=60)
def _samples() -> dict[str, dict[str, Any]]:
    found = {}
    for path in sorted(SAMPLES.glob("*.json")):
        try:
            found[path.stem] = engine.read_raw(path)
        except engine.CaseError:
            continue
    return found


def saving() -> None:
    with fold_out("Save", ":material/download:"):
        st.download_button(
            "Save the case as a file",
            case_file(),
            file_name(session.case(), "json"),
            "application/json",
            on_click="ignore",
        )
        st.caption("Everything you typed, figures with their units as typed. An unfinished case can be saved too.")


def case_file() -> str:
    """The case as it will be read again; what does not read, and a datasheet, as typed."""
    raw = session.case()
    case = session.checked(session.text_of(raw)).case
    if case is None:
        return json.dumps(raw, indent=1, ensure_ascii=False) + "\n"
    sheet = {"sheet": raw["sheet"]} if raw.get("sheet") else {}
    return json.dumps({**engine.raw_case(case), **sheet}, indent=1, ensure_ascii=False) + "\n"


def file_name(raw: dict[str, Any], ending: str) -> str:
    words = re.sub(r"[^A-Za-z0-9._-]+", "-", str(raw.get("tag") or "")).strip(".-")
    return f"{words or 'case'}.{ending}"


def starting() -> None:
    with fold_out("New", ":material/note_add:"):
        st.caption("The present case goes away unless you save it. One step back brings it again.")
        st.button("Start an empty case", on_click=session.replace, args=(session.empty_case(), "new case"))


def about(form: Form) -> None:
    words = [part for part in fields.parts(engine.Case) if part.shape == "box" and part.name != "format"]
    form.boxes([part for part in words if part.name in FIRST], (), 2)
    rest = [part for part in words if part.name not in FIRST]
    form.fold("About this case", [(part.name,) for part in rest], lambda: form.boxes(rest, (), 2))


def sides(form: Form) -> None:
    """Both streams side by side, each under the name it has in this exchanger."""
    model = fields.kind_stated(_part("exchanger").models, form.stated(("exchanger",)))
    for side, place in zip(engine.SIDES, st.columns(2, gap="large"), strict=True):
        with place:
            st.subheader(model.side_names[side], anchor=False)
            stream = _part(side).models[0]
            form.said((side,), stream)
            for part in fields.parts(stream):
                if part.shape == "kinds":
                    form.kinds(part, (side, part.name))
            steam = fields.get(form.raw, (side, "fluid", "steam")) is not None
            decided = SET_BY_STEAM if steam else ()
            boxes = [part for part in fields.parts(stream) if part.shape == "box"]
            form.boxes(
                [part for part in boxes if part.name not in decided or form.stated((side, part.name))], (side,), 2
            )
    for part, path in form.tables:
        st.markdown(f"**{plain(fields.words(engine.Case, form.raw, path[:2]))}: {part.title.lower()} of properties**")
        form.rows(part, path)


def exchanger(form: Form) -> None:
    """The exchanger as stated, its bundle drawn to scale beside the figures."""
    stated = form.stated(("exchanger",))
    drawn = engine.stated_bundle(stated, session.display().system) if isinstance(stated, dict) else None
    if drawn is None:
        form.kinds(_part("exchanger"), ("exchanger",))
        return
    entries, drawing = st.columns([2, 1], gap="medium")
    with entries:
        form.kinds(_part("exchanger"), ("exchanger",))
    with drawing, st.container(key="bundle"):
        plot(figures.bundle(drawn), drawn.alt, "bundle drawn")
        st.caption(plain("\n".join(drawn.legend)).replace("\n", "  \n"))


def _limits(form: Form) -> None:
    form.boxes(fields.parts(_part("limits").models[0]), ("limits",), 2, within=("limits",))


def _part(name: str) -> fields.Part:
    return next(part for part in fields.parts(engine.Case) if part.name == name)


def unplaced(problems: Problems) -> None:
    """What belongs to no field, such as a key that a file holds and no case knows."""
    for place, sentences in problems.rest().items():
        path = fields.steps(place)
        for says in sentences:
            st.error(plain(sentence(place, says)), icon=":material/error:")
        if place and fields.get(session.case(), path) is not None:
            st.button(f"Take “{plain(place)}” out of the case", on_click=session.put, args=(path, None))
