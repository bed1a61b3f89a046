"""The result file: a rated case as plain SI numbers under stable names, for other programs to read."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from engine import __version__
from engine.findings import Verdict
from engine.stated import SIDES
from engine.states import Chest, Profile, Rating, SideState, State
from engine.uncertainty import Intervals

FORMAT = "countercheck-rating"
VERSION = 1
STATES = ("clean", "fouled")
METHODS = ("march", "effectiveness_ntu", "lmtd")
MOST_CONTRIBUTORS = 3


def result_json(rating: Rating, intervals: Mapping[str, Intervals], verdicts: Sequence[Verdict]) -> dict[str, Any]:
    """The keys of a result file, ready for `json.dumps`.

    Kelvin, Pa, W, W/m²K (U on the outside bare area, a side's h on its own surface), m/s. What has no value is None,
    never NaN. A state or method without an answer is {"not_possible": reason}.
    """
    findings = [finding for verdict in verdicts for finding in verdict.findings]
    outcomes = [verdict.outcome for verdict in verdicts]
    return {
        "format": FORMAT,
        "version": VERSION,
        "tag": rating.case.tag,
        "input_hash": rating.case.input_hash,
        "engine": __version__,
        "states": {
            name: _state(rating.states[name], intervals.get(name))
            if name in rating.states
            else {"not_possible": rating.problem}
            for name in STATES
        },
        "methods": {name: _method(rating.methods.get(name, rating.problem)) for name in METHODS},
        "findings": [
            {
                "code": finding.code,
                "grade": finding.grade,
                "where": finding.where,
                "says": finding.says,
                "because": dict(finding.because),
                "do": finding.do,
                "source": finding.source,
            }
            for finding in findings
        ],
        "checks": {
            "run": outcomes.count("clear") + outcomes.count("found"),
            "found": outcomes.count("found"),
            "not_possible": outcomes.count("not possible"),
        },
    }


def _number(x: float | None) -> float | None:
    return float(x) if x is not None and math.isfinite(x) else None


def _numbers(values: Iterable[float]) -> list[float | None]:
    return [_number(x) for x in values]


def _method(found: State | str) -> dict[str, Any]:
    if isinstance(found, str):
        return {"not_possible": found}
    return {"duty": _number(found.duty), **{side: {"T_out": _number(found.T_out[side])} for side in SIDES}}


def _state(state: State, doubt: Intervals | None) -> dict[str, Any]:
    figures = ("duty", "area", "mtd", "F", "effectiveness", "NTU", "U_clean", "U_dirty", "U_required", "margin")
    contributors = doubt.contributors[:MOST_CONTRIBUTORS] if doubt else ()
    return {
        **{name: _number(getattr(state, name)) for name in figures},
        "intervals": {name: _interval(*ends) for name, ends in doubt.of.items()} if doubt else {},
        "contributors": [
            {"name": c.doubt.name, "share": _number(c.share), "shrink": c.doubt.shrink} for c in contributors
        ],
        **{side: _side(state.sides[side]) for side in SIDES},
        "wall": {"R": _number(state.wall_R)},
        "steam": _steam(state.chest) if state.chest else None,
        "profile": _profile(state.profile) if state.profile else None,
    }


def _interval(low: float, high: float) -> dict[str, float | None]:
    return {"low": _number(low), "high": _number(high)}


def _side(side: SideState) -> dict[str, Any]:
    return {
        **{name: _number(getattr(side, name)) for name in ("flow", "T_in", "T_out", "h", "Re", "Pr", "velocity")},
        "regime": side.regime,
        "dp": _number(side.dp),
        "dp_parts": {name: _number(part) for name, part in side.drops.items()},
        "R_fouling": _number(side.R_fouling),
        "correlations": [relation.name for relation in side.relations],
    }


def _steam(chest: Chest) -> dict[str, Any]:
    figures = ("p_supply", "p", "T_sat", "heat", "p_required", "stall_duty")
    return {
        "side": chest.side,
        **{name: _number(getattr(chest, name)) for name in figures},
        "zones": [
            {"name": zone.name, **{name: _number(getattr(zone, name)) for name in ("duty", "area", "U", "mtd")}}
            for zone in chest.zones
        ],
    }


def _profile(profile: Profile) -> dict[str, Any]:
    return {
        "x": _numbers(profile.x),
        **{f"{side}_T": _numbers(profile.T[side]) for side in SIDES},
        **{f"wall_T_{side}": _numbers(profile.wall_T[side]) for side in SIDES},
        **{f"{side}_regime": list(profile.regime[side]) for side in SIDES},
    }
