"""What a report says: built once, drawn by the PDF, the screen and the command line, so that they cannot disagree."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import groupby
from statistics import NormalDist

import numpy as np
from numpy.typing import NDArray

from engine import __version__, units
from engine.case import Case
from engine.correlations import REGISTER, Correlation, Source, losses
from engine.exchangers.double_pipe import DoublePipe
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.findings import GRADES, Finding, Verdict
from engine.findings import findings as by_grade
from engine.report import inputs
from engine.report.blocks import Block, Chart, Line, Section, Strip, Table
from engine.report.words import NONE, Ends, Words, capital, fluid_name, limits_of, listed, page_of, relation_name
from engine.stated import SIDES, Side
from engine.states import Profile, Rating, SideState, State
from engine.uncertainty import Intervals

STATES = ("clean", "fouled")
MOST_CONTRIBUTORS = 5
LEAST_SHARE = 0.005
"""Of the variance, for a contributor to be shown."""
ASSUMED = "assumed"
"""Code of the findings that name a default."""

METHOD_NAMES = {
    "march": "Cell by cell, local properties",
    "effectiveness_ntu": "ε-NTU, mean properties",
    "lmtd": "LMTD and F, mean properties",
}
PARTS = {
    "friction": "Friction",
    "returns": "Return bends and headers",
    "entrance_exit": "Entrance and exit",
    "crossflow": "Cross-flow between baffles",
    "window": "Windows",
    "ends": "End zones",
    "nozzles": "Nozzles",
}
PROPERTIES = (
    ("rho", "Density", "density"),
    ("cp", "Specific heat", "specific_heat"),
    ("mu", "Viscosity", "viscosity"),
    ("k", "Conductivity", "conductivity"),
)
OWN_UNITS = {"flow": "mass_flow", "T_in": "temperature_difference", "R_fouling": "fouling_resistance"}
"""Doubts that are held in SI and not as a share."""

ALWAYS_ASSUMED = (
    "Steady flow; no heat is conducted along the wall or the fluids; each fluid is mixed over its cross-section.",
    "Pressure drops lie between the stated nozzles or leg ends and hold no static head.",
    "The clean state has no fouling resistance; the fouled state has the stated ones over the whole surface.",
    "Intervals are 95 % and take the doubts as independent; a relation's scatter is common to all cells.",
)
NEVER_CHECKED = (
    "mechanical design, thickness and remaining life of pressure parts",
    "sizing of relief, and tube rupture",
    "vibration and noise beyond a screening of the tubes in a shell, erosion and corrosion",
    "supports, nozzle loads and thermal stress",
    "start-up, shut-down and upset operation",
    "compatibility of the materials with the fluids",
)
CAUTIONS = (
    "This is a rating aid. It does not replace the judgement of the responsible engineer, who verifies the inputs and "
    "the result and signs under local law.",
    "Pressure parts and relief are not covered. Changes of pressure equipment, re-rates, repairs and plugging belong "
    "to the authorised inspector, the local code in force and licensed practice.",
    "Nothing here is an instruction to operate, vent, drain or open equipment: that goes by permit and by the plant's "
    "own procedures.",
)


def sections(
    rating: Rating,
    intervals: Mapping[str, Intervals],
    verdicts: Sequence[Verdict],
    system: str = "si",
    studies: Sequence[Section] = (),
) -> tuple[Section, ...]:
    """The whole report in reading order, with figures in a system of units ("si", "us", "metric").

    `verdicts` should have been judged in the same system, and `studies`, sections of their own, be written in it.
    Raises ValueError for an unknown system.
    """
    if system not in units.SYSTEMS:
        raise ValueError(f'"{system}" is not a system of units; allowed are {", ".join(units.SYSTEMS)}')
    report = _Report(rating, intervals, verdicts, Words(system))
    made: tuple[tuple[str, str, Iterable[Block]], ...] = (
        ("identity", f"Rating of {rating.case.tag or 'an exchanger'}", report.identity()),
        ("answer", "Answer", report.answer()),
        ("scheme", "Exchanger", report.scheme()),
        ("inputs", "Inputs", inputs.inputs(rating.case, report.words, report.cite)),
        ("results", "Results", report.results()),
        ("profile", "Temperatures along the exchanger", report.profile()),
        ("resistances", "Where the resistance lies", report.resistances()),
        ("drops", "Pressure drops", report.drops()),
        ("methods", "Methods side by side", report.methods()),
        ("findings", "Findings", report.findings()),
        ("contributors", "What to measure to be surer", report.contributors()),
        *((section.key, section.title, section.blocks) for section in studies),
        ("assumptions", "Assumptions", report.assumptions()),
        ("not_checked", "Not checked", report.not_checked()),
        ("relations", "Relations and sources", report.relations()),
        ("cautions", "Cautions", CAUTIONS),
        ("signatures", "Signatures", report.signatures()),
    )
    written = (Section(key=key, title=title, blocks=tuple(blocks)) for key, title, blocks in made)
    return tuple(section for section in written if section.blocks)


def _chance(probability: float) -> str:
    if probability < 0.01:
        return "below 1 %"
    if probability > 0.99:
        return "above 99 %"
    return f"about {100 * probability:.0f} %"


def _percent(share: float, digits: int = 1) -> str:
    return f"{100 * share:.{digits}f} %"


def _off(share: float, digits: int = 1) -> str:
    return f"{100 * share:+.{digits}f} %"


@dataclass(frozen=True)
class _Report:
    """Writes each section of one rating; a section that has nothing to say comes out empty."""

    rating: Rating
    intervals: Mapping[str, Intervals]
    verdicts: Sequence[Verdict]
    words: Words

    @property
    def case(self) -> Case:
        return self.rating.case

    @property
    def names(self) -> Mapping[Side, str]:
        return self.case.exchanger.side_names

    @cached_property
    def found(self) -> tuple[Finding, ...]:
        return by_grade(self.verdicts)

    @property
    def both(self) -> list[State]:
        """Clean and fouled; empty where the rating has no answer."""
        return [self.rating.states[name] for name in STATES if name in self.rating.states]

    @property
    def columns(self) -> list[tuple[Side, str, SideState]]:
        """Each side clean and fouled, in the order of a table's columns."""
        return [(side, state.state, state.sides[side]) for side in SIDES for state in self.both]

    def _ends(self, state: str, quantity: str) -> Ends:
        return self.intervals[state].of.get(quantity) if state in self.intervals else None

    def _side(self, side: Side) -> str:
        """In the middle of a sentence, with its fluid."""
        return f"{self.names[side].lower()} ({fluid_name(self.case.stream(side))})"

    def _where(self, place: str) -> str:
        """ "outside film" in the trade names of the exchanger's sides."""
        first, _, rest = place.partition(" ")
        named = {str(side): name for side, name in self.names.items()}
        return f"{named.get(first, capital(first))} {rest}".rstrip()

    def identity(self) -> Iterator[Block]:
        case = self.case
        named = (case.tag, case.service, case.plant, case.revision)
        yield Table(
            header=("Tag", "Service", "Plant", "Revision", "Input hash", "Engine"),
            rows=((*(text or NONE for text in named), case.input_hash, f"Countercheck {__version__}"),),
            widths=(1.4, 2.4, 2, 0.8, 1.5, 1.4),
        )

    # --- answer -------------------------------------------------------------------------------------------------------

    def answer(self) -> Iterator[Block]:
        if not self.both:
            yield f"No answer: {self.rating.problem}."
        else:
            yield self._verdict()
            yield self._beside()
            yield " ".join(self._drop_verdict(side) for side in SIDES)
        yield self._tally()

    def _outlet(self, state: State, side: Side) -> str:
        return self.words.doubted(state.T_out[side], "temperature", self._ends(state.state, f"{side}.T_out"))

    def _duty(self, state: State) -> str:
        return self.words.doubted(state.duty, "heat_flow", self._ends(state.state, "duty"))

    @cached_property
    def _asked(self) -> list[Side]:
        """Sides whose outlet is stated, as a requirement."""
        return [side for side in SIDES if self.case.stream(side).T_out is not None]

    def _verdict(self) -> str:
        """The answer in one sentence: fouled outlet and duty, met or missed by how much, and how sure."""
        tag, fouled = self.case.tag or "This exchanger", self.rating.fouled
        duty = f"with a duty of {self._duty(fouled)}"
        if not self._asked:
            hot = self.case.hot
            inlet = self.words.show(self.case.T_in(hot), "temperature")
            return (
                f"{tag}, fouled, brings the {self._side(hot)} from {inlet} to {self._outlet(fouled, hot)}, {duty}; no "
                "required outlet is stated, so there is nothing to meet or to miss."
            )
        outcomes = [self._against(side) for side in self._asked]
        met = "meets" if all(good for good, _, _ in outcomes) else "misses"
        text = f"{tag} {met} what is required: fouled, {listed([said for _, said, _ in outcomes])}, {duty}"
        chances = [chance for _, _, chance in outcomes if chance is not None]
        if chances:
            text += f"; by the doubts known here the chance that it meets this is {_chance(min(chances))}"
        return text + "."

    def _against(self, side: Side) -> tuple[bool, str, float | None]:
        """Whether a stated outlet is met, by how much in words, and how likely that is."""
        wanted, cools = float(self.case.stream(side).T_out or 0.0), side == self.case.hot
        T, ends = self.rating.fouled.T_out[side], self._ends("fouled", f"{side}.T_out")
        over = T - wanted
        met = over <= 0 if cools else over >= 0
        shifted = (ends[0] - wanted, ends[1] - wanted) if ends else None
        gap = self.words.best(abs(over), "temperature_difference", shifted)
        how = f"{gap} {'below' if over < 0 else 'above'}" if met else f"{gap} too {'hot' if cools else 'cold'} for"
        required = self.words.show(wanted, "temperature")
        text = (
            f"the {self._side(side)} leaves at {self._outlet(self.rating.fouled, side)}, {how} the required {required}"
        )
        sd = self.intervals["fouled"].sd[f"{side}.T_out"] if "fouled" in self.intervals else 0.0
        chance = NormalDist().cdf((-over if cools else over) / sd) if sd > 0 else None
        return met, text, chance

    def _beside(self) -> str:
        """The outlets that the first sentence leaves out, the clean state, and the margin of U."""
        fouled, clean = self.rating.fouled, self.rating.clean
        told = self._asked or [self.case.hot]
        parts = [f"Fouled, the {self._side(s)} leaves at {self._outlet(fouled, s)}." for s in SIDES if s not in told]
        outlets = listed([f"the {self.names[side].lower()} leaves at {self._outlet(clean, side)}" for side in told])
        parts.append(f"Clean, {outlets}, with a duty of {self._duty(clean)}.")
        if fouled.U_required is not None and fouled.margin is not None and clean.margin is not None:
            required = self.words.show(fouled.U_required, "heat_transfer_coefficient", 3)
            U = self.words.best(fouled.U_dirty, "heat_transfer_coefficient", self._ends("fouled", "U_dirty"))
            margins = f"{_off(fouled.margin, 0)} fouled and {_off(clean.margin, 0)} clean"
            parts.append(f"U in service is {U}, required is {required}: a margin of {margins}.")
        if self.rating.requirement:
            parts.append(f"No required U: {self.rating.requirement}.")
        if not all(state.converged for state in self.both):
            parts.append("The temperatures did not settle: these figures are not to be used.")
        return " ".join(parts)

    def _drop_verdict(self, side: Side) -> str:
        dp, kind = self.rating.fouled.sides[side].dp, "pressure_difference"
        if side == self.case.steam_side:
            return f"The drop of the steam that condenses in the {self.names[side].lower()} is not rated."
        drops = self.words.doubted(dp, kind, self._ends("fouled", f"{side}.dp"))
        text, allowed = f"The {self.names[side].lower()} drops {drops}", self.case.stream(side).dp_allowed
        if allowed is None:
            return f"{text}; no allowed drop is stated."
        gap = f"{self.words.show(abs(dp - allowed), kind, 3)} {'over' if dp > allowed else 'under'}"
        return f"{text}, {gap} the allowed {self.words.show(allowed, kind, 3)}."

    def _tally(self) -> str:
        outcomes = [verdict.outcome for verdict in self.verdicts]
        run, missing = outcomes.count("clear") + outcomes.count("found"), outcomes.count("not possible")
        counts = {grade: sum(finding.grade == grade for finding in self.found) for grade in GRADES}
        graded = ", ".join(f"{n} {grade}" for grade, n in counts.items() if n) or "none"
        text = f"Findings: {graded}. Checks run: {run}; not possible: {missing}."
        if counts["stop"]:
            text += " A finding graded stop stands against this result: resolve it before the figures are used."
        return text

    def scheme(self) -> Iterator[Block]:
        T_out = dict.fromkeys(SIDES, "unknown")
        if self.both:
            for side, T in self.rating.fouled.T_out.items():
                T_out[side] = self.words.best(T, "temperature", self._ends("fouled", f"{side}.T_out"))
        yield inputs.scheme(self.case, self.words, T_out)
        if isinstance(self.case.exchanger, ShellAndTube):
            yield inputs.bundle(self.case.exchanger, self.words)

    # --- results ------------------------------------------------------------------------------------------------------

    def results(self) -> Iterator[Block]:
        if not self.both:
            return
        yield Table(
            header=("", "Clean", "95 % interval", "Fouled", "95 % interval"),
            rows=(*self._doubted_rows(), *self._bare_rows()),
            widths=(2.2, 1.2, 1.5, 1.2, 1.5),
        )
        yield self._by_side("Each side", self._side_rows())
        ends = tuple(f"{self.names[side]}, {end}" for side in SIDES for end in ("inlet", "outlet"))
        yield Table(
            header=("", *ends),
            rows=tuple(self._property_rows()),
            title="Properties used, fouled",
            widths=(1.5, 1.2, 1.2, 1.2, 1.2),
        )

    def _by_side(self, title: str, rows: Iterable[tuple[str, ...]]) -> Table:
        header = ("", *(f"{self.names[side]}, {state}" for side, state, _ in self.columns))
        return Table(header=header, rows=tuple(rows), title=title, widths=(1.5, 1.2, 1.2, 1.2, 1.2))

    def _doubted_rows(self) -> Iterator[tuple[str, ...]]:
        """The figures that have an interval."""
        U, T, names = "heat_transfer_coefficient", "temperature", self.names
        rows: list[tuple[str, str, str, list[float]]] = [
            ("Duty", "duty", "heat_flow", [s.duty for s in self.both]),
            *((f"{names[side]} outlet", f"{side}.T_out", T, [s.T_out[side] for s in self.both]) for side in SIDES),
            ("Mean temperature difference", "mtd", "temperature_difference", [s.mtd for s in self.both]),
            ("U in service", "U_dirty", U, [s.U_dirty for s in self.both]),
            ("U of the same films, no fouling", "U_clean", U, [s.U_clean for s in self.both]),
            *(
                (f"{names[side]} film, own surface", f"{side}.h", U, [s.sides[side].h for s in self.both])
                for side in SIDES
            ),
            *(
                (f"{names[side]} drop", f"{side}.dp", "pressure_difference", [s.sides[side].dp for s in self.both])
                for side in SIDES
            ),
        ]
        for label, quantity, kind, values in rows:
            cells: list[str] = []
            for state, value in zip(STATES, values, strict=True):
                ends = self._ends(state, quantity)
                cells += [self.words.best(value, kind, ends), self.words.span(value, kind, ends)]
            yield (label, *cells)

    def _bare_rows(self) -> Iterator[tuple[str, ...]]:
        show = self.words.show
        rows = {
            "F": [f"{s.F:.3f}" for s in self.both],
            "Effectiveness": [show(s.effectiveness, "fraction", 3) for s in self.both],
            "NTU": [show(s.NTU, "dimensionless", 3) for s in self.both],
            "U required": [show(s.U_required, "heat_transfer_coefficient", 3) for s in self.both],
            "Margin of U": [NONE if s.margin is None else _off(s.margin) for s in self.both],
            **self._steam_rows(),
        }
        for label, (clean, fouled) in rows.items():
            if (clean, fouled) != (NONE, NONE):
                yield label, clean, "", fouled, ""

    def _steam_rows(self) -> dict[str, list[str]]:
        """What condenses, at which pressure, and where its heat goes; empty where nothing condenses."""
        chests, show = [state.chest for state in self.both if state.chest is not None], self.words.show
        if not chests:
            return {}
        zones = [{zone.name: zone for zone in chest.zones} for chest in chests]

        def shares(name: str, of: str) -> list[str]:
            found = [getattr(at.get(name), of, None) for at in zones]
            wholes = [getattr(state, of) for state in self.both]
            return [NONE if x is None else _percent(x / whole) for x, whole in zip(found, wholes, strict=True)]

        return {
            "Condensate": [show(chest.flow, "mass_flow") for chest in chests],
            "Steam pressure in the chest": [show(chest.p, "pressure_absolute") for chest in chests],
            "Pressure for the required duty": [show(chest.p_required, "pressure_absolute") for chest in chests],
            "Superheat, of the duty": shares("desuperheating", "duty"),
            "Subcooling, of the duty": shares("subcooling", "duty"),
            "Under condensate, of the area": shares("subcooling", "area"),
        }

    def _side_rows(self) -> Iterator[tuple[str, ...]]:
        sides, show = [at for _, _, at in self.columns], self.words.show
        yield ("Reynolds number", *(show(at.Re, "dimensionless", 3) for at in sides))
        yield ("Prandtl number", *(show(at.Pr, "dimensionless", 3) for at in sides))
        yield ("Velocity", *(show(at.velocity, "velocity", 3) for at in sides))
        yield ("Regime", *(at.regime for at in sides))
        yield ("Fouling resistance", *(show(at.R_fouling, "fouling_resistance", 3) for at in sides))
        yield ("Surface, coldest", *(show(at.surface_T[0], "temperature") for at in sides))
        yield ("Surface, hottest", *(show(at.surface_T[1], "temperature") for at in sides))

    def _property_rows(self) -> Iterator[tuple[str, ...]]:
        fouled = [self.rating.fouled.sides[side] for side in SIDES]
        ends = [at for side in fouled for at in (side.properties_in, side.properties_out)]
        for key, name, quantity in PROPERTIES:
            yield (name, *(self.words.show(at[key], quantity) for at in ends))

    def profile(self) -> Iterator[Block]:
        profile = self.rating.fouled.profile if self.both else None
        if profile is None:
            return
        unit, hot, cold = self.words.unit("temperature"), self.case.hot, self.case.cold

        def shown(T: NDArray[np.float64]) -> tuple[float, ...]:
            return tuple(float(t) for t in units.to_unit(T, "temperature", unit))

        lines = (
            Line(name=f"{self.names[hot]} (hot)", y=shown(profile.T[hot]), marker="full circle"),
            Line(name=f"Wall, {self.names[hot].lower()} face", y=shown(profile.wall_T[hot]), dash=(5, 2)),
            Line(name=f"Wall, {self.names[cold].lower()} face", y=shown(profile.wall_T[cold]), dash=(1, 2)),
            Line(name=f"{self.names[cold]} (cold)", y=shown(profile.T[cold]), marker="open square"),
        )
        gap = np.abs(profile.T["inside"] - profile.T["outside"])
        walls = np.concatenate([profile.wall_T[side] for side in SIDES])
        coldest, hottest = (self.words.show(float(T), "temperature") for T in (walls.min(), walls.max()))
        start = f"from the {self.names['inside'].lower()} inlet on"
        exchanger = self.case.exchanger
        legs = exchanger.legs_in_series if isinstance(exchanger, DoublePipe) and exchanger.banks == 1 else 1
        yield Chart(
            x=tuple(float(x) for x in profile.x),
            x_label=f"Share of the area, {start}",
            y_label=f"Temperature, {unit}",
            lines=lines,
            strips=tuple(Strip(name=self.names[side], runs=_runs(profile, side)) for side in SIDES),
            marks=tuple(leg / legs for leg in range(1, legs)),
            alt=f"Fouled, {start}. The fluids come as near as "
            f"{self.words.show(float(gap.min()), 'temperature_difference', 3)}; the metal lies between {coldest} and "
            f"{hottest}.{' Upright lines part the legs.' if legs > 1 else ''}",
        )

    def resistances(self) -> Iterator[Block]:
        if not self.both:
            return
        show = self.words.show
        rows = [
            (
                self._where(name),
                *(
                    cell
                    for s in self.both
                    for R in [s.resistances[name]]
                    for cell in (show(R, "fouling_resistance", 3), _percent(R * s.U_dirty))
                ),
            )
            for name in self.rating.fouled.resistances
        ]
        clean, fouled = (show(1.0 / s.U_dirty, "fouling_resistance", 3) for s in self.both)
        yield Table(
            header=("On the outside bare area", "Clean", "Share", "Fouled", "Share"),
            rows=(*rows, ("Sum, 1/U in service", clean, _percent(1.0), fouled, _percent(1.0))),
            widths=(2, 1.4, 0.8, 1.4, 0.8),
        )

    def drops(self) -> Iterator[Block]:
        if self.both:
            yield self._by_side("", self._drop_rows())

    def _drop_rows(self) -> Iterator[tuple[str, ...]]:
        kind, columns = "pressure_difference", self.columns
        for part in dict.fromkeys(part for _, _, at in columns for part in at.drops):
            yield (PARTS.get(part, part), *(self.words.show(at.drops.get(part), kind, 3) for _, _, at in columns))
        totals = [(at.dp, self._ends(state, f"{side}.dp")) for side, state, at in columns]
        yield ("Total", *(self.words.best(dp, kind, ends) for dp, ends in totals))
        yield ("95 % interval", *(self.words.span(dp, kind, ends) for dp, ends in totals))
        allowed = [(at.dp, self.case.stream(side).dp_allowed) for side, _, at in columns]
        yield ("Allowed", *(inputs.NOT_STATED if most is None else self.words.typed(most) for _, most in allowed))
        yield (
            "Used of the allowed",
            *(NONE if most is None or np.isnan(dp) else _percent(dp / most, 0) for dp, most in allowed),
        )

    # --- methods and relations ----------------------------------------------------------------------------------------

    def methods(self) -> Iterator[Block]:
        if not self.both:
            return
        outlets = (f"{self.names[side]} outlet" for side in SIDES)
        yield Table(
            header=("Fouled state by", "Duty", "Off", *outlets, "U in service", "F"),
            rows=tuple(self._method_row(name, found) for name, found in self.rating.methods.items()),
            widths=(2.1, 1.1, 0.7, 1.3, 1.3, 1.6, 0.6),
        )
        for name, found in self.rating.methods.items():
            if isinstance(found, str):
                yield f"{METHOD_NAMES[name]}: not possible, {found}."
        opinions = tuple(self._opinion_rows())
        if opinions:
            yield Table(
                header=("Film by another relation", "Side", "h", "Off", "Holds for", "Source"),
                rows=opinions,
                title="Second opinions on the films, fouled, at mean properties",
                widths=(1.9, 0.9, 1.5, 0.6, 3.9, 0.7),
            )

    def _method_row(self, name: str, found: State | str) -> tuple[str, ...]:
        if isinstance(found, str):
            return (METHOD_NAMES[name], "not possible", *([NONE] * 5))
        return (
            METHOD_NAMES[name],
            self.words.show(found.duty, "heat_flow"),
            NONE if name == "march" else _off(found.duty / self.rating.fouled.duty - 1.0),
            *(self.words.show(found.T_out[side], "temperature") for side in SIDES),
            self.words.show(found.U_dirty, "heat_transfer_coefficient"),
            f"{found.F:.3f}",
        )

    @property
    def _opinions(self) -> Iterator[tuple[Side, Correlation, float, float]]:
        """Side, another relation for its film, h by that relation over the one used, h."""
        for side in SIDES:
            at = self.rating.fouled.sides[side]
            yield from ((side, REGISTER[name], h / at.h, h) for name, h in at.second_opinions.items())

    def _opinion_rows(self) -> Iterator[tuple[str, ...]]:
        for side, relation, ratio, h in self._opinions:
            shown, cited = self.words.show(h, "heat_transfer_coefficient", 3), self.cite(relation.source)
            yield relation_name(relation), self.names[side], shown, _off(ratio - 1, 0), limits_of(relation), cited

    @cached_property
    def _used(self) -> dict[str, tuple[Correlation, list[str]]]:
        """The relations that the figures rest on, and the sides they are used on."""
        used: dict[str, tuple[Correlation, list[str]]] = {}
        for side, _, at in self.columns:
            for relation in (*at.relations, self.case.exchanger.drop_relation(side)):
                places = used.setdefault(relation.name, (relation, []))[1]
                if self.names[side] not in places:
                    places.append(self.names[side])
        return used

    @cached_property
    def _losses(self) -> list[losses.Figure]:
        """The loss coefficients that entered the drops."""
        exchanger = self.case.exchanger
        if isinstance(exchanger, DoublePipe):
            taken = [losses.TUBE_ENTRANCE, losses.TUBE_EXIT, losses.RETURN_BEND, losses.ANNULUS_HAIRPIN]
        else:
            taken = [losses.TUBE_PASS]
        if any(at.drops.get("nozzles") for _, _, at in self.columns):
            taken += [losses.NOZZLE_IN, losses.NOZZLE_OUT]
        return taken

    @cached_property
    def _sources(self) -> list[Source]:
        """All sources cited by number, in the order in which a reader meets them."""
        derived = [figure.source for figure in self.case.exchanger.derived()]
        if not self.both:
            return list(dict.fromkeys(derived))
        opinions = [relation.source for _, relation, _, _ in self._opinions]
        used = [relation.source for relation, _ in self._used.values()]
        return list(dict.fromkeys([*derived, *opinions, *used, *(figure.source for figure in self._losses)]))

    def cite(self, source: Source) -> str:
        return f"[{self._sources.index(source) + 1}]"

    def relations(self) -> Iterator[Block]:
        if self.both:
            yield Table(
                header=("Relation", "Side", "Holds for", "Scatter (1 sd)", "Source"),
                rows=tuple(
                    (
                        f"{relation_name(relation)}\n{relation.gives}",
                        "\n".join(places),
                        f"{relation.applies}; {limits_of(relation)}",
                        self._scatter(relation),
                        self.cite(relation.source),
                    )
                    for relation, places in self._used.values()
                ),
                widths=(1.8, 0.9, 4, 1.2, 0.7),
            )
            taken = "; ".join(f"{f.what} {f.value:g} {self.cite(f.source)}" for f in self._losses)
            yield f"Losses taken, in velocity heads: {taken}."
        if self._sources:
            yield Table(
                header=("", "Source", "Printed page"),
                rows=tuple((f"[{i}]", source.text, page_of(source)) for i, source in enumerate(self._sources, 1)),
                widths=(0.4, 9, 1.2),
            )

    @staticmethod
    def _scatter(relation: Correlation) -> str:
        if relation.scatter is None:
            return "not known"
        return f"{units.show(relation.scatter, 'fraction', digits=2)}\n{relation.scatter_origin}"

    # --- doubts and limits --------------------------------------------------------------------------------------------

    def findings(self) -> Iterator[Block]:
        if not self.found:
            yield "None: every check that could be run is clear."
            return
        yield Table(
            header=("Grade", "What was found", "What to do"), rows=tuple(self._finding_rows()), widths=(0.6, 4.4, 2.8)
        )

    def _finding_rows(self) -> Iterator[tuple[str, str, str]]:
        """One row a finding, but one for all defaults: each of them already stands among the inputs."""
        for finding in self.found:
            if finding.code != ASSUMED:
                because = "; ".join(f"{what} {figure}" for what, figure in finding.because.items())
                place = f"[{finding.code}, {finding.where}]" if finding.where else f"[{finding.code}]"
                yield finding.grade, f"{finding.says}\n{because} {place}", f"{finding.do}\nSource: {finding.source}"
        defaults = [finding for finding in self.found if finding.code == ASSUMED]
        if defaults:
            says = f"{len(defaults)} inputs are not stated and taken by default, each with its origin among the inputs."
            places = ", ".join(finding.where for finding in defaults)
            yield defaults[0].grade, f"{says}\n{places} [{ASSUMED}]", defaults[0].do

    def contributors(self) -> Iterator[Block]:
        doubt = self.intervals.get("fouled")
        if doubt is None:
            return
        rows = tuple(
            (
                capital(c.doubt.name),
                f"{self.words.show(c.doubt.sd, OWN_UNITS.get(c.doubt.path.rpartition('.')[2], 'fraction'), 2)}, "
                f"{c.doubt.origin}",
                _percent(c.share, 0),
                f"±{self.words.show(c.duty_sd, 'heat_flow', 2)}",
                capital(c.doubt.shrink),
            )
            for c in doubt.contributors[:MOST_CONTRIBUTORS]
            if c.share >= LEAST_SHARE
        )
        if rows:
            yield Table(
                header=(
                    "Source of doubt",
                    "One standard deviation",
                    "Of the variance",
                    "Moves the duty by",
                    "To shrink it",
                ),
                rows=rows,
                widths=(1.9, 2.2, 0.9, 1.1, 3.2),
            )
        if doubt.not_propagated:
            yield f"Not in the intervals: {listed(doubt.not_propagated)}."

    def assumptions(self) -> Iterator[Block]:
        said = ["Every default taken is marked “assumed” among the inputs.", *ALWAYS_ASSUMED]
        if self.case.exchanger.deposit_conductivity is None:
            said.append("Deposits do not narrow the flow areas, since no deposit conductivity is stated.")
        for side in SIDES:
            said += [f"{capital(fluid_name(self.case.stream(side)))}: {n}." for n in self.case.fluid(side).notes]
        yield from (f"• {text}" for text in said)

    def not_checked(self) -> Iterator[Block]:
        missing: dict[str, list[str]] = {}
        for verdict in self.verdicts:
            if verdict.missing:
                place = f"{self._where(verdict.where)}: " if verdict.where else ""
                missing.setdefault(verdict.rule.title, []).append(place + verdict.missing)
        if missing:
            yield Table(
                header=("Check that was not possible, or only in part", "What is missing"),
                rows=tuple((title, "\n".join(what)) for title, what in missing.items()),
                widths=(2.1, 2.9),
            )
        yield f"Never part of a rating here: {'; '.join(NEVER_CHECKED)}."

    def signatures(self) -> Iterator[Block]:
        yield Table(
            header=("", "Name", "Date", "Signature"),
            rows=(("Prepared", self.case.prepared_by, "", ""), ("Checked", "", "", ""), ("Approved", "", "", "")),
            widths=(1, 2.5, 1.5, 2.5),
            roomy=True,
        )


def _runs(profile: Profile, side: Side) -> tuple[tuple[float, float, str], ...]:
    """Where along x which regime holds."""
    x, regime = profile.x, profile.regime[side]
    edges = [0.0, *(float(e) for e in 0.5 * (x[1:-2] + x[2:-1])), 1.0]
    runs = []
    for what, group in groupby(range(len(x) - 2), key=lambda cell: regime[cell + 1]):
        cells = list(group)
        runs.append((edges[cells[0]], edges[cells[-1] + 1], what))
    return tuple(runs)
