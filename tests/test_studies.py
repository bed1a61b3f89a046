"""Operating conditions, sweeps and answers agree with the rating of the same condition and with closed forms."""

from __future__ import annotations

import io
import time
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pypdf import PdfReader

from engine import studies
from engine.casefile import dump_case, load_case, parse_case, raw_of
from engine.rating import rate, rate_points
from engine.report import Table, report_pdf, studied
from engine.stated import CaseError
from engine.studies import (
    Conditions,
    Question,
    answer,
    around,
    asked,
    limits_of,
    operating_table,
    questions,
    restated,
    sweep,
    told,
    variables,
)
from engine.uncertainty import NORMAL_95, propagate
from tests.cases import OIL_COOLER, changed, constant, oil_cooler

SAMPLES = Path(__file__).resolve().parent.parent / "sample_cases"
SHELL = {
    "type": "shell-and-tube",
    "tema": "BEM",
    "shell_id": "489 mm",
    "tube_od": "19.05 mm",
    "gauge": "14 BWG",
    "tube_length": "4.88 m",
    "tube_pitch": "25.4 mm",
    "layout_angle": "30 deg",
    "tubes": 220,
    "tube_passes": 2,
    "baffle_cut": "25 %",
    "baffle_spacing": "250 mm",
    "material": "carbon steel",
}


def shell_cooler(**changes):
    streams = {"exchanger": SHELL, "inside__flow": "20 m3/h", "outside__flow": "40 t/h", "outside__T_out": "52 degC"}
    return parse_case(changed(OIL_COOLER, **{**streams, **changes}))


def figures(case):
    """By a rating of its own: what the limits bound, temperatures of surfaces and metal over both states."""
    states = rate(case).states
    found = {}
    for side, at in states["fouled"].sides.items():
        found |= {f"{side}.T_out": at.T_out, f"{side}.dp": at.dp, f"{side}.velocity": at.velocity}
        surface = np.concatenate([state.profile.surface_T[side] for state in states.values()])
        found |= {f"{side}.surface_T_max": surface.max(), f"{side}.surface_T_min": surface.min()}
        found[f"{side}.T_max"] = max(at.T_in, *(state.T_out[side] for state in states.values()))
    metal = [state.profile.wall_T[side].min() for side in ("inside", "outside") for state in states.values()]
    return {**found, "metal_T_min": min(metal)}


def slack_by_rating(case, limit):
    return float(limit.slack(figures(case)[limit.column]))


# --- limits -----------------------------------------------------------------------------------------------------------


def test_limits_are_the_stated_ones_and_scaling_of_heated_water():
    case = oil_cooler(
        limits__outside_velocity_max="2 m/s",
        limits__inside_wall_T_max="55 degC",
        limits__minimum_metal_temperature="0 degC",
    )
    assert [limit.key for limit in limits_of(case)] == [
        "inside.dp_allowed",
        "limits.inside_wall_T_max",
        "inside.scaling",
        "outside.T_out",
        "limits.outside_velocity_max",
        "limits.minimum_metal_temperature",
    ]
    assert [limit.key for limit in limits_of(case) if not limit.stated] == ["inside.scaling"]


def test_scaling_is_no_limit_of_oil_or_of_cooled_water():
    swapped = oil_cooler(
        outside__fluid="Water", inside__fluid=OIL_COOLER["outside"]["fluid"], outside__T_out=None, inside__flow="2 kg/s"
    )
    assert [limit.key for limit in limits_of(swapped)] == ["inside.dp_allowed"]


def test_slack_is_positive_inside_a_limit_on_either_side():
    (hot,) = (limit for limit in limits_of(oil_cooler()) if limit.key == "outside.T_out")
    (cold,) = (
        limit for limit in limits_of(oil_cooler(outside__T_out=None, inside__T_out="29 degC")) if "T_out" in limit.key
    )
    assert hot.upper
    assert not cold.upper
    np.testing.assert_allclose(hot.slack([330.15, 335.15]), [3.0, -2.0])
    np.testing.assert_allclose(cold.slack([303.15, 301.15]), [1.0, -1.0])


# --- operating conditions ---------------------------------------------------------------------------------------------

