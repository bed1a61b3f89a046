"""The march over cells and bays: onto the closed forms, in balance, in bounds, against separately written routes."""

from functools import partial
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_bvp

from engine import effectiveness as exact
from engine.exchangers import layout
from engine.march import temperatures

settings.register_profile("any machine", deadline=None)
settings.load_profile("any machine")

SHELLS = {
    "E, 2 passes": partial(layout.shell_pass, tube_passes=2),
    "E, 3 passes, first co-current": partial(layout.shell_pass, tube_passes=3, first_pass="co-current"),
    "E, 6 passes": partial(layout.shell_pass, tube_passes=6),
    "F, leaking": partial(layout.f_shell, leakage=0.15),
    "F, 4 passes": partial(layout.f_shell, tube_passes=4, first_pass="co-current"),
    "G, 1 pass": partial(layout.g_shell, tube_passes=1),
    "G, 4 passes": partial(layout.g_shell, tube_passes=4),
    "H, 1 pass": partial(layout.h_shell, tube_passes=1),
    "H, 2 passes": partial(layout.h_shell, first_pass="co-current"),
    "J, one inlet": layout.j_shell,
    "J, two inlets, 2 passes": partial(layout.j_shell, tube_passes=2, inlets=2),
    "X, 1 pass": layout.x_shell,
    "X, 2 passes of 3 rows": partial(layout.x_shell, tube_passes=2, rows=3),
}
BANKS = {
    "counter": partial(layout.banks, 5),
    "co-current": partial(layout.banks, 5, arrangement="co-current"),
    "3 banks in turn": partial(layout.banks, 5, 3),
    "3 banks, inside split": partial(layout.banks, 5, 3, inside="split"),
    "3 banks, outside split": partial(layout.banks, 5, 3, arrangement="co-current", outside="split"),
    "3 banks, both split": partial(layout.banks, 5, 3, inside="split", outside="split"),
    "F, 2 passes": partial(layout.f_shell, 3),
    "train of two E shells": lambda: layout.in_series(layout.shell_pass(4, 2), 2),
    "train of three G shells": lambda: layout.in_series(layout.g_shell(4, 1), 3),
}
LAYOUTS = {**{name: partial(build, 8) for name, build in SHELLS.items()}, **BANKS}
any_layout = st.sampled_from(sorted(LAYOUTS))


def uniform(order, NTU, Cr, inside_is_min=True):
    """Effectiveness for constant conductance and rates, C_min = 1."""
    C_max = np.inf if Cr == 0 else 1 / Cr
    C_inside, C_outside = (1.0, C_max) if inside_is_min else (C_max, 1.0)
    return float(temperatures(order, NTU * order.area_share, [C_inside], [C_outside], 1.0, 0.0).heat.sum())


def drawn_case(order, seed, P=3):
    """Conductances and rates that differ from cell to cell; the outside rate alike within a bay."""
    rng = np.random.default_rng(seed)
    UA = rng.uniform(0.02, 0.4, (P, order.n_cells)) * 10.0 ** rng.uniform(-1, 1)
    bays = len(order.outside_links) - 1
    cell_bay = (order.bay + bays * np.arange(order.units)[:, None]).ravel()
    C_inside = rng.uniform(0.5, 2.0, (P, order.n_cells))
    C_outside = rng.uniform(0.5, 2.0, (P, order.units * bays))[:, cell_bay]
    return UA, C_inside, C_outside, rng.uniform(280, 400, P), rng.uniform(280, 400, P)


# --- chains -----------------------------------------------------------------------------------------------------------


@given(
    st.floats(-3, 3).map(lambda x: 10**x),
    st.one_of(st.floats(0, 1), st.floats(0, 1e-6).map(lambda x: 1 - x)),
    st.integers(1, 40),
    st.booleans(),
    st.integers(1, 3),
)
def test_chain_falls_onto_the_closed_form(NTU, Cr, n, inside_is_min, n_banks):
    for arrangement, relation in (
        ("counter", exact.effectiveness_counter),
        ("co-current", exact.effectiveness_cocurrent),
    ):
        order = layout.banks(n, n_banks, arrangement=arrangement)
        assert uniform(order, NTU, Cr, inside_is_min) == pytest.approx(float(relation(NTU, Cr)), abs=1e-12)


