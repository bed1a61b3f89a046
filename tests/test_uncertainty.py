"""Intervals: first order against sampling and against differences of whole ratings, and what they consist of."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from engine import uncertainty
from engine.casefile import parse_case
from engine.points import points_of
from engine.rating import rate
from engine.solve import solve
from engine.stated import SIDES
from engine.uncertainty import NORMAL_95, QUANTITIES, doubts, propagate
from tests.cases import CONSTANT_COLD, CONSTANT_HOT, OIL_COOLER, changed, constant, oil_cooler

TURBULENT = {"inside": "inside:gnielinski_turbulent", "outside": "outside:annulus_turbulent"}
TEMPERATURES = ("inside.T_out", "outside.T_out")
TRANSITION = {
    "inside__fluid": {"solution": "ethylene glycol", "mass_fraction": "40 %"},
    "inside__flow": "2.4 t/h",
    "inside__T_in": "5 degC",
    "outside__fluid": "Water",
    "outside__T_in": "25 degC",
    "outside__T_out": None,
}


def of_case(case, **how):
    return propagate(case, rate(case), **how)


def log_change(name: str, up: dict, down: dict) -> float:
    """Half the change of ln duty between two whole ratings."""
    duty = [rate(constant(**changes)).states[name].duty for changes in (up, down)]
    return float(np.log(duty[0] / duty[1]) / 2)


@pytest.fixture(scope="module")
def plain():
    return of_case(constant())


# The width


def test_first_order_agrees_with_sampling(plain):
    sampled = of_case(constant(), samples=4000, seed=1)
    for state in ("clean", "fouled"):
        for quantity in QUANTITIES:
            (low, high), (drawn_low, drawn_high) = plain[state].of[quantity], sampled[state].of[quantity]
            assert drawn_high - drawn_low == pytest.approx(high - low, rel=0.08), quantity
            assert drawn_low == pytest.approx(low, abs=0.06 * (high - low)), quantity
            assert drawn_high == pytest.approx(high, abs=0.06 * (high - low)), quantity
            assert sampled[state].sd[quantity] == pytest.approx(plain[state].sd[quantity], rel=0.06), quantity


def test_sampling_repeats_itself_and_follows_its_seed():
    first, again, other = (of_case(constant(), samples=200, seed=seed)["fouled"].of for seed in (3, 3, 4))
    assert first == again
    assert first != other


def test_films_drawn_at_random_fall_into_the_interval(monkeypatch):
    """Both relations lognormal, 3000 draws through the batch; nothing but the batch is shared with the interval."""
    case = constant()
    films = [doubt for doubt in doubts(case, rate(case)) if doubt.path in TURBULENT.values()]
    assert len(films) == 2
    monkeypatch.setattr(uncertainty, "doubts", lambda case, rating: films)
    found = of_case(case)["fouled"]
    n = 3000
    point, _ = points_of(case)
    random = np.random.default_rng(7)
    factors = {film.path: random.lognormal(0.0, film.sd, n) for film in films}
    drawn = {quantity: np.empty(n) for quantity in ("duty", "U_dirty", "inside.T_out")}
    for rows, solved in solve(case, replace(point.part(np.zeros(n, dtype=int)), factors=factors)):
        assert not any(solved.problem)
        drawn["duty"][rows], drawn["U_dirty"][rows] = solved.duty, solved.U
        drawn["inside.T_out"][rows] = solved.T_out["inside"]
    for quantity, values in drawn.items():
        low, high = found.of[quantity]
        assert 0.93 < np.mean((low <= values) & (values <= high)) < 0.97, quantity


def test_without_doubt_an_interval_has_no_width(monkeypatch):
    case = constant()
    rating = rate(case)
    certain = [replace(doubt, sd=0.0) for doubt in doubts(case, rating)]
    for none in ([], certain):
        monkeypatch.setattr(uncertainty, "doubts", lambda case, rating, none=none: none)
        for state, found in propagate(case, rating).items():
            assert found.contributors == ()
            assert set(found.sd.values()) == {0.0}
            for quantity, (low, high) in found.of.items():
                assert low == high, quantity
            assert found.of["duty"][0] == pytest.approx(rating.states[state].duty, rel=1e-9)


def test_intervals_lie_about_the_rating(plain):
    rating = rate(constant())
    for name, state in rating.states.items():
        found = plain[name]
        centre = {"duty": state.duty, "U_clean": state.U_clean, "U_dirty": state.U_dirty, "mtd": state.mtd}
        centre |= {f"{side}.{key}": getattr(state.sides[side], key) for side in SIDES for key in ("h", "dp")}
        for quantity, value in centre.items():
            low, high = found.of[quantity]
            assert np.sqrt(low * high) == pytest.approx(value, rel=1e-8)
            assert np.log(high / low) == pytest.approx(2 * NORMAL_95 * found.sd[quantity], rel=1e-9)
        for side in SIDES:
            low, high = found.of[f"{side}.T_out"]
            assert (low + high) / 2 == pytest.approx(state.T_out[side], abs=1e-6)
            assert high - low == pytest.approx(2 * NORMAL_95 * found.sd[f"{side}.T_out"], rel=1e-9)


def test_a_relation_alone_gives_its_own_scatter_to_its_film(monkeypatch):
    case = constant()
    for side, path in TURBULENT.items():
        (film,) = [doubt for doubt in doubts(case, rate(case)) if doubt.path == path]
        with monkeypatch.context() as patch:
            patch.setattr(uncertainty, "doubts", lambda case, rating, film=film: [film])
            found = of_case(case)["clean"]
        # The film is the film's alone but for the wall's temperature, which moves its viscosity: here there is none.
        assert found.sd[f"{side}.h"] == pytest.approx(film.sd, rel=0.01)
        other = "outside" if side == "inside" else "inside"
        assert found.sd[f"{other}.h"] < 0.01 * film.sd
        assert found.sd[f"{side}.dp"] < 1e-9


# Against differences of whole ratings


@pytest.mark.parametrize("side", SIDES)
@pytest.mark.parametrize("state", ["clean", "fouled"])
def test_a_film_contributes_what_two_ratings_differ_by(plain, side, state):
    (film,) = [c for c in plain[state].contributors if c.doubt.path == TURBULENT[side]]
    up, down = ({"exchanger__film_factor": {side: float(np.exp(z * film.doubt.sd))}} for z in (1, -1))
    change = log_change(state, up, down)
    assert film.duty_sd == pytest.approx(change * rate(constant()).states[state].duty, rel=1e-4)
    assert film.share == pytest.approx((change / plain[state].sd["duty"]) ** 2, rel=2e-4)


@pytest.mark.parametrize("name", ["rho", "cp", "k", "mu"])
def test_a_property_contributes_what_two_ratings_differ_by(name):
    # Flow by mass, so that density moves no flow.
    found = of_case(constant())["fouled"]
    doubt = next(d for d in doubts(constant(), rate(constant())) if d.path == f"outside:{name}")
    figures = CONSTANT_HOT["constant"]
    number, unit = figures[name].split(" ", 1)
    up, down = (
        {
            "outside__fluid": {
                "name": "hot",
                "constant": {**figures, name: f"{float(number) * np.exp(z * doubt.sd)} {unit}"},
            }
        }
        for z in (1, -1)
    )
    change = log_change("fouled", up, down)
    of = [c for c in found.contributors if c.doubt.path == doubt.path]
    found_change = of[0].duty_sd / rate(constant()).fouled.duty if of else 0.0
    assert found_change == pytest.approx(abs(change), rel=2e-3, abs=2e-6)


def test_a_stated_flow_contributes_what_two_ratings_differ_by():
    found = of_case(constant(outside__flow="2.5 kg/s ± 4 %"))["fouled"]
    (flow,) = [c for c in found.contributors if c.doubt.path == "outside.flow"]
    up, down = ({"outside__flow": f"{2.5 * np.exp(z * 0.04)} kg/s"} for z in (1, -1))
    assert flow.duty_sd == pytest.approx(log_change("fouled", up, down) * rate(constant()).fouled.duty, rel=1e-4)
    assert flow.doubt.origin == "as stated"


def test_a_volume_flow_passes_its_doubt_on_by_mass():
    base = {"inside__flow": "7.2 m3/h ± 3 %"}
    case = constant(**base)
    (flow,) = [doubt for doubt in doubts(case, rate(case)) if doubt.path == "inside.flow"]
    assert flow.sd == pytest.approx(0.03 * 990.0 * 7.2 / 3600, rel=1e-9)


# What is stated


@pytest.mark.parametrize(
    ("key", "without", "with_doubt"),
    [
        ("outside__flow", "2.5 kg/s", "2.5 kg/s ± 5 %"),
        ("outside__T_in", "80 degC", "80 degC ± 2 K"),
        ("inside__T_in", "20 degC", "20 degC ± 2 K"),
        ("inside__R_fouling", "0.0003 m2K/W", "0.0003 m2K/W ± 30 %"),
    ],
)
def test_a_stated_doubt_widens_the_duty(key, without, with_doubt):
    narrow, wide = (of_case(constant(**{key: figure}))["fouled"] for figure in (without, with_doubt))
    assert wide.sd["duty"] > 1.03 * narrow.sd["duty"]
    assert key.replace("__", ".") in {c.doubt.path for c in wide.contributors}
    assert key.replace("__", ".") not in {c.doubt.path for c in narrow.contributors}


def test_a_doubt_of_the_fouling_leaves_the_clean_state_alone():
    narrow, wide = (of_case(constant(inside__R_fouling=figure)) for figure in ("0.0003 m2K/W", "0.0003 m2K/W ± 30 %"))
    assert wide["clean"].of["duty"] == pytest.approx(narrow["clean"].of["duty"], rel=1e-9)


def test_where_one_way_has_no_answer_the_other_counts():
    """Water at 20 °C ± 25 K: the colder inlet would be ice."""
    case = constant(inside__fluid="Water", inside__T_in="20 degC ± 25 K")
    found = of_case(case)["fouled"]
    assert found.not_propagated == ()
    (inlet,) = [c for c in found.contributors if c.doubt.path == "inside.T_in"]
    warmer = rate(constant(inside__fluid="Water", inside__T_in="45 degC")).fouled.duty
    assert inlet.duty_sd == pytest.approx(
        abs(np.log(warmer / rate(case).fouled.duty)) * rate(case).fouled.duty, rel=1e-4
    )


# What it consists of


@pytest.mark.parametrize(
    "case", [constant(), oil_cooler(), oil_cooler(**TRANSITION)], ids=["constant", "oil", "glycol"]
)
def test_contributors_are_ranked_and_add_up(case):
    for found in of_case(case).values():
        shares = [contributor.share for contributor in found.contributors]
        assert shares == sorted(shares, reverse=True)
        assert all(share > 0 for share in shares)
        assert 0.999 < sum(shares) <= 1.0001
        assert all(contributor.doubt.name and contributor.doubt.shrink for contributor in found.contributors)
        assert len({contributor.doubt.path for contributor in found.contributors}) == len(shares)


def test_every_relation_in_use_and_every_property_has_a_doubt():
    case = oil_cooler()
    rating = rate(case)
    paths = {doubt.path for doubt in doubts(case, rating)}
    for side in SIDES:
        assert {f"{side}:{name}" for name in ("rho", "cp", "mu", "k")} <= paths
        assert {f"{side}:{relation.name}" for relation in rating.fouled.sides[side].relations} <= paths
        assert f"{side}:{case.exchanger.drop_relation(side).name}" in paths
    assert "wall" in paths
    assert "outside.flow" in paths


def test_in_transition_the_distance_between_published_forms_counts():
    case = oil_cooler(**TRANSITION)
    rating = rate(case)
    side = rating.fouled.sides["inside"]
    assert side.regime == "transitional"
    (film,) = [doubt for doubt in doubts(case, rating) if doubt.path == "inside:transition"]
    spread = abs(np.log(side.second_opinions["transition_2013"] / side.h)) / 2
    assert film.sd == pytest.approx(max(spread, 0.15))


def test_typed_properties_are_doubted_more_than_those_of_a_pure_fluid():
    sd = {doubt.path: doubt.sd for doubt in doubts(oil_cooler(), rate(oil_cooler()))}
    for name in ("rho", "cp", "mu", "k"):
        assert sd[f"outside:{name}"] > sd[f"inside:{name}"]


def test_a_rating_without_an_answer_has_no_intervals():
    case = parse_case(
        changed(
            OIL_COOLER,
            inside__fluid=CONSTANT_COLD,
            outside__fluid="Water",
            outside__flow="2 kg/s",
            outside__T_in="5 degC",
            outside__T_out=None,
            inside__T_in="-60 degC",
        )
    )
    rating = rate(case)
    assert "freezes" in rating.problem
    assert propagate(case, rating) == {}
