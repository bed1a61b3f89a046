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
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.intp]
Arrangement = Literal["counter", "co-current"]
Through = Literal["in turn", "split"]


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

    @cached_property
    def chain(self) -> Arrangement | None:
        """Whether a unit is a plain chain: one inside path, one bay a cell, met in the reverse or in the same order."""
        m = len(self.bay)
        if len(self.inside_paths) > 1 or not np.array_equal(self.outside_links, in_turn(m)):
            return None
        if np.array_equal(self.bay, np.arange(m)):
            return "co-current"
        return "counter" if np.array_equal(self.bay, np.arange(m)[::-1]) else None


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


def _along_shell(n_bays: int, lengths: ArrayLike | None) -> Floats:
    given: Floats = np.ones(n_bays) if lengths is None else np.asarray(lengths, dtype=float)
    if n_bays < 1 or given.shape != (n_bays,) or not (given > 0).all():
        raise ValueError(f"{n_bays} bays need {n_bays} positive lengths; given {given.tolist()}")
    return given / float(given.sum())


def _shell(passes: Sequence[Ints], lengths: Floats, outside_links: Floats, first_from_near: bool) -> Layout:
    """A shell whose equal tube passes run to and fro through `passes`: their bays from the near end to the far end."""
    n = len(lengths)
    walks = [np.arange(n)[:: 1 if (k % 2 == 0) == first_from_near else -1] for k in range(len(passes))]
    ends = [np.concatenate([[0.0], np.cumsum(lengths[walk])]) for walk in walks]
    return Layout(
        inside_paths=(np.arange(n * len(passes)),),
        bay=np.concatenate([bays[walk] for bays, walk in zip(passes, walks, strict=True)]),
        area=np.concatenate([lengths[walk] for walk in walks]) / len(passes),
        along=np.concatenate([np.column_stack([x[:-1], x[1:]]) for x in ends]),
        outside_links=outside_links,
    )


def shell_pass(
    n_bays: int, tube_passes: int, first_pass: Arrangement = "counter", lengths: ArrayLike | None = None
) -> Layout:
    """TEMA E: one shell pass, any number of tube passes; `lengths` of the bays from the shell inlet on, else equal."""
    bays = [np.arange(n_bays)] * tube_passes
    return _shell(bays, _along_shell(n_bays, lengths), in_turn(n_bays), first_pass == "co-current")
