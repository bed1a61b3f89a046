"""The case file: what is refused and in which words, what is kept, and what the hash and the schema say of it."""

from __future__ import annotations

import copy
import json
import re
from pathlib import Path

import jsonschema
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from engine import units
from engine.casefile import LARGEST, dump_case, load_case, parse_case, raw_case, raw_of, save_case, schema
from engine.stated import CaseError
from tests.cases import CONSTANT_COLD, OIL_COOLER, OIL_TABLE, changed, oil_cooler

GLYCOL = {"solution": "ethylene glycol", "mass_fraction": "35 %"}
FINS = {"count": 12, "height": "6 mm", "thickness": "0.9 mm", "conductivity": "50 W/mK"}
FINNED = changed(
    OIL_COOLER,
    atmosphere="98 kPa a",
    limits={"inside_design_pressure": "10 barg", "inside_wall_T_max": "80 degC"},
    operating=[{"name": "summer", "inside_T_in": "30 degC"}],
    inside__fluid=GLYCOL,
    exchanger__inner_pipe={"od": "42.2 mm", "id": "35 mm"},
    exchanger__fins=FINS,
    exchanger__banks_in_parallel={"inside": 2, "outside": 2},
    exchanger__film_factor={"inside": 1.1},
)
STEAM = changed(
    OIL_COOLER, inside__fluid=CONSTANT_COLD, outside={"fluid": {"steam": {"p": "3 barg", "superheat": "5 K"}}}
)
SHELL = changed(
    OIL_COOLER,
    exchanger={
        "type": "shell-and-tube",
        "tema": "AES",
        "shell_id": "438 mm",
        "tube_od": "19.05 mm",
        "tube_wall": "2.11 mm",
        "tube_length": "4.88 m",
        "tube_pitch": "25.4 mm",
        "layout_angle": "90 deg",
        "tubes": 158,
        "tube_passes": 4,
        "baffle_cut": "25 %",
        "baffle_spacing": "127 mm",
        "material": "carbon steel",
    },
)
VALID = {"oil cooler": OIL_COOLER, "finned banks": FINNED, "steam": STEAM, "shell": SHELL}

JARGON = re.compile(r"validation|nput should|type=|\bunion\b|pydantic|\b(None|True|False|dict|str|tuple)\b|object has")


def refusal(make, *arguments) -> list[str]:
    """The sentences with which something is refused, each checked to be one for a user."""
    with pytest.raises(CaseError) as caught:
        make(*arguments)
    assert caught.value.problems
    for problem in caught.value.problems:
        assert problem.says
        assert "\n" not in str(problem)
        assert not JARGON.search(problem.says)
    return [str(problem) for problem in caught.value.problems]


def refused(raw) -> list[str]:
    return refusal(parse_case, raw)


def with_row(**row: str) -> dict:
    """An oil whose middle row is changed."""
    rows = copy.deepcopy(OIL_TABLE)
    rows[1].update(row)
    return {"name": "oil", "table": rows}


@pytest.mark.parametrize("raw", VALID.values(), ids=VALID)
def test_the_cases_that_the_refusals_start_from_are_sound(raw):
    assert parse_case(raw).tag == "E-1402"