@given(st.floats(0.01, 30), st.floats(0, 1), st.integers(1, 5), st.booleans(), st.booleans(), st.booleans())
def test_split_banks_fall_onto_their_closed_form(NTU, Cr, n_banks, inside_is_split, inside_is_min, counter):
    order = layout.banks(
        3,
        n_banks,
        arrangement="counter" if counter else "co-current",
        inside="split" if inside_is_split else "in turn",
        outside="in turn" if inside_is_split else "split",
    )
    closed = exact.effectiveness_split_banks(
        NTU, Cr, n_banks, split_is_min=inside_is_split == inside_is_min, counter=counter
    )
    assert uniform(order, NTU, Cr, inside_is_min) == pytest.approx(float(closed), abs=1e-12)


@pytest.mark.parametrize("n_banks", [1, 4])
def test_banks_split_on_both_sides_work_as_one(n_banks):
    order = layout.banks(6, n_banks, inside="split", outside="split")
    assert uniform(order, 2.0, 0.7) == pytest.approx(float(exact.effectiveness_counter(2.0, 0.7)), abs=1e-13)


@pytest.mark.parametrize(("C_inside", "C_outside"), [(1.0, 1.0), (1.0, 2.5), (2.0, 0.8)])
@pytest.mark.parametrize("arrangement", ["counter", "co-current"])
def test_varying_conductance_and_rate_agree_with_a_boundary_value_solver(arrangement, C_inside, C_outside):
    sign = -1 if arrangement == "counter" else 1

    def UA(x):
        return 2.0 * (1 + 0.8 * np.sin(5 * x))

    def C_hot(x):
        return C_inside * (1 + 0.3 * x)

    def slopes(x, T):
        flux = UA(x) * (T[0] - T[1])
        return np.vstack([-flux / C_hot(x), sign * flux / C_outside])

    def ends(at_0, at_1):
        return np.array([at_0[0] - 400, (at_1 if arrangement == "counter" else at_0)[1] - 300])

    x = np.linspace(0, 1, 200)
    truth = solve_bvp(slopes, ends, x, np.full((2, x.size), 350.0), tol=1e-8, max_nodes=100_000)
    assert truth.success

    def outlets(n):
        middle = (np.arange(n) + 0.5) / n
        found = temperatures(
            layout.banks(n, arrangement=arrangement), [UA(middle) / n], [C_hot(middle)], [C_outside], 400.0, 300.0
        )
        return np.array([found.inside_outlet[0], found.outside_outlet[0]]), found

    out_of = np.array([truth.y[0, -1], truth.y[1, 0 if arrangement == "counter" else -1]])
    coarse, fine = outlets(50)[0], outlets(100)[0]
    assert (4 * fine - coarse) / 3 == pytest.approx(out_of, abs=2e-6)
    middle, found = (np.arange(100) + 0.5) / 100, outlets(100)[1]
    assert found.inside_mean[0] == pytest.approx(truth.sol(middle)[0], abs=2e-2)
    assert found.outside_mean[0] == pytest.approx(truth.sol(middle)[1], abs=2e-2)


def test_cell_means_carry_the_heat():
    order = layout.counter_chain(4)
    UA, *rest = drawn_case(order, 3)
    found = temperatures(order, 20 * UA, *rest)
    assert 20 * UA * (found.inside_mean - found.outside_mean) == pytest.approx(found.heat, rel=1e-11)


# --- shells -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("shells", [1, 3])
@pytest.mark.parametrize("passes", [2, 4])
@pytest.mark.parametrize("tubes_are_min", [True, False])
@pytest.mark.parametrize(("NTU", "Cr"), [(0.5, 1.0), (1.5, 0.4), (3.0, 0.8), (2.0, 0.0)])
def test_shells_converge_at_second_order_onto_the_closed_form(NTU, Cr, tubes_are_min, passes, shells):
    truth = float(exact.effectiveness_shell(NTU, Cr, shells, tube_passes=passes, tubes_are_min=tubes_are_min))
    default, coarse, fine = (
        uniform(layout.in_series(layout.shell_pass(n, passes), shells), NTU, Cr, tubes_are_min) for n in (19, 40, 80)
    )
    assert default == pytest.approx(truth, abs=1e-4)
    assert (4 * fine - coarse) / 3 == pytest.approx(truth, abs=1e-6)
    if Cr > 0:
        assert np.log2((coarse - truth) / (fine - truth)) == pytest.approx(2, abs=0.1)


