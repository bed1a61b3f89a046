"""The pages Trust and Datasheet check without a browser."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

pytest.importorskip("streamlit")
from streamlit.testing.v1 import AppTest

import engine
from app import drafts, fields, page_trust
from tests.cases import OIL_COOLER


@pytest.fixture(autouse=True)
def _own_drafts(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COUNTERCHECK_DATA", str(tmp_path))


def page(name: str, token: str = "") -> AppTest:
    app = AppTest.from_string(
        f"from app import frame, page_{name}\nframe.drawn(page_{name}.show)()", default_timeout=60
    )
    if token:
        app.query_params["draft"] = token
    app = app.run()
    assert not app.exception
    assert "went wrong" not in words(app)
    return app


def words(app: AppTest) -> str:
    shown = [*app.title, *app.subheader, *app.markdown, *app.caption, *app.error, *app.warning, *app.info]
    return "\n".join(str(element.value) for element in shown).replace("\N{NO-BREAK SPACE}", " ")


# --- trust ------------------------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def lines() -> list[dict[str, Any]]:
    return engine.proof_table()


def test_the_trust_page_counts_what_the_engine_reproduces(lines):
    said = words(page("trust"))
    assert f"**{len(lines)} values" in said
    assert "all hold" in said
    assert "Values that do not hold" not in said
    for kind, says in engine.PROOF_KINDS.items():
        assert f"| {kind.capitalize()} | {sum(line['kind'] == kind for line in lines)} | {says} |" in said


def test_a_chosen_subject_shows_its_values_sources_and_allowances(lines):
    app = page("trust")
    app.selectbox(key="trust subject").set_value("rate").run()
    said = words(app)
    for line in (line for line in lines if line["subject"] == "rate"):
        assert page_trust.plain(line["what"]) in said
        assert page_trust.plain(f"{line['source']}. Allowance: {line['reason']}.") in said


def test_a_value_that_is_off_stands_first(lines, monkeypatch):
    wrong = {**lines[7], "what": "a wrong one", "ours": 1.5 * lines[7]["value"], "difference": 0.5, "holds": False}
    monkeypatch.setattr(engine, "proof_table", lambda: [*lines[:7], wrong, *lines[8:]])
    page_trust.computed.clear()
    said = words(page("trust"))
    page_trust.computed.clear()
    assert "1 of them off" in said
    assert said.index("Values that do not hold") < said.index("a measured exchanger")
    assert "✗ off" in said


def test_the_measured_range_stands_beside_ours_by_both_methods():
    said = words(page("trust"))
    found = engine.measured_exchanger()
    for _, at, _ in found.ours.values():
        assert f"| {at:.0f} |" in said
    assert "3373" in said
    assert "3725" in said


# --- datasheet check --------------------------------------------------------------------------------------------------

SHEET: dict[str, Any] = {
    "item": "E-2107",
    "inside": {"flow": "186 t/h", "cp": "4.20 kJ/kgK", "T_in": "26.0 degC", "T_out": "33.4 degC"},
    "outside": {"flow": "62 t/h", "cp": "2.75 kJ/kgK", "T_in": "74.0 degC", "T_out": "40.0 degC"},
    "duty": "1613 kW",
    "area": "111.3 m2",
    "mtd": "23.07 K",
    "U_service": "628 W/m2K",
}
SLIPPED = fields.put(SHEET, ("U_service",), "3566 W/m2K")
"""628 Btu/h·ft²·°F in W/m²K: one unit read as the other."""


def kept(sheet: dict[str, Any], raw: dict[str, Any] | None = None, **chosen: Any) -> str:
    """The token of a draft that holds a sheet."""
    token = drafts.new_token()
    case = {"format": "countercheck-case", "version": 1, **(raw or {"inside": {}, "outside": {}, "exchanger": {}})}
    drafts.write(token, json.dumps({"case": {**case, "sheet": sheet}, "chosen": chosen}), 0)
    return token


def token_of(app: AppTest) -> str:
    token = app.query_params["draft"]
    return token[0] if isinstance(token, list) else token


def draft_of(app: AppTest) -> dict[str, Any]:
    found = drafts.read(token_of(app))
    assert found is not None
    return json.loads(found[0])


def box(app: AppTest, place: str) -> Any:
    generation = app.session_state["generation"]
    return app.text_input(key=f"sheet.{place}@typed#{generation}")


def test_the_page_opens_with_no_sheet_and_no_case():
    app = page("sheet")
    assert "Upload or paste" in words(app)
    labels = {element.label for element in [*app.text_input, *app.selectbox]}
    assert {declared.name for declared in engine.sheet_fields().values()} <= labels


def test_figures_typed_one_by_one_are_checked_as_soon_as_two_belong_together():
    app = page("sheet")
    figures = {
        "inside.flow": "186 t/h", "inside.cp": "4.20 kJ/kgK", "inside.T_in": "26.0 degC", "inside.T_out": "33.4 degC",
        "outside.T_in": "74 degC", "duty": "16.13 MW",
    }  # fmt: skip
    for place, text in figures.items():
        box(app, place).set_value(text).run()
    assert draft_of(app)["case"]["sheet"]["inside"]["T_out"] == "33.4 degC"
    assert "1 stop" in words(app)


def test_a_slip_of_units_is_named_first_and_asked_about():
    app = page("sheet", kept(SLIPPED))
    said = words(app)
    assert "Looks like a slip" in said
    assert "Btu/h" in said
    order = [str(element.value) for element in app.main if element.type in ("markdown", "subheader")]
    slip = next(i for i, value in enumerate(order) if "Looks like a slip" in value)
    assert slip < order.index("Contradictions") < order.index("Questions to the vendor")
    assert app.code[0].value.startswith("Questions on the datasheet E-2107\n\n1. ")
    assert "3566 W/m2K" in app.code[0].value


def test_a_contradiction_shows_its_arithmetic_with_the_figures_as_typed():
    app = page("sheet", kept(fields.put(SHEET, ("inside", "T_out"), "31.4 degC")))
    assert page_trust.plain("186 t/h × 4.20 kJ/kgK × (31.4 degC − 26.0 degC) = 1172 kW") in words(app)


def test_a_sheet_that_closes_says_so_and_still_says_what_is_not_possible():
    app = page("sheet", kept(SHEET))
    said = words(app)
    assert "None: what can be recomputed agrees" in said
    assert "Most would be gained by" in said
    assert "oncondensables" not in said.partition("Most would be gained by")[2].partition("\n")[0]


def test_a_figure_that_does_not_read_is_kept_and_the_rest_is_checked(tmp_path: Path):
    app = page("sheet", kept(SHEET, **{"sheet view": "Figures of the sheet"}))
    box(app, "inside.flow").set_value("186 furlongs").run()
    assert draft_of(app)["case"]["sheet"]["inside"]["flow"] == "186 furlongs"
    assert box(app, "inside.flow").value == "186 furlongs"
    said = words(app)
    assert "furlongs" in said
    assert "✗" in said
    assert "checks run" in said
    app = page("sheet", token_of(app))
    box(app, "inside.flow").set_value("").run()
    assert "flow" not in draft_of(app)["case"]["sheet"]["inside"]


def test_a_count_is_kept_as_a_number_and_a_wrong_one_as_typed():
    app = page("sheet", kept(SHEET, **{"sheet view": "Figures of the sheet"}))
    box(app, "tubes").set_value("508").run()
    assert draft_of(app)["case"]["sheet"]["tubes"] == 508
    box(app, "tubes").set_value("508.5").run()
    assert draft_of(app)["case"]["sheet"]["tubes"] == "508.5"
    assert "is not a whole number" in words(app)


def test_a_wrong_sheet_leaves_the_rating_of_the_case_alone():
    token = kept({"duty": "lots", "colour": "blue"}, OIL_COOLER)
    app = page("rating", token)
    assert "Not the present case" not in words(app)
    assert app.metric
    app = page("case", token)
    assert "✓ Complete" in words(app)
    app = page("sheet", token)
    assert "2 entries do not read" in words(app)


def test_dotted_keys_of_a_file_stand_in_their_boxes():
    app = page("sheet", kept({"inside.T_in": "26 degC"}, **{"sheet view": "Figures of the sheet"}))
    assert box(app, "inside.T_in").value == "26 degC"


def upload(app: AppTest, key: str, *files: tuple[str, bytes, str]) -> AppTest:
    return app.file_uploader(key=f"{key}@typed#{app.session_state['generation']}").set_value(list(files)).run()


def test_a_sheet_is_uploaded_and_one_step_back_brings_the_former():
    app = page("sheet")
    data = engine.sheet_csv(engine.sheet_as_typed(SLIPPED)[0])
    app.file_uploader(key="sheet file@typed#0").set_value(("vendor.csv", data, "text/csv")).run()
    assert draft_of(app)["case"]["sheet"] == SLIPPED
    assert "Looks like a slip" in words(app)
    assert draft_of(app)["before"]["what"] == "sheet vendor.csv read"


@pytest.mark.parametrize(
    ("data", "says"),
    [
        (b"field,value\nduty,lots\ncolour,blue\n", "colour"),
        (b"field,value\nduty,=1+1\n", "formula"),
        (b"\xff\xfe\x00", "not text"),
        (b"x" * (engine.MOST_BIDS << 19), "allowed is up to 1 MiB"),
    ],
)
def test_a_file_that_is_no_sheet_is_refused_in_sentences_and_changes_nothing(data: bytes, says: str):
    app = page("sheet", kept(SHEET))
    app.file_uploader(key="sheet file@typed#0").set_value(("bad.csv", data, "text/csv")).run()
    assert "bad.csv was not taken" in words(app)
    assert says in words(app)
    assert draft_of(app)["case"]["sheet"] == SHEET


def test_pasted_rows_are_taken_and_what_is_not_understood_stays_in_the_box():
    app = page("sheet", kept(SHEET))
    rows = "\tTube side\tShell side\nVelocity\t1.18 m/s\t\ncolour\tblue\nU_clean\t878 W/m2K"
    app.text_area(key="sheet pasted@typed#0").set_value(rows).run()
    app.button(key="sheet pasted@typed#0 taken").click().run()
    sheet = draft_of(app)["case"]["sheet"]
    assert sheet["inside"] == {**SHEET["inside"], "velocity": "1.18 m/s"}
    assert sheet["U_clean"] == "878 W/m2K"
    assert app.text_area(key="sheet pasted@typed#1").value == "colour\tblue"
    assert "is no field of a datasheet" in words(app)


def test_the_case_of_a_sheet_rates_and_the_sheet_of_a_rating_closes():
    app = page("sheet", kept({}, OIL_COOLER))
    app.button(key="made@typed#0").click().run()
    made = draft_of(app)["case"]["sheet"]
    assert made["inside"]["T_in"] == "27.00 °C"
    assert "checks run" in words(app)
    assert not any(grade in words(app) for grade in ("■ Stop", "▲ Act"))
    app.button(key="case@typed#1").click().run()
    case = draft_of(app)["case"]
    assert case["sheet"] == made
    assert case["exchanger"]["legs_in_series"] == OIL_COOLER["exchanger"]["legs_in_series"]
    assert "It can be rated." in words(app)
    assert not page("rating", token_of(app)).error


def test_a_case_takes_part_only_where_it_is_asked_to():
    token = kept({**SHEET, "legs_in_series": 10, "leg_length": "6 m"}, OIL_COOLER)
    app = page("sheet", token)
    assert "our own data have" in app.code[0].value
    app.checkbox(key="beside@typed#0").uncheck().run()
    assert not any("our own data have" in code.value for code in app.code)


def test_bids_are_uploaded_compared_and_taken_out():
    app = page("sheet", kept(SHEET, **{"sheet view": "Bids side by side"}))
    assert "0 of at least 2" in words(app)
    app.button(key="own@typed#0").click().run()
    for name, sheet in (("b.csv", SLIPPED), ("c.csv", {**SHEET, "area": "120 m2"})):
        data = engine.sheet_csv(engine.sheet_as_typed(sheet)[0])
        key = next(element.key for element in app.file_uploader if element.key.startswith("bid files"))
        app.file_uploader(key=key).set_value([(name, data, "text/csv")]).run()
    said = words(app)
    assert "| On one basis | E\\-2107 | b | c |".replace("\\-", "-") in said
    assert "| Surface as printed | 111.3 m² | 111.3 m² | 120.0 m² |" in said
    app.button(key="out b@typed#0").click().run()
    assert "| On one basis | E-2107 | c |" in words(app)
    key = next(element.key for element in app.file_uploader if element.key.startswith("bid files"))
    app.file_uploader(key=key).set_value([("d.csv", b"nonsense", "text/csv")]).run()
    assert "d.csv was not taken" in words(app)
    assert list(draft_of(app)["chosen"]["bids"]) == ["E-2107", "c"]


def test_a_saved_case_holds_the_sheet_as_typed():
    wrong = fields.put(SHEET, ("duty",), "lots")
    app = page("case", kept(wrong, OIL_COOLER))
    assert not app.exception
    raw = {"format": "countercheck-case", "version": 1, **OIL_COOLER, "sheet": wrong}
    app = AppTest.from_string(
        "from app import session, page_case\nimport streamlit as st\nsession.begin()\nst.code(page_case.case_file())"
    )
    app.query_params["draft"] = kept(wrong, OIL_COOLER)
    app.run()
    assert json.loads(app.code[0].value) == raw
