"""The result file: its keys, its units, and what must hold between its figures."""

from __future__ import annotations

import json
from dataclasses import replace

import pytest

from engine import __version__, casefile, findings, rating, uncertainty
from engine.result import result_json
from tests.cases import OIL_COOLER, changed, oil_cooler

STATE = {
    "duty", "area", "mtd", "F", "effectiveness", "NTU", "U_clean", "U_dirty", "U_required", "margin", "intervals",
    "contributors", "inside", "outside", "wall", "steam", "profile",
}  # fmt: skip
SIDE = {"flow", "T_in", "T_out", "h", "Re", "Pr", "velocity", "regime", "dp", "dp_parts", "R_fouling", "correlations"}
PROFILE = {
    "x", "inside_T", "outside_T", "wall_T_inside", "wall_T_outside", "inside_regime", "outside_regime"
}  # fmt: skip
BOILS = {"inside__p_in": "0.2 bara", "inside__flow": "0.05 m3/h", "outside__T_in": "95 degC", "outside__T_out": None}


def result_of(case):
    rated = rating.rate(case)
    intervals = uncertainty.propagate(case, rated)
    return result_json(rated, intervals, findings.judge(rated, intervals))


@pytest.fixture(scope="module")
def result():
    return result_of(oil_cooler())


@pytest.fixture(scope="module")
def fouled(result):
    return result["states"]["fouled"]


def test_the_keys_are_those_of_the_contract(result):
    assert list(result) == [
        "format", "version", "tag", "input_hash", "engine", "states", "methods", "findings", "checks"
    ]  # fmt: skip
    assert (result["format"], result["version"], result["tag"]) == ("countercheck-rating", 1, "E-1402")
    assert result["engine"] == __version__
    assert result["input_hash"] == oil_cooler().input_hash
    assert set(result["states"]) == {"clean", "fouled"}
    assert set(result["methods"]) == {"march", "effectiveness_ntu", "lmtd"}
    for state in result["states"].values():
        assert set(state) == STATE
        assert set(state["inside"]) == set(state["outside"]) == SIDE
        assert set(state["profile"]) == PROFILE
        assert set(state["wall"]) == {"R"}
        for interval in state["intervals"].values():
            assert set(interval) == {"low", "high"}
        assert 1 <= len(state["contributors"]) <= 3
        for contributor in state["contributors"]:
            assert set(contributor) == {"name", "share", "shrink"}
    for method in result["methods"].values():
        assert set(method) == {"duty", "inside", "outside"}
        assert set(method["inside"]) == {"T_out"}
    for finding in result["findings"]:
        assert set(finding) == {"code", "grade", "where", "says", "because", "do", "source"}
    assert set(result["checks"]) == {"run", "found", "not_possible"}


def test_figures_are_plain_si(fouled):
    assert fouled["inside"]["T_in"] == pytest.approx(300.15)
    assert fouled["outside"]["T_in"] == pytest.approx(341.15)
    assert fouled["inside"]["R_fouling"] == 0.00018
    # 8 legs of 6 m of a pipe of 60.3 mm
    assert fouled["area"] == pytest.approx(3.141592653589793 * 0.0603 * 48)
    assert type(fouled["duty"]) is float
    assert type(fouled["profile"]["x"][0]) is float


def test_duty_is_u_area_mtd(result):
    for state in result["states"].values():
        assert state["duty"] == pytest.approx(state["U_dirty"] * state["area"] * state["mtd"], rel=1e-9)


def test_each_states_own_fouling_lies_between_its_two_u(result):
    for state in result["states"].values():
        R = state["outside"]["R_fouling"] + state["inside"]["R_fouling"] * 60.3 / 52.48
        assert 1 / state["U_clean"] == pytest.approx(1 / state["U_dirty"] - R, rel=1e-6)


def test_the_clean_state_has_no_fouling(result):
    clean = result["states"]["clean"]
    assert clean["inside"]["R_fouling"] == clean["outside"]["R_fouling"] == 0
    assert clean["U_clean"] == pytest.approx(clean["U_dirty"], rel=1e-12)
    assert clean["duty"] > result["states"]["fouled"]["duty"]


