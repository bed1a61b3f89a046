"""Where the tubes of a bundle stand in its cross-section, drawn to scale from what is stated of it.

The shell-side fluid crosses the bundle along y, so that baffle edges are lines of constant y. The places follow from
layout, pitch, outer tube limit and pass lanes alone, as a drawing office would begin: a check on the stated figures,
not the drawing of the exchanger that was built.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.correlations import Array
from engine.correlations.across_bundle import tube_layout
from engine.exchangers.shell_and_tube import ShellAndTube

PARTITION_LANE = 0.016
"""Between the tubes either side of a pass partition whose lane is not stated [m] (common practice)."""
U_BEND_LANE = 1.5
"""The same over the tube diameter for U-tubes, whose least bend is 2.5 diameters from leg to leg (common practice)."""


@dataclass(frozen=True, kw_only=True)
class TubeField:
    """Tube centres of one shell and what stands around them [m], the origin on the axis of the shell."""

    x: Array
    y: Array
    """(n,) the innermost places of each pass, as many as there are tubes; all of them where fewer were found."""
    tube_pass: NDArray[np.int_]
    """(n,) from 1 on; passes follow one another down and up through neighbouring sectors."""
    tube_od: float
    shell_radius: float
    bundle_radius: float
    """To the outer tube limit."""
    cut_y: float | None
    """Edge of the baffles that leave the upper window open, the others at -cut_y; None without baffles."""
    strip_y: Array
    """(pairs,) of the sealing strips, which reach from the bundle to the shell on both sides."""
    lane_x: Array
    lane_y: Array
    """Middles of the lanes along and across the flow."""
    tubes: int
    """As stated."""
    capacity: int
    """Places found."""


def tube_field(exchanger: ShellAndTube) -> TubeField:
    """The tube field of one shell of a sound exchanger."""
    layout = tube_layout(exchanger.angle)
    od, pitch = float(exchanger.tube_od), float(exchanger.tube_pitch)
    reach = (exchanger.outer_tube_limit - od) / 2
    passes = exchanger.tube_passes
    columns = exchanger.pass_lanes + 1 if passes % (exchanger.pass_lanes + 1) == 0 else 1
    bands = passes // columns
    across = max(PARTITION_LANE, U_BEND_LANE * od if exchanger.u_tubes else 0.0)
    along = float(exchanger.pass_lane_width) or PARTITION_LANE

    row_y, row_band = _lines(layout.row * pitch, across + od, bands, reach)
    step = layout.transverse * pitch
    rows = []
    for i, (y, band) in enumerate(zip(row_y, row_band, strict=True)):
        shifted = layout.staggered and _from_middle(i, len(row_y), bands) % 2 == 1
        x, column = _lines(step, along + od, columns, reach, step / 2 if shifted else 0.0)
        rows.append((x, np.full_like(x, y), column, np.full_like(column, band)))
    x, y, column, band = (np.concatenate(part) for part in zip(*rows, strict=True))

    within = np.hypot(x, y) <= reach * (1 + 1e-9)
    x, y, column, band = x[within], y[within], column[within], band[within]
    down = bands - 1 - band
    number = column * bands + np.where(column % 2 == 0, down, bands - 1 - down) + 1
    kept = _innermost(np.hypot(x, y), number, exchanger.tubes)
    radius = float(exchanger.shell_id) / 2
    cut_y = None
    if exchanger.baffle_cut is not None and exchanger.shell_letter != "X":
        cut_y = radius - float(exchanger.baffle_cut) * 2 * radius
    pairs = exchanger.sealing_strip_pairs
    strip_reach = cut_y if cut_y is not None else 0.5 * radius
    return TubeField(
        x=x[kept],
        y=y[kept],
        tube_pass=number[kept].astype(np.int_),
        tube_od=od,
        shell_radius=radius,
        bundle_radius=exchanger.outer_tube_limit / 2,
        cut_y=cut_y,
        strip_y=strip_reach * (2 * np.arange(1, pairs + 1) / (pairs + 1) - 1),
        lane_x=_between(_lines(step, along + od, columns, reach)),
        lane_y=_between((row_y, row_band)),
        tubes=exchanger.tubes,
        capacity=len(x),
    )


def _innermost(radius: Array, number: NDArray[np.int_], tubes: int) -> NDArray[np.int_]:
    """So many places, the passes filled evenly from the middle outwards."""
    rank = np.empty(len(radius), dtype=np.int_)
    order = np.argsort(np.round(radius, 9), kind="stable")
    for tube_pass in np.unique(number):
        of_pass = order[number[order] == tube_pass]
        rank[of_pass] = np.arange(len(of_pass))
    return np.sort(np.argsort(rank, kind="stable")[:tubes])


def _lines(pitch: float, lane: float, parts: int, reach: float, shift: float = 0.0) -> tuple[Array, NDArray[np.int_]]:
    """Lines of centres from -reach to reach, and the part from 0 on in which each lies.

    Centres stand `pitch` apart, at least `lane` across the boundary of two parts of a disc of equal area; `shift` moves
    those of every part away from the middle.
    """
    bounds = _equal_parts(parts)[parts // 2 + 1 :] * reach
    if parts % 2:
        s, part = shift, parts // 2
    else:
        s, part = max(lane, pitch) / 2 + shift, parts // 2
    found: list[tuple[float, int]] = []
    while s <= reach * (1 + 1e-9):
        found.append((s, part))
        s += pitch
        if len(bounds) and part < parts - 1 and s > bounds[0]:
            s += max(lane - pitch, 0.0)
            part, bounds = part + 1, bounds[1:]
    upper = [(s, part) for s, part in found if s > 0]
    lower = [(-s, parts - 1 - part) for s, part in reversed(upper)]
    middle = [(s, part) for s, part in found if s == 0]
    places = [*lower, *middle, *upper]
    return np.array([s for s, _ in places]), np.array([part for _, part in places], dtype=np.int_)


def _equal_parts(parts: int) -> Array:
    """(parts + 1,) ends, from -1 to 1, of the strips that cut a disc of radius 1 into equal areas."""
    s = np.sin(np.linspace(-np.pi / 2, np.pi / 2, 2001))
    share = 0.5 + (s * np.sqrt(1 - s**2) + np.arcsin(s)) / np.pi
    return np.interp(np.linspace(0, 1, parts + 1), share, s)


def _from_middle(i: int, rows: int, bands: int) -> int:
    """How many rows a row lies from the first one of its half."""
    return abs(2 * i + 1 - rows) // 2


def _between(lines: tuple[Array, NDArray[np.int_]]) -> Array:
    """Middles between the last line of one part and the first of the next."""
    s, part = lines
    turn = np.flatnonzero(np.diff(part))
    return (s[turn] + s[turn + 1]) / 2
