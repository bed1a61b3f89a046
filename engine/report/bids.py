"""Bids side by side: what each sheet prints, and what all of them come to on one basis."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from engine.case import Case
from engine.casefile import parse_case, raw_case
from engine.datasheet import GRADES, Audit
from engine.datasheet.conversion import case_of_sheet
from engine.datasheet.figures import Figures, Missing, bare_area, bore, outside_diameter, surface
from engine.rating import rate
from engine.report.blocks import Block, Table
from engine.report.words import NONE, Words
from engine.stated import SIDES, CaseError, Figure, Side
from engine.states import Rating

MOST_BIDS = 4
PRINTED: tuple[tuple[str, str], ...] = (
    ("duty", "heat_flow"),
    ("mtd", "temperature_difference"),
    ("F", ""),
    ("U_service", "heat_transfer_coefficient"),
    ("U_dirty", "heat_transfer_coefficient"),
    ("U_clean", "heat_transfer_coefficient"),
    ("excess_area", "fraction"),
)
PRINTED_OF_SIDE: tuple[tuple[str, str], ...] = (
    ("flow", ""),
    ("T_in", "temperature"),
    ("T_out", "temperature"),
    ("R_fouling", "fouling_resistance"),
    ("velocity", "velocity"),
    ("dp", "pressure_difference"),
    ("dp_allowed", "pressure_difference"),
)
BUILT: tuple[tuple[str, str], ...] = (
    ("tema", ""),
    ("shells_in_series", ""),
    ("shells_in_parallel", ""),
    ("shell_id", "length"),
    ("tubes", ""),
    ("tube_od", "length"),
    ("tube_length", "length"),
    ("tube_passes", ""),
    ("leg_length", "length"),
    ("legs_in_series", ""),
    ("weight_empty", "mass"),
)


@dataclass(frozen=True)
class Bid:
    """One sheet as it stands beside the others; `case` is the enquiry, where there is one."""

    audit: Audit
    case: Case | None = None

    @cached_property
    def figures(self) -> Figures:
        """The sheet's own, without what the enquiry states."""
        about = self.audit.subject
        return Figures({**about.sheet_values, "type": about.values["type"]}, about)

    def found(self, of: Callable[[Figures], float]) -> float | None:
        """A figure that follows from several; None where one of them is lacking."""
        try:
            return float(of(self.figures))
        except (Missing, ValueError, ZeroDivisionError):
            return None

    def U_dirty(self, R: Mapping[Side, float]) -> float | None:
        """From the printed clean U, with fouling that is the same for all bids [W/m²K]."""

        def of(v: Figures) -> float:
            ratio = outside_diameter(v) / bore(v)
            return 1 / (1 / float(v["U_clean"]) + R["outside"] + R["inside"] * ratio)

        return self.found(of)

    @cached_property
    def rated(self) -> Rating | str:
        """Our rating of this exchanger in the service of the enquiry, or of its own sheet; or why there is none."""
        raw = case_of_sheet(self.audit.sheet)
        if self.case is not None:
            enquiry = raw_case(self.case)
            enquiry.pop("sheet", None)
            raw = {**enquiry, "exchanger": raw["exchanger"]}
        try:
            rating = rate(parse_case(raw))
        except CaseError as error:
            return "; ".join(str(problem) for problem in error.problems[:3])
        return rating if rating.states else rating.problem


def bids_side_by_side(audits: Mapping[str, Audit], case: Case | None = None, system: str = "si") -> tuple[Block, ...]:
    """Tables of 2 to 4 bids by name: on one basis, as printed, and what was found on each.

    Raises ValueError for another number of bids.
    """
    if not 2 <= len(audits) <= MOST_BIDS:
        raise ValueError(f"{len(audits)} bids cannot stand side by side; allowed are 2 to {MOST_BIDS}")
    bids, words = {name: Bid(audit, case) for name, audit in audits.items()}, Words(system)
    return (*_one_basis(bids, case, words), _printed(bids, words), _checked(bids))


