"""Exact relations: published and derived values, and the laws that every arrangement obeys."""

from functools import partial

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.linalg import expm

from engine import effectiveness as exact
from engine.proofs.effectiveness import ROWS

settings.register_profile("any machine", deadline=None)
settings.load_profile("any machine")

one_mixed = exact.effectiveness_crossflow_one_mixed
RISING = {
    "counter": exact.effectiveness_counter,
    "co-current": exact.effectiveness_cocurrent,
    "1-2 shell": exact.effectiveness_shell,
    "three 1-2 shells": partial(exact.effectiveness_shell, shells=3),
    "cross-flow unmixed": exact.effectiveness_crossflow_unmixed,
    "cross-flow, C_max mixed": partial(one_mixed, min_is_mixed=False),
    "cross-flow, C_min mixed": partial(one_mixed, min_is_mixed=True),
    "split banks, C_min split": partial(exact.effectiveness_split_banks, n_banks=3, split_is_min=True),
    "split banks, C_max split": partial(exact.effectiveness_split_banks, n_banks=3, split_is_min=False, counter=False),
}
ALL = {
    **RISING,
    "cross-flow mixed": exact.effectiveness_crossflow_mixed,
    "1-6 shell, C_min in the tubes": partial(exact.effectiveness_shell, tube_passes=6),
    "1-6 shell, C_min in the shell": partial(exact.effectiveness_shell, tube_passes=6, tubes_are_min=False),
}
arrangements = st.sampled_from(sorted(ALL))
sizes = st.floats(0, 40)
ratios = st.floats(0, 1)
some_F = st.tuples(st.floats(0.02, 0.98), st.floats(0.05, 3.0), st.integers(1, 4))
"""Share of the largest P, R, shells."""


@pytest.mark.parametrize("proof", ROWS, ids=lambda proof: f"{proof.subject}: {proof.what}")
def test_published_and_derived_values_are_reproduced(proof):
    assert proof.holds(), f"{proof.what}: {proof.ours()} instead of {proof.value} ({proof.source})"


@given(arrangements, sizes, ratios)
def test_no_arrangement_beats_counterflow(name, NTU, Cr):
    found = ALL[name](NTU, Cr)
    assert 0 <= found <= exact.effectiveness_counter(NTU, Cr) + 1e-12 <= 1 + 2e-12


@given(arrangements, sizes)
def test_arrangement_is_indifferent_when_one_fluid_keeps_its_temperature(name, NTU):
    assert ALL[name](NTU, 0.0) == pytest.approx(1 - np.exp(-NTU), abs=1e-14)


@given(arrangements, st.floats(0, 1e-4), ratios)
def test_small_exchanger_passes_UA_times_the_inlet_difference(name, NTU, Cr):
    assert ALL[name](NTU, Cr) == pytest.approx(NTU * (1 - NTU * (1 + Cr) / 2), abs=1e-11)


@given(arrangements, st.floats(0, 30), st.floats(1e-9, 1e-6))
def test_limits_of_the_ratio_are_met_without_a_step(name, NTU, near):
    for limit, beside in ((0.0, near), (1.0, 1 - near)):
        assert ALL[name](NTU, beside) == pytest.approx(float(ALL[name](NTU, limit)), abs=20 * near)


@given(st.sampled_from(sorted(RISING)), sizes, st.floats(0, 5), ratios)
def test_more_area_helps(name, NTU, more, Cr):
    assert RISING[name](NTU + more, Cr) >= RISING[name](NTU, Cr) - 1e-14


@given(arrangements, sizes, ratios, ratios)
def test_a_larger_second_stream_helps(name, NTU, Cr, other):
    low, high = sorted((Cr, other))
    assert ALL[name](NTU, high) <= ALL[name](NTU, low) + 1e-12


@given(
    st.sampled_from(["counter", "co-current", "1-2 shell", "cross-flow unmixed"]), st.floats(0.01, 9), st.floats(0.1, 9)
)
def test_both_fluids_see_the_same_duty(name, NTU1, R):
    first, second = exact.of_fluid_1(ALL[name], NTU1, R), exact.of_fluid_1(ALL[name], NTU1 * R, 1 / R)
    assert first * R == pytest.approx(float(second), rel=1e-12)


@given(st.floats(0.01, 8), ratios)
def test_many_shells_approach_counterflow(NTU, Cr):
    trains = [float(exact.effectiveness_shell(NTU, Cr, n)) for n in (1, 2, 4, 400)]
    assert trains == sorted(trains) or max(trains) - min(trains) < 1e-12
    assert trains[-1] == pytest.approx(float(exact.effectiveness_counter(NTU, Cr)), abs=2e-4)


