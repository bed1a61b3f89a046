"""Pipes, gauges, metals, clearances, tube counts and usual ranges."""

import numpy as np
import pytest
from fluids.piping import nearest_pipe

from engine.exchangers import standard_sizes as sizes
from engine.exchangers.standard_sizes import INCH, METALS, conductivity, gauge_wall, metal, pipe, tube_count
from engine.proofs.standard_sizes import ROWS

NPS = {
    "1/2": 0.5, "3/4": 0.75, "1": 1, "1 1/4": 1.25, "1 1/2": 1.5, "2": 2, "2 1/2": 2.5, "3": 3, "3 1/2": 3.5, "4": 4,
    "5": 5, "6": 6, "8": 8, "10": 10, "12": 12,
}  # fmt: skip


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row.subject}: {row.what}")
def test_published_values(row):
    assert row.holds(), row.difference()


@pytest.mark.parametrize(
    "schedule",
    [
        "5",
        "10",
        "20",
        "30",
        "40",
        "60",
        "80",
        "100",
        "120",
        "140",
        "160",
        "STD",
        "XS",
        "XXS",
        "5S",
        "10S",
        "40S",
        "80S",
    ],
)
def test_every_wall_agrees_with_an_independent_table(schedule):
    for nps, inches in NPS.items():
        try:
            _, its_bore, its_od, _ = nearest_pipe(NPS=inches, schedule=schedule)
        except ValueError:
            with pytest.raises(ValueError, match=f"NPS {nps} has no schedule"):
                pipe(nps, schedule)
        else:
            od, bore = pipe(nps, schedule)
            # 273.0 and 323.8 mm in B36.10M are 273.1 and 323.9 mm in older issues of B36.19M
            assert od == pytest.approx(its_od, abs=0.11e-3)
            assert od - bore == pytest.approx(its_od - its_bore, abs=1e-9)


@pytest.mark.parametrize(
    ("nps", "schedule"), [("1 1/2", "40"), ("1-1/2", "Sch 40"), ("1.5", "std"), ("1.5 in", "Schedule 40")]
)
def test_a_pipe_may_be_spelt_as_usual(nps, schedule):
    assert pipe(nps, schedule) == pipe("1 1/2", "40")


@pytest.mark.parametrize("gauge", ["14", "14 BWG", "BWG 14", "14bwg"])
def test_a_gauge_may_be_spelt_as_usual(gauge):
    assert gauge_wall(gauge) == pytest.approx(0.083 * INCH)


def test_what_is_not_offered_is_refused_with_what_is():
    for refused, sentence in (
        (lambda: pipe("7", "40"), "no pipe of NPS '7'.*1 1/2, 2"),
        (lambda: pipe("two", "40"), "no pipe of NPS 'two'"),
        (lambda: pipe("2", "7"), "NPS 2 has no schedule '7'.*40, 80"),
        (lambda: gauge_wall("3"), "'3' is no tube gauge.*7 to 24"),
        (lambda: gauge_wall("thin"), "is no tube gauge"),
        (lambda: metal("hasteloy"), "did you mean alloy C-276"),
        (lambda: metal(""), "offered are carbon steel"),
        (lambda: conductivity("copper", [300.0, 900.0]), "copper is known from 250 K to 600 K; 900 K"),
        (lambda: conductivity("copper", np.nan), "copper is known"),
        (lambda: sizes.shell_baffle_clearance(0.1), "state the clearance"),
        (lambda: sizes.shell_baffle_clearance(3.0), "state the clearance"),
        (lambda: sizes.bundle_clearance(0.5, "Q"), "'Q' is no rear head"),
        (lambda: sizes.bundle_diameter(100, 0.02, 0.025, 30.0, 3), "3 tube passes"),
        (lambda: sizes.pattern(50.0), "offered are 30, 45, 60 and 90"),
        (lambda: sizes.unsupported_span(0.1, "steel and nickel"), "not of 100 mm"),
    ):
        with pytest.raises(ValueError, match=sentence):
            refused()