def _one_basis(bids: Mapping[str, Bid], case: Case | None, words: Words) -> Iterator[Block]:
    fouling: dict[Side, float] = {side: _common_fouling(bids.values(), case, side) for side in SIDES}
    R = [words.show(fouling[side], "fouling_resistance", 3) for side in SIDES]
    whose = "the enquiry" if case is not None else "the bid that states most"
    service = "the service of the enquiry" if case is not None else "the service that each sheet states"
    yield (
        f"Whole unit, outside surface, fouling of {whose} for all (inside {R[0]}, outside {R[1]}), and our own rating "
        f"of each exchanger in {service}."
    )
    rows: list[tuple[str, ...]] = []

    def row(label: str, cells: Sequence[str]) -> None:
        if any(cell != NONE for cell in cells):
            rows.append((label, *cells))

    each = list(bids.values())
    row("Surface as printed", [words.show(bid.found(surface), "area") for bid in each])
    row("Surface from the tubes", [words.show(bid.found(bare_area), "area") for bid in each])
    U = [bid.U_dirty(fouling) for bid in each]
    row("Dirty U on this fouling", [words.show(u, "heat_transfer_coefficient", 3) for u in U])
    row("Excess of it over service U", [_excess(bid, u) for bid, u in zip(each, U, strict=True)])
    ratings = [bid.rated for bid in each]
    known = [rating if isinstance(rating, Rating) else None for rating in ratings]
    row("Our duty, fouled", [words.show(r.fouled.duty if r else None, "heat_flow") for r in known])
    row("Our U, fouled", [words.show(r.fouled.U_dirty if r else None, "heat_transfer_coefficient", 3) for r in known])
    row("Our margin of U", [_percent(r.fouled.margin if r else None) for r in known])
    about = each[0].audit.subject
    for side in SIDES:
        drops = [r.fouled.sides[side].dp if r else None for r in known]
        row(
            f"Our pressure drop ({about.side_name(side)})",
            [words.show(drop, "pressure_difference", 3) for drop in drops],
        )
    yield Table(header=("On one basis", *bids), rows=tuple(rows))
    for name, rating in zip(bids, ratings, strict=True):
        if isinstance(rating, str):
            yield f"{name} could not be rated: {rating}."


def _common_fouling(bids: Iterable[Bid], case: Case | None, side: Side) -> float:
    if case is not None:
        return float(case.stream(side).R_fouling)
    return max(float(bid.audit.sheet.side(side).R_fouling or 0.0) for bid in bids)


def _excess(bid: Bid, U: float | None) -> str:
    service = bid.audit.sheet.U_service
    return _percent(U / service - 1 if U is not None and service else None)


def _percent(share: float | None) -> str:
    return NONE if share is None else f"{100 * share:+.0f} %"


def _printed(bids: Mapping[str, Bid], words: Words) -> Table:
    about = next(iter(bids.values())).audit.subject
    paths = [*PRINTED, *((f"{side}.{name}", q) for name, q in PRINTED_OF_SIDE for side in SIDES), *BUILT]
    rows = []
    for path, quantity in paths:
        cells = [_cell(bid.audit.subject.sheet_values.get(path), quantity, words) for bid in bids.values()]
        if any(cell != NONE for cell in cells):
            label = about.label(path)
            rows.append((f"{label[:1].upper()}{label[1:]}", *cells))
    return Table(header=("As printed", *bids), rows=tuple(rows))


def _cell(value: object, quantity: str, words: Words) -> str:
    """To the digits that were typed."""
    if value is None:
        return NONE
    if not isinstance(value, Figure):
        return str(value)
    digits = len(str(round(abs(value) / value.digit))) if value.digit else 4
    # Kelvin or Fahrenheit would make a typed 26.0 °C one of four digits.
    fixed = 4 if value.quantity == "temperature" else min(max(digits, 2), 5)
    return words.show(float(value), quantity or value.quantity, fixed)


def _checked(bids: Mapping[str, Bid]) -> Table:
    audits = [bid.audit for bid in bids.values()]
    counted = ("clear", "found", "not possible")
    rows = [(name.capitalize(), *(str(audit.counts[name]) for audit in audits)) for name in (*counted, *GRADES[:2])]
    slips = [
        "\n".join(f"{audit.subject.label(slip.field)}: {slip.name}" for slip in audit.slips) or NONE for audit in audits
    ]
    return Table(header=("Checks", *bids), rows=(*rows, ("Looks like a slip", *slips)))


__all__ = ["MOST_BIDS", "bids_side_by_side"]