CONDITIONS = [
    {"name": "winter", "inside_T_in": "5 degC"},
    {"name": "maximum", "outside_flow": "9 t/h", "inside_flow": "15 m3/h"},
    {"name": "clean start", "inside_R_fouling": "0 m2K/W", "outside_T_in": "65 degC"},
    {"name": "no difference", "inside_T_in": "68 degC"},
    {"name": "ice", "inside_T_in": "-5 degC"},
]


def test_each_column_is_the_rating_of_the_case_so_stated():
    table = operating_table(oil_cooler(operating=CONDITIONS)).frame
    assert list(table.index) == ["As stated", *(condition["name"] for condition in CONDITIONS)]
    stated = [
        oil_cooler(),
        oil_cooler(inside__T_in="5 degC"),
        oil_cooler(outside__flow="9 t/h", inside__flow="15 m3/h"),
        oil_cooler(inside__R_fouling="0 m2K/W", outside__T_in="65 degC"),
    ]
    for i, case in enumerate(stated):
        for column, value in figures(case).items():
            assert table[column].iloc[i] == pytest.approx(value, rel=1e-7), (i, column)
        assert table["duty"].iloc[i] == pytest.approx(rate(case).fouled.duty, rel=1e-7)
        assert table["outside.regime"].iloc[i] == rate(case).fouled.sides["outside"].regime


def test_a_condition_without_an_answer_says_why_and_spoils_no_other():
    table = operating_table(oil_cooler(operating=CONDITIONS)).frame
    assert list(table["problem"] != "") == [False, False, False, False, True, True]
    assert "same temperature" in table["problem"].iloc[4]
    assert "freez" in table["problem"].iloc[5]
    assert table[["duty", "inside.dp", "slack outside.T_out"]].iloc[4:].isna().all(axis=None)
    assert not table[["duty", "inside.dp", "slack outside.T_out"]].iloc[:4].isna().any(axis=None)
    assert list(table["limit"].iloc[[0, 2, 4]]) == ["", "outside.T_out", ""]


def test_all_conditions_are_one_solve(monkeypatch):
    solves = []
    tabulated = studies.tabulated
    monkeypatch.setattr(studies, "tabulated", lambda *given: solves.append(1) or tabulated(*given))
    operating_table(oil_cooler(operating=CONDITIONS))
    assert len(solves) == 1


def test_a_volume_flow_is_taken_at_the_inlet_of_its_own_condition():
    table = operating_table(oil_cooler(operating=CONDITIONS)).frame
    warm, cold = table["inside.flow"].iloc[[0, 1]]
    # Water at 27 and 5 °C: 996.5 and 1000.0 kg/m³ (IAPWS-95, at 1 atm; 0.2 kg/m³ more at 5 bar).
    assert warm == pytest.approx(12 / 3600 * 996.7, rel=1e-4)
    assert cold == pytest.approx(12 / 3600 * 1000.2, rel=1e-4)


def test_conditions_come_back_from_the_case_file_as_typed():
    case = oil_cooler(operating=CONDITIONS)
    again = parse_case(raw_of(dump_case(case)))
    assert again == case
    assert again.input_hash == case.input_hash != oil_cooler().input_hash


@pytest.mark.parametrize(
    ("conditions", "path", "says"),
    [
        ([{"name": "a"}, {"name": " A"}], "operating[1].name", "stands twice"),
        ([{"name": " "}], "operating[0].name", "is empty"),
        ([{"inside_T_in": "5 degC"}], "operating[0].name", "is missing"),
        ([{"name": "a", "tubes_plugged": 4}], "operating[0].tubes_plugged", "no tubes to plug"),
        ([{"name": "a", "inside_T_in": "5"}], "operating[0].inside_T_in", "unit"),
        ([{"name": "a", "flow": "5 kg/s"}], "operating[0].flow", 'did you mean "inside_flow"'),
        ([{"name": str(i)} for i in range(13)], "operating", "12"),
    ],
)
def test_a_condition_that_cannot_be_meant_is_refused_in_a_sentence(conditions, path, says):
    with pytest.raises(CaseError) as refused:
        oil_cooler(operating=conditions)
    [problem] = refused.value.problems
    assert problem.path == path
    assert says in problem.says


def test_more_tubes_plugged_than_there_are_is_refused():
    with pytest.raises(CaseError, match="220 of 220 tubes leaves none open"):
        shell_cooler(operating=[{"name": "a", "tubes_plugged": 220}])


