"""The answer in sentences: met or missed, by how much and how surely; the clean state, the drops, the findings."""

from __future__ import annotations

from collections.abc import Iterator
from statistics import NormalDist

from engine import __version__
from engine.findings import GRADES
from engine.report.blocks import Block, Table
from engine.report.rated import Rated
from engine.report.words import NONE, listed, off
from engine.stated import SIDES, Side
from engine.states import State


def identity(r: Rated) -> Iterator[Block]:
    case = r.case
    named = (case.tag, case.service, case.plant, case.revision)
    yield Table(
        header=("Tag", "Service", "Plant", "Revision", "Input hash", "Engine"),
        rows=((*(text or NONE for text in named), case.input_hash, f"Countercheck {__version__}"),),
        widths=(1.4, 2.4, 2, 0.8, 1.5, 1.4),
    )


def answer(r: Rated) -> Iterator[Block]:
    if not r.both:
        yield f"No answer: {r.rating.problem}."
    else:
        yield _verdict(r)
        yield _beside(r)
        yield " ".join(_drop_verdict(r, side) for side in SIDES)
    yield _tally(r)


def _outlet(r: Rated, state: State, side: Side) -> str:
    return r.words.doubted(state.T_out[side], "temperature", r.ends(state.state, f"{side}.T_out"))


def _duty(r: Rated, state: State) -> str:
    return r.words.doubted(state.duty, "heat_flow", r.ends(state.state, "duty"))


def _required(r: Rated) -> list[Side]:
    """Sides whose outlet is stated, as a requirement."""
    return [side for side in SIDES if r.case.stream(side).T_out is not None]


def _verdict(r: Rated) -> str:
    """The answer in one sentence: fouled outlet and duty, met or missed by how much, and how sure."""
    tag, fouled, required = r.case.tag or "This exchanger", r.rating.fouled, _required(r)
    duty = f"with a duty of {_duty(r, fouled)}"
    if not required:
        hot = r.case.hot
        inlet = r.words.show(r.case.T_in(hot), "temperature")
        return (
            f"{tag}, fouled, brings the {r.side(hot)} from {inlet} to {_outlet(r, fouled, hot)}, {duty}; no "
            "required outlet is stated, so there is nothing to meet or to miss."
        )
    outcomes = [_against(r, side) for side in required]
    met = "meets" if all(good for good, _, _ in outcomes) else "misses"
    text = f"{tag} {met} what is required: fouled, {listed([said for _, said, _ in outcomes])}, {duty}"
    chances = [chance for _, _, chance in outcomes if chance is not None]
    if chances:
        text += f"; by the doubts known here the chance that it meets this is {_chance(min(chances))}"
    return f"{text}."


def _chance(probability: float) -> str:
    if probability < 0.01:
        return "below 1 %"
    return "above 99 %" if probability > 0.99 else f"about {100 * probability:.0f} %"


def _against(r: Rated, side: Side) -> tuple[bool, str, float | None]:
    """Whether a stated outlet is met, by how much in words, and how likely that is."""
    wanted, cools = float(r.case.stream(side).T_out or 0.0), side == r.case.hot
    T, ends = r.rating.fouled.T_out[side], r.ends("fouled", f"{side}.T_out")
    over = T - wanted
    met = over <= 0 if cools else over >= 0
    shifted = (ends[0] - wanted, ends[1] - wanted) if ends else None
    gap = r.words.best(abs(over), "temperature_difference", shifted)
    how = f"{gap} {'below' if over < 0 else 'above'}" if met else f"{gap} too {'hot' if cools else 'cold'} for"
    required = r.words.show(wanted, "temperature")
    text = f"the {r.side(side)} leaves at {_outlet(r, r.rating.fouled, side)}, {how} the required {required}"
    sd = r.intervals["fouled"].sd[f"{side}.T_out"] if "fouled" in r.intervals else 0.0
    chance = NormalDist().cdf((-over if cools else over) / sd) if sd > 0 else None
    return met, text, chance


def _beside(r: Rated) -> str:
    """The outlets that the first sentence leaves out, the clean state, and the margin of U."""
    fouled, clean = r.rating.fouled, r.rating.clean
    told = _required(r) or [r.case.hot]
    parts = [f"Fouled, the {r.side(s)} leaves at {_outlet(r, fouled, s)}." for s in SIDES if s not in told]
    outlets = listed([f"the {r.names[side].lower()} leaves at {_outlet(r, clean, side)}" for side in told])
    parts.append(f"Clean, {outlets}, with a duty of {_duty(r, clean)}.")
    if fouled.U_required is not None and fouled.margin is not None and clean.margin is not None:
        required = r.words.show(fouled.U_required, "heat_transfer_coefficient", 3)
        U = r.words.best(fouled.U_dirty, "heat_transfer_coefficient", r.ends("fouled", "U_dirty"))
        margins = f"{off(fouled.margin, 0)} fouled and {off(clean.margin, 0)} clean"
        parts.append(f"U in service is {U}, required is {required}: a margin of {margins}.")
    if r.rating.requirement:
        parts.append(f"No required U: {r.rating.requirement}.")
    if not all(state.converged for state in r.both):
        parts.append("The temperatures did not settle: these figures are not to be used.")
    return " ".join(parts)


def _drop_verdict(r: Rated, side: Side) -> str:
    dp, kind = r.rating.fouled.sides[side].dp, "pressure_difference"
    if side == r.case.steam_side:
        return f"The drop of the steam that condenses in the {r.names[side].lower()} is not rated."
    drops = r.words.doubted(dp, kind, r.ends("fouled", f"{side}.dp"))
    text, allowed = f"The {r.names[side].lower()} drops {drops}", r.case.stream(side).dp_allowed
    if allowed is None:
        return f"{text}; no allowed drop is stated."
    gap = f"{r.words.show(abs(dp - allowed), kind, 3)} {'over' if dp > allowed else 'under'}"
    return f"{text}, {gap} the allowed {r.words.show(allowed, kind, 3)}."


def _tally(r: Rated) -> str:
    outcomes = [verdict.outcome for verdict in r.verdicts]
    run, missing = outcomes.count("clear") + outcomes.count("found"), outcomes.count("not possible")
    counts = {grade: sum(finding.grade == grade for finding in r.found) for grade in GRADES}
    graded = ", ".join(f"{n} {grade}" for grade, n in counts.items() if n) or "none"
    text = f"Findings: {graded}. Checks run: {run}; not possible: {missing}."
    if counts["stop"]:
        text += " A finding graded stop stands against this result: resolve it before the figures are used."
    return text
