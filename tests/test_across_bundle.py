"""Shell side: ideal bank, Bell-Delaware, Kern, Gaddis and Gnielinski, Zukauskas."""

import time
from dataclasses import replace

import ht
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from engine.correlations.across_bundle import (
    bell_delaware_drop,
    bell_delaware_film,
    bundle_geometry,
    crossflow_area,
    drop_factors,
    film_factors,
    gaddis_gnielinski_drag,
    gaddis_gnielinski_drop,
    ideal_film,
    kern_area,
    kern_drop,
    kern_equivalent_diameter,
    kern_film,
    leakage_factor,
    over_steps,
    taborek_f,
    taborek_j,
    turbulent_share,
    zukauskas_bank,
)
from engine.proofs.across_bundle import ROWS

ANGLES = (30.0, 45.0, 60.0, 90.0)
DIMENSIONS = dict(
    layout_angle=30.0, shell_id=0.6, bundle_diameter=0.55, tube_od=0.01905, tube_pitch=0.0238125, tubes=400,
    baffle_cut=0.25, baffles=14, baffle_spacing=0.25, inlet_spacing=0.35, outlet_spacing=0.3,
    tube_hole_clearance=0.0004, shell_baffle_clearance=0.0048, sealing_strip_pairs=2,
)  # fmt: skip


def shell(**changes):
    return bundle_geometry(**(DIMENSIONS | changes))


def film(g, Re, Re_mean=None):
    Re = np.asarray(Re, dtype=float)
    G = Re * 1e-3 / g.do
    return bell_delaware_film(g, G=G, Re=Re, Re_mean=Re if Re_mean is None else Re_mean, Pr=7.0, cp=4e3, mu_ratio=0.8)


def drop(g, Re, relation=bell_delaware_drop):
    m = np.asarray(Re, dtype=float) * 1e-3 / g.do * g.Sm / g.flow_share
    return relation(g, m=m, rho=1e3, mu=1e-3, mu_ratio=0.8, Re_mean=Re)


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row.subject}: {row.what}")
def test_published_values(row):
    assert row.holds(), row.difference()


# The ideal bank


@pytest.mark.parametrize("Re", [10.0, 1e2, 1e3, 1e4])
@pytest.mark.parametrize("angle", ANGLES)
def test_rows_of_j_and_f_join_except_for_two_printed_steps(angle, Re):
    """The two steps stand in every copy of the table."""
    genuine = {(45.0, 1e3): 0.0396, (90.0, 1e4): 0.0539}
    below = np.nextafter(Re, 0)
    j_step = float(taborek_j(angle, np.asarray(Re), 1.33) / taborek_j(angle, np.asarray(below), 1.33) - 1)
    f_step = float(taborek_f(angle, np.asarray(Re), 1.33) / taborek_f(angle, np.asarray(below), 1.33) - 1)
    assert abs(f_step) < 0.005
    if (angle, Re) in genuine:
        assert j_step == pytest.approx(genuine[angle, Re], abs=2e-4)
    else:
        assert abs(j_step) < 0.01


@pytest.mark.parametrize(("angle", "staggered"), [(30.0, True), (45.0, True), (60.0, True), (90.0, False)])
def test_the_ideal_bank_agrees_with_zukauskas(angle, staggered):
    ST, SL = {30.0: (1, 0.866), 45.0: (1.414, 0.707), 60.0: (1.732, 0.5), 90.0: (1, 1)}[angle]
    Re = np.geomspace(2e3, 1e5, 50)
    nu_taborek = taborek_j(angle, Re, 1.25) * Re * 5.0 ** (1 / 3)
    nu_zukauskas = zukauskas_bank(Re, 5.0, 1.0, ST, SL, staggered)
    assert np.abs(np.log(nu_taborek / nu_zukauskas)).max() < 0.17


@pytest.mark.parametrize(("angle", "lowest"), [(30.0, 0.85), (45.0, 0.70), (60.0, 0.48), (90.0, 0.95)])
def test_the_two_drags_agree_within_their_scatter(angle, lowest):
    """Taborek gives a row at 60 degrees the loss of one at 30; Gaddis and Gnielinski give it half of that at Re 1e5."""
    Re = np.geomspace(100, 1e5, 50)
    ratio = gaddis_gnielinski_drag(angle, Re, 1.25) / (4 * taborek_f(angle, Re, 1.25))
    assert ratio.min() > lowest
    assert ratio.max() < 1.40


