"""The app without a browser: the form, the draft and its keeping, units, what-if, results of a former case."""

from __future__ import annotations

import copy
import json
import re
import sqlite3
import time
from pathlib import Path
from typing import Any

import pytest

pytest.importorskip("streamlit")
from streamlit.testing.v1 import AppTest

import engine
from app import drafts, fields
from app.display import Display, display_of, plain
from app.inputs import pasted
from engine.case import TableRow
from tests.cases import OIL_COOLER

ROOT = Path(__file__).resolve().parent.parent
FLOW = "inside.flow@typed#0"


@pytest.fixture(autouse=True)
def _own_drafts(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COUNTERCHECK_DATA", str(tmp_path))


def page(name: str, token: str = "") -> AppTest:
    script = f"from app import frame, page_{name}\nframe.drawn(page_{name}.show)()"
    app = AppTest.from_string(script, default_timeout=30)
    if token:
        app.query_params["draft"] = token
    return app.run()


def kept(raw: dict[str, Any] = OIL_COOLER, **more: Any) -> str:
    """The token of a draft that holds a case."""
    token = drafts.new_token()
    drafts.write(token, json.dumps({"case": raw, **more}), 0)
    return token


def token_of(app: AppTest) -> str:
    value = app.query_params["draft"]
    return value[0] if isinstance(value, list) else value


def draft_of(app: AppTest) -> dict[str, Any]:
    found = drafts.read(token_of(app))
    assert found is not None
    return json.loads(found[0])


def words(app: AppTest) -> str:
    said = "\n".join(
        str(e.value) for e in [*app.title, *app.markdown, *app.caption, *app.error, *app.warning, *app.info]
    )
    return said.replace("\N{NO-BREAK SPACE}", " ")


def metric(app: AppTest, label: str) -> str:
    return next(m.value for m in app.metric if m.label.startswith(label))


# --- the form ---------------------------------------------------------------------------------------------------------


def test_every_page_opens_with_nothing_stated() -> None:
    for name in ("case", "rating", "report"):
        app = page(name)
        assert not app.exception
        assert "went wrong" not in words(app)


def test_the_app_opens_as_it_is_started() -> None:
    app = AppTest.from_file(str(ROOT / "app" / "main.py"), default_timeout=30).run()
    assert not app.exception
    assert app.title[0].value == "New case"


def test_a_new_case_says_how_many_entries_are_missing_and_marks_no_field_as_wrong() -> None:
    app = page("case")
    assert re.search(r"✎ \d+ entries missing\.", words(app))
    assert "to correct" not in words(app)
    assert "✗" not in words(app)


def test_a_case_filled_in_field_by_field_is_complete_and_rates() -> None:
    app = page("case")
    entries = {
        "inside.flow": "12 m3/h",
        "inside.T_in": "27 degC",
        "inside.p_in": "4.2 barg",
        "outside.flow": "6 t/h",
        "outside.T_in": "68 degC",
        "outside.p_in": "6 barg",
        "exchanger.inner_pipe.nps": "2",
        "exchanger.inner_pipe.schedule": "40",
        "exchanger.outer_pipe.nps": "3",
        "exchanger.outer_pipe.schedule": "40",
        "exchanger.leg_length": "6 m",
        "exchanger.legs_in_series": "8",
        "exchanger.wall_conductivity": "50 W/mK",
    }
    for side in engine.SIDES:
        app.text_input(key=f"{side}.fluid@typed#0").set_value("water").run()
    for place, text in entries.items():
        app.text_input(key=f"{place}@typed#0").set_value(text).run()
    assert "✓ Complete" in words(app)
    assert draft_of(app)["case"]["exchanger"]["legs_in_series"] == 8
    assert draft_of(app)["case"]["inside"]["flow"] == "12 m3/h"
    assert float(metric(page("rating", token_of(app)), "Duty")) > 0


def test_a_misspelt_fluid_is_refused_at_its_box_before_anything_else_is_typed() -> None:
    app = page("case")
    app.text_input(key="inside.fluid@typed#0").set_value("tolune").run()
    assert "1 to correct" in words(app)
    assert "✗ No fluid is called 'tolune'" in words(app)


def test_a_pipe_with_its_size_alone_lacks_its_schedule_and_is_not_wrong() -> None:
    app = page("case")
    app.text_input(key="exchanger.inner_pipe.nps@typed#0").set_value("2").run()
    assert "to correct" not in words(app)
    assert "✗" not in words(app)
    assert app.text_input(key="exchanger.inner_pipe.schedule@typed#0").placeholder.startswith("needed")


def test_a_bad_figure_stays_in_its_box_with_the_engines_sentence_beside_it() -> None:
    app = page("case", kept())
    app.text_input(key=FLOW).set_value("12 furlongs").run()
    assert app.text_input(key=FLOW).value == "12 furlongs"
    with pytest.raises(engine.CaseError) as refused:
        engine.parse_case(fields.put(OIL_COOLER, ("inside", "flow"), "12 furlongs"))
    assert plain(refused.value.problems[0].says)[:60] in words(app)
    assert "1 to correct" in words(app)
    assert draft_of(app)["case"]["inside"]["flow"] == "12 furlongs"


@pytest.mark.parametrize("text", ["7.5", "eight", "8.0"])
def test_a_count_that_is_no_whole_number_is_refused_and_kept_as_typed(text: str) -> None:
    app = page("case", kept())
    app.text_input(key="exchanger.legs_in_series@typed#0").set_value(text).run()
    assert "is not a whole number" in words(app)
    assert draft_of(app)["case"]["exchanger"]["legs_in_series"] == text


def test_markup_in_a_users_words_is_shown_as_it_was_typed() -> None:
    raw = fields.put(OIL_COOLER, ("tag",), "**E-1** $x$ <b> :red[no]")
    app = page("case", kept(raw))
    assert app.title[0].value == r"\*\*E-1\*\* \$x\$ \<b\> \:red\[no\]"


def test_an_unknown_key_of_a_file_is_named_and_can_be_taken_out() -> None:
    app = page("case", kept(fields.put(OIL_COOLER, ("inside", "flwo"), "1 kg/s")))
    assert any("is not a known key" in error.value for error in app.error)
    next(b for b in app.button if b.label.startswith("Take")).click().run()
    assert "✓ Complete" in words(app)


def test_a_fluid_chosen_from_the_list_is_written_in_its_box() -> None:
    app = page("case", kept())
    app.selectbox(key="inside.fluid.chosen@typed#0").set_value("ammonia").run()
    assert app.text_input(key="inside.fluid@typed#0").value == "ammonia"
    assert draft_of(app)["case"]["inside"]["fluid"] == "ammonia"


def test_an_emptied_optional_group_leaves_the_case() -> None:
    app = page("case", kept())
    key = "exchanger.fins.count@typed#0"
    app.text_input(key=key).set_value("24").run()
    assert draft_of(app)["case"]["exchanger"]["fins"] == {"count": 24}
    assert "3 entries missing" in words(app)
    app.text_input(key=key).set_value("").run()
    assert draft_of(app)["case"] == OIL_COOLER


def test_every_kind_of_fluid_and_every_type_of_exchanger_has_a_form() -> None:
    app = page("case", kept())
    for kind in ("solution", "table", "constant", "steam", "pure"):
        generation = app.session_state["generation"]
        app.selectbox(key=f"inside.fluid.kind@typed#{generation}").set_value(kind).run()
        assert not app.exception
        assert "went wrong" not in words(app)
        stated = draft_of(app)["case"]["inside"].get("fluid")
        assert (kind in stated) if kind != "pure" else stated == "Water"
    for kind, model in engine.EXCHANGERS.items():
        generation = app.session_state["generation"]
        app.selectbox(key=f"exchanger.kind@typed#{generation}").set_value(kind).run()
        assert "went wrong" not in words(app)
        labels = {box.label for box in [*app.text_input, *app.selectbox]}
        idle = model.idle({}) | {"orientation"}  # no steam condenses here
        assert {declared.name for name, declared in model.declared().items() if name not in idle} <= labels


def test_a_field_that_decides_nothing_is_not_asked_for_until_it_does() -> None:
    shell = {"type": "shell-and-tube", "tema": "BEM"}
    app = page("case", kept({**OIL_COOLER, "exchanger": shell}))
    asked = {"exchanger.u_bend_length", "exchanger.shell_inlets"}
    assert not asked & {box.key.partition("@")[0] for box in app.text_input}
    app.text_input(key="exchanger.tema@typed#0").set_value("BJU").run()
    assert asked <= {box.key.partition("@")[0] for box in app.text_input}


def test_a_choice_that_is_needed_is_not_made_for_the_user() -> None:
    app = page("case", kept({**OIL_COOLER, "exchanger": {"type": "shell-and-tube"}}))
    assert app.selectbox(key="exchanger.layout_angle@typed#0").value is None
    app.selectbox(key="exchanger.layout_angle@typed#0").set_value("90 deg").run()
    assert draft_of(app)["case"]["exchanger"]["layout_angle"] == "90 deg"


def test_what_one_kind_of_fluid_had_comes_back_with_it() -> None:
    app = page("case", kept())
    app.selectbox(key="outside.fluid.kind@typed#0").set_value("constant").run()
    app.text_input(key="outside.fluid.constant.rho@typed#1").set_value("850 kg/m3").run()
    app.selectbox(key="outside.fluid.kind@typed#1").set_value("table").run()
    assert draft_of(app)["case"]["outside"]["fluid"] == OIL_COOLER["outside"]["fluid"]
    app.selectbox(key="outside.fluid.kind@typed#2").set_value("constant").run()
    assert draft_of(app)["case"]["outside"]["fluid"]["constant"] == {"rho": "850 kg/m3"}


def test_rows_are_added_removed_and_brought_back() -> None:
    app = page("case", kept())
    app.button(key="outside.fluid.table.add@typed#0").click().run()
    assert len(draft_of(app)["case"]["outside"]["fluid"]["table"]) == 4
    app.button(key="outside.fluid.table[3].remove@typed#0").click().run()
    assert draft_of(app)["case"] == OIL_COOLER
    next(b for b in app.button if b.label == "One step back").click().run()
    assert len(draft_of(app)["case"]["outside"]["fluid"]["table"]) == 4


@pytest.mark.parametrize(
    "text",
    [
        "T [degC]\trho [kg/m3]\tcp [kJ/kgK]\tk [W/mK]\tmu [cP]\n40\t862\t1.95\t0.131\t39.6",
        "Temperature (degC); Density (kg/m3); Specific heat (kJ/kgK); Thermal conductivity (W/mK); "
        "Dynamic viscosity (cP)\n40; 862; 1.95; 0.131; 39.6",
        "40 degC; 862 kg/m3; 1.95 kJ/kgK; 0.131 W/mK; 39.6 cP",
        "| 40 degC | 862 kg/m3 | 1.95 kJ/kgK | 0.131 W/mK | 39.6 cP |",
        "mu [cP], k [W/mK], cp [kJ/kgK], rho [kg/m3], T [degC]\n39.6, 0.131, 1.95, 862, 40",
        "40 degC   862 kg/m3   1.95 kJ/kgK   0.131 W/mK   39.6 cP",
    ],
)
def test_a_table_is_pasted_from_sheets_of_many_kinds(text: str) -> None:
    row = {"T": "40 degC", "rho": "862 kg/m3", "cp": "1.95 kJ/kgK", "k": "0.131 W/mK", "mu": "39.6 cP"}
    assert pasted(text, TableRow) == [row]


def test_pasted_figures_without_a_unit_are_kept_for_the_engine_to_refuse() -> None:
    assert pasted("40 862 1.95", TableRow) == [{"T": "40", "rho": "862", "cp": "1.95"}]


# --- units ------------------------------------------------------------------------------------------------------------


def test_switching_units_leaves_the_case_and_its_hash_alone_and_changes_what_is_shown() -> None:
    app = page("case", kept())
    before = engine.parse_case(draft_of(app)["case"]).input_hash
    for choice in ("us", "metric", "si", "typed", "us"):
        units = next(box for box in app.selectbox if box.label == "Show figures in")
        units.set_value(choice).run()
        assert draft_of(app)["case"] == OIL_COOLER
    assert engine.parse_case(draft_of(app)["case"]).input_hash == before
    assert app.text_input(key="inside.T_in@us#0").value == "80.6 °F"
    assert app.text_input(key="outside.flow@us#0").value.endswith("lb/h ± 3 %")
    assert "Duty, Btu/h" in [m.label for m in page("rating", token_of(app)).metric]


def test_a_figure_typed_in_another_view_is_kept_as_typed_and_shown_in_the_view() -> None:
    app = page("case", kept(units="us"))
    app.text_input(key="inside.flow@us#0").set_value("14 m3/h").run()
    assert draft_of(app)["case"]["inside"]["flow"] == "14 m3/h"
    assert app.text_input(key="inside.flow@us#0").value.endswith("gpm")


def test_results_follow_the_system_that_most_typed_figures_are_in() -> None:
    assert display_of("typed", [("80 degF", ("temperature",)), ("5 psi", ("pressure_difference",))]).system == "us"
    assert display_of("typed", [("5 kPa", ("pressure_difference",)), ("bad", ("length",))]).system == "si"
    assert display_of("metric", []).system == "metric"


def test_a_typed_figure_in_another_system_reads_back_as_the_same_value() -> None:
    for system in engine.SYSTEMS:
        shown = Display(system, system).typed("123.45 gpm", ("volume_flow",))
        assert engine.parse(shown, "volume_flow").value == pytest.approx(
            engine.parse("123.45 gpm", "volume_flow").value, rel=1e-5
        )


# --- results ----------------------------------------------------------------------------------------------------------


def test_the_rating_page_shows_the_engines_figures() -> None:
    app = page("rating", kept())
    case = engine.parse_case(OIL_COOLER)
    fouled = engine.rate(case).fouled
    assert metric(app, "Duty") == f"{fouled.duty / 1e3:.3g}"
    assert float(metric(app, "Annulus outlet")) == pytest.approx(fouled.T_out["outside"] - 273.15, abs=0.06)
    assert "E-1402" in words(app)
    assert not app.exception


def test_a_rating_that_is_not_of_the_present_case_says_so_and_why() -> None:
    app = page("case", kept())
    app.text_input(key=FLOW).set_value("twelve").run()
    rating = page("rating", token_of(app))
    assert "Not the present case" in rating.warning[0].value
    assert "Inner pipe, flow" in words(rating)
    assert metric(rating, "Duty") == metric(page("rating", kept()), "Duty")
    assert not [box for box in rating.text_input if box.key and box.key.startswith("try ")]
    app.text_input(key=FLOW).set_value("13 m3/h").run()
    assert not page("rating", token_of(app)).warning


@pytest.mark.parametrize("path", sorted((ROOT / "sample_cases").glob("*.json")), ids=lambda path: path.stem)
def test_every_sample_case_is_complete_and_shown_on_every_page(path: Path) -> None:
    token = kept(engine.read_raw(path))
    for name in ("case", "rating", "report"):
        app = page(name, token)
        assert not app.exception
        assert "went wrong" not in words(app)
        assert not app.warning
    assert "✓ Complete" in words(page("case", token))


def test_steam_asks_for_no_temperatures_and_its_pressure_can_be_tried() -> None:
    raw = {**OIL_COOLER, "outside": {"fluid": {"steam": {"p": "3 barg"}}}}
    app = page("case", kept(raw))
    assert "✓ Complete" in words(app)
    assert "outside.T_in@typed#0" not in [box.key for box in app.text_input]
    rating = page("rating", token_of(app))
    before = metric(rating, "Duty")
    rating.text_input(key="try outside.fluid.steam.p@typed#0").set_value("5 barg").run()
    assert "went wrong" not in words(rating)
    next(b for b in rating.button if b.label == "Adopt this in the case").click().run()
    assert draft_of(rating)["case"]["outside"]["fluid"]["steam"]["p"] == "5 barg"
    assert float(metric(rating, "Duty")) > float(before)


def test_a_file_that_is_no_case_is_refused_and_the_case_stays() -> None:
    app = page("case", kept())
    for data, said in (
        (b"not json", "is not JSON"),
        (b'{"format": "other"}', "is not a case"),
        (b'{"format": "countercheck-case", "version": 99}', "newer"),
        (b"\xff\xfe", "is not text"),
    ):
        app.file_uploader[0].set_value(("a*b.json", data, "application/json")).run()
        assert said in "".join(e.value for e in app.info)
        assert draft_of(app)["case"] == OIL_COOLER


def test_a_file_opens_as_it_was_saved() -> None:
    app = page("case")
    data = engine.dump_case(engine.parse_case(OIL_COOLER)).encode()
    app.file_uploader[0].set_value(("e-1402.json", data, "application/json")).run()
    assert draft_of(app)["case"] == OIL_COOLER
    assert app.text_input(key="inside.flow@typed#1").value == "12 m3/h"


def test_without_any_complete_case_no_result_is_shown() -> None:
    app = page("rating")
    assert not app.metric
    assert "nothing to rate yet" in words(app)
    assert "Annulus, flow is missing" in words(app)


def test_plugged_tubes_are_tried_as_a_whole_number() -> None:
    raw = json.loads((ROOT / "sample_cases" / "two-shells-crossing.json").read_text(encoding="utf-8"))
    app = page("rating", kept(raw))
    plugged = "try exchanger.tubes_plugged@typed#0"
    app.text_input(key=plugged).set_value("5").run()
    tried = engine.rate(engine.parse_case(fields.put(raw, ("exchanger", "tubes_plugged"), 5))).fouled.duty
    assert Display("us", "us").show(tried, "heat_flow") in words(app)
    app.text_input(key=plugged).set_value("5.5").run()
    assert "is not a whole number" in words(app)


def test_what_if_leaves_the_case_alone_until_it_is_adopted() -> None:
    app = page("rating", kept())
    app.text_input(key="try outside.flow@typed#0").set_value("7 t/h").run()
    assert draft_of(app)["case"] == OIL_COOLER
    assert app.slider(key="drag outside.flow@typed#0").value == pytest.approx(7.0)
    tried = engine.rate(engine.parse_case(fields.put(OIL_COOLER, ("outside", "flow"), "7 t/h"))).fouled.duty
    assert f"{tried / 1e3:.4g} kW" in words(app)
    next(b for b in app.button if b.label == "Adopt this in the case").click().run()
    assert draft_of(app)["case"]["outside"]["flow"] == "7 t/h ± 3 %"
    assert metric(app, "Duty") == f"{tried / 1e3:.3g}"
    next(b for b in app.button if b.label == "One step back").click().run()
    assert draft_of(app)["case"] == OIL_COOLER


def test_a_dragged_figure_is_written_in_its_box_with_its_unit() -> None:
    app = page("rating", kept())
    app.slider(key="drag inside.T_in@typed#0").set_value(32.1).run()
    assert app.text_input(key="try inside.T_in@typed#0").value == "32.1 °C"
    assert draft_of(app)["whatif"] == {"inside.T_in": "32.1 °C"}


def test_a_what_if_that_cannot_be_read_is_answered_with_a_sentence() -> None:
    app = page("rating", kept())
    app.text_input(key="try inside.T_in@typed#0").set_value("thirty").run()
    assert "Inner pipe, inlet temperature" in words(app)
    assert next(b for b in app.button if b.label == "Adopt this in the case").disabled
    assert not app.exception


def test_the_report_page_offers_both_files_and_previews_every_section() -> None:
    app = page("report", kept())
    assert {b.label for b in app.get("download_button")} >= {"Report (PDF)", "Case (file)"}
    case = engine.parse_case(OIL_COOLER)
    rating = engine.rate(case)
    intervals = engine.propagate(case, rating)
    written = engine.sections(
        rating, intervals, engine.judge(rating, intervals, system="si"), "si", engine.studied(case)
    )
    assert [h.value for h in app.subheader] == [plain(section.title) for section in written]


# --- drafts -----------------------------------------------------------------------------------------------------------


def test_a_refresh_or_a_restart_finds_the_draft_again() -> None:
    app = page("case", kept())
    app.text_input(key="tag@typed#0").set_value("E-77").run()
    app.text_input(key=FLOW).set_value("nonsense").run()
    again = page("case", token_of(app))
    assert again.text_input(key="tag@typed#0").value == "E-77"
    assert again.text_input(key=FLOW).value == "nonsense"


def test_two_windows_never_see_each_others_case() -> None:
    one, two = page("case"), page("case")
    assert token_of(one) != token_of(two)
    one.text_input(key="tag@typed#0").set_value("SECRET-1").run()
    two.text_input(key="tag@typed#0").set_value("OTHER-2").run()
    assert "SECRET-1" not in words(two)
    assert draft_of(one)["case"]["tag"] == "SECRET-1"
    assert draft_of(two)["case"]["tag"] == "OTHER-2"


def test_a_token_that_is_not_known_is_not_taken_over() -> None:
    app = page("case", "A" * 32)
    assert token_of(app) != "A" * 32
    assert "not kept here" in words(app)


def test_one_draft_changed_in_two_windows_becomes_two_and_loses_nothing() -> None:
    token = kept()
    one, two = page("case", token), page("case", token)
    one.text_input(key="tag@typed#0").set_value("ONE").run()
    two.text_input(key="tag@typed#0").set_value("TWO").run()
    assert token_of(one) == token != token_of(two)
    assert draft_of(one)["case"]["tag"] == "ONE"
    assert draft_of(two)["case"]["tag"] == "TWO"
    assert "another window" in words(two)


def test_looking_writes_nothing(tmp_path: Path) -> None:
    page("case")
    assert not (tmp_path / "drafts.sqlite3").exists()


def test_the_drafts_file_holds_no_token_and_is_its_owners_alone(tmp_path: Path) -> None:
    token = kept()
    path = tmp_path / "drafts.sqlite3"
    assert path.stat().st_mode & 0o077 == 0
    with sqlite3.connect(path) as file:
        rows = file.execute("SELECT * FROM draft").fetchall()
    assert len(rows) == 1
    assert token not in json.dumps(rows)


def test_a_draft_is_kept_for_thirty_days(monkeypatch: pytest.MonkeyPatch) -> None:
    token, now = kept(), time.time()
    monkeypatch.setattr(time, "time", lambda: now + 29 * 86400)
    assert drafts.read(token) is not None
    monkeypatch.setattr(time, "time", lambda: now + 31 * 86400)
    assert drafts.read(token) is None
    kept()
    monkeypatch.setattr(time, "time", lambda: now)
    assert drafts.read(token) is None


@pytest.mark.parametrize("token", ["", "short", "x" * 65, "../../etc/passwd" * 3, "' OR 1=1 --" * 4])
def test_an_address_that_is_no_token_finds_nothing(token: str) -> None:
    kept()
    assert drafts.read(token) is None


def test_a_folder_that_cannot_be_written_is_said_in_one_sentence(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "file").write_text("")
    monkeypatch.setenv("COUNTERCHECK_DATA", str(tmp_path / "file" / "below"))
    app = page("case")
    app.text_input(key="tag@typed#0").set_value("E-1").run()
    assert "cannot be kept" in app.warning[0].value
    assert app.text_input(key="tag@typed#0").value == "E-1"


def test_a_fault_of_ours_is_one_sentence_and_loses_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    from app import page_rating

    def fails(*_: Any) -> None:
        raise ZeroDivisionError("secret detail")

    monkeypatch.setattr(page_rating, "key_figures", fails)
    app = page("rating", kept())
    assert "went wrong" in app.error[0].value
    assert "secret detail" not in words(app)
    assert not app.exception


# --- paths ------------------------------------------------------------------------------------------------------------


def test_a_place_is_called_as_the_form_calls_it() -> None:
    def said(place: str) -> str:
        return fields.words(engine.Case, OIL_COOLER, fields.steps(place))

    assert said("inside.T_in") == "Inner pipe, inlet temperature"
    assert said("outside.fluid.table[1].mu") == "Annulus, fluid, row 2, dynamic viscosity"
    assert said("exchanger.inner_pipe.od") == "Exchanger, inner pipe, outside diameter"
    assert said("tag") == "Tag"
    assert said("insid") == "“insid”"


def test_a_sentence_calls_keys_as_the_form_calls_them() -> None:
    at = fields.model_at(engine.Case, OIL_COOLER, ("exchanger", "inner_pipe"))
    said = fields.in_form_words('needs either "nps" and "schedule", or "od" and "id"', at)
    assert said == "needs either “Nominal size” and “Schedule”, or “Outside diameter” and “Inside diameter”"


def test_changing_a_path_leaves_the_original_alone() -> None:
    before = copy.deepcopy(OIL_COOLER)
    fields.put(OIL_COOLER, ("outside", "fluid", "table", 0, "T"), "21 degC")
    fields.put(OIL_COOLER, ("exchanger", "fins", "count"), 3)
    assert before == OIL_COOLER


def test_a_case_of_wrong_shape_is_drawn_and_can_be_put_right() -> None:
    raw = {**OIL_COOLER, "inside": "Water", "exchanger": {"type": "double-pipe", "inner_pipe": 3}}
    app = page("case", kept(raw))
    assert "is not a group of keys" in words(app)
    app.text_input(key=FLOW).set_value("12 m3/h").run()
    assert draft_of(app)["case"]["inside"] == {"flow": "12 m3/h"}