@pytest.mark.parametrize(("NTU", "Cr"), [(1.0, 1.0), (2.0, 0.5)])
def test_cross_flow_rows_approach_both_fluids_unmixed(NTU, Cr):
    truth = float(exact.effectiveness_crossflow_unmixed(NTU, Cr))
    coarse, fine = (uniform(layout.x_shell(n, rows=n), NTU, Cr) for n in (8, 16))
    assert (4 * fine - coarse) / 3 == pytest.approx(truth, abs=2e-5)


@pytest.mark.parametrize("inside_is_min", [True, False])
def test_single_row_cross_flow_has_the_inside_mixed(inside_is_min):
    truth = float(exact.effectiveness_crossflow_one_mixed(1.7, 0.6, min_is_mixed=inside_is_min))
    coarse, fine = (uniform(layout.x_shell(n), 1.7, 0.6, inside_is_min) for n in (20, 40))
    assert (4 * fine - coarse) / 3 == pytest.approx(truth, abs=1e-6)


@pytest.mark.parametrize("name", sorted(SHELLS))
def test_every_shell_converges_at_second_order(name):
    first, second, third = (uniform(SHELLS[name](n), 1.5, 0.7) for n in (16, 32, 64))
    assert np.log2((first - second) / (second - third)) == pytest.approx(2, abs=0.1)


def test_one_or_two_shell_inlets_of_divided_flow_are_mirror_images():
    one, two = (layout.j_shell(20, 1, inlets) for inlets in (1, 2))
    assert uniform(one, 2.0, 0.6) == pytest.approx(uniform(two, 2.0, 0.6), abs=2e-4)


def test_first_pass_matters_for_odd_passes_only():
    better, poorer = (uniform(layout.shell_pass(40, 3, first), 2.0, 0.8) for first in ("counter", "co-current"))
    assert better > poorer + 0.01
    one, other = (uniform(layout.shell_pass(40, 4, first), 2.0, 0.8) for first in ("counter", "co-current"))
    assert one == pytest.approx(other, abs=1e-4)


def test_leak_past_the_longitudinal_baffle_costs_duty():
    losses = [uniform(layout.f_shell(12, leakage=x), 3.0, 0.9) for x in (0.0, 0.05, 0.1, 0.2)]
    assert losses == sorted(losses, reverse=True)


def test_unequal_bays_converge_to_the_same_shell():
    lengths = np.concatenate([[2.0], np.ones(36), [2.0]])
    truth = float(exact.effectiveness_shell(2.0, 0.8))
    assert uniform(layout.shell_pass(38, 2, lengths=lengths), 2.0, 0.8) == pytest.approx(truth, abs=5e-5)


def all_unknowns_at_once(order, UA, C_inside, C_outside, T_i, T_o):
    """The same cells, without elimination: every exit and every bay mean an unknown of one linear system."""
    m, bays = order.bay.size, len(order.outside_links) - 1
    C_i, C_o = C_inside * order.inside_share, C_outside * order.outside_share
    size = m + 2 * bays  # inside exits, bay exits, bay means
    A, b = np.zeros((size, size)), np.zeros(size)
    links = order.inside_links
    entry = np.zeros((m, size + 1))
    for p, path in enumerate(order.inside_paths):
        for q, other in enumerate(order.inside_paths):
            entry[path[0], other[-1]] += links[q, p] / links[:, p].sum()
        entry[path[0], -1] = links[-1, p] / links[:, p].sum() * T_i
        for before, after in pairwise(path):
            entry[after, before] = 1.0
    for c in range(m):
        stay = np.exp(-UA[c] / C_i[c])
        A[c, c] = 1
        A[c] -= stay * entry[c, :-1]
        A[c, m + bays + order.bay[c]] -= 1 - stay
        b[c] = stay * entry[c, -1]
    for k in range(bays):
        cells = np.flatnonzero(order.bay == k)
        C, arriving = C_o[cells[0]], order.outside_links[:, k] / order.outside_links[:, k].sum()
        inlet = np.zeros(size)
        inlet[m : m + bays] = arriving[:-1]
        from_inside, known = np.zeros(size), 0.0
        size_of_bay = UA[cells].sum() / C
        for c in cells:
            from_inside += C_i[c] * entry[c, :-1]
            from_inside[c] -= C_i[c]
            known += C_i[c] * entry[c, -1]
        A[m + k, m + k] = C
        A[m + k] -= C * inlet + from_inside
        b[m + k] = C * arriving[-1] * T_o + known
        weight = 1 / (1 - np.exp(-size_of_bay)) - 1 / size_of_bay
        A[m + bays + k, m + bays + k] = 1
        A[m + bays + k, m + k] -= weight
        A[m + bays + k] -= (1 - weight) * inlet
        b[m + bays + k] = (1 - weight) * arriving[-1] * T_o
    found = np.linalg.solve(A, b)
    return found[:m], found[m : m + bays][order.bay]