@pytest.mark.parametrize("ST", [0.03, 0.04])
@pytest.mark.parametrize("staggered", [True, False])
def test_zukauskas_agrees_with_an_independent_code(ST, staggered):
    SL = 0.025
    Re = 2e4
    if staggered:
        theirs = ht.conv_tube_bank.Nu_Zukauskas_Bejan(Re, 3.0, 30, SL, ST, Pr_wall=2.0)
        assert float(zukauskas_bank(np.asarray(Re), 3.0, 2 / 3, ST, SL, True)) == pytest.approx(theirs, rel=0.02)
    else:
        assert float(zukauskas_bank(np.asarray(Re), 3.0, 2 / 3, ST, SL, False)) == pytest.approx(
            0.27 * Re**0.63 * 3.0**0.36 * 1.5**0.25
        )


# Bell-Delaware


@pytest.mark.parametrize("angle", ANGLES)
def test_nothing_jumps_where_the_printed_constants_switch(angle):
    g = shell(layout_angle=angle)
    Re = np.linspace(60, 160, 20_001)
    for values in (film(g, Re), drop(g, Re).total, drop(g, Re, gaddis_gnielinski_drop).total):
        assert np.abs(np.diff(np.log(values))).max() < 0.005
    # the mean of the shell decides: a local Re on either side of 100 changes nothing but j
    assert film(g, [90.0, 110.0], Re_mean=500.0) == pytest.approx(
        ideal_film(angle, g.pitch_ratio, G=np.array([90.0, 110.0]) * 1e-3 / g.do, Re=np.array([90.0, 110.0]), Pr=7.0,
                   cp=4e3, mu_ratio=0.8) * film_factors(g, 500.0).product
    )  # fmt: skip


def test_constants_are_the_printed_ones_outside_the_blend():
    assert turbulent_share(np.array([1.0, 80.0, 100.0, 125.0, 1e4])) == pytest.approx([0, 0, 0.5, 1, 1], abs=1e-12)
    g = shell(sealing_strip_pairs=0)
    assert film_factors(g, 50.0).Jb == pytest.approx(np.exp(-1.35 * g.Fbp))
    assert film_factors(g, 500.0).Jb == pytest.approx(np.exp(-1.25 * g.Fbp))
    assert drop_factors(g, 50.0).Rb == pytest.approx(np.exp(-4.5 * g.Fbp))
    assert drop_factors(g, 500.0).Rb == pytest.approx(np.exp(-3.7 * g.Fbp))
    even = shell(inlet_spacing=0.25, outlet_spacing=0.25)
    assert film_factors(even, 500.0).Js == pytest.approx(1.0)
    assert drop_factors(even, 500.0).Rs == pytest.approx(2.0)


def test_without_leakage_and_bypass_only_cut_spacing_and_laminar_factors_are_left():
    tight = shell(tube_hole_clearance=0.0, shell_baffle_clearance=0.0, sealing_strip_pairs=50)
    for Re in (15.0, 60.0, 1e4):
        J = film_factors(tight, Re)
        assert J.Jl == 1.0
        assert J.Jb == 1.0
        assert J.product == pytest.approx(J.Jc * J.Js * J.Jr)
    assert leakage_factor(tight) == 1.0


@given(st.floats(0, 20), st.floats(0, 20), st.floats(1.0, 5e4), st.sampled_from(ANGLES))
def test_more_sealing_strips_never_lower_h_nor_the_drop(few, more, Re, angle):
    less, greater = (shell(layout_angle=angle, sealing_strip_pairs=n) for n in sorted((few, more)))
    assert film(greater, Re) >= film(less, Re) * (1 - 1e-12)
    assert drop(greater, Re).total >= drop(less, Re).total * (1 - 1e-12)


@given(st.floats(0, 0.01), st.floats(0, 0.01), st.floats(0, 0.001))
def test_a_wider_gap_at_the_shell_never_raises_h_nor_the_drop(a, b, hole):
    narrow, wide = (shell(shell_baffle_clearance=gap, tube_hole_clearance=hole) for gap in sorted((a, b)))
    assert drop(wide, 1e4).total <= drop(narrow, 1e4).total * (1 + 1e-12)
    assert film(wide, 1e4) <= film(narrow, 1e4) * (1 + 1e-12)


@pytest.mark.parametrize("relation", [bell_delaware_drop, gaddis_gnielinski_drop])
@pytest.mark.parametrize("angle", ANGLES)
def test_the_drop_grows_with_flow_to_the_power_of_nearly_two(angle, relation):
    Re = np.geomspace(1.01e3, 9.9e4, 200)
    total = drop(shell(layout_angle=angle), Re, relation).total
    exponent = np.diff(np.log(total)) / np.diff(np.log(Re))
    steps = np.digitize(1e4, Re)
    exponent = np.delete(exponent, steps - 1)
    assert exponent.min() > 1.78
    assert exponent.max() < 2.03