# --- sweeps -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("case", [oil_cooler(), shell_cooler()], ids=["double pipe", "shell and tube"])
def test_a_sweep_agrees_with_the_rating_of_points(case):
    for path in ("outside.flow", "outside.T_in", "inside.R_fouling"):
        variable = variables(case)[path]
        values = variable.today * np.array([0.96, 1.0, 1.05]) + 1e-5
        swept, points = sweep(case, path, values).frame, rate_points(case, pd.DataFrame({path: values}))
        for name in ("duty", "inside.T_out", "outside.dp", "U_dirty"):
            np.testing.assert_allclose(swept[name], points[name], rtol=1e-7)


def test_a_sweep_over_plugged_tubes_agrees_with_ratings():
    case = shell_cooler()
    swept = sweep(case, "tubes_plugged", [0, 22, 66])
    for row, plugged in enumerate((0, 22, 66)):
        alone = figures(restated(case, "tubes_plugged", plugged))
        for column, value in alone.items():
            assert swept.frame[column].iloc[row] == pytest.approx(value, rel=1e-7)
    assert (np.diff(swept.frame["inside.velocity"]) > 0).all()
    assert (np.diff(swept.frame["duty"]) < 0).all()


def test_a_sweep_over_a_solution_makes_another_fluid_of_each_value():
    case = oil_cooler(inside__fluid={"solution": "ethylene glycol", "mass_fraction": "20 %"})
    swept = sweep(case, "inside.mass_fraction", [0.1, 0.3, 0.7]).frame
    for row, fraction in enumerate(("10 %", "30 %")):
        alone = oil_cooler(inside__fluid={"solution": "MEG", "mass_fraction": fraction})
        assert swept["duty"].iloc[row] == pytest.approx(rate(alone).fouled.duty, rel=1e-7)
    assert "mass fraction of 0.7 is outside" in swept["problem"].iloc[2]
    assert np.isnan(swept["duty"].iloc[2])


def test_the_limit_passed_the_furthest_is_named_along_a_sweep():
    swept = sweep(oil_cooler(), "inside.flow", np.array([0.2, 1.0, 3.0, 6.0]))
    assert list(swept.frame["limit"]) == ["outside.T_out", "", "", "inside.dp_allowed"]
    assert [limit.key for limit in swept.passed(3)] == ["inside.dp_allowed"]
    np.testing.assert_array_equal(swept.within(swept.limits), [False, True, True, False])


def test_a_case_without_limits_can_be_swept():
    case = constant(inside__dp_allowed=None, inside__fluid=OIL_COOLER["outside"]["fluid"])
    swept = sweep(case, "inside.flow", [1.0, 2.0])
    assert swept.limits == ()
    assert list(swept.frame["limit"]) == ["", ""]


@pytest.mark.parametrize(
    ("path", "values", "says"),
    [
        ("inside.pressure", [1.0], "cannot be varied in this case; allowed are inside.flow"),
        ("tubes_plugged", [1.0], "cannot be varied in this case"),
        ("inside.flow", [], "needs a list of 1 to 2000 numbers"),
        ("inside.flow", 3.0, "needs a list"),
        ("inside.flow", [[1.0]], "needs a list"),
        ("inside.flow", ["1 kg/s"], "needs a list"),
        ("inside.flow", [1.0, np.nan], "not a finite number"),
        ("inside.flow", np.ones(2001), "needs a list"),
    ],
)
def test_a_sweep_that_cannot_be_is_refused_in_one_sentence(path, values, says):
    with pytest.raises(CaseError) as refused:
        sweep(oil_cooler(), path, values)
    [problem] = refused.value.problems
    assert problem.path == path
    assert says in problem.says


def test_half_a_plugged_tube_is_refused():
    with pytest.raises(CaseError, match="not whole"):
        sweep(shell_cooler(), "tubes_plugged", [1.5])


def test_values_without_an_answer_carry_a_sentence():
    frame = sweep(oil_cooler(), "inside.flow", [-1.0, 2.0]).frame
    assert "positive finite number" in frame["problem"].iloc[0]
    assert frame["problem"].iloc[1] == ""
    frame = sweep(oil_cooler(), "inside.T_in", [260.0, 341.15, 300.0]).frame
    assert list(frame["problem"] != "") == [True, True, False]