# Path, what is put there, and what the sentence must say; each is refused for that one reason.
ONE_REASON = [
    # figures and their units
    ("inside.flow", 12, 'inside.flow: 12 gives no unit; write it as text, for example "42 m3/h"'),
    ("inside.flow", "12", 'inside.flow: "12" gives no unit; write for example "12 kg/h"'),
    ("inside.flow", "12 m", 'inside.flow: "12 m" is a length; allowed is a mass flow in kg/h'),
    ("inside.flow", "12 furlongs", "has a unit that is not known here; allowed is a mass flow"),
    ("inside.p_in", "4 bar", '"4 bar" does not say whether it is absolute or gauge; write "4 barg" or "4 bara"'),
    ("inside.flow", float("nan"), "NaN gives no unit"),
    ("inside.flow", "nan kg/s", '"nan kg/s" is not a finite number'),
    ("inside.flow", "Infinity kg/s", "is not a finite number"),
    ("inside.flow", "1e999 kg/s", '"1e999 kg/s" is out of the range of numbers'),
    ("inside.flow", "1" * 5000 + " kg/s", "has 5005 characters; write a number and a unit"),
    ("inside.flow", "1" * 60 + " kg/s", "has a number of 60 characters; write at most 40"),
    ("inside.flow", "0 kg/s", '"0 kg/s" is out of bounds; allowed is above 0 kg/h'),
    ("inside.flow", "-1 kg/s", '"-1 kg/s" is out of bounds; allowed is above 0 kg/h'),
    ("inside.flow", None, "inside.flow: is missing"),
    ("inside.flow", True, "true is not a figure"),
    ("inside.flow", ["1 kg/s"], '["1 kg/s"] is not a figure'),
    ("inside.T_in", "-300 degC", '"-300 degC" is below absolute zero'),
    ("inside.T_in", "0 K", "is out of bounds; allowed is from -223.15 °C to 1227 °C"),
    ("inside.p_in", "0 bara", '"0 bara" is no pressure; allowed is above a perfect vacuum'),
    ("inside.p_in", "-2 barg", "is out of bounds; allowed is from -1.013 barg"),
    ("inside.R_fouling", "-0.0001 m2K/W", "is out of bounds; allowed is from 0 m²K/W to 0.1000 m²K/W"),
    ("inside.R_fouling", "0 m2K/W ± 0.0001 m2K/W", "lays a ± about no fouling; allowed is a resistance above zero"),
    ("atmosphere", "0 barg", "is a gauge pressure; allowed is an absolute pressure"),
    # counts
    ("exchanger.legs_in_series", 8.0, "8.0 is not a whole number without a point; write 8"),
    ("exchanger.legs_in_series", 8.5, "8.5 is not a whole number; allowed is 1 to 200"),
    ("exchanger.legs_in_series", -1, "-1 is out of bounds; allowed is 1 to 200"),
    ("exchanger.legs_in_series", 0, "0 is out of bounds; allowed is 1 to 200"),
    ("exchanger.legs_in_series", 10**6, "1000000 is out of bounds; allowed is 1 to 200"),
    ("exchanger.legs_in_series", True, "true is not a whole number; allowed is 1 to 200"),
    ("exchanger.legs_in_series", "8", '"8" is not a whole number; allowed is 1 to 200'),
    ("exchanger.legs_in_series", None, "null is not a whole number; allowed is 1 to 200"),
    ("exchanger.banks_in_parallel", {"inside": 3, "outside": 2}, "2 beside 3 inside"),
    ("exchanger.inner_pipes", 7, "7 is not rated yet: only one inner pipe"),
    # words
    ("tag", 1402, 'tag: 1402 is not text; write "1402"'),
    ("tag", "x" * 61, "tag: is 61 characters long; allowed is up to 60"),
    ("tag", "E\x00", "tag: holds control characters; allowed is plain text"),
    ("tag", "\ud800", "tag: holds half of a surrogate pair; allowed is plain text"),
    (
        "exchanger.arrangement",
        "countercurrent",
        'is not offered; allowed is counter, co-current; did you mean "counter"?',
    ),
    # keys
    ("colour", "red", "colour: is not a known key; known here: atmosphere, exchanger, format, inside"),
    ("services", "x", 'services: is not a known key; did you mean "service"?'),
    ("inside.T_inlet", "27 degC", 'inside.T_inlet: is not a known key; did you mean "T_in"?'),
    ("inside.steam", {"p": "1 barg"}, "inside.steam: is not a known key"),
    ("limits.inside_design_presure", "9 barg", 'did you mean "inside_design_pressure"?'),
    ("exchanger.leg_lenght", "6 m", 'exchanger.leg_lenght: is not a known key; did you mean "leg_length"?'),
    ("exchanger.shell_id", "0.4 m", 'shell_id: goes with "shell-and-tube", not with "double-pipe"; known here: arrang'),
    ("exchanger.inner_pipe.shedule", "40", 'exchanger.inner_pipe.shedule: is not a known key; did you mean "schedule"'),
    ("exchanger.banks_in_parallel", {"insid": 2}, 'banks_in_parallel.insid: is not a known key; did you mean "inside"'),
    ("exchanger.fins", {**FINS, "heigth": "1 mm"}, 'exchanger.fins.heigth: is not a known key; did you mean "height"?'),
    ("inside.fluid", {"name": "Water", "tabel": []}, 'inside.fluid.tabel: is not a known key; did you mean "table"?'),
    ("inside.fluid", {"name": "Water", "mass_fraction": "35 %"}, 'fluid.mass_fraction: goes with "solution", not with'),
    ("inside.fluid", {**GLYCOL, "fraction": "1 %"}, 'fluid.fraction: is not a known key; did you mean "mass_fraction"'),
    ("outside.fluid", with_row(visc="1 cP"), "outside.fluid.table[1].visc: is not a known key; known here: T, cp, k"),
    # parts
    ("inside", [], "inside: [] is not a group of keys in braces"),
    ("exchanger", "x", 'exchanger: "x" is not a group of keys in braces; its "type" says which exchanger it is'),
    ("exchanger.type", "double pipe", 'exchanger.type: "double pipe" is not offered; allowed is "double-pipe" or'),
    ("exchanger.inner_pipe", "2 in", 'exchanger.inner_pipe: "2 in" is not a group of keys in braces'),
    ("inside.fluid", 3, "inside.fluid: 3 is not a fluid; allowed is a name such as"),
    ("inside.fluid", {}, "inside.fluid: {} is not a fluid; allowed is a name such as"),
    ("outside.fluid", {"name": "x", "table": {"T": "1"}}, 'fluid.table: {"T": "1"} is not a list in brackets'),
    # pipes
    ("exchanger.inner_pipe", {"nps": "3", "schedule": "40"}, "88.9 mm outside does not fit into the outer pipe's bore"),
    ("exchanger.inner_pipe", {"nps": "2.2", "schedule": "40"}, "there is no pipe of NPS '2.2' in the table; offered"),
    ("exchanger.inner_pipe", {"nps": "2", "schedule": "47"}, "NPS 2 has no schedule '47' in the table; offered are 5S"),
    ("exchanger.inner_pipe", {"nps": "1/0", "schedule": "40"}, "there is no pipe of NPS '1/0'"),
    ("exchanger.inner_pipe", {"nps": "2"}, "is missing"),
    ("exchanger.inner_pipe", {}, 'needs either "nps" and "schedule", or "od" and "id"'),
    ("exchanger.inner_pipe.od", "60 mm", "gives both a nominal size and diameters; allowed is one of the two"),
    ("exchanger.inner_pipe", {"od": "50 mm", "id": "60 mm"}, "60 mm is not smaller than the outside diameter, 50 mm"),
    ("exchanger.fins", {**FINS, "height": "12 mm"}, "fins of 12 mm on 60.3 mm do not fit into the bore of 77.92 mm"),
    ("exchanger.fins", {**FINS, "count": 200}, "200 fins of 0.9 mm leave no bare wall between them; allowed is up to"),
    ("exchanger.inside_roughness", "4 mm", "4 mm is over 5 % of the passage of 52.48 mm; allowed is up to that"),
    ("exchanger.material", "carbon steel", 'one of "material" and "wall_conductivity" must be stated'),
    # fluids
    ("inside.fluid", "Watr", "no fluid is called 'Watr': the nearest name is water"),
    ("inside.fluid", "Acetone", "has no viscosity and conductivity for acetone: type a property table for it"),
    ("inside.fluid", {**GLYCOL, "mass_fraction": "80 %"}, "a mass fraction of 0.8 is outside the 0 to 0.6"),
    ("inside.fluid", {**GLYCOL, "mass_fraction": "35"}, '"35" gives no unit and is above 1; write for example "35 %"'),
    ("inside.T_in", "-5 degC", "inside.T_in: at the inlet: water at -5 °C freezes (0 °C)"),
    ("outside.fluid", {"name": "oil", "table": OIL_TABLE[:1]}, "holds too few entries, 1; allowed is 2 or more"),
    ("outside.fluid", with_row(T="20 degC"), "fluid.table: gives the same temperature twice; each row needs"),
    ("outside.fluid", with_row(rho="0 kg/m3"), 'fluid.table[1].rho: "0 kg/m3" is out of bounds; allowed is above 0'),
    ("outside.fluid", with_row(mu="-1 cP"), 'fluid.table[1].mu: "-1 cP" is out of bounds; allowed is above 0'),
    ("outside.fluid", with_row(cp="1e9 J/kgK"), 'fluid.table[1].cp: "1e9 J/kgK" is out of bounds; allowed is above'),
    ("outside.fluid", with_row(k="nan W/mK"), 'fluid.table[1].k: "nan W/mK" is not a finite number'),
    ("outside.fluid", with_row(T="-300 degC"), 'fluid.table[1].T: "-300 degC" is below absolute zero'),
    # temperatures against each other
    ("outside.T_out", "20 degC", "second law; allowed is between the two inlets, 27 °C (inside) and 68 °C (outside)"),
    ("outside.T_out", "75 degC", '"75 degC" is against the second law; allowed is between the two inlets'),
    ("outside.T_out", "68 degC", '"68 degC" is against the second law; allowed is between the two inlets'),
    # format and version
    ("format", "other", 'format: "other" is not a case; allowed is "countercheck-case"'),
    ("format", ["countercheck-case"], 'format: ["countercheck-case"] is not a case'),
    ("version", 0, "version: 0 is not a version; allowed is 1"),
    ("version", "1", 'version: "1" is not a version; allowed is 1'),
    ("version", True, "version: true is not a version; allowed is 1"),
    ("version", 1.0, "version: 1.0 is not a version; allowed is 1"),
    ("version", 2, "version: 2 is newer than this program knows; allowed is up to 1"),
]


