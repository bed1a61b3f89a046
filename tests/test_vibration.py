"""Screening of tube vibration."""

import numpy as np
import pytest
from scipy.optimize import brentq

from engine.exchangers.vibration import (
    BEAM_EIGENVALUES,
    CONNORS_SETS,
    acoustic_frequency,
    added_mass_coefficient,
    critical_velocity,
    mass_per_length,
    natural_frequency,
    sets_exceeded,
    shedding_frequencies,
)
from engine.proofs.vibration import ROWS


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row.subject}: {row.what}")
def test_published_values(row):
    assert row.holds(), row.difference()


@pytest.mark.parametrize(
    ("ends", "characteristic", "start"),
    [
        ("pinned-pinned", np.sin, 3.1),
        ("fixed-pinned", lambda x: np.tan(x) - np.tanh(x), 3.9),
        ("fixed-fixed", lambda x: np.cos(x) * np.cosh(x) - 1, 4.7),
    ],
)
def test_beam_eigenvalues_solve_their_characteristic_equation(ends, characteristic, start):
    root = brentq(characteristic, start - 0.1, start + 0.1)
    assert BEAM_EIGENVALUES[ends] == pytest.approx(root**2, rel=1e-4)


def test_the_rattle_of_the_fuel_salt_exchanger_lies_between_the_two_sets():
    """ORNL-TM-2098: rattle began at 800 to 900 gpm of water, none was reported at 500 gpm."""
    od, bore = 0.0127, 0.0127 - 2 * 0.0010668
    m = mass_per_length(od, bore, 8860.0, 1e3, 1e3, added_mass_coefficient(0.019685 / od, 30.0))
    f = natural_frequency(od, bore, 219e9, m, 0.6096, "pinned-pinned")
    gap_velocity = 1.20297 * np.array([500.0, 850.0, 1300.0]) / 850.0
    assert sets_exceeded(gap_velocity, f, od, m, 1e3).tolist() == [0.0, 1.0, 2.0]
    ratio = [float(gap_velocity[1] / critical_velocity(c, f, od, m, 1e3)) for c in CONNORS_SETS]
    assert ratio == pytest.approx([0.81, 1.60], abs=0.01)


def test_a_longer_span_is_weaker_and_a_clamped_one_stiffer():
    f = natural_frequency(0.019, 0.015, 200e9, 1.5, np.array([0.5, 1.0]), "pinned-pinned")
    assert f[0] == pytest.approx(4 * f[1])
    assert natural_frequency(0.019, 0.015, 200e9, 1.5, 1.0, "fixed-fixed") > f[1]


def test_a_far_neighbour_leaves_the_added_mass_of_a_single_tube():
    assert added_mass_coefficient(1e3, 30.0) == pytest.approx(1.0, abs=1e-6)
    assert added_mass_coefficient(1.25, 90.0) < added_mass_coefficient(1.25, 60.0)


def test_shedding_and_acoustic_frequencies():
    assert shedding_frequencies(2.0, 0.02) == pytest.approx((20.0, 50.0))
    first, second = (acoustic_frequency(n, 340.0, 1.0, 1.25, 90.0) for n in (1, 2))
    assert second == pytest.approx(2 * first)
    assert acoustic_frequency(1, 340.0, 1.0, 1e3, 90.0) == pytest.approx(170.0)


def test_an_angle_that_is_no_layout_is_refused():
    with pytest.raises(ValueError, match="offered are 30, 45, 60 and 90"):
        added_mass_coefficient(1.25, 50.0)
