"""The sample cases: each loads, rates within what a plant would accept, and bears out what it says it teaches."""

from __future__ import annotations

import json
import re
from functools import cache
from pathlib import Path

import pytest

from engine.casefile import dump_case, load_case, parse_case, raw_of
from engine.rating import rate
from engine.stated import SIDES
from engine.states import Rating
from engine.uncertainty import propagate
from tests.cases import changed

FOLDER = Path(__file__).parents[1] / "sample_cases"
NAMES = sorted(path.stem for path in FOLDER.glob("*.json"))


@cache
def raw(name: str) -> dict:
    return json.loads((FOLDER / f"{name}.json").read_text(encoding="utf-8"))


@cache
def rated(name: str) -> Rating:
    return rate(load_case(FOLDER / f"{name}.json"))


def rated_with(name: str, **changes) -> Rating:
    return rate(parse_case(changed(raw(name), **changes)))


@pytest.mark.parametrize("name", NAMES)
def test_a_sample_loads_and_is_kept_as_typed(name):
    case = load_case(FOLDER / f"{name}.json")
    assert raw_of(dump_case(case)) == raw(name)
    assert case.tag
    assert case.service
    assert case.plant
    assert re.fullmatch(r"[A-Z].*\.", case.teaches, re.DOTALL)


@pytest.mark.parametrize("name", NAMES)
def test_a_sample_rates_within_what_a_plant_would_accept(name):
    rating = rated(name)
    assert rating.problem == ""
    for state in rating.states.values():
        assert state.converged
        assert state.duty > 0
        assert state.profile is not None
    fouled, clean = rating.fouled, rating.clean
    assert clean.U_dirty >= fouled.U_dirty
    if rating.case.sheet is not None:
        return  # What a vendor's sheet claims may be far off: that is what such a sample is about.
    assert fouled.margin is not None
    assert -0.25 < fouled.margin < 0.30
    for side in SIDES:
        allowed = rating.case.stream(side).dp_allowed
        # Steam's drop is not calculated.
        if allowed is not None and not rating.case.stream(side).condenses:
            assert fouled.sides[side].dp < allowed, side


def test_there_are_samples_of_both_types_in_all_habits_of_units():
    types = [raw(name)["exchanger"]["type"] for name in NAMES]
    assert types.count("double-pipe") >= 4
    assert types.count("shell-and-tube") >= 4
    text = "".join(json.dumps(raw(name)) for name in NAMES)
    for unit in ("degF", "degC", "gpm", "lb/h", "kg/h", "psig", "barg", "h ft2 F/Btu", "m2K/W"):
        assert unit in text, unit


def test_tags_plants_and_lessons_are_their_own():
    for key in ("tag", "teaches"):
        assert len({raw(name)[key] for name in NAMES}) == len(NAMES)


# What each teaches


def test_closed_loop_water():
    """Both sides turbulent, the methods within half a percent; the stated fouling takes four tenths of the clean U."""
    rating = rated("closed-loop-water")
    assert {rating.fouled.sides[side].regime for side in SIDES} == {"turbulent"}
    for method in rating.methods.values():
        assert method.duty == pytest.approx(rating.fouled.duty, rel=0.005)
    fouling = sum(R for name, R in rating.fouled.resistances.items() if "fouling" in name)
    assert fouling * rating.fouled.U_dirty == pytest.approx(0.42, abs=0.03)
    doubt = propagate(rating.case, rating)["fouled"].sd["U_dirty"]
    assert 1 - rating.fouled.U_dirty / rating.clean.U_dirty > 10 * doubt


def test_gear_oil_turning_laminar():
    """Transition at the inlet, laminar from two thirds of the way on; mean properties promise 4 % too much."""
    fouled = rated("gear-oil-turning-laminar").fouled
    regime = fouled.profile.regime["inside"]
    turn = regime.index("laminar")
    assert set(regime[:turn]) == {"transitional"}
    assert set(regime[turn:]) == {"laminar"}
    assert fouled.profile.x[turn] == pytest.approx(2 / 3, abs=0.05)
    assert rated("gear-oil-turning-laminar").methods["effectiveness_ntu"].duty / fouled.duty == pytest.approx(
        1.04, abs=0.007
    )


def test_glycol_in_transition():
    """In transition all the way; published joins differ by a third; the required duty is inside the interval."""
    rating = rated("glycol-in-transition")
    side = rating.fouled.sides["inside"]
    assert set(rating.fouled.profile.regime["inside"]) == {"transitional"}
    assert side.second_opinions["transition_2013"] / side.h == pytest.approx(4 / 3, abs=0.05)
    assert 0 < rating.fouled.margin < 0.05
    fouled = propagate(rating.case, rating)["fouled"]
    low, high = fouled.of["duty"]
    assert low < 0.9 * rating.fouled.required_duty
    assert high > 1.1 * rating.fouled.required_duty
    assert "transition" in fouled.contributors[0].doubt.name
    assert fouled.contributors[0].share > 0.75


def test_milk_heater_co_current():
    """Co-current keeps the wall below its limit; counterflow heats further, and when clean passes the limit."""
    name = "milk-heater-co-current"
    here, counter = rated(name), rated_with(name, exchanger__arrangement="counter")
    limit = float(here.case.limits.inside_wall_T_max)
    assert max(state.sides["inside"].surface_T[1] for state in here.states.values()) < limit
    assert counter.clean.sides["inside"].surface_T[1] > limit
    assert counter.fouled.T_out["inside"] > here.fouled.T_out["inside"] + 1.5


def test_compressed_air_aftercooler():
    """The air's film is three quarters of the resistance; twice the water gives 4 % more for 3.5 times its drop."""
    fouled = rated("compressed-air-aftercooler").fouled
    assert fouled.resistances["inside film"] * fouled.U_dirty == pytest.approx(0.74, abs=0.03)
    more = rated_with("compressed-air-aftercooler", outside__flow="50 L/min").fouled
    assert more.duty / fouled.duty == pytest.approx(1.04, abs=0.01)
    assert more.sides["outside"].dp / fouled.sides["outside"].dp == pytest.approx(3.5, abs=0.2)
    assert fouled.margin < 0
    assert rated_with("compressed-air-aftercooler", exchanger__leg_length="3.2 m").fouled.margin > 0


def test_finned_hairpins_in_parallel():
    """Fins quadruple the duty; the relation between fins carries nearly all of the doubt, which is large."""
    name = "finned-hairpins-in-parallel"
    rating, plain = rated(name), rated_with(name, exchanger__fins=None)
    assert rating.fouled.duty / plain.fouled.duty == pytest.approx(4.0, abs=0.2)
    fouled = propagate(rating.case, rating)["fouled"]
    low, high = fouled.of["duty"]
    assert high / low > 1.8
    assert fouled.contributors[0].share > 0.95
    assert "finned" in fouled.contributors[0].doubt.name
    assert fouled.contributors[0].doubt.sd == pytest.approx(0.30)