def put(raw, path: str, value):
    raw = copy.deepcopy(raw)
    *way, last = path.split(".")
    at = raw
    for step in way:
        at = at.setdefault(step, {})
    at[last] = value
    return raw


@pytest.mark.parametrize(("path", "value", "says"), ONE_REASON)
def test_a_wrong_input_is_refused_in_one_sentence(path, value, says):
    sentences = refused(put(OIL_COOLER, path, value))
    assert len(sentences) == 1
    assert says in sentences[0]
    assert sentences[0].startswith(f"{path.partition('.')[0]}")


@pytest.mark.parametrize(
    ("fluid", "says"),
    [
        ("tolune", "inside.fluid: no fluid is called 'tolune': the nearest name is toluene"),
        ({"solution": "ethylen glykol"}, "inside.fluid.solution: no solution is called 'ethylen glykol'"),
        ("", "inside.fluid: is missing"),
    ],
)
def test_a_fluid_that_is_not_known_is_refused_before_anything_else_is_stated(fluid, says):
    sentences = refused(changed(OIL_COOLER, inside={"fluid": fluid}, outside={}, exchanger={"type": "double-pipe"}))
    assert [sentence for sentence in sentences if sentence.startswith(says)]


@pytest.mark.parametrize(
    "path",
    [
        *("format", "version", "inside", "outside", "exchanger"),
        *("inside.fluid", "inside.flow", "inside.T_in", "outside.p_in"),
        *("exchanger.type", "exchanger.inner_pipe", "exchanger.leg_length", "exchanger.legs_in_series"),
    ],
)
def test_a_missing_key_is_named(path):
    (sentence,) = refused(changed(OIL_COOLER, **{path.replace(".", "__"): None}))
    assert sentence.startswith(f"{path}: is missing")