@given(st.floats(0.01, 8), ratios, st.booleans())
def test_many_tube_passes_approach_cross_flow_with_both_fluids_mixed(NTU, Cr, tubes_are_min):
    shell = exact.effectiveness_shell(NTU, Cr, tube_passes=20_000, tubes_are_min=tubes_are_min)
    assert shell == pytest.approx(float(exact.effectiveness_crossflow_mixed(NTU, Cr)), abs=1e-6)


def shell_by_matrix_exponential(NTU_tubes, R, passes):
    """P of the tube fluid: the linear equations of the shell and of each pass, and the conditions at the turns."""
    a, s = NTU_tubes / passes, NTU_tubes * R
    A = np.zeros((passes + 1, passes + 1))
    A[0] = s / passes
    A[0, 0] = -s
    for k in range(passes):
        A[k + 1, [0, k + 1]] = np.array([a, -a]) * (1 if k % 2 == 0 else -1)
    across = expm(A)
    conditions, given_there = [np.eye(passes + 1)[0], np.eye(passes + 1)[1]], [1.0, 0.0]
    for k in range(1, passes):
        at_turn = np.eye(passes + 1) if k % 2 == 0 else across
        conditions.append(at_turn[k] - at_turn[k + 1])
        given_there.append(0.0)
    start = np.linalg.solve(conditions, given_there)
    return start[passes] if passes % 2 == 0 else (across @ start)[passes]


@pytest.mark.parametrize("passes", [2, 4, 6, 8])
@pytest.mark.parametrize(("NTU", "R"), [(0.3, 0.2), (1.0, 1.0), (2.0, 0.7), (4.0, 0.5), (1.2, 2.5)])
def test_even_tube_passes_solve_their_differential_equations(passes, NTU, R):
    ours = exact.effectiveness_shell(NTU * max(R, 1), min(R, 1 / R), tube_passes=passes, tubes_are_min=R <= 1) / max(
        R, 1
    )
    assert ours == pytest.approx(shell_by_matrix_exponential(NTU, R, passes), rel=1e-11)


@given(st.floats(0, 12), ratios, st.integers(1, 4))
def test_size_comes_back_from_effectiveness(NTU, Cr, shells):
    def within_rounding(found, effectiveness, relation):
        return relation(found, Cr) == pytest.approx(float(effectiveness), abs=1e-13)

    counter, cocurrent = exact.effectiveness_counter(NTU, Cr), exact.effectiveness_cocurrent(NTU, Cr)
    train = partial(exact.effectiveness_shell, shells=shells)
    assert within_rounding(exact.ntu_counter(counter, Cr), counter, exact.effectiveness_counter)
    assert cocurrent > 1 / (1 + Cr) - 1e-9 or exact.ntu_cocurrent(cocurrent, Cr) == pytest.approx(
        NTU, rel=1e-5, abs=1e-12
    )
    reached = train(NTU, Cr)
    if reached < exact.largest_P(Cr, shells) - 1e-9:
        assert within_rounding(exact.ntu_shell(reached, Cr, shells), reached, train)


@given(st.sampled_from(sorted(RISING)), st.floats(0.001, 3), ratios)
def test_size_is_found_for_any_arrangement(name, NTU, Cr):
    relation = RISING[name]
    found = exact.ntu(relation, relation(NTU, Cr), Cr)
    assert relation(found, Cr) == pytest.approx(float(relation(NTU, Cr)), rel=1e-12)


def test_least_size_is_found_where_more_area_does_harm():
    relation = exact.effectiveness_crossflow_mixed
    grid = np.linspace(1, 5, 4001)
    values = relation(grid, 1.0)
    best = values.max()
    before = exact.ntu(relation, best - 1e-6, 1.0)
    assert before < grid[values.argmax()] < 4
    assert relation(before, 1.0) == pytest.approx(best - 1e-6, abs=1e-12)
    assert np.isinf(exact.ntu(relation, best + 1e-6, 1.0))


def test_what_no_area_can_reach_is_infinite_and_spoils_no_neighbour():
    assert np.isinf(exact.ntu_counter(1.0, 0.5))
    assert np.isinf(exact.ntu_cocurrent(0.7, 0.5))
    assert np.isinf(exact.ntu_shell(0.6, 1.0))
    mixed = exact.ntu(exact.effectiveness_cocurrent, [0.2, 0.7, 0.3], 0.5)
    assert np.isinf(mixed).tolist() == [False, True, False]
    assert mixed[2] == pytest.approx(float(exact.ntu_cocurrent(0.3, 0.5)), rel=1e-12)