def test_the_parts_of_the_drop_add_up_and_keep_the_shape_of_the_points():
    g = shell()
    Re = np.full((5, 3), 2e4)
    parts = drop(g, Re)
    assert parts.total == pytest.approx(parts.crossflow + parts.window + parts.ends)
    assert parts.total.shape == (5, 3)
    assert bell_delaware_film(
        g, G=np.ones((5, 1)), Re=Re, Re_mean=np.full((5, 1), 2e4), Pr=Re / 1e4, cp=4e3, mu_ratio=1.0
    ).shape == (5, 3)


def test_an_f_shell_halves_every_area_and_meets_each_baffle_twice():
    e, f = shell(), shell(shell_passes=2)
    for area in ("Sm", "Sw", "Ssb", "Stb", "Sb"):
        assert getattr(f, area) == pytest.approx(getattr(e, area) / 2)
    assert f.Nb == 2 * e.Nb
    assert (f.rs, f.rlm, f.Fbp, f.rss, f.Dw, f.Fc) == (e.rs, e.rlm, e.Fbp, e.rss, e.Dw, e.Fc)
    assert f.mass_velocity(3.0) == pytest.approx(2 * e.mass_velocity(3.0))


def test_a_j_shell_is_half_the_flow_over_half_the_length():
    j, half = shell(flow_share=0.5, length_share=0.5), shell(baffles=7)
    assert bell_delaware_drop(j, m=40.0, rho=800.0, mu=1e-3, mu_ratio=1.0, Re_mean=1e4).total == pytest.approx(
        bell_delaware_drop(half, m=20.0, rho=800.0, mu=1e-3, mu_ratio=1.0, Re_mean=1e4).total
    )


@pytest.mark.parametrize("angle", ANGLES)
def test_areas_and_rows_of_the_layouts(angle):
    g = shell(layout_angle=angle)
    gaps = {30.0: 1.0, 45.0: 2**0.5, 60.0: 2 / 3**0.5, 90.0: 1.0}[angle]
    lanes = g.Dotl - g.do
    assert g.Sm == pytest.approx(g.Lbc * (g.Ds - g.Dotl + lanes * gaps * (1 - g.do / g.pt)))
    assert g.Sm == pytest.approx(crossflow_area(angle, g.Ds, g.Dotl, g.do, g.pt, g.Lbc))
    rows = {30.0: 0.75**0.5, 45.0: 0.5**0.5, 60.0: 0.5, 90.0: 1.0}[angle]
    assert g.Ncc == pytest.approx((g.Ds * 0.5) / (rows * g.pt))
    assert g.Fc + 2 * g.Fw == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("changes", "sentence"),
    [
        (dict(layout_angle=50.0), "50 degrees is not offered; offered are 30, 45, 60 and 90"),
        (dict(tube_od=0.03), "below tube_pitch"),
        (dict(bundle_diameter=0.61), "bundle_diameter must lie between tube_od and shell_id"),
        (dict(baffle_cut=0.01), "baffle_cut must leave tubes in the window"),
        (dict(baffle_cut=0.5), "baffle_cut"),
        (dict(baffle_cut=float("nan")), "baffle_cut"),
        (dict(baffles=0), "at least 1 baffle"),
        (dict(tubes=0), "at least 1 tube"),
        (dict(inlet_spacing=0.0), "spacing must be above 0"),
        (dict(tube_hole_clearance=-1e-4), "clearances must not be negative"),
        (dict(tubes=2000), "fill the baffle window"),
    ],
)
def test_contradicting_dimensions_are_refused_with_a_sentence(changes, sentence):
    with pytest.raises(ValueError, match=sentence):
        shell(**changes)


def test_limits_are_reported():
    outside = bell_delaware_film.excursions(
        Re=np.array([1e4, 2e5]), pitch_ratio=np.array(1.2), baffle_cut=np.array(0.25)
    )
    assert [(e.limit.argument, e.share) for e in outside] == [("Re", 0.5), ("pitch_ratio", 1.0)]
    assert bell_delaware_film.excursions(Re=np.array([1e3]), pitch_ratio=np.array(1.25)) == ()
    assert kern_film.excursions(Re=np.array([100.0]))[0].lowest == 100.0


def test_the_common_pitch_ratios_lie_inside_the_limits():
    for od, pitch in ((0.01905, 0.0238125), (0.0254, 0.03175), (0.020, 0.025), (0.01905, 0.028575)):
        g = shell(tube_od=od, tube_pitch=pitch, tubes=250)
        assert bell_delaware_film.excursions(pitch_ratio=np.array(g.pitch_ratio)) == ()