def test_what_is_missing_is_listed_at_once():
    sentences = refused(changed(OIL_COOLER, inside={}, outside={}, exchanger={"type": "double-pipe"}))
    keys = [f"{side}.{key}" for side in ("inside", "outside") for key in ("fluid", "flow", "T_in", "p_in")]
    keys += [f"exchanger.{key}" for key in ("inner_pipe", "outer_pipe", "leg_length", "legs_in_series")]
    assert {f"{key}: is missing" for key in keys} <= set(sentences)


def test_liquid_water_above_its_boiling_point_is_refused_and_its_vapour_is_not():
    hot = {"inside__T_in": "120 degC", "inside__p_in": "1 bara", "outside__T_out": None}
    (sentence,) = refused(changed(OIL_COOLER, **hot))
    assert sentence.startswith('inside.T_in: "120 degC" is above the boiling point of water, 99.61 °C at 1 bar abs')
    vapour = oil_cooler(**hot, inside__fluid="steam", inside__flow="0.1 kg/s")
    assert vapour.fluid("inside").phase == "gas"


def test_a_solution_below_its_freezing_point_is_refused():
    (sentence,) = refused(changed(OIL_COOLER, inside__fluid=GLYCOL, inside__T_in="-40 degC"))
    assert sentence.startswith("inside.T_in: at the inlet: ethylene glycol 35 % in water at -40 °C freezes")


