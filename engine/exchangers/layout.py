"""How the two fluids meet: the order in which the inside fluid passes the cells, the outside bay of each cell.

Every arrangement is one *unit* (a bank of a double pipe, one shell), repeated. Inside a unit each fluid runs through a
small network, given as `links`: `links[a, b]` is the share of the stream that goes from place a to place b, and index
-1 stands for the stream's own inlet (as a row) and outlet (as a column). The places are paths for the inside fluid and
bays for the outside fluid. A path is a sequence of cells; a bay has one mean temperature for all its cells.

Shell types are those of the TEMA Standards (Tubular Exchanger Manufacturers Association), figure N-1.2.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.intp]
Arrangement = Literal["counter", "co-current"]
Through = Literal["in turn", "split"]


def _same(a: NDArray[Any], b: NDArray[Any]) -> bool:
    return np.array_equal(a, b)


def in_turn(n: int) -> Floats:
    """Links of a stream that visits n places one after another."""
    return np.roll(np.eye(n + 1), 1, axis=1)


@dataclass(frozen=True, kw_only=True, eq=False)
class Layout:
    """Cells and bays of one unit, and how the units are connected.

    Cells are numbered along the inside paths, bays along the outside flow, upstream before downstream; over the whole
    layout unit after unit, in the order in which the inside fluid meets the units where it visits them in turn.
    """

    inside_paths: tuple[Ints, ...]
    """Cells of each inside path, in flow order; each cell of the unit once."""
    bay: Ints
    """(m,) outside bay of each of the unit's m cells."""
    area: Floats
    """(m,) share of the unit's area in each cell; sums to 1."""
    along: Floats
    """(m, 2) where each cell begins and ends along its bank or tube pass, in the inside flow's direction, 0 to 1."""
    inside_links: Floats = field(default_factory=lambda: in_turn(1))
    outside_links: Floats
    chain: Arrangement | None = None
    """Set where every cell is a bay of its own and the two fluids meet the cells in opposite or in the same order."""
    halvings: int = 0
    """How often the march halves each bay of one row to and fro (see `to_and_fro`), at the cost of its films once."""
    units: int = 1
    inside_units: Through = "in turn"
    """Whether the inside fluid visits the units in turn or is split equally over them."""
    outside_units: Through = "in turn"
    units_flow: Arrangement = "counter"
    """Where both fluids visit the units in turn: in opposite order or in the same."""

    def __post_init__(self) -> None:
        m, bays = len(self.bay), len(self.outside_links) - 1
        visited = np.sort(np.concatenate(self.inside_paths))
        if not np.array_equal(visited, np.arange(m)):
            raise ValueError(f"the inside paths must visit each of {m} cells once; they visit {visited.tolist()}")
        if not np.array_equal(np.unique(self.bay), np.arange(bays)):
            raise ValueError(
                f"each of {bays} outside bays must hold a cell; cells lie in {np.unique(self.bay).tolist()}"
            )
        if self.chain and not np.array_equal(self.bay, np.arange(m)[:: 1 if self.chain == "co-current" else -1]):
            raise ValueError(f"the cells of a {self.chain} chain do not lie in the bays {self.bay.tolist()}")
        if len(self.inside_links) != len(self.inside_paths) + 1:
            raise ValueError(f"{len(self.inside_paths)} inside paths need links of one more row and column")
        if self.area.shape != (m,) or (self.area <= 0).any() or abs(self.area.sum() - 1) > 1e-9:
            raise ValueError(f"the {m} area shares must be positive and sum to 1; given {self.area.tolist()}")
        if self.units < 1:
            raise ValueError(f"the number of units is {self.units}; at least 1 is needed")
        for side, links in (("inside", self.inside_links), ("outside", self.outside_links)):
            if (links < 0).any() or not np.allclose(links.sum(axis=0), links.sum(axis=1)):
                raise ValueError(f"the {side} links lose or gain flow")
            if abs(links[-1].sum() - 1) > 1e-9 or np.tril(links[:-1, :-1]).any():
                raise ValueError(f"the {side} links must carry the whole stream, upstream before downstream")

    @property
    def n_cells(self) -> int:
        return self.units * len(self.bay)

    @cached_property
    def to_and_fro(self) -> Ints | None:
        """(passes, bays) the cell of each inside path in each bay, where the paths follow one another and each runs the
        whole row of bays that the outside fluid visits in turn; None in any other layout."""
        passes, bays = len(self.inside_paths), len(self.outside_links) - 1
        if not (_same(self.outside_links, in_turn(bays)) and _same(self.inside_links, in_turn(passes))):
            return None
        met = [self.bay[path] for path in self.inside_paths]
        row = np.arange(bays)
        if not all(_same(bay, row) or _same(bay, row[::-1]) for bay in met):
            return None
        return np.array([path[np.argsort(bay)] for path, bay in zip(self.inside_paths, met, strict=True)])

    @cached_property
    def area_share(self) -> Floats:
        """(n_cells,) share of the whole area in each cell."""
        return np.tile(self.area / self.units, self.units)

    @cached_property
    def span(self) -> Floats:
        """(n_cells, 2) `along` of every cell."""
        return np.tile(self.along, (self.units, 1))

    @cached_property
    def inside_share(self) -> Floats:
        """(n_cells,) share of the whole inside flow that passes each cell."""
        share = np.empty(len(self.bay))
        for path, flow in zip(self.inside_paths, self.inside_links[:-1].sum(axis=1), strict=True):
            share[path] = flow
        return np.tile(share / (self.units if self.inside_units == "split" else 1), self.units)

    @cached_property
    def outside_share(self) -> Floats:
        """(n_cells,) share of the whole outside flow that passes each cell's bay."""
        share = self.outside_links[:-1].sum(axis=1)[self.bay]
        return np.tile(share / (self.units if self.outside_units == "split" else 1), self.units)


