"""A whole double pipe: against closed forms, against its differential equations, and against what must always hold."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_bvp

from engine.casefile import parse_case
from engine.effectiveness import effectiveness_cocurrent, effectiveness_counter
from engine.exchangers import Cells
from engine.points import points_of
from engine.rating import rate, rate_points
from engine.solve import flowing_side, resistances, solve
from engine.stated import SIDES, CaseError
from tests.cases import OIL_COOLER, OIL_TABLE, changed, constant, oil_cooler


@pytest.mark.parametrize("arrangement", ["counter", "co-current"])
def test_constant_properties_fall_onto_the_closed_forms(arrangement):
    rating = rate(constant(exchanger__arrangement=arrangement))
    march, eps, lmtd = (rating.methods[name] for name in ("march", "effectiveness_ntu", "lmtd"))
    exact = effectiveness_counter if arrangement == "counter" else effectiveness_cocurrent
    C = {"inside": 2 * 4100.0, "outside": 2.5 * 4200.0}
    NTU = march.U_dirty * march.area / C["inside"]
    by_hand = exact(NTU, C["inside"] / C["outside"]) * C["inside"] * 60.0
    assert march.duty == pytest.approx(float(by_hand), rel=1e-9)
    assert eps.duty == pytest.approx(march.duty, rel=1e-9)
    assert lmtd.duty == pytest.approx(march.duty, rel=1e-9)
    assert abs(march.F - 1.0) < 1e-9


def test_equal_capacity_rates_give_a_constant_difference():
    case = constant(
        inside__flow="2.5 kg/s",
        inside__fluid={"name": "same", "constant": dict(rho="960 kg/m3", cp="4.2 kJ/kgK", k="0.67 W/mK", mu="0.3 cP")},
    )
    state = rate(case).fouled
    profile = state.profile
    assert np.ptp(profile.T["outside"] - profile.T["inside"]) < 1e-9
    NTU = state.NTU
    assert state.effectiveness == pytest.approx(NTU / (1 + NTU), rel=1e-9)


FIVE = {
    "water over water": {
        "outside__fluid": "Water",
        "outside__flow": "9 t/h",
        "outside__T_in": "80 degC",
        "outside__T_out": None,
    },
    "laminar oil": {"outside__flow": "2 t/h", "outside__T_out": None},
    "glycol heated in transition": {
        "inside__fluid": {"solution": "ethylene glycol", "mass_fraction": "40 %"},
        "inside__flow": "4 t/h",
        "inside__T_in": "5 degC",
        "outside__fluid": "Water",
        "outside__T_in": "70 degC",
        "outside__T_out": None,
    },
    "co-current product heater": {
        "exchanger__arrangement": "co-current",
        "outside__T_out": None,
        "inside__T_in": "90 degC",
        "outside__T_in": "30 degC",
        "inside__p_in": "5 barg",
    },
    "air heated by water": {
        "outside__fluid": "Air",
        "outside__flow": "350 kg/h",
        "outside__T_in": "15 degC",
        "outside__T_out": None,
        "inside__T_in": "85 degC",
    },
}


def _local_chain(case, x, T_i, T_o):
    """U and both bulk cp at places x along the path from the inside inlet [m]; films of a sliver, wall temperatures
    settled place by place."""
    exchanger = case.exchanger
    point, _ = points_of(case)
    L, half = float(exchanger.leg_length), 1e-6
    along = np.clip(x % L, half, L - half)
    inside = (along - half, along + half)
    outside = inside if exchanger.arrangement == "co-current" else (L - along - half, L - along + half)
    cells = Cells(
        layout=None,
        start={"inside": inside[0], "outside": outside[0]},
        end={"inside": inside[1], "outside": outside[1]},
        leg={"inside": L, "outside": L},
    )
    fluids = {side: case.fluid(side) for side in SIDES}
    T = {"inside": T_i[None], "outside": T_o[None]}
    surface = {side: 0.5 * (T["inside"] + T["outside"]) for side in SIDES}
    for _ in range(25):
        at = {side: flowing_side(fluids[side], side, point, T[side], surface[side]) for side in SIDES}
        films = {side: exchanger.film(side, cells, at[side]) for side in SIDES}
        r = resistances(case, point, films, 0.5 * (surface["inside"] + surface["outside"]))
        U = 1 / sum(r.values())
        flux = U * (T["inside"] - T["outside"])
        surface = {"inside": T["inside"] - flux * r["inside film"], "outside": T["outside"] + flux * r["outside film"]}
    return U[0], fluids["inside"].at(T_i).cp, fluids["outside"].at(T_o).cp


@pytest.mark.parametrize("name", FIVE)
def test_duty_agrees_with_the_differential_equations(name):
    """dT/dA of both streams as a boundary-value problem on the same local films, solved by scipy leg for leg."""
    case = oil_cooler(**FIVE[name], exchanger__legs_in_series=3)
    exchanger = case.exchanger
    co = exchanger.arrangement == "co-current"
    T_in = {side: case.T_in(side) for side in SIDES}
    flow = {side: case.flow(side) for side in SIDES}
    length = float(exchanger.leg_length) * exchanger.legs_in_series
    per_metre = exchanger.area / length

    def slopes(x, T):
        U, cp_i, cp_o = _local_chain(case, x, T[0], T[1])
        q = U * (T[0] - T[1]) * per_metre
        return np.vstack([-q / (flow["inside"] * cp_i), (q if co else -q) / (flow["outside"] * cp_o)])

    def ends(first, last):
        return np.array([first[0] - T_in["inside"], (first if co else last)[1] - T_in["outside"]])

    # Entrance effects restart at every leg: crowd the mesh there, as x^3, and never put a place on the joint itself.
    L, n = float(exchanger.leg_length), 8
    grid = np.linspace(0, 1, n) ** 3
    both = np.unique(np.concatenate([grid * 0.5, 1 - grid * 0.5]))
    mesh = np.unique(np.concatenate([k * L + both * L for k in range(exchanger.legs_in_series)]))
    state = rate(case).fouled
    guess = np.vstack(
        [np.linspace(T_in["inside"], state.T_out["inside"], mesh.size), np.full(mesh.size, T_in["outside"])]
    )
    found = solve_bvp(slopes, ends, mesh, guess, tol=3e-4, max_nodes=5000)
    T_out = {"inside": found.y[0, -1], "outside": found.y[1, -1 if co else 0]}
    for side in SIDES:
        fluid = case.fluid(side)
        h = fluid.enthalpy(np.array([T_in[side], T_out[side]]))
        assert abs(h[1] - h[0]) * flow[side] == pytest.approx(state.duty, rel=1e-3)


LONG_LEG = {
    "outside__fluid": "Water",
    "outside__flow": "9 t/h",
    "outside__T_in": "95 degC",
    "outside__T_out": None,
    "outside__p_in": "20 barg",
    "inside__p_in": "20 barg",
    "exchanger__leg_length": "90 m",
    "exchanger__legs_in_series": 1,
}


def test_march_converges_at_second_order_where_no_entrance_interferes():
    duty = [rate(oil_cooler(**LONG_LEG), fineness=k).fouled.duty for k in (2, 4, 8)]
    first, second = (abs(b - a) for a, b in pairwise(duty))
    assert np.log2(first / second) == pytest.approx(2.0, abs=0.15), (first, second)
    assert first / duty[-1] < 2e-5


@pytest.mark.parametrize("name", FIVE)
def test_default_cells_are_fine_enough(name):
    """A film that starts at infinity at every leg leaves no clean order; what counts is how far off the default is."""
    case = oil_cooler(**FIVE[name])
    assert rate(case).fouled.duty == pytest.approx(rate(case, fineness=32).fouled.duty, rel=1e-3)


oil = st.fixed_dictionaries(
    {
        "water": st.floats(1.0, 25.0),
        "oil": st.floats(0.5, 12.0),
        "T_hot": st.floats(50.0, 95.0),
        "legs": st.integers(1, 12),
        "fouling": st.floats(0.0, 8e-4).map(lambda R: round(R, 6)),
        "arrangement": st.sampled_from(["counter", "co-current"]),
    }
)


def _drawn(d, **more):
    return oil_cooler(
        inside__flow=f"{d['water']:.6g} t/h",
        outside__flow=f"{d['oil']:.6g} t/h",
        outside__T_in=f"{d['T_hot']:.6g} degC",
        outside__T_out=None,
        outside__p_in="40 barg",
        inside__p_in="40 barg",
        exchanger__legs_in_series=d["legs"],
        exchanger__arrangement=d["arrangement"],
        inside__R_fouling=f"{d['fouling']:.6g} m2K/W",
        **more,
    )


@given(oil)
@settings(max_examples=25, deadline=None)
def test_balance_closes_and_the_chain_sums(d):
    case = _drawn(d)
    state = rate(case).fouled
    for side in SIDES:
        h = case.fluid(side).enthalpy(np.array([case.T_in(side), state.T_out[side]]))
        assert case.flow(side) * abs(h[1] - h[0]) == pytest.approx(state.duty, rel=1e-9)
    assert sum(state.resistances.values()) == pytest.approx(1 / state.U_dirty, rel=1e-12)
    assert state.duty == pytest.approx(state.U_dirty * state.area * state.mtd, rel=1e-12)
    assert sum(state.sides["inside"].drops.values()) == pytest.approx(state.sides["inside"].dp, rel=1e-12)
    low, high = sorted(case.T_in(side) for side in SIDES)
    assert all(low <= T <= high for T in state.T_out.values())


@given(oil)
@settings(max_examples=15, deadline=None)
def test_duty_rises_with_length_and_falls_with_fouling(d):
    base = rate(_drawn(d))
    longer = rate(_drawn(d, exchanger__leg_length="6.5 m"))
    assert longer.fouled.duty > base.fouled.duty
    assert base.clean.duty >= base.fouled.duty * (1 - 1e-9)


@given(oil)
@settings(max_examples=15, deadline=None)
def test_reversing_both_flows_changes_nothing(d):
    """Both fluids fed at the other end: the path is the same, so is the rating. Fed here by swapping hot and cold."""
    case = constant(exchanger__arrangement=d["arrangement"], exchanger__legs_in_series=d["legs"])
    swapped = replace_inlets(case)
    assert rate(swapped).fouled.duty == pytest.approx(rate(case).fouled.duty, rel=1e-9)


def replace_inlets(case):
    hot, cold = case.outside, case.inside
    inside, outside = cold.model_copy(update={"T_in": hot.T_in}), hot.model_copy(update={"T_in": cold.T_in})
    return case.model_copy(update={"inside": inside, "outside": outside})


def test_split_banks_carry_half_the_flow_each():
    """Two banks split on both sides are two exchangers of half the flow."""
    two = constant(exchanger__banks_in_parallel={"inside": 2, "outside": 2})
    one = constant(inside__flow="1 kg/s", outside__flow="1.25 kg/s")
    a, b = rate(two).fouled, rate(one).fouled
    assert a.duty == pytest.approx(2 * b.duty, rel=1e-9)
    assert a.sides["inside"].velocity == pytest.approx(b.sides["inside"].velocity, rel=1e-9)
    assert a.sides["inside"].dp == pytest.approx(b.sides["inside"].dp, rel=1e-9)


@pytest.mark.parametrize("split", ["inside", "outside"])
@pytest.mark.parametrize("arrangement", ["counter", "co-current"])
def test_one_side_split_over_banks_equals_its_bank_by_bank_solution(split, arrangement):
    case = constant(exchanger__banks_in_parallel={split: 3}, exchanger__arrangement=arrangement)
    rating = rate(case)
    state = rating.fouled
    exact = effectiveness_counter if arrangement == "counter" else effectiveness_cocurrent
    C = {"inside": 2 * 4100.0, "outside": 2.5 * 4200.0}
    other = "outside" if split == "inside" else "inside"
    C_split, C_whole = C[split] / 3, C[other]
    C_min, C_max = sorted((C_split, C_whole))
    eps = float(exact(state.U_dirty * state.area / 3 / C_min, C_min / C_max))
    T_split, T = case.T_in(split), case.T_in(other)
    duty = 0.0
    for _ in range(3):
        q = eps * C_min * (T_split - T)
        T += q / C_whole
        duty += q
    assert state.duty == pytest.approx(abs(duty), rel=1e-9)
    assert rating.methods["effectiveness_ntu"].duty == pytest.approx(abs(duty), rel=1e-9)
    assert isinstance(rating.methods["lmtd"], str)


def test_one_side_split_over_banks_is_held_against_a_required_outlet():
    """Asked for just the outlet it gives, it has a margin of nothing."""
    banks = {"inside": 3}
    T = rate(constant(exchanger__banks_in_parallel=banks)).fouled.T_out["outside"] - 273.15
    state = rate(constant(exchanger__banks_in_parallel=banks, outside__T_out=f"{T:.12g} degC")).fouled
    assert state.margin == pytest.approx(0.0, abs=1e-6)


def test_heat_loss_warms_the_surroundings_not_the_other_stream():
    case = constant(exchanger__heat_loss="20 kW")
    state, without = rate(case).fouled, rate(constant()).fouled
    hot = 2.5 * 4200.0 * (case.T_in("outside") - state.T_out["outside"])
    cold = 2.0 * 4100.0 * (state.T_out["inside"] - case.T_in("inside"))
    assert hot - cold == pytest.approx(20e3, rel=1e-6)
    assert cold == pytest.approx(state.duty, rel=1e-9)
    assert state.duty < without.duty


def test_a_finned_annulus_beats_a_bare_one_for_oil():
    fins = {"count": 24, "height": "6 mm", "thickness": "0.9 mm", "conductivity": "50 W/mK"}
    bare, finned = rate(oil_cooler()), rate(oil_cooler(exchanger__fins=fins))
    assert finned.fouled.duty > 1.5 * bare.fouled.duty
    assert finned.fouled.area == pytest.approx(bare.fouled.area)


def test_a_deposit_of_known_conductivity_narrows_the_bore():
    known = rate(oil_cooler(exchanger__deposit_conductivity="1 W/mK"))
    unknown = rate(oil_cooler())
    assert known.clean.sides["inside"].dp == pytest.approx(unknown.clean.sides["inside"].dp, rel=1e-9)
    ratio = known.fouled.sides["inside"].velocity / known.clean.sides["inside"].velocity
    d = oil_cooler().exchanger.tube_id
    assert ratio == pytest.approx(np.exp(2 * 1.0 * 1.8e-4 / d) ** 2, rel=1e-3)
    assert unknown.fouled.sides["inside"].velocity == pytest.approx(unknown.clean.sides["inside"].velocity, rel=1e-3)


def test_required_duty_sets_required_U_and_margin():
    rating = rate(oil_cooler())
    case, state = rating.case, rating.fouled
    h = case.fluid("outside").enthalpy(np.array([case.T_in("outside"), float(case.outside.T_out)]))
    duty = case.flow("outside") * (h[0] - h[1])
    assert state.required_duty == pytest.approx(duty, rel=1e-12)
    T_cold = case.T_in("inside") + duty / (case.flow("inside") * 4180)
    a, b = case.T_in("outside") - T_cold, float(case.outside.T_out) - case.T_in("inside")
    U = duty / (state.area * (a - b) / np.log(a / b))
    assert state.U_required == pytest.approx(U, rel=1e-3)
    assert state.margin == pytest.approx(state.U_dirty / state.U_required - 1, rel=1e-12)


def test_gas_velocity_and_drop_follow_the_falling_pressure():
    case = oil_cooler(**FIVE["air heated by water"])
    side = rate(case).fouled.sides["outside"]
    assert side.regime in ("turbulent", "mixed", "transitional")
    higher = oil_cooler(**{**FIVE["air heated by water"], "outside__p_in": "10 barg"})
    assert rate(higher).fouled.sides["outside"].dp < side.dp


# --- many points ------------------------------------------------------------------------------------------------------


def test_points_equal_single_ratings_and_keep_their_index():
    case = oil_cooler()
    frame = pd.DataFrame(
        {"inside.flow": [3.0, 2.0, 4.0], "outside.T_in": [340.0, 350.0, 335.0], "inside.R_fouling": [0.0, 1e-4, 3e-4]},
        index=["c", "a", "b"],
    )
    found = rate_points(case, frame)
    assert list(found.index) == ["c", "a", "b"]
    assert (found.problem == "").all()
    for name, row in frame.iterrows():
        one = case.model_copy(
            update={
                "inside": case.inside.model_copy(
                    update={"flow": row["inside.flow"], "R_fouling": row["inside.R_fouling"]}
                ),
                "outside": case.outside.model_copy(update={"T_in": row["outside.T_in"]}),
            }
        )
        state = rate(one).fouled
        assert found.loc[name, "duty"] == pytest.approx(state.duty, rel=1e-7)
        assert found.loc[name, "inside.dp"] == pytest.approx(state.sides["inside"].dp, rel=1e-6)


def test_a_bad_row_carries_a_sentence_and_spoils_no_other():
    case = oil_cooler()
    good = pd.DataFrame({"inside.flow": [3.0, 3.1]})
    frame = pd.DataFrame(
        {
            "inside.flow": [3.0, np.nan, -1.0, 0.0, np.inf, 3.1, 3.0, 3.0],
            "inside.T_in": [300.15, 300.15, 300.15, 300.15, 300.15, 300.15, 500.0, 341.15],
        }
    )
    found, alone = rate_points(case, frame), rate_points(case, good)
    assert list(found.problem == "") == [True, False, False, False, False, True, False, False]
    assert found.duty[[0, 5]].to_numpy() == pytest.approx(alone.duty.to_numpy(), rel=1e-9)
    bad = found[found.problem != ""]
    assert bad.drop(columns="problem").isna().all(axis=None)
    assert "boils" in found.problem[6]


def test_an_unknown_column_is_refused_by_name():
    with pytest.raises(ValueError, match=r"inside\.fow"):
        rate_points(oil_cooler(), pd.DataFrame({"inside.fow": [1.0]}))


@pytest.mark.parametrize(
    "frame",
    [
        pd.DataFrame({"inside.flow": ["3"]}),
        pd.DataFrame({"inside.flow": [True]}),
        pd.DataFrame({"inside.flow": [3 + 1j]}),
        pd.DataFrame({"inside.flow": pd.to_datetime(["2026-01-01"])}),
        pd.DataFrame([[3.0, 3.0]], columns=["inside.flow", "inside.flow"]),
    ],
)
def test_a_column_that_holds_no_numbers_or_stands_twice_is_refused(frame):
    with pytest.raises(CaseError, match=r"inside\.flow"):
        rate_points(oil_cooler(), frame)


def test_absurd_flows_are_told_row_by_row():
    found = rate_points(oil_cooler(), pd.DataFrame({"inside.flow": [1e-300, 1e300, 3.0, 2e4]}))
    assert list(found.problem == "") == [False, False, True, False]
    assert "cannot pass" in found.problem[3]


def test_a_long_exchanger_keeps_to_the_second_law():
    """A tiny stream over fins comes out at the other's inlet, not beyond it."""
    fins = {"count": 24, "height": "6 mm", "thickness": "0.9 mm", "conductivity": "50 W/mK"}
    for flow in ("0.005 kg/s", "0.02 kg/s", "0.1 kg/s"):
        state = rate(oil_cooler(exchanger__fins=fins, outside__flow=flow, outside__T_out=None)).fouled
        assert state.effectiveness <= 1.0 + 1e-9
        assert state.T_out["outside"] >= 300.15 - 1e-6


