"""How the march converges as its cells are halved: once onto a closed form, once where properties change on the way."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache, partial
from itertools import pairwise

from engine import effectiveness as exact
from engine.casefile import parse_case
from engine.exchangers import layout
from engine.march import temperatures
from engine.proofs import Proof
from engine.rating import rate

CELLS = (10, 20, 40, 80)
FINENESS = (1, 2, 4, 8)


@dataclass(frozen=True, kw_only=True)
class Refinement:
    """The duty on ever finer cells, each count twice the one before. `exact` where a closed form gives the duty."""

    what: str
    cells: tuple[int, ...]
    duty: tuple[float, ...]
    exact: float | None = None

    @property
    def differences(self) -> tuple[float | None, ...]:
        """From the closed form, or where there is none from the cells before [W]."""
        if self.exact is not None:
            return tuple(duty - self.exact for duty in self.duty)
        return (None, *(fine - coarse for coarse, fine in pairwise(self.duty)))

    @property
    def orders(self) -> tuple[float | None, ...]:
        """To which power of the cell size the differences fell since the cells before."""
        return (None, *(_order(pair) for pair in pairwise(self.differences)))


def _order(differences: Sequence[float | None]) -> float | None:
    coarse, fine = differences
    return math.log2(abs(coarse / fine)) if coarse and fine else None


@cache
def onto_the_closed_form() -> Refinement:
    """A shell of two tube passes with one U everywhere: water of 60 kW/K cooled by 90 kW/K, 90 kW/K of conductance."""
    C_hot, C_cold, UA, span = 60e3, 90e3, 90e3, 50.0

    def duty(bays: int) -> float:
        order = layout.shell_pass(bays, 2)
        found = temperatures(order, UA * order.area_share, [C_cold], [C_hot], 300.0, 300.0 + span)
        return abs(float(found.heat.sum()))

    closed = float(exact.effectiveness_shell(UA / C_hot, C_hot / C_cold)) * C_hot * span
    return Refinement(
        what="One shell of two tube passes, constant properties, against the closed form",
        cells=tuple(layout.shell_pass(bays, 2).n_cells for bays in CELLS),
        duty=tuple(map(duty, CELLS)),
        exact=closed,
    )


@cache
def with_changing_properties() -> Refinement:
    """Cold water warmed by pressurised hot water in one long leg: all properties change by far from cell to cell."""
    case = parse_case(
        {
            "format": "countercheck-case",
            "version": 1,
            "inside": {"fluid": "Water", "flow": "8 t/h", "T_in": "5 degC", "p_in": "40 barg"},
            "outside": {"fluid": "Water", "flow": "20 t/h", "T_in": "200 degC", "p_in": "40 barg"},
            "exchanger": {
                "type": "double-pipe",
                "arrangement": "co-current",
                "inner_pipe": {"nps": "2", "schedule": "40"},
                "outer_pipe": {"nps": "3", "schedule": "40"},
                "leg_length": "90 m",
                "legs_in_series": 1,
                "wall_conductivity": "50 W/mK",
            },
        }
    )
    return Refinement(
        what="One long leg of a double pipe, properties and films changing on the way, against the cells before",
        cells=tuple(case.exchanger.cells(fineness).layout.n_cells for fineness in FINENESS),
        duty=tuple(rate(case, fineness=fineness).fouled.duty for fineness in FINENESS),
    )


def refinements() -> tuple[Refinement, ...]:
    return onto_the_closed_form(), with_changing_properties()


def _last_order(study: str) -> float:
    found = {"constant": onto_the_closed_form, "changing": with_changing_properties}[study]().orders[-1]
    assert found is not None
    return found


SECOND_ORDER = "second order, as the mean of a bay or a cell is weighted between its ends"

ROWS: tuple[Proof, ...] = tuple(
    Proof(
        subject=subject,
        what=f"order of convergence, {study} properties",
        ours=partial(_last_order, study),
        value=2.0,
        unit="-",
        tolerance=tolerance,
        reason=reason,
        kind="derived",
        source=SECOND_ORDER,
        relative=False,
    )
    for subject, study, tolerance, reason in (
        ("temperatures", "constant", 0.02, "terms of higher order, which die away as cells are halved"),
        ("rate", "changing", 0.2, "the film falls off steeply behind the entrance of the leg, which dies away slower"),
    )
)