def test_equal_inlets_leave_nothing_to_exchange():
    (sentence,) = refused(changed(OIL_COOLER, outside__T_in="300.15 K", outside__T_out=None))
    assert sentence.startswith("outside.T_in: both inlets are at 27 °C, so no heat flows")


def test_steam_states_no_temperature_of_its_own():
    sentences = refused(changed(STEAM, outside__T_in="140 degC", outside__p_in="3 barg"))
    assert [sentence.partition(":")[0] for sentence in sentences] == ["outside.T_in", "outside.p_in"]
    assert refused(changed(STEAM, outside__fluid={"steam": {"p": "3 barg", "superhet": "0 K"}})) == [
        'outside.fluid.steam.superhet: is not a known key; did you mean "superheat"?'
    ]


def test_problems_of_every_kind_are_listed_together():
    sentences = refused(
        changed(
            OIL_COOLER,
            inside__flwo="1 kg/s",
            inside__flow="12 m",
            inside__fluid={"name": "Water", "mass_fraction": "1 %"},
            outside__T_in="27 degC",
            outside__T_out="27",
            exchanger__inner_pipe={"nps": "3", "schedule": "40"},
            exchanger__leg_length="6 kg",
            exchanger__banks_in_parallel={"inside": 3, "outside": 2},
            exchanger__wall_conductivity=None,
        )
    )
    assert sorted(sentence.partition(":")[0] for sentence in sentences) == [
        "exchanger.banks_in_parallel.outside",
        "exchanger.inner_pipe",
        "exchanger.leg_length",
        "exchanger.material",
        "inside.flow",
        "inside.fluid.mass_fraction",
        "inside.flwo",
        "outside.T_in",
        "outside.T_out",
    ]


def test_what_cannot_be_read_is_not_blamed_for_more():
    """A wrong unit leaves no wrong consequence beside it, such as a missing wall or a boiling stand-in fluid."""
    assert len(refused(changed(OIL_COOLER, exchanger__wall_conductivity="50 W/m2K"))) == 1
    assert len(refused(changed(OIL_COOLER, exchanger__outside_roughness="2 bar"))) == 1
    assert len(refused(changed(OIL_COOLER, inside__T_in="300 degC", inside__fluid={}, outside__T_out=None))) == 1
    assert len(refused(changed(STEAM, outside__fluid={"steam": {"p": "3 bar"}}))) == 1
    assert len(refused(changed(OIL_COOLER, outside__fluid=with_row(mu="1 kg")))) == 1


def test_a_group_of_keys_is_what_a_case_is():
    for raw in ([], "x", 3, None):
        assert refused(raw) == ["a case is a group of keys in braces"]
    assert refused({}) == ['format: is missing; allowed is "countercheck-case"', "version: is missing; allowed is 1"]


# Files and texts

GOOD = json.dumps(OIL_COOLER)
LEGS = '"legs_in_series": 8'
TEXTS = [
    (b"", "the file is empty; allowed is a case in JSON"),
    (b" \n\t ", "the file is empty; allowed is a case in JSON"),
    (bytes(range(256)), "the file is not text; allowed is JSON in UTF-8"),
    (GOOD.encode("utf-16"), "the file is not text; allowed is JSON in UTF-8"),
    ("[]", "the file is not a group of keys in braces"),
    ('"case"', "the file is not a group of keys in braces"),
    ("3", "the file is not a group of keys in braces"),
    ("null", "the file is not a group of keys in braces"),
    ("[" * 100_000, "the file nests deeper than the allowed 20 levels"),
    ('{"a":' * 100_000, "the file nests deeper than the allowed 20 levels"),
    ('{"a":' * 30 + "1" + "}" * 30, "the file nests deeper than the allowed 20 levels"),
    (GOOD + "x", "the file is not JSON: extra data in line 1, column"),
    (GOOD[:200], "the file is not JSON: unterminated string in line 1, column"),
    (GOOD[:-1] + ",}", "the file is not JSON: expecting property name enclosed in double quotes in line 1, column"),
    (GOOD.replace(LEGS, '"legs_in_series": NaN'), "exchanger.legs_in_series: NaN is not a figure; allowed is a finite"),
    (GOOD.replace(LEGS, '"legs_in_series": -Infinity'), "exchanger.legs_in_series: -Infinity is not a figure"),
    (GOOD.replace(LEGS, '"legs_in_series": 1e999'), "exchanger.legs_in_series: 1e999 is too large or too long"),
    (
        GOOD.replace(LEGS, '"legs_in_series": ' + "9" * 5000),
        "legs_in_series: is a number of 5000 digits; allowed is up",
    ),
    (GOOD.replace('"tag":', '"tag": "a", "tag":'), "tag: stands twice in the same group; allowed is once"),
    (GOOD.replace('"nps": "2"', '"nps": "2", "nps": "2"'), "exchanger.inner_pipe.nps: stands twice in the same group"),
    (GOOD.replace('"mu": "5.6 cP"', '"mu": "1 cP", "mu": "1 cP"'), "outside.fluid.table[2].mu: stands twice"),
    (GOOD.replace('"tag":', r'"\ud800":'), "?: holds half of a surrogate pair; allowed is plain text"),
]