def test_values_around_todays_show_today_and_the_answer():
    case = shell_cooler()
    for path, variable in variables(case).items():
        values = around(variable, variable.high)
        assert variable.today in values, path
        assert values.min() >= variable.low
        assert values.max() <= variable.high


# --- answers ----------------------------------------------------------------------------------------------------------

ASKED = [
    (oil_cooler(), "inside.flow", "least", "outside.T_out"),
    (oil_cooler(), "inside.flow", "most", "inside.dp_allowed"),
    (oil_cooler(), "outside.flow", "most", "outside.T_out"),
    (oil_cooler(), "inside.T_in", "most", "outside.T_out"),
    (oil_cooler(), "outside.T_in", "most", "outside.T_out"),
    (oil_cooler(), "inside.R_fouling", "most", "outside.T_out"),
    (oil_cooler(outside__T_out=None, inside__T_out="28.5 degC"), "outside.T_in", "least", "inside.T_out"),
    (oil_cooler(limits__outside_velocity_max="1.2 m/s"), "outside.flow", "most", "limits.outside_velocity_max"),
    (oil_cooler(limits__outside_wall_T_min="20 degC"), "inside.T_in", "least", "limits.outside_wall_T_min"),
    (
        oil_cooler(limits__inside_wall_T_max="31 degC", outside__T_out=None),
        "outside.T_in",
        "most",
        "limits.inside_wall_T_max",
    ),
    (
        oil_cooler(limits__inside_design_temperature="30 degC"),
        "inside.T_in",
        "most",
        "limits.inside_design_temperature",
    ),
    (
        oil_cooler(limits__minimum_metal_temperature="25 degC"),
        "inside.T_in",
        "least",
        "limits.minimum_metal_temperature",
    ),
    (shell_cooler(outside__T_out="53 degC"), "inside.flow", "least", "outside.T_out"),
    (shell_cooler(outside__T_out="53 degC"), "outside.R_fouling", "most", "outside.T_out"),
]


@pytest.mark.parametrize(
    ("case", "path", "way", "key"), ASKED, ids=[f"{way} {path}, {key}" for _, path, way, key in ASKED]
)
def test_the_first_limit_binds_at_the_answer_and_is_passed_beyond_it(case, path, way, key):
    found = answer(case, Question(path=path, way=way))
    assert found.outcome == "reached"
    assert found.limit.key == key
    assert found.at_most == (way == "most")
    # The limit binds in a rating of its own, and no other is passed there.
    there = restated(case, path, found.value)
    slack = slack_by_rating(there, found.limit)
    assert slack > -1e-7 * found.limit.scale
    assert slack < 1e-4 * found.limit.scale
    assert all(slack_by_rating(there, limit) > 0 for limit in limits_of(case) if limit != found.limit)
    # A step beyond passes it, a step back does not.
    step = 0.01 * (found.value - found.variable.today)
    assert slack_by_rating(restated(case, path, found.value + step), found.limit) < 0
    assert slack_by_rating(restated(case, path, found.value - step), found.limit) > 0
    # Between the stated value and the answer nothing is passed.
    between = sweep(case, path, np.linspace(found.variable.today, found.value, 30))
    assert between.within(between.limits).all()


def test_an_answer_is_found_where_both_its_neighbours_lie_on_the_limit_within_the_last_digits():
    case = load_case(SAMPLES / "gear-oil-turning-laminar.json")
    found = answer(case, Question(path="outside.R_fouling", way="most"))
    assert (found.outcome, found.limit.key) == ("reached", "inside.T_out")


def test_the_most_plugged_tubes_is_the_last_count_that_keeps_the_outlet():
    case = shell_cooler(outside__T_out="53 degC")
    found = answer(case, Question(path="tubes_plugged", way="most"))
    assert found.outcome == "reached"
    assert found.limit.key == "outside.T_out"
    assert found.value == int(found.value)
    T = [figures(restated(case, "tubes_plugged", found.value + more))["outside.T_out"] for more in (0, 1)]
    assert T[0] <= 53 + 273.15 < T[1]


def test_the_most_glycol_keeps_the_outlet_and_is_found_over_fluids():
    case = oil_cooler(
        inside__fluid={"solution": "ethylene glycol", "mass_fraction": "5 %"},
        inside__flow="4 m3/h",
        outside__T_out="59.8 degC",
    )
    found = answer(case, Question(path="inside.mass_fraction", way="most"))
    assert found.outcome == "reached"
    assert found.limit.key == "outside.T_out"
    slack = slack_by_rating(restated(case, "inside.mass_fraction", found.value), found.limit)
    assert slack == pytest.approx(0, abs=2e-3)


