"""What the figures rest on: methods side by side, second opinions, relations with their limits, numbered sources."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

from engine import units
from engine.correlations import REGISTER, Correlation, Source
from engine.correlations.losses import COEFFICIENTS, Figure
from engine.correlations.sources import COMMON_PRACTICE
from engine.report.blocks import Block, Table
from engine.report.rated import ASSUMED, Rated
from engine.report.words import NONE, capital, limits_of, off, relation_name
from engine.stated import SIDES, Side
from engine.states import State

SHORT = 40
"""Characters; a finding's source that takes more is cited by number."""
NOT_CHECKED, UNCHECKED = "not checked", " (printed page not checked)"
"""Of a source's printed page, in a table and behind the source."""

METHOD_NAMES = {
    "march": "Cell by cell, local properties",
    "effectiveness_ntu": "ε-NTU, mean properties",
    "lmtd": "LMTD and F, mean properties",
}


@dataclass(frozen=True, kw_only=True)
class Opinion:
    """What another relation, or another coefficient, gives for a film or a drop of the fouled state."""

    of: str
    """ "Tube side film"."""
    by: Correlation | Figure
    ratio: float
    """Of its figure to the rated one."""
    shown: str

    @property
    def name(self) -> str:
        by = self.by
        return relation_name(by) if isinstance(by, Correlation) else f"{capital(by.what)}, {by.value:g} {by.unit}"

    @property
    def holds(self) -> str:
        return limits_of(self.by) if isinstance(self.by, Correlation) else NONE