@pytest.mark.parametrize(("data", "says"), TEXTS, ids=[f"{i}: {says[:60]}" for i, (_, says) in enumerate(TEXTS)])
def test_a_file_that_is_no_case_is_refused_in_one_sentence(tmp_path, data, says):
    path = tmp_path / "case.json"
    path.write_bytes(data if isinstance(data, bytes) else data.encode())
    (sentence,) = refusal(load_case, path)
    assert says in sentence


def test_what_json_cannot_hold_is_listed_beside_what_a_case_cannot(tmp_path):
    path = tmp_path / "case.json"
    text = GOOD.replace('"tag":', '"tag": "a", "tag":').replace('"12 m3/h"', '"12 m"').replace(LEGS, LEGS + ".0")
    path.write_text(text)
    places = [sentence.partition(":")[0] for sentence in refusal(load_case, path)]
    assert places == ["tag", "inside.flow", "exchanger.legs_in_series"]


def test_a_byte_order_mark_brackets_in_text_and_a_deep_text_do_no_harm(tmp_path):
    path = tmp_path / "case.json"
    path.write_bytes(b"\xef\xbb\xbf" + GOOD.encode())
    assert load_case(path).tag == "E-1402"
    assert raw_of("\ufeff" + GOOD) == OIL_COOLER
    assert refusal(raw_of, " " * (LARGEST + 1)) == ["the file is too large; allowed is up to 1 MiB"]
    assert parse_case(raw_of(json.dumps({**OIL_COOLER, "notes": '[{"\\' * 300}))).notes.startswith("[{")


def test_what_is_not_a_readable_file_is_refused(tmp_path, monkeypatch):
    assert "is a folder; allowed is a case file (JSON)" in refusal(load_case, tmp_path)[0]
    assert "cannot be read: no such file or directory" in refusal(load_case, tmp_path / "none.json")[0]
    assert "cannot be read" in refusal(load_case, tmp_path / ("x" * 300))[0]
    assert "is not the name of a file" in refusal(load_case, "a\0b")[0]
    (tmp_path / "big.json").write_bytes(b" " * (LARGEST + 1))
    assert "is too large; allowed is up to 1 MiB" in refusal(load_case, tmp_path / "big.json")[0]

    def locked(*_, **__):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "open", locked)
    assert "cannot be read: permission denied" in refusal(load_case, tmp_path / "big.json")[0]


def test_an_endless_file_is_not_read_to_its_end():
    if not Path("/dev/zero").exists():
        pytest.skip("no such device here")
    assert "is too large" in refusal(load_case, "/dev/zero")[0]


# What is kept


@pytest.mark.parametrize("raw", VALID.values(), ids=VALID)
def test_a_written_case_reads_back_the_same(raw, tmp_path):
    case = parse_case(raw)
    save_case(case, tmp_path / "case.json")
    back = load_case(tmp_path / "case.json")
    assert back == case
    assert back.input_hash == case.input_hash
    assert raw_case(case) == raw_of(dump_case(case)) == raw
    assert dump_case(back) == dump_case(case)


def test_figures_keep_their_typed_text_and_defaults_are_not_written():
    text = dump_case(oil_cooler(inside__flow=" 12.00  m³/hr ± 3 % ", inside__T_in="80.6 °F"))
    assert '"flow": "12.00  m³/hr ± 3 %"' in text
    assert '"T_in": "80.6 °F"' in text
    assert "roughness" not in text
    assert "limits" not in text
    assert "atmosphere" not in text