@pytest.mark.parametrize("name", sorted(SHELLS))
@pytest.mark.parametrize("seed", [1, 2])
def test_elimination_agrees_with_all_unknowns_at_once(name, seed):
    order = SHELLS[name](8)
    case = drawn_case(order, seed)
    found = temperatures(order, *case)
    for p in range(3):
        inside, outside = all_unknowns_at_once(order, *(x[p] for x in case))
        assert found.inside_exit[p] == pytest.approx(inside, abs=1e-9)
        assert found.outside_exit[p] == pytest.approx(outside, abs=1e-9)


# --- laws for every layout --------------------------------------------------------------------------------------------


@given(any_layout, st.integers(0, 10_000))
def test_heat_balances_in_every_cell_and_bay(name, seed):
    order = LAYOUTS[name]()
    UA, C_i, C_o, T_i, T_o = drawn_case(order, seed)
    found = temperatures(order, UA, C_i, C_o, T_i, T_o)
    span = np.abs(T_i - T_o)[:, None]
    given_off = C_i * order.inside_share * (found.inside_entry - found.inside_exit)
    assert np.abs(given_off - found.heat).max() <= 1e-12 * (C_i * span).max() + 1e-10
    bays = len(order.outside_links) - 1
    cell_bay = (order.bay + bays * np.arange(order.units)[:, None]).ravel()
    to_bay = np.zeros((len(T_i), cell_bay.max() + 1))
    np.add.at(to_bay, (slice(None), cell_bay), found.heat)
    taken_up = C_o * order.outside_share * (found.outside_exit - found.outside_entry)
    assert np.abs(taken_up - to_bay[:, cell_bay]).max() <= 1e-12 * (C_o * span).max() + 1e-10


@given(any_layout, st.floats(-2, 2.5), st.floats(-3, 3))
def test_duty_of_both_streams_is_the_same(name, size, ratio):
    order = LAYOUTS[name]()
    C_inside, C_outside = 1.0, 10**ratio
    found = temperatures(order, 10**size * order.area_share, [C_inside], [C_outside], 1.0, 0.0)
    duty = found.heat.sum()
    assert abs(C_inside * (1 - found.inside_outlet) - duty) <= 1e-12 * max(C_inside, C_outside)
    assert abs(C_outside * found.outside_outlet - duty) <= 1e-12 * max(C_inside, C_outside)


@given(any_layout, st.floats(-2, 3), st.floats(-3, 3))
@settings(max_examples=200)
def test_no_temperature_leaves_the_span_of_the_inlets(name, size, ratio):
    order = LAYOUTS[name]()
    found = temperatures(order, 10**size * order.area_share, [1.0], [10**ratio], 1.0, 0.0)
    for field in ("inside_entry", "inside_exit", "inside_mean", "outside_entry", "outside_exit", "outside_mean"):
        T = getattr(found, field)
        assert np.isfinite(T).all()
        assert T.min() >= -1e-12, field
        assert T.max() <= 1 + 1e-12, field


@given(any_layout, st.floats(-2, 1.5), st.floats(0, 1), st.booleans())
def test_no_layout_beats_counterflow(name, size, Cr, inside_is_min):
    found = uniform(LAYOUTS[name](), 10**size, Cr, inside_is_min)
    assert found <= exact.effectiveness_counter(10**size, Cr) + 1e-12


@given(any_layout, st.integers(0, 10_000))
def test_temperatures_scale_and_shift_with_the_inlets(name, seed):
    order = LAYOUTS[name]()
    UA, C_i, C_o, T_i, T_o = drawn_case(order, seed)
    unit, found = temperatures(order, UA, C_i, C_o, 1.0, 0.0), temperatures(order, UA, C_i, C_o, T_i, T_o)
    assert found.inside_outlet == pytest.approx(T_o + unit.inside_outlet * (T_i - T_o), abs=1e-10)
    assert found.heat == pytest.approx(unit.heat * (T_i - T_o)[:, None], abs=1e-9)