@settings(max_examples=12, deadline=None)
@given(
    required=st.floats(58.7, 60.5),
    path=st.sampled_from(["inside.flow", "inside.T_in", "outside.flow", "outside.R_fouling"]),
)
def test_an_answer_meets_any_required_outlet(required, path):
    case = oil_cooler(outside__T_out=f"{required!r} degC", inside__dp_allowed=None)
    least = path == "inside.flow"
    found = answer(case, Question(path=path, way="least" if least else "most", keys=("outside.T_out",)))
    if found.value is None:
        ends = sweep(case, path, [found.variable.low, found.variable.high])
        assert found.outcome == "not mended"
        assert not ends.within([found.limit]).any()
    else:
        assert slack_by_rating(restated(case, path, found.value), found.limit) == pytest.approx(0, abs=2e-3)
        held = slack_by_rating(case, found.limit) >= 0
        assert found.outcome == ("reached" if held else "mended")
        assert (found.value > found.variable.today) == (held != least)


# --- by hand ----------------------------------------------------------------------------------------------------------

HOT_FLOW, COLD_FLOW, HOT_CP, COLD_CP = 2.5, 2.0, 4200.0, 4100.0


def large_films(**changes):
    """Constant properties, films of little account beside a large fouling: U hardly varies."""
    base = {
        "inside__R_fouling": "0.004 m2K/W",
        "exchanger__film_factor": {"inside": "10", "outside": "10"},
        "inside__dp_allowed": None,
    }
    return constant(**{**base, **changes})


def counter_effectiveness(NTU, Cr):
    x = np.exp(-NTU * (1 - Cr))
    return (1 - x) / (1 - Cr * x)


def counter_NTU(effectiveness, Cr):
    return np.log((1 - Cr * effectiveness) / (1 - effectiveness)) / (1 - Cr)


def test_warmest_inlet_by_the_effectiveness_that_does_not_depend_on_temperatures():
    T_hot, required = 80.0, 75.0
    case = large_films(outside__T_out=f"{required} degC")
    base = rate(case).fouled
    C_hot, C_cold = HOT_FLOW * HOT_CP, COLD_FLOW * COLD_CP
    effectiveness = C_hot * (T_hot + 273.15 - base.T_out["outside"]) / (C_cold * 60.0)
    warmest = T_hot - C_hot * (T_hot - required) / (effectiveness * C_cold)
    found = answer(case, Question(path="inside.T_in", way="most", keys=("outside.T_out",)))
    assert found.value == pytest.approx(warmest + 273.15, abs=1e-3)


def test_most_fouling_by_inverting_the_effectiveness_of_counter_flow():
    T_hot, T_cold, required = 80.0, 20.0, 76.0
    case = large_films(outside__T_out=f"{required} degC")
    C_hot, C_cold = HOT_FLOW * HOT_CP, COLD_FLOW * COLD_CP
    effectiveness = C_hot * (T_hot - required) / (C_cold * (T_hot - T_cold))
    U = counter_NTU(effectiveness, C_cold / C_hot) * C_cold / case.exchanger.area
    clean = rate(large_films(inside__R_fouling="0 m2K/W")).fouled
    by_hand = (1 / U - 1 / clean.U_dirty) / case.exchanger.area_ratio
    found = answer(case, Question(path="inside.R_fouling", way="most"))
    assert found.value == pytest.approx(by_hand, rel=2e-3)


def test_least_flow_by_solving_the_effectiveness_of_counter_flow():
    T_hot, T_cold, required = 80.0, 20.0, 76.5
    case = large_films(outside__T_out=f"{required} degC")
    UA = rate(case).fouled.U_dirty * case.exchanger.area
    C_hot = HOT_FLOW * HOT_CP

    def T_out(flow):
        C = flow * COLD_CP
        C_min, C_max = min(C, C_hot), max(C, C_hot)
        return T_hot - counter_effectiveness(UA / C_min, C_min / C_max) * C_min * (T_hot - T_cold) / C_hot

    low, high = 0.01, COLD_FLOW
    for _ in range(60):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if T_out(middle) > required else (low, middle)
    found = answer(case, Question(path="inside.flow", way="least", keys=("outside.T_out",)))
    assert found.value == pytest.approx(high, rel=0.02)
    assert found.value > high  # the film that falls with the flow is all that was left out


