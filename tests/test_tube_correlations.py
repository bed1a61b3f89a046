"""Films and friction in tubes and annuli: published values, limits, and the joints between regimes."""

import fluids
import ht
import numpy as np
import pytest
from scipy import linalg

from engine.correlations import REGISTER
from engine.correlations.annulus import (
    ANNULUS_RELATIONS,
    FinnedAnnulus,
    annulus_developed,
    annulus_laminar,
    annulus_turbulent,
    excursions_annulus,
    fin_efficiency,
    finned_annulus,
    friction_annulus,
    nusselt_annulus,
    nusselt_finned_annulus,
    reynolds_star,
)
from engine.correlations.inside_tubes import (
    LAMINAR,
    TRANSITIONAL,
    TUBE_RELATIONS,
    TURBULENT,
    Wall,
    dittus_boelter,
    excursions_tube,
    gnielinski_1976,
    gnielinski_laminar,
    gnielinski_turbulent,
    nusselt_tube,
    transition_2013,
)
from engine.correlations.losses import churchill, colebrook, friction_tube, haaland, wall_factor_friction
from engine.proofs import annulus, inside_tubes, losses

ROWS = inside_tubes.ROWS + annulus.ROWS + losses.ROWS
LIQUIDS = [Wall(mu=r, Pr=r) for r in (0.4, 1.0, 2.5)]
GASES = [Wall(T=r, gas=True) for r in (0.7, 1.5)]


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row.subject}: {row.what}")
def test_value_is_reproduced(row):
    assert row.holds(), f"{row.difference():.3g} off, allowed {row.tolerance:g}: {row.source}"


def test_every_relation_has_a_check_value():
    modules = {"engine.correlations." + name for name in ("inside_tubes", "annulus", "losses")}
    ours = {name for name, relation in REGISTER.items() if relation.formula.__module__ in modules}
    assert len(ours) > 25
    assert ours - {row.subject for row in ROWS} == set()


# Other libraries, over a range instead of at one value


def test_single_relations_agree_with_another_library():
    Re, ratio, Pr = np.meshgrid(np.geomspace(5e3, 1e7, 7), [0.0, 1e-5, 1e-3, 0.05], [0.7, 6.0, 100.0], indexing="ij")
    for ours, theirs in (
        (churchill(Re, ratio), np.vectorize(fluids.Churchill_1977)(Re, ratio)),
        (colebrook(Re, ratio), np.vectorize(fluids.Clamond)(Re, ratio)),
        (haaland(Re, ratio), np.vectorize(fluids.Haaland)(Re, ratio)),
        (dittus_boelter(Re, Pr, True), np.vectorize(ht.turbulent_Dittus_Boelter)(Re, Pr)),
        (
            gnielinski_1976(Re, Pr),
            np.vectorize(ht.turbulent_Gnielinski)(Re, Pr, (0.79 * np.log(Re) - 1.64) ** -2.0),
        ),
    ):
        np.testing.assert_allclose(ours, theirs, rtol=1e-9)


def inner_wall_eigenvalue(a, order=64):
    """Developed Nu of an annulus, inner wall isothermal, outer wall adiabatic: (r R')' + beta r u R = 0."""
    j = np.arange(order + 1)
    x = np.cos(np.pi * j / order)
    weight = np.where((j == 0) | (j == order), 2.0, 1.0) * (-1.0) ** j
    D = np.outer(weight, 1.0 / weight) / (np.subtract.outer(x, x) + np.eye(order + 1))
    D = (D - np.diag(D.sum(axis=1))) * 2.0 / (1.0 - a)
    r = a + (1.0 - a) * (x + 1.0) / 2.0
    u = 1.0 - r**2 - (1.0 - a**2) * np.log(r) / np.log(a)
    last = np.eye(order + 1)[-1]
    flow = linalg.solve(np.vstack([D[:-1], last]), np.append((u * r)[:-1], 0.0))[0]
    u *= (1.0 - a**2) / 2.0 / flow
    A, B = np.diag(1.0 / r) @ D @ np.diag(r) @ D, -np.diag(u)
    A[0], B[0], A[-1], B[-1] = D[0], 0.0, last, 0.0
    beta = linalg.eig(A, B, right=False)
    beta = beta.real[np.isfinite(beta) & (np.abs(beta.imag) < 1e-6 * np.abs(beta))]
    return beta[beta > 0.0].min() * (1.0 - a**2) * (1.0 - a) / a


@pytest.mark.parametrize("a", [0.02, 0.028, 0.04, 0.085, 0.22, 0.45, 0.75, 0.85, 0.98, 0.999])
def test_developed_annulus_is_exact_between_the_rows_of_its_table(a):
    assert annulus_developed(a) == pytest.approx(inner_wall_eigenvalue(a), rel=4e-5)