def test_a_figure_set_by_the_program_is_written_with_its_unit():
    case = oil_cooler()
    moved = case.model_copy(update={"inside": case.inside.model_copy(update={"T_in": 301.25})})
    assert raw_case(moved)["inside"]["T_in"] == "28.1 °C"
    assert float(parse_case(raw_case(moved)).inside.T_in) == 301.25


# The hash

FIGURES = {
    "inside.flow": "volume_flow",
    "outside.flow": "mass_flow",
    "inside.T_in": "temperature",
    "outside.T_out": "temperature",
    "inside.p_in": "pressure_gauge",
    "inside.R_fouling": "fouling_resistance",
    "inside.dp_allowed": "pressure_difference",
    "exchanger.leg_length": "length",
    "exchanger.wall_conductivity": "conductivity",
}


def typed_in(raw, path: str, quantity: str, system: str):
    """The same figure shown in the units of a system, with all its digits."""
    at = raw
    *way, last = path.split(".")
    for step in way:
        at = at[step]
    value = units.parse(at[last].partition("±")[0], quantity).value
    return put(raw, path, units.show(value, quantity, system, digits=17))


@given(st.fixed_dictionaries({path: st.sampled_from(list(units.SYSTEMS)) for path in FIGURES}))
@example(dict.fromkeys(FIGURES, "us"))
def test_the_hash_does_not_see_units(systems):
    raw = changed(OIL_COOLER, outside__flow="6 t/h")
    again = raw
    for path, system in systems.items():
        again = typed_in(again, path, FIGURES[path], system)
    assert parse_case(again).input_hash == parse_case(raw).input_hash


def test_the_hash_sees_no_digit_beyond_the_ninth_and_no_default_that_is_typed_out():
    hash_of = oil_cooler().input_hash
    assert oil_cooler(inside__flow="52.83441047163 gpm").input_hash == hash_of
    assert oil_cooler(exchanger__arrangement="Counter").input_hash == hash_of
    assert oil_cooler(exchanger__inside_roughness="0.045 mm").input_hash == hash_of
    assert oil_cooler(atmosphere="1 atm a").input_hash == hash_of
    assert oil_cooler(limits={}).input_hash == hash_of


DIFFERENT = [
    *(("inside.flow", text) for text in ("12.0001 m3/h", "12 m3/h ± 1 %", "12 t/h")),
    *(("inside.T_in", text) for text in ("27.0001 degC", "27 degC ± 0.1 K")),
    *(("inside.p_in", text) for text in ("4.2001 barg", "5.21325 bara")),
    ("inside.R_fouling", "0.000180001 m2K/W"),
    ("inside.fluid", "Methanol"),
    ("inside.fluid", {"solution": "MEG", "mass_fraction": "10 %"}),
    ("outside.T_out", "60.001 degC"),
    ("outside.dp_allowed", "100 kPa"),
    ("outside.fluid", with_row(mu="39.7 cP")),
    ("exchanger.arrangement", "co-current"),
    ("exchanger.legs_in_series", 10),
    ("exchanger.leg_length", "6.001 m"),
    ("exchanger.inner_pipe", {"nps": "2", "schedule": "80"}),
    ("exchanger.banks_in_parallel", {"inside": 2, "outside": 2}),
    ("exchanger.fins", FINS),
    ("exchanger.heat_loss", "1 kW"),
    ("exchanger.film_factor", {"outside": 1.1}),
    ("exchanger.outside_roughness", "0.046 mm"),
    ("limits", {"inside_velocity_max": "3 m/s"}),
    ("atmosphere", "99 kPa a"),
]


def test_the_hash_sees_every_change():
    hashes = [oil_cooler().input_hash] + [parse_case(put(OIL_COOLER, *change)).input_hash for change in DIFFERENT]
    assert len(set(hashes)) == len(hashes)


# Anything at all