# --- which limit, and why not -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changes", "key"),
    [
        ({"outside__dp_allowed": "300 kPa"}, "outside.dp_allowed"),
        ({"outside__dp_allowed": "600 kPa"}, "outside.T_out"),
        ({"outside__dp_allowed": "600 kPa", "limits__outside_velocity_max": "1.1 m/s"}, "limits.outside_velocity_max"),
    ],
)
def test_of_several_limits_the_first_on_the_way_is_named(changes, key):
    found = answer(oil_cooler(**changes), Question(path="outside.flow", way="most"))
    assert found.limit.key == key


def test_only_the_limits_asked_for_count_and_others_passed_are_named():
    case = oil_cooler(outside__dp_allowed="300 kPa")
    found = answer(case, Question(path="outside.flow", way="most", keys=("outside.T_out",)))
    assert found.limit.key == "outside.T_out"
    assert [limit.key for limit in found.also] == ["outside.dp_allowed"]
    assert "There, the allowed drop of the annulus (300.0 kPa) is exceeded." in told(found)


def test_boiling_ends_the_way_with_its_sentence():
    hot = oil_cooler(outside__fluid="Water", outside__T_in="90 degC", outside__T_out=None, outside__p_in="1 barg")
    found = answer(hot, Question(path="outside.T_in", way="most"))
    assert found.outcome == "reached"
    assert found.limit is None
    assert found.ends == (None, None)
    assert "boils" in found.problem
    assert "there is no answer" in told(found)
    assert found.value < 273.15 + 120.5


def test_a_stated_value_that_fails_is_answered_by_the_nearest_that_does_not():
    case = oil_cooler(outside__T_out="58.5 degC")
    found = answer(case, Question(path="outside.flow", way="most"))
    assert found.outcome == "mended"
    assert found.at_most
    assert found.by == pytest.approx(-slack_by_rating(case, found.limit), rel=1e-7)
    assert found.value < found.variable.today
    assert slack_by_rating(restated(case, "outside.flow", found.value), found.limit) == pytest.approx(0, abs=1e-3)
    assert "would have to be at most" in told(found)
    inlet = answer(case, Question(path="inside.T_in", way="least"))
    assert inlet.value < inlet.variable.today
    assert inlet.at_most


def test_what_no_value_mends_says_so():
    found = answer(oil_cooler(outside__T_out="50 degC"), Question(path="inside.flow", way="least"))
    assert (found.outcome, found.value) == ("not mended", None)
    assert told(found).endswith("No value from 0.600 m³/h to 120 m³/h mends that.")


def test_what_no_limit_ends_says_so():
    case = shell_cooler()
    found = answer(case, Question(path="tubes_plugged", way="least"))
    assert found.outcome == "open"
    found = answer(oil_cooler(outside__T_out="66 degC"), Question(path="outside.T_in", way="least"))
    assert found.outcome == "open"
    assert "no limit that counts is hit" in told(found)


def test_a_case_without_an_answer_says_why():
    boiling = oil_cooler(
        inside__fluid="Water",
        inside__p_in="0.2 bara",
        outside__T_in="95 degC",
        outside__T_out=None,
        inside__flow="0.3 m3/h",
    )
    if rate(boiling).states:
        pytest.fail("the case is meant to boil")
    found = answer(boiling, Question(path="inside.flow", way="least"))
    assert found.outcome == "no answer"
    assert rate(boiling).problem in told(found)


def test_common_practice_that_today_passes_does_not_count_unless_asked_for():
    case = oil_cooler(
        outside__fluid="Water",
        outside__T_in="90 degC",
        outside__T_out=None,
        outside__p_in="5 barg",
        inside__T_in="40 degC",
    )
    found = answer(case, Question(path="inside.flow", way="most"))
    assert [limit.key for limit in found.left_out] == ["inside.scaling"]
    assert found.limit.key == "inside.dp_allowed"
    assert "common practice" in told(found)
    alone = answer(case, Question(path="outside.T_in", way="most", keys=("inside.scaling",)))
    assert alone.outcome == "mended"
    assert alone.value < alone.variable.today