def test_fin_efficiency_solves_the_fin_equation():
    h, k, t, H, n = 300.0, 40.0, 0.9e-3, 12.7e-3, 2000
    dx = H / n
    m2 = 2.0 * h / (k * t)
    band = np.zeros((3, n))
    band[0, 1:], band[1], band[2, :-1] = 1.0, -2.0 - m2 * dx**2, 1.0
    band[2, -2] = 2.0  # adiabatic tip by reflection
    theta = np.append(1.0, linalg.solve_banded((1, 1), band, np.append(-1.0, np.zeros(n - 1))))
    assert fin_efficiency(h, k, t, H) == pytest.approx(np.trapezoid(theta, dx=dx) / H, rel=1e-5)


# Cells of a leg


@pytest.mark.parametrize("Re", [300.0, 2299.0, 5000.0, 4e4])
def test_cells_of_a_leg_sum_to_the_printed_mean(Re):
    edges = np.array([0.0, 0.05, 0.4, 1.0, 2.7, 6.0])
    for film in (
        lambda x1, x2: nusselt_tube(Re, 7.0, 0.02, x1, x2)[0],
        lambda x1, x2: nusselt_annulus(Re, 7.0, 0.02, 0.55, x1, x2)[0],
    ):
        cells = film(edges[:-1], edges[1:])
        assert np.sum(cells * np.diff(edges)) / 6.0 == pytest.approx(film(0.0, 6.0), rel=1e-12)
        assert np.all(np.diff(cells) < 0.0)


def test_whole_leg_is_the_relation_as_printed():
    Re_laminar, Re_turbulent, Pr, d_over_L, a = 1500.0, 3e4, 9.0, 0.01, 0.6
    assert nusselt_tube(Re_laminar, Pr, d_over_L, 0.0, 1.0)[0] == gnielinski_laminar(Re_laminar, Pr, d_over_L)
    assert nusselt_tube(Re_turbulent, Pr, d_over_L, 0.0, 1.0)[0] == pytest.approx(
        gnielinski_turbulent(Re_turbulent, Pr, d_over_L), rel=1e-14
    )
    assert nusselt_annulus(Re_laminar, Pr, d_over_L, a, 0.0, 1.0)[0] == annulus_laminar(Re_laminar, Pr, d_over_L, a)
    assert nusselt_annulus(Re_turbulent, Pr, d_over_L, a, 0.0, 1.0)[0] == pytest.approx(
        annulus_turbulent(Re_turbulent, Pr, d_over_L, a), rel=1e-14
    )


# Regimes and their joints


def test_regime_codes_change_at_the_limits():
    Re = np.array([100.0, 2299.9, 2300.0, 9999.9, 1e4, 1e6])
    codes = [LAMINAR, LAMINAR, TRANSITIONAL, TRANSITIONAL, TURBULENT, TURBULENT]
    assert nusselt_tube(Re, 5.0, 0.02, 0.0, 3.0)[1].tolist() == codes
    assert nusselt_annulus(Re, 5.0, 0.02, 0.6, 0.0, 3.0)[1].tolist() == codes
    assert nusselt_tube(4000.0, 5.0, 0.02, 0.0, 3.0, joined_by=transition_2013)[1] == TURBULENT


def films(wall, factors=None):
    for Pr in (0.7, 5.0, 60.0, 500.0):
        for L in (20.0, 300.0, 3000.0):
            for x1, x2 in ((0.0, L), (0.4 * L, 0.45 * L)):
                yield lambda Re, Pr=Pr, x1=x1, x2=x2: nusselt_tube(Re, Pr, 1.0, x1, x2, wall=wall, factors=factors)[0]
                yield lambda Re, Pr=Pr, x1=x1, x2=x2: nusselt_annulus(
                    Re, Pr, 1.0, 0.6, x1, x2, wall=wall, factors=factors
                )[0]


def frictions(wall):
    for ratio in (0.0, 1e-3, 2e-2):
        yield lambda Re, ratio=ratio: friction_tube(Re, ratio, wall=wall)
        yield lambda Re, ratio=ratio: friction_annulus(Re, 0.6, ratio, wall=wall)


@pytest.mark.parametrize("wall", LIQUIDS + GASES)
def test_nothing_jumps_between_laminar_and_turbulent(wall):
    """Steps shrink with the spacing: a jump would stay."""
    Re = 2000.0 * 1.001 ** np.arange(1800)
    for quantity in (*films(wall), *films(wall, factors=(0.9, 1.2, 1.05)), *frictions(wall)):
        here, close, there = quantity(Re), quantity(Re * (1.0 + 1e-8)), quantity(Re * 1.001)
        assert np.max(np.abs(close / here - 1.0)) < 1e-6
        assert np.max(np.abs(there / here - 1.0)) < 0.02