def banks(
    n: int,
    n_banks: int = 1,
    *,
    arrangement: Arrangement = "counter",
    inside: Through = "in turn",
    outside: Through = "in turn",
) -> Layout:
    """`n_banks` banks of a double pipe with n equal cells each.

    `arrangement` holds within a bank and for the order of the banks. Each fluid visits the banks in turn or is split
    equally over them.
    """
    order, edges = np.arange(n), np.linspace(0, 1, n + 1)
    return Layout(
        inside_paths=(order,),
        bay=order if arrangement == "co-current" else order[::-1],
        area=np.full(n, 1 / n),
        along=np.column_stack([edges[:-1], edges[1:]]),
        outside_links=in_turn(n),
        chain=arrangement,
        units=n_banks,
        inside_units=inside,
        outside_units=outside,
        units_flow=arrangement,
    )


def counter_chain(n: int) -> Layout:
    """n equal cells that the two fluids meet in opposite order."""
    return banks(n, arrangement="counter")


def cocurrent_chain(n: int) -> Layout:
    """n equal cells that the two fluids meet in the same order."""
    return banks(n, arrangement="co-current")


def in_series(layout: Layout, n: int) -> Layout:
    """A train of n such units, the two fluids visiting them in opposite order."""
    if layout.units > 1:
        raise ValueError(f"only a single unit can be put in series; this layout has {layout.units}")
    return replace(layout, units=n, inside_units="in turn", outside_units="in turn", units_flow="counter")


