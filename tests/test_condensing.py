"""Film condensation on and in tubes."""

import ht
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from engine.correlations.condensing import (
    boyko_kruzhilin,
    chato,
    horizontal_tube_film,
    kern_rows,
    labuntsov_turbulent,
    latent_heat,
    nusselt_horizontal,
    nusselt_rows,
    nusselt_vertical,
    shah_1979,
    vertical_film,
)
from engine.proofs.condensing import ROWS

STEAM = dict(k=0.68, rho_l=958.0, rho_v=0.6, mu=2.8e-4)
H_FG = 2.257e6


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row.subject}: {row.what}")
def test_published_values(row):
    assert row.holds(), row.difference()


def test_the_condensate_leaves_subcooled():
    assert latent_heat(2.0e6, 4000.0, 10.0) == 2.0e6 + 27200.0


def test_nusselt_on_a_wall_agrees_with_an_independent_code():
    theirs = ht.condensation.Nusselt_laminar(
        Tsat=373.15, Tw=363.15, rhog=0.6, rhol=958.0, kl=0.68, mul=2.8e-4, Hvap=H_FG, L=0.5
    )
    assert float(nusselt_vertical(**STEAM, h_fg=H_FG, dT=10.0, L=0.5)) == pytest.approx(theirs, rel=1e-3)


@pytest.mark.parametrize("x", [0.0, 0.3, 1.0])
def test_boyko_and_kruzhilin_agree_with_an_independent_code(x):
    m, d, mu, cp, k = 0.05, 0.02, 2e-4, 4200.0, 0.68
    theirs = ht.condensation.Boyko_Kruzhilin(m=m, rhog=1.6, rhol=930.0, kl=k, mul=mu, Cpl=cp, D=d, x=x)
    ours = boyko_kruzhilin(np.asarray(4 * m / (np.pi * d * mu)), cp * mu / k, k, d, 930.0, 1.6, x)
    assert float(ours) == pytest.approx(theirs, rel=1e-9)


@pytest.mark.parametrize("x", [0.05, 0.4, 0.99])
def test_shah_agrees_with_an_independent_code(x):
    m, d, mu, cp, k = 0.05, 0.02, 2e-4, 4200.0, 0.68
    theirs = ht.condensation.Shah(m=m, x=x, D=d, rhol=930.0, mul=mu, kl=k, Cpl=cp, P=3e5, Pc=22.064e6)
    ours = shah_1979(np.asarray(4 * m / (np.pi * d * mu)), cp * mu / k, k, d, 3e5 / 22.064e6, x)
    assert float(ours) == pytest.approx(theirs, rel=1e-9)


def test_the_mean_of_shah_is_the_printed_closed_form():
    """0.55 + 2.09/p_r^0.38 for complete condensation (Shah 1979), which rounds the integral up by 2 %."""
    p_r = 0.05
    liquid = 0.023 * 0.6 / 0.02 * 2e4**0.8 * 2.0**0.4
    mean, _ = quad(lambda x: float(shah_1979(np.asarray(2e4), 2.0, 0.6, 0.02, p_r, x)), 0, 1, points=[0.99])
    assert mean / liquid == pytest.approx(0.55 + 2.09 / p_r**0.38, rel=0.025)


def test_the_mean_of_boyko_and_kruzhilin_is_that_of_the_ends():
    """The mean along a tube whose root term runs linearly in length, as the source takes it."""
    both = [float(boyko_kruzhilin(np.asarray(2e4), 1.3, 0.68, 0.02, 930.0, 1.6, x)) for x in (0.0, 1.0)]
    liquid = 0.021 * 0.68 / 0.02 * 2e4**0.8 * 1.3**0.43
    assert np.mean(both) == pytest.approx(liquid * (1 + (930.0 / 1.6) ** 0.5) / 2)


@pytest.mark.parametrize("Pr", [1.0, 1.75, 5.0, 10.0])
def test_the_vertical_film_never_jumps(Pr):
    dT = np.geomspace(1e-3, 60, 100_000)
    cp = Pr * STEAM["k"] / STEAM["mu"]
    h, Re = vertical_film(**STEAM, cp=cp, h_fg=H_FG, dT=dT, L=3.0)
    assert Re[0] < 30
    assert Re[-1] > 1800
    assert np.abs(np.diff(np.log(h))).max() < 0.005
    assert (np.diff(Re) > 0).all()


def test_the_vertical_film_closes_its_own_balance():
    dT = np.array([0.01, 1.0, 10.0, 50.0])
    h, Re = vertical_film(**STEAM, cp=4200.0, h_fg=H_FG, dT=dT, L=3.0)
    assert pytest.approx(4 * h * 3.0 * dT / (STEAM["mu"] * H_FG)) == Re
    assert h[0] == pytest.approx(float(nusselt_vertical(**STEAM, h_fg=H_FG, dT=0.01, L=3.0)))
    Pr = 4200.0 * STEAM["mu"] / STEAM["k"]
    assert h[-1] == pytest.approx(float(labuntsov_turbulent(Re[-1], Pr, STEAM["k"], STEAM["mu"] / STEAM["rho_l"])))


@given(st.floats(0.01, 50), st.floats(1.05, 5))
def test_a_colder_wall_condenses_more_at_a_lower_coefficient(dT, ratio):
    for relation, length in ((nusselt_vertical, "L"), (nusselt_horizontal, "D"), (chato, "d")):
        h = [float(relation(**STEAM, h_fg=H_FG, dT=x, **{length: 0.02})) for x in (dT, ratio * dT)]
        assert h[1] == pytest.approx(h[0] * ratio**-0.25)


def test_deeper_rows_share_the_condensate_of_the_upper_ones():
    N = np.arange(1, 30)
    assert kern_rows(1) == nusselt_rows(1) == 1.0
    assert (np.diff(kern_rows(N)) < 0).all()
    assert (nusselt_rows(N[1:]) < kern_rows(N[1:])).all()


def test_in_a_horizontal_tube_the_greater_of_the_two_regimes_holds_and_nothing_jumps():
    Re_L = np.geomspace(20, 2e5, 5000)
    h = horizontal_tube_film(**STEAM, cp=4200.0, h_fg=H_FG, dT=5.0, d=0.02, Re_L=Re_L)
    stratified = float(chato(**STEAM, h_fg=H_FG, dT=5.0, d=0.02))
    assert h[0] == pytest.approx(stratified)
    assert h[-1] > 2 * stratified
    assert (np.diff(h) >= 0).all()
    assert np.abs(np.diff(np.log(h))).max() < 0.005


def test_limits_are_reported():
    assert chato.excursions(Re_vapour=np.array([1e4])) == ()
    assert chato.excursions(Re_vapour=np.array([5e4]))[0].limit.high == 35e3
    assert shah_1979.excursions(x=np.array([0.5, 1.0]), p_reduced=np.array([0.001]))[1].limit.argument == "x"