def test_where_figures_turn_back_the_first_crossing_on_the_way_is_taken():
    limit = limits_of(oil_cooler())[0]
    variable = variables(oil_cooler())["inside.T_in"]

    def waves(values):
        # Inside up to 310, outside up to 330, inside again.
        slack = np.where((values > 310.0) & (values < 330.0), -1.0, 1.0)
        return Conditions(frame=pd.DataFrame({f"slack {limit.key}": slack, "problem": ""}), limits=(limit,))

    near, far = studies._narrowed(waves, variable, np.linspace(300.0, 350.0, 41), lambda found: found.within([limit]))
    assert near <= 310.0 < far
    assert far - near < 1e-3


@pytest.mark.parametrize(
    ("question", "says"),
    [
        (Question(path="inside.p_in", way="most"), "cannot be varied"),
        (Question(path="inside.flow", way="most", keys=("inside.T_out",)), "inside.T_out is no limit of this case"),
    ],
)
def test_a_question_that_the_case_does_not_know_is_refused(question, says):
    with pytest.raises(CaseError, match=says):
        answer(oil_cooler(), question)


# --- how sure ---------------------------------------------------------------------------------------------------------


def test_the_interval_is_where_the_limit_would_bind_at_the_ends_of_its_own_interval():
    case = oil_cooler(inside__dp_allowed=None)
    question = Question(path="inside.T_in", way="most", keys=("outside.T_out",))
    found = answer(case, question)
    there = restated(case, "inside.T_in", found.value)
    doubt = NORMAL_95 * propagate(there, rate(there))["fouled"].sd["outside.T_out"]
    for end, shift in zip(found.ends, (-doubt, doubt), strict=True):
        moved = answer(oil_cooler(inside__dp_allowed=None, outside__T_out=f"{60 + shift!r} degC"), question)
        assert end == pytest.approx(moved.value, abs=0.03)


def test_a_doubtful_flow_widens_the_interval_of_another_answer():
    widths = []
    for flow in ("6 t/h", "6 t/h ± 8 %"):
        low, high = answer(oil_cooler(outside__flow=flow), Question(path="outside.T_in", way="most")).ends
        widths.append(high - low)
    assert widths[1] > 1.1 * widths[0]


# --- in words, and how fast -------------------------------------------------------------------------------------------


def test_every_usual_question_is_asked_and_answered_in_sentences():
    for case in (oil_cooler(), shell_cooler()):
        for question in questions(case):
            said = told(answer(case, question), "us")
            assert asked(case, question).endswith("?")
            assert said[0].isupper()
            assert said.endswith(".")
            assert not any(mark in said for mark in ("nan", "None", "{", "inside.", "outside."))
    assert {"tubes_plugged", "inside.R_fouling", "inside.flow"} <= {
        question.path for question in questions(shell_cooler())
    }


def test_an_answer_names_value_interval_today_and_limit():
    said = told(answer(oil_cooler(), Question(path="inside.flow", way="most")))
    assert said.startswith("The flow of water (inner pipe) can go up to ")
    assert "95 % interval" in said
    assert "today it is 12.0 m³/h" in said
    assert "the first limit hit is the allowed drop of the inner pipe (70.00 kPa)" in said


@pytest.mark.parametrize(
    "case", [oil_cooler(operating=CONDITIONS), shell_cooler()], ids=["double pipe", "shell and tube"]
)
def test_a_study_takes_no_longer_than_a_reader_waits(case, capsys):
    spent = {}
    for name, study in (
        ("operating table", lambda: operating_table(case)),
        ("sweep of 41", lambda: sweep(case, "inside.flow", np.linspace(1.0, 6.0, 41))),
        ("answer", lambda: answer(case, Question(path="inside.R_fouling", way="most"))),
    ):
        start = time.perf_counter()
        study()
        spent[name] = time.perf_counter() - start
    with capsys.disabled():
        print(f"\n{case.exchanger.type}: " + ", ".join(f"{name} {1e3 * t:.0f} ms" for name, t in spent.items()))
    assert max(spent.values()) < 10.0


# --- in the report ----------------------------------------------------------------------------------------------------