def test_factors_agree_with_an_independent_code():
    g = shell()
    bell = ht.conv_tube_bank
    J = film_factors(g, 1e4)
    assert pytest.approx(bell.baffle_correction_Bell(g.Fc, method="HEDH"), rel=1e-9) == J.Jc
    assert pytest.approx(bell.baffle_leakage_Bell(g.Ssb, g.Stb, g.Sm, method="HEDH"), rel=1e-9) == J.Jl
    theirs = bell.bundle_bypassing_Bell(g.Fbp, 2, g.Ncc, laminar=False, method="HEDH")
    assert pytest.approx(theirs, rel=1e-9) == J.Jb
    assert pytest.approx(bell.unequal_baffle_spacing_Bell(14, 0.25, 0.35, 0.3), rel=1e-9) == J.Js
    laminar = film_factors(g, 50.0)
    assert pytest.approx(bell.bundle_bypassing_Bell(g.Fbp, 2, g.Ncc, laminar=True, method="HEDH")) == laminar.Jb
    assert pytest.approx(bell.unequal_baffle_spacing_Bell(14, 0.25, 0.35, 0.3, laminar=True)) == laminar.Js
    few = replace(g, Ncc=8.0, Ncw=2.0, Nb=14.0)
    for Re in (10.0, 40.0, 99.0):
        assert film_factors(few, Re).Jr == pytest.approx(bell.laminar_correction_Bell(Re, 150), rel=1e-9)


# Kern


@pytest.mark.parametrize("Re_aim", [2e3, 2e4, 2e5])
def test_kern_drop_agrees_with_an_independent_code(Re_aim):
    """The closed form for f against the library's fit of Kern's chart, square layout."""
    De, Gs = kern_equivalent_diameter(90.0, 0.025, 0.032), 300.0
    mu = De * Gs / Re_aim
    m = Gs * kern_area(0.6, 0.025, 0.032, 0.2)
    theirs = ht.conv_tube_bank.dP_Kern(
        m=m, rho=800.0, mu=mu, DShell=0.6, LSpacing=0.2, pitch=0.032, Do=0.025, NBaffles=19
    )
    ours = kern_drop(De, shell_id=0.6, crossings=20, Gs=Gs, rho=800.0, Re=np.asarray(Re_aim), mu_ratio=1.0)
    assert float(ours) == pytest.approx(theirs, rel=0.10)


def test_two_shell_passes_halve_kerns_area():
    assert kern_area(0.6, 0.025, 0.032, 0.2, shell_passes=2) == pytest.approx(kern_area(0.6, 0.025, 0.032, 0.2) / 2)


def test_kern_and_bell_delaware_stay_within_a_factor_of_two_of_each_other():
    g = shell()
    De = kern_equivalent_diameter(30.0, g.do, g.pt)
    As = kern_area(g.Ds, g.do, g.pt, g.Lbc)
    for m in (10.0, 30.0, 90.0):
        Re_kern = np.asarray(De * m / As / 1e-3)
        h = kern_film(De, k=0.6, Re=Re_kern, Pr=7.0, mu_ratio=1.0)
        Re = np.asarray(g.do * g.mass_velocity(m) / 1e-3)
        bell = bell_delaware_film(g, G=g.mass_velocity(m), Re=Re, Re_mean=Re, Pr=7.0, cp=7.0 * 0.6 / 1e-3, mu_ratio=1.0)
        assert 0.5 < float(h / bell) < 2.0


def test_the_film_is_fast():
    rng = np.random.default_rng(1)
    Re, Pr = 10 ** rng.uniform(1, 5, (1000, 24)), rng.uniform(1, 100, (1000, 24))
    mean = Re.mean(axis=1, keepdims=True)
    g, best = shell(), np.inf
    for _ in range(10):
        start = time.perf_counter()
        bell_delaware_film(g, G=mean, Re=Re, Re_mean=mean, Pr=Pr, cp=4e3, mu_ratio=Pr)
        best = min(best, time.perf_counter() - start)
    assert best / Re.size < 0.3e-6


@pytest.mark.parametrize("angle", [30.0, 45.0, 60.0, 90.0])
def test_a_cell_is_led_over_a_step_and_keeps_the_printed_rows_elsewhere(angle):
    for end in (1e1, 1e2, 1e3, 1e4):
        near = end * np.exp(np.linspace(-0.03, 0.03, 601))
        led = taborek_j(angle, near, 1.33) * over_steps(angle, near)
        assert np.abs(np.diff(np.log(led))).max() < 1e-3
        assert (over_steps(angle, np.array([0.98, 1.02]) * end) == 1.0).all()
