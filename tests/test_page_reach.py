"""The page "What it would take", without a browser: questions, their answers, and operating conditions."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

pytest.importorskip("streamlit")
from streamlit.testing.v1 import AppTest

from app import drafts
from app.page_reach import passed
from engine.studies import Question, answer, sweep, told
from tests.cases import OIL_COOLER, changed, oil_cooler


@pytest.fixture(autouse=True)
def _own_drafts(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COUNTERCHECK_DATA", str(tmp_path))


def page(raw: dict[str, Any], name: str = "reach", **more: Any) -> AppTest:
    token = drafts.new_token()
    drafts.write(token, json.dumps({"case": raw, **more}), 0)
    script = f"from app import frame, page_{name}\nframe.drawn(page_{name}.show)()"
    app = AppTest.from_string(script, default_timeout=60)
    app.query_params["draft"] = token
    return app.run()


def draft(app: AppTest) -> dict[str, Any]:
    value = app.query_params["draft"]
    found = drafts.read(value[0] if isinstance(value, list) else value)
    assert found is not None
    return json.loads(found[0])


def words(app: AppTest) -> str:
    assert not app.exception
    said = "\n".join(
        str(e.value) for e in [*app.title, *app.markdown, *app.caption, *app.error, *app.warning, *app.info]
    )
    return said.replace("\\", "").replace("\N{NO-BREAK SPACE}", " ")


def box(app: AppTest, label: str) -> Any:
    return next(b for b in [*app.text_input, *app.selectbox, *app.button] if b.label == label)


def test_the_answer_stands_first_and_is_the_engines() -> None:
    app = page(OIL_COOLER)
    assert told(answer(oil_cooler(), Question(path="inside.flow", way="least"))) in app.markdown[0].value.replace(
        "\\", ""
    )
    assert len(app.get("plotly_chart")) == 1


def test_another_question_and_another_limit_are_kept_with_the_draft() -> None:
    app = page(OIL_COOLER)
    box(app, "Question").set_value("most inside.flow").run()
    box(app, "What must be kept").set_value("outside.T_out").run()
    asked = Question(path="inside.flow", way="most", keys=("outside.T_out",))
    assert told(answer(oil_cooler(), asked)) in words(app)
    assert draft(app)["chosen"] == {"question": "most inside.flow", "limit": "outside.T_out"}
    again = page(OIL_COOLER, chosen=draft(app)["chosen"])
    assert box(again, "Question").value == "most inside.flow"


def test_conditions_are_added_typed_and_removed() -> None:
    app = page(OIL_COOLER)
    box(app, "Clean start").click().run()
    box(app, "Another").click().run()
    box(app, "Another").click().run()
    zero = {"inside_R_fouling": "0 m2K/W", "outside_R_fouling": "0 m2K/W"}
    names = [{"name": "Clean start", **zero}, {"name": "Condition"}, {"name": "Condition 2"}]
    assert draft(app)["case"]["operating"] == names
    assert "| As stated | Clean start | Condition | Condition 2 |" in words(app)
    flows = [b for b in app.text_input if b.label == "Annulus, flow"]
    flows[1].set_value("9 t/h").run()
    assert draft(app)["case"]["operating"][1] == {"name": "Condition", "outside_flow": "9 t/h"}
    assert "Condition passes a limit." in words(app)
    for _ in range(3):
        box(app, "Remove condition 1").click().run()
    assert "operating" not in draft(app)["case"]


def test_an_empty_box_tells_what_the_case_states() -> None:
    app = page(changed(OIL_COOLER, operating=[{"name": "winter"}]))
    assert box(app, "Inner pipe, flow").placeholder == "taken as 12.00 m³/h"
    assert box(app, "Annulus, inlet temperature").placeholder == "taken as 68.0 °C"
    assert not [b for b in app.text_input if "plugged" in b.label]


def test_a_condition_that_cannot_be_read_says_so_and_the_former_case_is_shown() -> None:
    app = page(changed(OIL_COOLER, operating=[{"name": "winter"}]))
    box(app, "Annulus, flow").set_value("9").run()
    said = words(app)
    assert "Not the present case" in said
    assert "unit" in said
    assert "The flow of water (inner pipe) can go down to" in said


def test_a_case_without_limits_is_told_what_to_state() -> None:
    raw = changed(
        OIL_COOLER,
        inside__dp_allowed=None,
        inside__p_in="60 barg",
        outside__T_out=None,
        inside__fluid=OIL_COOLER["outside"]["fluid"],
    )
    said = words(page(raw))
    assert "No limit is stated" in said
    assert "the last value tried" in said


def test_a_case_without_an_answer_says_why() -> None:
    raw = changed(
        OIL_COOLER, inside__p_in="0.2 bara", outside__T_in="95 degC", outside__T_out=None, inside__flow="0.3 m3/h"
    )
    assert "The case itself has no answer" in words(page(raw))


def test_nothing_stated_asks_for_the_case_first() -> None:
    assert "nothing to rate yet" in words(page({"format": "countercheck-case", "version": 1}))


def test_grey_is_where_a_limit_is_passed() -> None:
    swept = sweep(oil_cooler(), "inside.flow", [0.2, 0.4, 1.0, 4.0, 6.0, 7.0])
    assert list(passed(swept)) == [(0.2, pytest.approx(0.7)), (5.0, 7.0)]


def test_the_report_page_shows_conditions_and_answers() -> None:
    said = words(page(changed(OIL_COOLER, operating=[{"name": "winter", "inside_T_in": "5 degC"}]), "report"))
    assert "| As stated | winter |" in said
    assert "How small may the flow of water (inner pipe) be?" in said