def test_the_report_holds_the_conditions_as_columns_and_the_answers():
    case = oil_cooler(operating=CONDITIONS)
    written = {section.key: section for section in studied(case)}
    assert list(written) == ["operating", "reach"]
    verdict, *tables = written["operating"].blocks
    assert verdict == "Maximum passes a limit; no difference and ice have no answer."
    tables = [block for block in tables if isinstance(block, Table)]
    assert [name for table in tables for name in table.header if name] == list(operating_table(case).frame.index)
    last = {row[0]: row[1:] for row in tables[0].rows}
    assert last["First limit"][2].startswith("required outlet of the annulus: PASSED by 0.")
    margin = 60 + 273.15 - rate(oil_cooler(inside__T_in="5 degC")).fouled.T_out["outside"]
    assert last["Margin to the required outlet of the annulus"][1] == f"+{margin:.3g} K"
    [asked_and_told] = [block for block in written["reach"].blocks if isinstance(block, Table)]
    assert len(asked_and_told.rows) == len(questions(case))


def test_a_case_without_conditions_has_answers_only_and_one_without_an_answer_nothing():
    assert [section.key for section in studied(oil_cooler())] == ["reach"]
    boiling = oil_cooler(inside__p_in="0.2 bara", outside__T_in="95 degC", outside__T_out=None, inside__flow="0.3 m3/h")
    assert studied(boiling) == ()


def test_the_pdf_prints_the_studies_before_the_assumptions():
    case = oil_cooler(operating=CONDITIONS)
    rating = rate(case)
    pages = PdfReader(io.BytesIO(report_pdf(rating, {}, (), "us", studied(case, "us")))).pages
    text = " ".join(page.extract_text() for page in pages)
    assert text.index("Operating conditions") < text.index("What it would take") < text.index("Assumptions")
    assert "clean start" in text
    assert "140.0 °F" in text


# --- both states, and steam -------------------------------------------------------------------------------------------


def test_a_condition_counts_clean_too():
    hot = oil_cooler(outside__fluid="Water", outside__T_in="90 degC", outside__T_out=None, outside__p_in="5 barg")
    hot = restated(hot, "inside.R_fouling", 0.002)
    swept = sweep(hot, "outside.T_in", [350.0, 400.0])
    rating = rate(restated(hot, "outside.T_in", 400.0))
    surface = [state.profile.surface_T["inside"].max() for state in rating.states.values()]
    assert swept.frame["inside.surface_T_max"].iloc[1] == pytest.approx(max(surface), rel=1e-7)
    assert max(surface) == surface[0]
    assert rating.fouled.duty == pytest.approx(swept.frame["duty"].iloc[1], rel=1e-7)


STEAM = {
    "outside__fluid": {"steam": {"p": "3 barg"}},
    **dict.fromkeys(("outside__flow", "outside__T_in", "outside__p_in", "outside__T_out"), None),
    "inside__T_out": "60 degC",
    "inside__flow": "6 m3/h",
    "exchanger__legs_in_series": 2,
}


def test_the_least_steam_pressure_keeps_the_outlet():
    case = oil_cooler(**STEAM)
    found = answer(case, Question(path="outside.fluid.steam.p", way="least"))
    assert found.limit.key == "inside.T_out"
    there = restated(case, "outside.fluid.steam.p", found.value)
    assert there.p_in("outside") == pytest.approx(found.value)
    assert rate(there).fouled.T_out["inside"] == pytest.approx(333.15, abs=1e-3)
    assert found.variable.today == pytest.approx(case.p_in("outside"))
    assert "bara" in told(found)


def test_where_the_clean_exchanger_would_boil_its_water_there_is_no_answer():
    case = oil_cooler(**STEAM)
    found = answer(case, Question(path="outside.fluid.steam.p", way="most"))
    assert found.problem.startswith("clean, ")
    assert rate(restated(case, "outside.fluid.steam.p", found.value)).states
    assert not rate(restated(case, "outside.fluid.steam.p", 1.02 * found.value)).states


def test_operating_conditions_of_a_steam_heater():
    case = oil_cooler(**STEAM, operating=[{"name": "maximum", "inside_flow": "9 m3/h"}])
    table = operating_table(case).frame
    alone = rate(oil_cooler(**{**STEAM, "inside__flow": "9 m3/h"})).fouled
    assert table["duty"].iloc[1] == pytest.approx(alone.duty, rel=1e-7)
    assert table["outside.regime"].iloc[1] == "condensing"