@given(some_F)
def test_F_is_the_same_for_both_fluids(drawn):
    share, R, shells = drawn
    P = share * exact.largest_P(R, shells)
    assert exact.correction_factor(P, R, shells) == pytest.approx(
        float(exact.correction_factor(P * R, 1 / R, shells)), rel=1e-9
    )


@given(some_F)
def test_F_follows_from_the_effectiveness(drawn):
    share, R, shells = drawn
    P = float(share * exact.largest_P(R, shells))
    F = exact.correction_factor(P, R, shells)
    larger = max(R, 1.0)
    counter = exact.ntu_counter(P * larger, min(R, 1 / R)) / larger
    shell = exact.of_fluid_1(partial(exact.effectiveness_shell, shells=shells), counter / F, R)
    assert 0 < F <= 1 + 1e-12
    assert shell == pytest.approx(P, rel=1e-9)


@given(some_F)
def test_slope_of_F_is_its_derivative(drawn):
    share, R, shells = drawn
    P = share * exact.largest_P(R, shells)
    h = 1e-5 * min(share, 1 - share)
    by_difference = np.diff(exact.correction_factor(P + np.array([-h, h]), R, shells))[0] / (2 * h)
    assert exact.correction_factor_slope(P, R, shells) == pytest.approx(by_difference, rel=1e-4, abs=1e-6)


@given(st.floats(0.05, 3), st.integers(1, 4))
def test_F_falls_to_zero_at_the_cliff_and_stays_there(R, shells):
    cliff = exact.largest_P(R, shells)
    near, nearer, beyond = exact.correction_factor(cliff * np.array([1 - 1e-4, 1 - 1e-8, 1 + 1e-9]), R, shells)
    assert near > nearer > 0
    assert beyond == 0
    assert exact.correction_factor_slope(cliff * (1 + 1e-9), R, shells) == -np.inf


def test_F_at_equal_rates_joins_its_neighbours():
    R = np.array([1 - 1e-7, 1.0, 1 + 1e-7])
    F = exact.correction_factor(0.45, R, 1)
    assert np.ptp(F) < 1e-6
    assert F[1] == pytest.approx(F[[0, 2]].mean(), abs=1e-12)


def test_F_is_one_without_change_or_against_constant_temperature():
    assert exact.correction_factor([0.0, 0.5, 0.9], [1.0, 0.0, 0.0], 2) == pytest.approx([1, 1, 1], abs=1e-14)


@given(st.floats(1e-3, 200), st.floats(1e-3, 200))
def test_log_mean_lies_between_geometric_and_arithmetic_mean(a, b):
    found = exact.log_mean(a, b)
    assert np.sqrt(a * b) * (1 - 1e-12) <= found <= (a + b) / 2 * (1 + 1e-12)
    assert found == exact.log_mean(b, a)


def test_log_mean_of_equal_or_vanishing_ends():
    a = np.array([7.0, 7.0, 7.0, 0.0, 0.0])
    b = np.array([7.0, 7.0 * (1 + 1e-15), 7.0 * (1 + 1e-9), 5.0, 0.0])
    assert exact.log_mean(a, b) == pytest.approx([7, 7, 7 * (1 + 5e-10), 0, 0], rel=1e-14)


def test_crossing_ends_are_marked():
    assert exact.crosses([90, 90, 90], [50, 50, 20], [30, 30, 30], [89, 90, 40]).tolist() == [False, True, True]


@pytest.mark.parametrize(
    ("call", "says"),
    [
        (lambda: exact.effectiveness_counter(-1.0, 0.5), "NTU must be 0 or more; given -1"),
        (lambda: exact.effectiveness_shell([1.0, 2.0], [0.5, 1.2]), "Cr must be between 0 and 1; given 1.2"),
        (lambda: exact.effectiveness_cocurrent(float("nan"), 0.5), "NTU must be 0 or more; given nan"),
        (lambda: exact.ntu_counter(1.1, 0.5), "effectiveness must be between 0 and 1; given 1.1"),
        (lambda: exact.effectiveness_shell(1.0, 0.5, tube_passes=3), "even number of tube passes; given 3"),
        (lambda: exact.log_mean(3.0, -2.0), "an end difference must be 0 or more; given -2"),
        (lambda: exact.terminal_ratios(90, 95, 30, 40), "the fall of the hot fluid must be 0 or more; given -5"),
    ],
)
def test_arguments_outside_their_domain_are_refused_with_a_sentence(call, says):
    with pytest.raises(ValueError, match=says):
        call()