@dataclass(frozen=True)
class Basis:
    """Knows which relations and sources one rating uses, and by which number each source is cited."""

    r: Rated

    def methods(self) -> Iterator[Block]:
        r = self.r
        if not r.both:
            return
        outlets = (f"{r.names[side]} outlet" for side in SIDES)
        yield Table(
            header=("Fouled state by", "Duty", "Off", *outlets, "U in service", "F"),
            rows=tuple(self._method_row(name, found) for name, found in r.rating.methods.items()),
            widths=(2.1, 1.1, 0.7, 1.3, 1.3, 1.6, 0.6),
        )
        for name, found in r.rating.methods.items():
            if isinstance(found, str):
                yield f"{METHOD_NAMES[name]}: not possible, {found}."
        if self.opinions:
            yield Table(
                header=("Figure", "By another relation", "Gives", "Off", "Holds for", "Source"),
                rows=tuple(
                    (o.of, o.name, o.shown, off(o.ratio - 1, 0), o.holds, self.cite(o.by.source)) for o in self.opinions
                ),
                title="Second opinions on films and drops, fouled, at mean properties",
                widths=(1.1, 2.4, 1.3, 0.6, 3.9, 0.6),
                fine=True,
            )
            yield f"Spread around the figure used: {'; '.join(self._spreads())}."

    def _method_row(self, name: str, found: State | str) -> tuple[str, ...]:
        r = self.r
        if isinstance(found, str):
            return (METHOD_NAMES[name], "not possible", *([NONE] * 5))
        return (
            METHOD_NAMES[name],
            r.words.show(found.duty, "heat_flow"),
            NONE if name == "march" else off(found.duty / r.rating.fouled.duty - 1.0),
            *(r.words.show(found.T_out[side], "temperature") for side in SIDES),
            r.words.show(found.U_dirty, "heat_transfer_coefficient"),
            f"{found.F:.3f}",
        )

    @cached_property
    def opinions(self) -> list[Opinion]:
        """Films and then drops, the inside first."""
        sides = [(self.r.names[side], self.r.rating.fouled.sides[side]) for side in SIDES]
        found = [
            (f"{name} {what}", by, rated, "heat_transfer_coefficient" if what == "film" else "pressure_difference")
            for what, opinions, rated_of in (
                ("film", "second_opinions", "h"),
                ("drop", "second_opinion_drops", "dp"),
            )
            for name, at in sides
            for by, rated in ((item, getattr(at, rated_of)) for item in getattr(at, opinions).items())
        ]
        return [
            Opinion(
                of=of,
                by=REGISTER.get(by) or COEFFICIENTS[by],
                ratio=value / rated,
                shown=self.r.words.show(value, kind, 3),
            )
            for of, (by, value), rated, kind in found
        ]

    def _spreads(self) -> Iterator[str]:
        ratios: dict[str, list[float]] = {}
        for opinion in self.opinions:
            ratios.setdefault(opinion.of, [1.0]).append(opinion.ratio)
        for of, found in ratios.items():
            low, high = (off(ratio - 1, 0) for ratio in (min(found), max(found)))
            yield f"{of.lower()} {low} to {high}" if low != high else f"{of.lower()} under 1 %"

    def _relations(self, state: State, side: Side) -> tuple[Correlation, ...]:
        """All that the figures of a side rest on."""
        at, case = state.sides[side], self.r.case
        if side == case.steam_side:
            return at.relations
        regimes = state.profile.regime[side] if state.profile is not None else (at.regime,)
        supporting = case.exchanger.supporting(side, regimes, case.fluid(side).phase == "gas")
        return (*at.relations, case.exchanger.drop_relation(side), *supporting)

    @cached_property
    def used(self) -> dict[Correlation, list[str]]:
        """The relations that the figures rest on, and the sides they are used on."""
        used: dict[Correlation, list[str]] = {}
        for side in SIDES:
            for relation in dict.fromkeys(x for state in self.r.both for x in self._relations(state, side)):
                used.setdefault(relation, []).append(self.r.names[side])
        return used

    @cached_property
    def coefficients(self) -> list[Figure]:
        """The loss coefficients that entered the drops."""
        case = self.r.case
        rated = [side for side in SIDES if self.r.both and side != case.steam_side]
        return list(dict.fromkeys(figure for side in rated for figure in case.exchanger.loss_coefficients(side)))

    @cached_property
    def sources(self) -> dict[str, str]:
        """All that is cited by number, in the order in which a reader meets it, and whether its page was compared."""
        found = [figure.source for figure in self.r.case.exchanger.derived()]
        if self.r.both:
            found += [opinion.by.source for opinion in self.opinions]
        cited = {source.text: _page(source) for source in found}
        for finding in self.r.found:
            if len(finding.source) > SHORT and finding.code != ASSUMED:
                text = finding.source.removesuffix(UNCHECKED)
                cited.setdefault(text, NONE if text == finding.source else NOT_CHECKED)
        for source in (*(relation.source for relation in self.used), *(figure.source for figure in self.coefficients)):
            cited[source.text] = _page(source)
        return cited

    def cite(self, source: Source | str) -> str:
        """Its number; of a finding whose source is said in a few words, these."""
        text = source.text if isinstance(source, Source) else source.removesuffix(UNCHECKED)
        return f"[{list(self.sources).index(text) + 1}]" if text in self.sources else text

    def relations(self) -> Iterator[Block]:
        if not self.r.both:
            return
        yield Table(
            header=("Relation", "Side", "Holds for", "Scatter (1 sd)", "Source"),
            rows=tuple(
                (
                    f"{relation_name(relation)}: {relation.gives}",
                    ", ".join(places),
                    f"{relation.applies}; {limits_of(relation)}",
                    _scatter(relation),
                    self.cite(relation.source),
                )
                for relation, places in self.used.items()
            ),
            widths=(2.1, 0.9, 4.4, 1.65, 0.6),
            fine=True,
        )
        taken = "; ".join(f"{f.what} {f.value:g} {self.cite(f.source)}" for f in self.coefficients)
        if taken:
            yield f"Losses taken, in velocity heads: {taken}."

    def cited(self) -> Iterator[Block]:
        if self.sources:
            yield Table(
                header=("", "Source", "Printed page"),
                rows=tuple((f"[{i}]", text, page) for i, (text, page) in enumerate(self.sources.items(), 1)),
                widths=(0.5, 11, 1.4),
                fine=True,
            )


def _page(source: Source) -> str:
    """Whether the printed page was compared."""
    return NONE if source == COMMON_PRACTICE else "checked" if source.checked else NOT_CHECKED


def _scatter(relation: Correlation) -> str:
    if relation.scatter is None:
        return "not known"
    return f"{units.show(relation.scatter, 'fraction', digits=2)}, {relation.scatter_origin}"