JUNK = st.one_of(
    st.sampled_from(
        [
            *(None, True, 0, -1, 8, 8.0, 8.5, 10**40, float("nan"), float("inf"), 1e300),
            *("", " ", "Water", "steam", "counter", "40", "2", "1/0", "\ud800", "a\x00", "9" * 5000, "±"),
            *("12 m", "1e999 kg/s", "nan kg/s", "0 kg/s", "5 kg/s", "1,5 kg/s", "٣ kg/s", "5 t/h ± 500 %"),
            *("20 degC", "300 K", "1 barg", "0 bara", "40 %", "1/0 in", "½ in"),
            *([], {}, [[]], [1], {"a": 1}, {"a": {"a": {"a": {}}}}, {"\ud800": 1}),
            *(GLYCOL, CONSTANT_COLD, FINS, {"steam": {"p": "1 barg"}}, {"name": "x", "table": []}),
            {"type": "double-pipe"},
        ]
    ),
    st.text(max_size=12),
)
KEYS = st.sampled_from(
    ["x", "", "a.b", "flow", "fluid", "steam", "table", "solution", "type", "fins", "shell_id", "nps"]
)


def places(part, at=()):
    yield at
    items = part.items() if isinstance(part, dict) else enumerate(part) if isinstance(part, list) else ()
    for key, value in items:
        yield from places(value, (*at, key))


@st.composite
def damaged(draw):
    """A sound case with some of its nodes deleted, replaced, renamed or joined by others."""
    raw = {"case": copy.deepcopy(draw(st.sampled_from(list(VALID.values()))))}
    for _ in range(draw(st.integers(1, 5))):
        *way, last = draw(st.sampled_from([place for place in places(raw) if place]))
        at = raw
        for step in way:
            at = at[step]
        deed = draw(st.sampled_from(["delete", "replace", "rename", "add"]))
        if deed == "replace" or len(way) == 0:
            at[last] = copy.deepcopy(draw(JUNK))
        elif deed == "delete":
            del at[last]
        elif deed == "rename" and isinstance(at, dict):
            at[draw(KEYS)] = at.pop(last)
        elif isinstance(at, dict):
            at[draw(KEYS)] = copy.deepcopy(draw(JUNK))
        else:
            at.append(copy.deepcopy(draw(JUNK)))
    return raw["case"]


@settings(max_examples=150)
@given(damaged())
def test_whatever_is_stated_is_a_case_or_is_refused(raw):
    try:
        case = parse_case(raw)
    except CaseError:
        refused(raw)
    else:
        assert parse_case(raw_of(dump_case(case))).input_hash == case.input_hash


# The schema


def test_the_schema_allows_what_the_reader_allows():
    found = schema()
    jsonschema.Draft202012Validator.check_schema(found)
    checker = jsonschema.Draft202012Validator(found)
    for raw in VALID.values():
        checker.validate(raw)
    for fluid in ("Water", {"name": "Water"}, GLYCOL, CONSTANT_COLD, with_row()):
        checker.validate(changed(OIL_COOLER, inside__fluid=fluid))


@pytest.mark.parametrize(
    ("path", "value"),
    [
        *(("colour", "red"), ("inside.flwo", "1"), ("inside.flow", 12), ("exchanger.legs_in_series", 0)),
        *(("exchanger.arrangement", "up"), ("exchanger.type", "plate"), ("inside.fluid", 3), ("version", 2)),
    ],
)
def test_the_schema_refuses_what_it_can_tell(path, value):
    assert not jsonschema.Draft202012Validator(schema()).is_valid(put(OIL_COOLER, path, value))


def test_the_schema_describes_every_key():
    found = schema()
    groups = {"case": found, **found["$defs"]}

    def described(key) -> bool:
        if key.get("description") or "const" in key:
            return True
        if "$ref" in key:
            return bool(found["$defs"][key["$ref"].rpartition("/")[2]].get("description"))
        parts = [part for part in (*key.get("anyOf", ()), *key.get("oneOf", ())) if part != {"type": "null"}]
        parts += [key["items"]] if "items" in key else []
        return bool(parts) and all(described(part) for part in parts)

    silent = [
        f"{group}.{name}" for group, d in groups.items() for name, key in d["properties"].items() if not described(key)
    ]
    assert silent == []
    assert all(d["additionalProperties"] is False for d in groups.values())


def test_the_schema_says_what_stands_in_for_what_is_absent():
    text = json.dumps(schema(), ensure_ascii=False)
    assert "When absent: commercial steel pipe (common practice)." in text
    assert '"default"' not in text