def test_trade_names_are_unambiguous_and_found_in_any_case():
    spellings = [word.casefold() for m in METALS.values() for word in (m.name, *m.trade_names)]
    assert len(spellings) == len(set(spellings))
    assert metal("SS316") is metal("stainless  steel 316") is metal("316L")
    assert metal("Monel") is METALS["alloy 400"]


@pytest.mark.parametrize("m", METALS.values(), ids=list(METALS))
def test_metals_are_plausible_and_ordered(m):
    at, k = np.array(m.k_table).T
    assert (np.diff(at) > 0).all()
    assert at[0] == 250
    assert ((k > 8) & (k < 420)).all()
    first_slope = (k[2] - k[1]) / (at[2] - at[1]) if len(at) > 2 else 0.0
    assert k[0] == pytest.approx(k[1] + first_slope * (at[0] - at[1]), rel=0.01)
    assert 60e9 < m.E < 220e9
    assert 2600 < m.density < 9000
    assert 8e-6 < m.expansion < 24e-6
    assert conductivity(m.name, np.full((2, 3), 300.0)).shape == (2, 3)


def test_the_bundle_leaves_its_clearance():
    for head in "LMNPSTUW":
        for bore in (0.2, 0.6, 1.0, 2.0):
            bundle = sizes.outer_tube_limit(bore, head)
            assert bundle + sizes.bundle_clearance(bundle, head) == pytest.approx(bore, rel=1e-12)


def test_hole_clearance_widens_for_short_spans_and_large_tubes():
    assert sizes.tube_hole_clearance(0.019, 0.9) == 0.0008
    assert sizes.tube_hole_clearance(0.019, 1.0) == 0.0004
    assert sizes.tube_hole_clearance(0.038, 1.0) == 0.0008


@pytest.mark.parametrize(
    ("bore", "od", "pitch", "angle", "passes", "ludwig", "kern"),
    [
        (23.25, 0.75, 0.9375, 30.0, 1, 481, 442),
        (23.25, 0.75, 1.0, 60.0, 2, 398, 376),
        (31.0, 0.75, 1.0, 30.0, 4, 692, 678),
        (29.0, 1.0, 1.25, 90.0, 2, 348, 348),
    ],
)
def test_tube_counts_span_the_published_tables(bore, od, pitch, angle, passes, ludwig, kern):
    """Ludwig 2001, Table 10-9; Kern 1950, Table 9."""
    count = tube_count(bore * INCH, od * INCH, pitch * INCH, angle, passes)
    assert count.low == pytest.approx(0.95 * min(ludwig, kern), rel=1e-9)
    assert count.high == pytest.approx(1.05 * max(ludwig, kern), rel=1e-9)


@pytest.mark.parametrize(
    ("bore", "pitch", "angle", "passes", "printed"),
    [(15.25, 1.0, 30.0, 1, 151), (19.25, 1.0, 90.0, 2, 222), (25, 0.9375, 30.0, 4, 484), (37, 1.0, 30.0, 1, 1127)],
)
def test_the_area_estimate_holds_the_published_counts(bore, pitch, angle, passes, printed):
    """A tube 2 % off the tabulated size falls to the estimate; Ludwig 2001, Table 10-9, Kern 1950, Table 9."""
    count = tube_count(bore * INCH, 0.75 * 1.02 * INCH, pitch * INCH, angle, passes)
    assert count.sources == (sizes.COUNT_ESTIMATE,)
    assert count.low <= printed <= count.high


def test_tube_counts_grow_with_the_shell():
    counts = [tube_count(d * INCH, 0.75 * INCH, 1.0 * INCH, 30.0, 2) for d in np.linspace(8, 37, 100)]
    assert (np.diff([c.low for c in counts]) >= 0).all()
    assert (np.diff([c.high for c in counts]) >= 0).all()
    u_tubes = tube_count(0.6, 0.75 * INCH, 1.0 * INCH, 30.0, 2, u_tubes=True)
    assert u_tubes.high < tube_count(0.6, 0.75 * INCH, 1.0 * INCH, 30.0, 2).high


def test_usual_ranges_are_ranges():
    for table in (sizes.FOULING, sizes.VELOCITIES, sizes.RHO_V2_LIMITS):
        assert all(0 <= usual.low <= usual.high for usual in table.values())