@pytest.mark.parametrize("wall", LIQUIDS + GASES)
def test_film_rises_and_friction_stays_within_half_a_percent_a_step(wall):
    Re = 2000.0 * 1.001 ** np.arange(1800)
    for Pr in (0.7, 5.0):
        for film in (
            nusselt_tube(Re, Pr, 1.0, 0.0, 200.0, wall=wall)[0],
            nusselt_annulus(Re, Pr, 1.0, 0.6, 0.0, 200.0, wall=wall)[0],
        ):
            assert np.all(np.diff(film) > 0.0)
            assert np.max(np.diff(film) / film[:-1]) < 0.005
    for friction in frictions(wall):
        assert np.max(np.abs(np.diff(friction(Re)) / friction(Re)[:-1])) < 0.005


def test_mixed_regimes_in_one_array_equal_one_value_at_a_time():
    rng = np.random.default_rng(7)
    Re, Pr, ratio = rng.uniform([[[200.0]], [[1.0]], [[0.5]]], [[[2e4]], [[40.0]], [[2.0]]], (3, 6, 8))
    edges = np.linspace(0.0, 5.0, 9)
    wall = Wall(mu=ratio, Pr=ratio)
    Nu, regime = nusselt_tube(Re, Pr, 0.02, edges[:-1], edges[1:], wall=wall)
    Nu_a, regime_a = nusselt_annulus(Re, Pr, 0.02, 0.5, edges[:-1], edges[1:], wall=wall)
    assert set(regime.ravel()) == {LAMINAR, TRANSITIONAL, TURBULENT}
    for i, j in np.ndindex(Re.shape):
        one = Wall(mu=ratio[i, j], Pr=ratio[i, j])
        tube = nusselt_tube(Re[i, j], Pr[i, j], 0.02, edges[j], edges[j + 1], wall=one)
        ring = nusselt_annulus(Re[i, j], Pr[i, j], 0.02, 0.5, edges[j], edges[j + 1], wall=one)
        assert (Nu[i, j], regime[i, j]) == (pytest.approx(tube[0], rel=1e-12), tube[1])
        assert (Nu_a[i, j], regime_a[i, j]) == (pytest.approx(ring[0], rel=1e-12), ring[1])


def test_each_factor_multiplies_its_own_regime():
    Re = np.array([500.0, 6000.0, 5e4])
    plain = nusselt_tube(Re, 5.0, 0.02, 0.0, 3.0)[0]
    scattered = nusselt_tube(Re, 5.0, 0.02, 0.0, 3.0, factors=(1.1, 1.2, 1.3))[0]
    np.testing.assert_allclose(scattered / plain, [1.1, 1.2, 1.3])
    per_point = (np.array([[1.0], [2.0]]), 1.0, 1.0)
    assert nusselt_tube(Re, 5.0, 0.02, 0.0, 3.0, factors=per_point)[0][1, 0] == pytest.approx(2.0 * plain[0])


# The wall


def test_wall_factors_of_liquids_and_gases():
    Re = np.array([1000.0, 5e4])
    plain = nusselt_tube(Re, 5.0, 0.02, 0.0, 3.0)[0]

    def ratio(wall):
        return nusselt_tube(Re, 5.0, 0.02, 0.0, 3.0, wall=wall)[0] / plain

    np.testing.assert_allclose(ratio(Wall(mu=0.5, Pr=0.6, T=1.1)), [0.5**-0.14, 0.6**-0.11])
    np.testing.assert_allclose(ratio(Wall(mu=1.2, Pr=1.0, T=1.3, gas=True)), [1.0, 1.3**-0.45])
    np.testing.assert_allclose(ratio(Wall(mu=0.8, Pr=1.0, T=0.8, gas=True)), [1.0, 1.0])


def test_friction_at_the_wall():
    np.testing.assert_allclose(
        wall_factor_friction(np.array([1000.0, 4000.0, 1e5]), 0.5), 0.5 ** np.array([0.58, 0.25, 0.25])
    )
    assert friction_tube(1e5, 1e-4, wall=Wall(mu=1.3, T=1.3, gas=True)) == churchill(1e5, 1e-4)


# Limits


def test_laminar_annulus_drop_is_not_that_of_a_tube():
    a = 0.025 / 0.045
    assert friction_annulus(56.0, a, 1e-3) * 56.0 == pytest.approx(95.457, rel=1e-4)
    assert friction_annulus(56.0, 0.999, 0.0) * 56.0 == pytest.approx(96.0, rel=1e-5)
    assert reynolds_star(1.0, 0.999) == pytest.approx(2.0 / 3.0, rel=1e-5)