def _shell(
    passes: Sequence[Sequence[Ints]],
    lengths: Floats,
    outside_links: Floats,
    *,
    first_from_near: bool = True,
    chain: Arrangement | None = None,
) -> Layout:
    """A shell whose equal tube passes run to and fro along it.

    Each pass is one row of bays, or several in parallel over which the inside flow is split, given from the near end
    to the far end; the flow mixes between passes.
    """
    n, number = len(lengths), [len(rows) for rows in passes]
    links = np.zeros((sum(number) + 1, sum(number) + 1))
    row_bays, walks, begun, before = [], [], 0, np.array([-1])
    for k, rows in enumerate(passes):
        paths = np.arange(begun, begun + len(rows))
        links[np.ix_(before, paths)] = 1 / (len(before) * len(rows))
        walks += [np.arange(n)[:: 1 if (k % 2 == 0) == first_from_near else -1]] * len(rows)
        row_bays += list(rows)
        begun, before = begun + len(rows), paths
    links[before, -1] = 1 / len(before)
    ends = [np.concatenate([[0.0], np.cumsum(lengths[walk])]) for walk in walks]
    share = np.repeat([1 / (len(passes) * rows) for rows in number], number)
    return Layout(
        inside_paths=tuple(np.arange(n * begun).reshape(begun, n)),
        inside_links=links,
        bay=np.concatenate([bays[walk] for bays, walk in zip(row_bays, walks, strict=True)]),
        outside_links=outside_links,
        chain=chain,
        area=np.concatenate([lengths[walk] * part for walk, part in zip(walks, share, strict=True)]),
        along=np.concatenate([np.column_stack([x[:-1], x[1:]]) for x in ends]),
    )


def _lengths(n_bays: int, lengths: ArrayLike | None) -> Floats:
    given: Floats = np.ones(n_bays) if lengths is None else np.asarray(lengths, dtype=float)
    if n_bays < 1 or given.shape != (n_bays,) or not (given > 0).all():
        raise ValueError(f"{n_bays} bays need {n_bays} positive lengths; given {given.tolist()}")
    return given / float(given.sum())


def _branches(n_branches: int, n: int) -> Floats:
    """Links of a stream split equally over branches of n bays in turn, numbered branch after branch."""
    links = np.zeros((n_branches * n + 1, n_branches * n + 1))
    for first in range(0, n_branches * n, n):
        met = np.array([-1, *range(first, first + n), -1])
        links[met[:-1], met[1:]] = 1 / n_branches
    return links


def shell_pass(
    n_bays: int,
    tube_passes: int,
    first_pass: Arrangement = "counter",
    lengths: ArrayLike | None = None,
    halvings: int = 0,
) -> Layout:
    """TEMA E: one shell pass, any number of tube passes; relative `lengths` of the bays from the shell inlet on."""
    one = _shell(
        [[np.arange(n_bays)]] * tube_passes,
        _lengths(n_bays, lengths),
        in_turn(n_bays),
        first_from_near=first_pass == "co-current",
        chain=first_pass if tube_passes == 1 else None,
    )
    return replace(one, halvings=halvings)