@given(any_layout, st.integers(0, 10_000))
def test_a_point_does_not_depend_on_its_neighbours(name, seed):
    order = LAYOUTS[name]()
    case = drawn_case(order, seed)
    together, alone = temperatures(order, *case), temperatures(order, *(x[1:2] for x in case))
    assert together.inside_exit[1] == pytest.approx(alone.inside_exit[0], abs=1e-11)
    assert together.outside_mean[1] == pytest.approx(alone.outside_mean[0], abs=1e-11)


@given(st.integers(2, 12), st.integers(0, 10_000))
def test_a_chain_looks_the_same_from_both_sides(n, seed):
    order = layout.counter_chain(n)
    UA, C_i, C_o, T_i, T_o = drawn_case(order, seed)
    this = temperatures(order, UA, C_i, C_o, T_i, T_o)
    that = temperatures(order, UA[:, ::-1], C_o[:, ::-1], C_i[:, ::-1], T_o, T_i)
    assert this.inside_outlet == pytest.approx(that.outside_outlet, abs=1e-10)
    assert this.heat == pytest.approx(-that.heat[:, ::-1], abs=1e-10)


@pytest.mark.parametrize("name", sorted(set(LAYOUTS) - {"F, leaking"}))
def test_layout_is_indifferent_when_one_fluid_keeps_its_temperature(name):
    order = LAYOUTS[name]()
    assert uniform(order, 1.3, 0.0, inside_is_min=True) == pytest.approx(1 - np.exp(-1.3), abs=1e-12)
    assert uniform(order, 1.3, 0.0, inside_is_min=False) == pytest.approx(1 - np.exp(-1.3), abs=1e-12)


# --- layouts ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", sorted(LAYOUTS))
def test_layout_accounts_for_all_area_and_flow(name):
    order = LAYOUTS[name]()
    assert order.area_share.sum() == pytest.approx(1, abs=1e-12)
    assert order.bay.size * order.units == order.n_cells == order.inside_share.size == order.outside_share.size
    assert (order.span[:, 0] < order.span[:, 1]).all()
    walked = (order.span[:, 1] - order.span[:, 0]) * order.inside_share
    assert walked.sum() == pytest.approx(round(walked.sum()), abs=1e-9)


@pytest.mark.parametrize(
    ("build", "kind"),
    [
        (lambda: layout.counter_chain(1), "counter"),
        (lambda: layout.cocurrent_chain(1), "co-current"),
        (lambda: layout.shell_pass(5, 1), "counter"),
        (lambda: layout.shell_pass(5, 1, "co-current"), "co-current"),
        (lambda: layout.f_shell(5), "counter"),
        (lambda: layout.f_shell(5, 2, "co-current"), "co-current"),
        (lambda: layout.f_shell(5, leakage=0.1), None),
        (lambda: layout.f_shell(5, 4), None),
        (lambda: layout.shell_pass(5, 2), None),
    ],
)
def test_plain_chains_are_known_as_such(build, kind):
    assert build().chain == kind


def test_counter_chain_meets_the_outside_outlet_first():
    found = temperatures(layout.counter_chain(5), [[0.3]], [1.0], [1.0], 400.0, 300.0)
    assert (np.diff(found.outside_mean[0]) < 0).all()
    assert found.outside_exit[0, 0] == pytest.approx(found.outside_outlet[0])
    assert found.outside_entry[0, -1] == pytest.approx(300.0)


@pytest.mark.parametrize(
    ("call", "says"),
    [
        (lambda: layout.f_shell(4, 3), "even number of tube passes.*given 3"),
        (lambda: layout.f_shell(4, leakage=1.2), "leakage.*is 1.2; it must be at least 0 and below 1"),
        (lambda: layout.g_shell(5), "5 bays cannot be split into 2 equal groups"),
        (lambda: layout.h_shell(6), "6 bays cannot be split into 4 equal groups"),
        (lambda: layout.g_shell(4, 3), "one tube pass or an even number; given 3"),
        (lambda: layout.j_shell(3), "3 bays cannot be divided into two equal halves"),
        (lambda: layout.shell_pass(3, 2, lengths=[1.0, 2.0]), "3 bays need 3 positive lengths; given"),
        (lambda: layout.in_series(layout.banks(2, 2), 2), "only a single unit.*has 2"),
        (lambda: layout.banks(4, 0), "number of units is 0"),
    ],
)
def test_impossible_layouts_are_refused_with_a_sentence(call, says):
    with pytest.raises(ValueError, match=says):
        call()