def test_roughness_enters_friction_in_turbulent_flow_only():
    assert friction_annulus(1000.0, 0.6, 0.03) == friction_annulus(1000.0, 0.6, 0.0)
    assert friction_annulus(1e5, 0.6, 0.03) > 1.5 * friction_annulus(1e5, 0.6, 0.0)


def test_excursions_judge_each_relation_only_where_it_is_used():
    Re = np.array([[1000.0, 5e4], [2000.0, 5e6]])
    found = {(e.correlation, e.limit.argument): e.share for e in excursions_tube(Re, 5.0, 0.02, 3.0)}
    assert found == {("gnielinski_turbulent", "Re"): 0.25}
    oil = excursions_tube(500.0, 2000.0, 0.02, 3.0, wall=Wall(mu=0.05, Pr=0.01))
    assert {(e.correlation, e.limit.argument) for e in oil} == {
        ("gnielinski_laminar", "Pr"),
        ("wall_factor_liquid_laminar", "mu_ratio"),
    }
    hot = excursions_tube(5e4, 0.7, 0.02, 3.0, wall=Wall(T=2.5, gas=True))
    assert [e.correlation for e in hot] == ["wall_factor_gas_turbulent"]
    narrow = excursions_annulus(500.0, 5.0, 0.01, 0.05, 3.0)
    assert [(e.correlation, e.limit.argument) for e in narrow] == [("annulus_laminar", "a")]
    assert excursions_annulus(5e4, 5.0, 0.01, 0.6, 3.0) == ()


def test_every_regime_has_a_scatter():
    assert [r.scatter for r in TUBE_RELATIONS] == [0.07, 0.15, 0.07]
    assert [r.scatter for r in ANNULUS_RELATIONS] == [0.10, 0.15, 0.10]
    assert (finned_annulus.scatter, churchill.scatter) == (0.30, 0.07)


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        ((0.0, 5.0, 0.02, 0.0, 1.0), "Re must be a number above zero"),
        (([1e4, np.nan], 5.0, 0.02, 0.0, 1.0), "Re must be a number above zero"),
        ((np.inf, 5.0, 0.02, 0.0, 1.0), "Re must be a number above zero"),
        ((1e4, -1.0, 0.02, 0.0, 1.0), "Pr must be a number above zero"),
        ((1e4, 5.0, 0.02, 1.0, 1.0), "0 <= x1 < x2"),
    ],
)
def test_impossible_arguments_are_refused(arguments, says):
    with pytest.raises(ValueError, match=says):
        nusselt_tube(*arguments)


@pytest.mark.parametrize("Re", [0.0, -3.0, np.nan, [5e4, 0.0]])
def test_friction_without_flow_is_refused(Re):
    with pytest.raises(ValueError, match="Re must be a number above zero"):
        friction_tube(Re, 0.0)
    with pytest.raises(ValueError, match="Re must be a number above zero"):
        friction_annulus(Re, 0.6, 0.0)


def test_annulus_outside_its_table_is_refused():
    for a in (0.01, 1.2):
        with pytest.raises(ValueError, match="diameter ratio"):
            annulus_developed(a)


# Longitudinal fins


def test_finned_cross_section():
    fins = FinnedAnnulus(D_o=0.0779, D_i=0.0483, count=24, height=0.0127, thickness=0.89e-3)
    assert fins.flow_area == pytest.approx(np.pi / 4 * (0.0779**2 - 0.0483**2) - 24 * 0.0127 * 0.89e-3)
    wetted = np.pi * 0.0779 + np.pi * 0.0483 - 24 * 0.89e-3 + 24 * (2 * 0.0127 + 0.89e-3)
    assert fins.d_h == pytest.approx(4.0 * fins.flow_area / wetted)
    assert fins.effective_share(1e-9, 50.0) == pytest.approx((fins.unfinned + fins.finned) / fins.bare)
    assert fins.unfinned / fins.bare < fins.effective_share(1e9, 50.0) < 1.0
    assert nusselt_finned_annulus(5e4, 5.0, fins.d_h, 0.0, 6.0)[0] == nusselt_tube(5e4, 5.0, fins.d_h, 0.0, 6.0)[0]


@pytest.mark.parametrize("change", [{"count": 0}, {"height": 0.02}, {"thickness": 0.01}, {"height": -0.001}])
def test_fins_that_do_not_fit_are_refused(change):
    with pytest.raises(ValueError, match="do not fit"):
        FinnedAnnulus(**{"D_o": 0.0779, "D_i": 0.0483, "count": 24, "height": 0.0127, "thickness": 0.89e-3, **change})