def f_shell(
    n_bays: int,
    tube_passes: int = 2,
    first_pass: Arrangement = "counter",
    leakage: float = 0.0,
    lengths: ArrayLike | None = None,
) -> Layout:
    """TEMA F: two shell passes either side of a longitudinal baffle, `n_bays` along each, half the tube passes in each.

    `leakage` is the share of the outside flow that slips past the baffle at the nozzles' end, from the inlet straight
    to the outlet. `lengths` from that end on.
    """
    if tube_passes % 2:
        raise ValueError(f"an F shell has an even number of tube passes, half in each shell pass; given {tube_passes}")
    if not 0 <= leakage < 1:
        raise ValueError(f"the leakage past the longitudinal baffle is {leakage}; it must be at least 0 and below 1")
    links = (1 - leakage) * in_turn(2 * n_bays)
    links[-1, -1] = leakage
    shell_passes = [np.arange(n_bays), np.arange(n_bays, 2 * n_bays)[::-1]]
    order = shell_passes if first_pass == "co-current" else shell_passes[::-1]
    rows = [[row] for row in order for _ in range(tube_passes // 2)]
    chain = first_pass if tube_passes == 2 and not leakage else None
    return _shell(rows, _lengths(n_bays, lengths), links, chain=chain)


def _split_flow(
    zones: int, n_bays: int, tube_passes: int, first_pass: Arrangement, lengths: ArrayLike | None
) -> Layout:
    if n_bays % (2 * zones):
        raise ValueError(f"{n_bays} bays cannot be split into {2 * zones} equal groups")
    if tube_passes != 1 and tube_passes % 2:
        raise ValueError(f"a split-flow shell has one tube pass or an even number; given {tube_passes}")
    half = n_bays // (2 * zones)
    out_and_back = np.arange(4 * zones * half).reshape(2 * zones, 2, half)
    inlet_row, outlet_row = np.empty(n_bays, dtype=np.intp), np.empty(n_bays, dtype=np.intp)
    for branch, (away, back) in enumerate(out_and_back):
        here = slice(branch * half, (branch + 1) * half)
        inlet_row[here], outlet_row[here] = (away[::-1], back) if branch % 2 == 0 else (away, back[::-1])
    if tube_passes == 1:
        rows = [[inlet_row, outlet_row]]
    else:
        order = [inlet_row, outlet_row] if first_pass == "co-current" else [outlet_row, inlet_row]
        rows = [[row] for row in order for _ in range(tube_passes // 2)]
    return _shell(rows, _lengths(n_bays, lengths), _branches(2 * zones, 2 * half))


def g_shell(
    n_bays: int, tube_passes: int = 2, first_pass: Arrangement = "counter", lengths: ArrayLike | None = None
) -> Layout:
    """TEMA G (split flow): in at mid-length, half to each end along one side of a longitudinal baffle and back.

    `n_bays` along the shell (even). One tube pass fills both sides; else half the passes lie in each, those at the
    outlet side first where `first_pass` is counter.
    """
    return _split_flow(1, n_bays, tube_passes, first_pass, lengths)


def h_shell(
    n_bays: int, tube_passes: int = 2, first_pass: Arrangement = "counter", lengths: ArrayLike | None = None
) -> Layout:
    """TEMA H (double split flow): two G shells end to end, in at one and three quarters of the length."""
    return _split_flow(2, n_bays, tube_passes, first_pass, lengths)


def j_shell(n_bays: int, tube_passes: int = 1, inlets: Literal[1, 2] = 1, lengths: ArrayLike | None = None) -> Layout:
    """TEMA J (divided flow): in at mid-length and out at both ends (`inlets` 1), or the reverse (2); `n_bays` even."""
    if n_bays % 2:
        raise ValueError(f"{n_bays} bays cannot be divided into two equal halves")
    near, far = np.arange(n_bays).reshape(2, n_bays // 2)
    row = np.concatenate([near[::-1], far] if inlets == 1 else [near, far[::-1]])
    return _shell([[row]] * tube_passes, _lengths(n_bays, lengths), _branches(2, n_bays // 2))


def x_shell(
    n_bays: int,
    tube_passes: int = 1,
    first_pass: Arrangement = "counter",
    rows: int = 1,
    lengths: ArrayLike | None = None,
) -> Layout:
    """TEMA X (cross-flow): each of `n_bays` slices takes its share of the outside flow across all tube passes in turn.

    The outside fluid does not mix along the shell. The inside fluid of a pass is split over `rows` that the outside
    fluid meets one after another; one row means mixed, many rows unmixed.
    """
    x, layers = _lengths(n_bays, lengths), tube_passes * rows
    layer = np.arange(layers * n_bays).reshape(tube_passes, rows, n_bays)
    slices = np.arange(n_bays)
    links = np.zeros((layers * n_bays + 1, layers * n_bays + 1))
    links[-1, slices] = links[slices - n_bays - 1, -1] = x
    for k in range(1, layers):
        links[slices + (k - 1) * n_bays, slices + k * n_bays] = x
    order = layer if first_pass == "co-current" else layer[::-1]
    return _shell([list(one_pass) for one_pass in order], x, links)