def test_ntu_and_effectiveness_are_on_the_smaller_heat_capacity(fouled):
    C = {side: fouled["duty"] / abs(fouled[side]["T_out"] - fouled[side]["T_in"]) for side in ("inside", "outside")}
    span = abs(fouled["inside"]["T_in"] - fouled["outside"]["T_in"])
    assert fouled["NTU"] == pytest.approx(fouled["U_dirty"] * fouled["area"] / min(C.values()), rel=1e-9)
    assert fouled["effectiveness"] == pytest.approx(fouled["duty"] / (min(C.values()) * span), rel=1e-9)


def test_margin_is_that_of_the_state(result):
    for state in result["states"].values():
        assert state["margin"] == pytest.approx(state["U_dirty"] / state["U_required"] - 1, rel=1e-12)


def test_drop_parts_sum_to_the_drop(result):
    for state in result["states"].values():
        for side in ("inside", "outside"):
            assert sum(state[side]["dp_parts"].values()) == pytest.approx(state[side]["dp"], rel=1e-12)


def test_intervals_hold_their_figure(result):
    for state in result["states"].values():
        for quantity, interval in state["intervals"].items():
            side, _, name = quantity.rpartition(".")
            value = state[side][name] if side else state[quantity]
            assert interval["low"] < value < interval["high"], quantity


def test_contributors_stand_largest_first(fouled):
    shares = [contributor["share"] for contributor in fouled["contributors"]]
    assert shares == sorted(shares, reverse=True)
    assert 0 < sum(shares) <= 1 + 1e-12


def test_profile_runs_from_end_to_end(fouled):
    profile = fouled["profile"]
    assert {len(column) for column in profile.values()} == {len(profile["x"])}
    assert (profile["x"][0], profile["x"][-1]) == (0, 1)
    assert profile["inside_T"][0] == pytest.approx(fouled["inside"]["T_in"])
    assert profile["inside_T"][-1] == pytest.approx(fouled["inside"]["T_out"])
    # Counter-current: the outside fluid enters where the inside fluid leaves.
    assert profile["outside_T"][-1] == pytest.approx(fouled["outside"]["T_in"])
    assert profile["outside_T"][0] == pytest.approx(fouled["outside"]["T_out"])


def test_the_march_is_the_fouled_state(result):
    assert result["methods"]["march"]["duty"] == result["states"]["fouled"]["duty"]


def test_a_method_without_a_relation_says_why():
    raw = changed(OIL_COOLER, exchanger__banks_in_parallel={"inside": 1, "outside": 3}, exchanger__legs_in_series=3)
    methods = result_of(casefile.parse_case(raw))["methods"]
    assert list(methods["lmtd"]) == ["not_possible"]
    assert "only known through its ε" in methods["lmtd"]["not_possible"]


def test_checks_are_counted_by_outcome(result):
    rated = rating.rate(oil_cooler())
    verdicts = findings.judge(rated, uncertainty.propagate(rated.case, rated))
    outcomes = [verdict.outcome for verdict in verdicts]
    assert result["checks"] == {
        "run": outcomes.count("clear") + outcomes.count("found"),
        "found": outcomes.count("found"),
        "not_possible": outcomes.count("not possible"),
    }


def test_without_an_answer_every_state_and_method_says_why():
    result = result_of(oil_cooler(**BOILS))
    for part in (*result["states"].values(), *result["methods"].values()):
        assert list(part) == ["not_possible"]
        assert "boils" in part["not_possible"]
    assert any(finding["grade"] == "stop" for finding in result["findings"])


def test_the_unknown_is_null_and_never_nan():
    rated = rating.rate(oil_cooler(outside__T_out=None))
    fouled = rated.states["fouled"]
    sides = {**fouled.sides, "outside": replace(fouled.sides["outside"], Re=float("nan"), Pr=float("inf"))}
    result = result_json(replace(rated, states={**rated.states, "fouled": replace(fouled, sides=sides)}), {}, ())
    state = result["states"]["fouled"]
    assert state["outside"]["Re"] is None
    assert state["outside"]["Pr"] is None
    assert state["U_required"] is None
    assert state["margin"] is None
    assert state["intervals"] == {}
    json.dumps(result, allow_nan=False)


def test_the_same_case_gives_the_same_file(result):
    assert json.dumps(result_of(oil_cooler()), allow_nan=False) == json.dumps(result, allow_nan=False)