def test_an_empty_frame_gives_an_empty_frame():
    found = rate_points(oil_cooler(), pd.DataFrame({"inside.flow": np.array([], dtype=float)}))
    assert len(found) == 0
    assert "duty" in found.columns


def test_points_do_not_depend_on_their_company():
    """Chunks and early leavers must not show in the figures."""
    case = oil_cooler()
    random = np.random.default_rng(3)
    frame = pd.DataFrame({"inside.flow": random.uniform(1, 6, 600), "outside.flow": random.uniform(0.3, 3, 600)})
    found = rate_points(case, frame)
    alone = rate_points(case, frame.iloc[[0, 300, 599]])
    assert found.duty.iloc[[0, 300, 599]].to_numpy() == pytest.approx(alone.duty.to_numpy(), rel=1e-8)


def test_a_liquid_that_boils_at_the_wall_is_told_not_rated():
    case = parse_case(
        changed(
            OIL_COOLER,
            inside__T_in="95 degC",
            inside__p_in="0.1 barg",
            inside__flow="1 m3/h",
            outside__fluid={"name": "hot oil", "table": [dict(OIL_TABLE[1]), dict(OIL_TABLE[2], T="250 degC")]},
            outside__T_in="240 degC",
            outside__T_out=None,
        )
    )
    rating = rate(case)
    assert not rating.states
    assert "boils" in rating.problem


def test_solutions_report_whether_they_settled():
    case = oil_cooler()
    point, _ = points_of(case)
    [(_, solved)] = list(solve(case, replace(point)))
    assert solved.residual[0] < 1e-8


def test_another_friction_factor_gives_a_second_opinion_on_turbulent_drops_only():
    water = rate(oil_cooler(**FIVE["water over water"])).fouled.sides
    # Two fits of the same rough-tube data lie within a few per cent; the hydraulic diameter alone makes an annulus low.
    (colebrook,) = water["inside"].second_opinion_drops.values()
    assert colebrook == pytest.approx(water["inside"].dp, rel=0.04)
    (by_d_h,) = water["outside"].second_opinion_drops.values()
    assert 0.85 < by_d_h / water["outside"].dp < 0.99
    assert rate(oil_cooler(**FIVE["laminar oil"])).fouled.sides["outside"].second_opinion_drops == {}
