"""The tube field holds what is stated of a bundle: pitch, layout, outer tube limit, passes, count; it is drawn so."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app import figures
from engine.exchangers import standard_sizes
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.exchangers.tube_field import TubeField, tube_field
from engine.report.drawings import draw_bundle
from engine.report.inputs import bundle, stated_bundle
from engine.report.pdf import _fonts
from engine.report.words import Words
from tests.test_app import kept, page, words

PITCH, OD, BORE = 0.0254, 0.01905, 0.59055
STATED: dict[str, Any] = {
    "type": "shell-and-tube",
    "tema": "AES",
    "shell_id": "590.55 mm",
    "tube_od": "19.05 mm",
    "gauge": "14 BWG",
    "tube_length": "4.88 m",
    "tube_pitch": "25.4 mm",
    "layout_angle": "30 deg",
    "tubes": 260,
    "tube_passes": 2,
    "baffle_cut": "25 %",
    "baffle_spacing": "250 mm",
    "wall_conductivity": "50 W/mK",
}
ANGLES = ("30 deg", "45 deg", "60 deg", "90 deg")


def exchanger(**changes: Any) -> ShellAndTube:
    return ShellAndTube.model_validate({**STATED, **changes})


def distances(field: TubeField) -> np.ndarray:
    apart = np.hypot(field.x[:, None] - field.x, field.y[:, None] - field.y)
    np.fill_diagonal(apart, np.inf)
    return apart


@settings(max_examples=25, deadline=None)
@given(
    angle=st.sampled_from(ANGLES),
    passes=st.integers(1, 8),
    lanes=st.integers(0, 3),
    tubes=st.integers(8, 300),
)
def test_tubes_stand_a_pitch_apart_within_the_outer_tube_limit(angle, passes, lanes, tubes):
    at = exchanger(layout_angle=angle, tube_passes=passes, pass_lanes=lanes, tubes=tubes, tema="AES")
    field = tube_field(at)
    assert len(field.x) == min(tubes, field.capacity)
    assert distances(field).min() >= PITCH * (1 - 1e-9)
    assert np.hypot(field.x, field.y).max() <= (at.outer_tube_limit - OD) / 2 * (1 + 1e-9)
    assert set(field.tube_pass) == set(range(1, passes + 1))


@pytest.mark.parametrize(
    ("angle", "neighbours"),
    [("30 deg", (0, 60, 120)), ("60 deg", (30, 90, 150)), ("90 deg", (0, 90)), ("45 deg", (45, 135))],
)
def test_the_layout_angle_says_where_the_nearest_tubes_stand(angle, neighbours):
    """Directions of the six or four nearest tubes, the flow upright."""
    field = tube_field(exchanger(layout_angle=angle, tube_passes=1, tubes=200))
    middle = np.argmin(np.hypot(field.x, field.y))
    near = np.flatnonzero(np.isclose(distances(field)[middle], PITCH, rtol=1e-9))
    way = np.degrees(np.arctan2(field.y[near] - field.y[middle], field.x[near] - field.x[middle])) % 180
    assert len(near) == 2 * len(neighbours)
    assert np.allclose(np.unique(way.round(6) % 180), neighbours)


@pytest.mark.parametrize("angle", ANGLES)
@pytest.mark.parametrize(("tema", "passes"), [("BEM", 1), ("BEM", 2), ("AES", 1), ("AES", 2), ("AES", 4)])
def test_as_many_places_as_published_layouts_hold(angle, tema, passes):
    """Ludwig's and Kern's counts for 23 1/4 in, 3/4 on 1 in, widened by a tenth: no bundle limits are printed."""
    usual = standard_sizes.tube_count(BORE, OD, PITCH, float(angle.split()[0]), passes)
    capacity = tube_field(exchanger(layout_angle=angle, tema=tema, tube_passes=passes)).capacity
    assert 0.85 * usual.low <= capacity <= 1.1 * usual.high


@pytest.mark.parametrize(("passes", "lanes"), [(2, 0), (4, 0), (4, 1), (6, 0), (6, 1)])
def test_the_passes_hold_equal_shares_and_touch_only_the_next(passes, lanes):
    field = tube_field(exchanger(tube_passes=passes, pass_lanes=lanes, layout_angle="90 deg", tubes=240))
    counts = np.bincount(field.tube_pass)[1:]
    assert counts.max() - counts.min() <= 0.1 * counts.mean()
    assert len(field.lane_x) == lanes
    assert len(field.lane_y) == passes // (lanes + 1) - 1
    middles = [
        (field.x[of].mean(), field.y[of].mean()) for n in range(1, passes + 1) if (of := field.tube_pass == n).any()
    ]
    steps = [np.hypot(bx - ax, by - ay) for (ax, ay), (bx, by) in pairwise(middles)]
    assert max(steps) < 0.55 * BORE


@pytest.mark.parametrize(("passes", "lanes", "along"), [(2, 0, "y"), (2, 1, "x")])
def test_a_stated_lane_along_the_flow_keeps_its_width(passes, lanes, along):
    field = tube_field(exchanger(tube_passes=passes, pass_lanes=lanes, pass_lane_width="19 mm"))
    s = getattr(field, along)
    width = s[s > 0].min() - s[s < 0].max() - OD
    assert width == pytest.approx(0.019 if lanes else 0.016)  # a partition's lane, where none is stated


def test_u_tubes_leave_room_for_their_bends():
    field = tube_field(exchanger(tema="BEU"))
    legs = field.y[field.y > 0].min() - field.y[field.y < 0].max()
    assert legs >= 2.5 * OD * (1 - 1e-9)


def test_the_baffle_edges_lie_where_the_cut_says():
    # 25 % of the bore from the top: a quarter of the bore above the axis.
    assert tube_field(exchanger()).cut_y == pytest.approx(0.25 * BORE)
    assert tube_field(exchanger(tema="AXS", baffle_cut=None, baffle_spacing=None)).cut_y is None


def test_sealing_strips_lie_between_the_baffle_edges():
    field = tube_field(exchanger(sealing_strip_pairs=3))
    assert np.allclose(field.strip_y, np.array([-0.5, 0, 0.5]) * field.cut_y)


def test_fewer_places_than_tubes_are_said_and_all_of_them_drawn():
    at = exchanger(layout_angle="90 deg", tube_passes=4, tubes=360)
    field = tube_field(at)
    assert field.capacity == len(field.x) < 360
    drawn = bundle(at, Words("si"))
    assert f"Only {field.capacity} of 360 tubes find a place: check bore, pitch, layout and count." in drawn.alt


# --- drawn ------------------------------------------------------------------------------------------------------------


def test_another_layout_angle_is_another_drawing():
    _fonts()
    drawn = {}
    for angle in ANGLES:
        found = stated_bundle({**STATED, "layout_angle": angle})
        assert found is not None
        drawn[angle] = (figures.bundle(found).to_json(), draw_bundle(found, 480.0).asString("pdf"))
        assert angle in found.alt
    assert len(set(drawn.values())) == len(ANGLES)


def test_circles_are_as_large_as_the_tubes():
    found = bundle(exchanger(tube_passes=1, tubes=1), Words("si"))
    x = np.array(figures.bundle(found).data[0].x, dtype=float)
    assert np.nanmax(x) - np.nanmin(x) == pytest.approx(OD, abs=2e-5)


@pytest.mark.parametrize(
    "changes",
    [{"tube_pitch": "20 mm"}, {"tubes": 9000}, {"tema": "AEQ"}, {"shell_id": "wide"}, {"type": "double-pipe"}],
)
def test_what_cannot_be_built_is_not_drawn(changes):
    assert stated_bundle({**STATED, **changes}) is None


def test_an_exchanger_still_without_baffles_is_drawn():
    found = stated_bundle({key: value for key, value in STATED.items() if not key.startswith("baffle")})
    assert found is not None
    assert "Baffle cut" not in found.alt


def test_the_page_draws_the_bundle_while_the_case_is_still_incomplete(tmp_path, monkeypatch):
    monkeypatch.setenv("COUNTERCHECK_DATA", str(tmp_path))
    raw = {"format": "countercheck-case", "version": 1, "exchanger": STATED}
    app = page("case", kept(raw))
    assert "missing" in words(app)
    assert "260 tubes of 19.05 mm at 30 deg" in words(app)
    before = [chart.proto.spec for chart in app.get("plotly_chart")]
    next(box for box in app.selectbox if box.label == "Layout angle").set_value("45 deg")
    app.run()
    assert "260 tubes of 19.05 mm at 45 deg" in words(app)
    assert [chart.proto.spec for chart in app.get("plotly_chart")] != before
    assert len(before) == 1
