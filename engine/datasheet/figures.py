"""What the checks read: the figures of a sheet by path, and what follows from several of them.

Where the sheet is silent the case is asked, for the exchanger and for what enters it; never for results.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import cache
from typing import Any

from engine import fluids
from engine.case import ATMOSPHERE, Case, PureFluid, absolute
from engine.exchangers import standard_sizes
from engine.exchangers.double_pipe import DoublePipe
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.rating import rate
from engine.sheet import PARTS, Sheet, sheet_fields
from engine.stated import SIDES, Figure, Side, Stated
from engine.states import Rating

DOUBLE_PIPE, SHELL_AND_TUBE = "double-pipe", "shell-and-tube"
FLUID_PROPERTIES: Mapping[str, str] = {
    "rho": "density",
    "cp": "specific_heat",
    "mu": "viscosity",
    "k": "conductivity",
}
MINIMUM_WALL = 1.11
"""Average over minimum wall of drawn tubes, 10 to 12 % (common practice)."""
SATURATED = 0.5
"""Of the saturation temperature, within which a printed one is saturated [K]."""
GAS_DENSITY = 150.0
"""Below it an unnamed fluid is taken as a gas [kg/m³]."""


class Missing(Exception):
    """Raised where a check cannot be made; its text names the field or says what is lacking."""


class Impossible(Missing):
    """Figures between which nothing can be computed, such as an outlet beyond the other inlet."""


class Figures:
    """The figures by path, some of them changed on trial; remembers which were asked for."""

    def __init__(self, values: Mapping[str, Any], subject: Subject) -> None:
        self.values = values
        self.subject = subject
        self.read: set[str] = set()

    def get(self, path: str) -> Any:
        """The figure, or None where nobody states it."""
        value = self.values.get(path)
        if value is not None:
            self.read.add(path)
        return value

    def __getitem__(self, path: str) -> Any:
        value = self.get(path)
        if value is None:
            raise Missing(path)
        return value

    def any_of(self, *paths: str) -> Any:
        """The first that is stated. Missing, with all their names, where none is."""
        for path in paths:
            if self.values.get(path) is not None:
                return self[path]
        raise Missing(" or ".join(paths))

    def __contains__(self, path: str) -> bool:
        return self.get(path) is not None


@dataclass(frozen=True, kw_only=True)
class Subject:
    """A sheet, the case it belongs to where there is one, and what both mean together."""

    sheet: Sheet
    case: Case | None = None
    sheet_values: Mapping[str, Any] = field(init=False)
    case_values: Mapping[str, Any] = field(init=False)
    values: Mapping[str, Any] = field(init=False)
    _known: dict[str, Any] = field(init=False, default_factory=dict)

    def __post_init__(self) -> None:
        own, asked = self.sheet.stated(), dict(_of_case(self.case)) if self.case else {}
        object.__setattr__(self, "sheet_values", own)
        object.__setattr__(self, "case_values", asked)
        values = {**asked, **own}
        values.setdefault("type", _kind(values))
        object.__setattr__(self, "values", values)

    @property
    def double_pipe(self) -> bool:
        return bool(self.values["type"] == DOUBLE_PIPE)

    def side_name(self, side: str) -> str:
        names = {"inside": "inner pipe", "outside": "annulus"} if self.double_pipe else SHELL_NAMES
        return names.get(side, "")

    def label(self, path: str) -> str:
        """A field as the trade calls it: "specific heat, mean (tube side)"."""
        side, _, name = path.rpartition(".")
        declared = sheet_fields().get(path)
        words = declared.name if declared else (name or path).replace("_", " ")
        words = words[:1].lower() + words[1:] if words[1:2].islower() else words
        where = self.side_name(side) if side in SIDES else side.replace("_", " ")
        return f"{words} ({where})" if where else words

    def fluid(self, side: Side) -> fluids.Fluid:
        """The side's fluid as the property library or the case's table knows it. Missing where neither does."""
        found = self._once(f"fluid {side}", lambda: self._fluid(side))
        if isinstance(found, str):
            raise Missing(found)
        fluid: fluids.Fluid = found
        return fluid

    def _fluid(self, side: Side) -> fluids.Fluid | str:
        if self.case is not None and self.case.stream(side).condenses:
            return f"a single phase; the {self.side_name(side)} condenses"
        try:
            if self.case is not None:
                return self.case.fluid(side)
            name, p, T = (self.values.get(f"{side}.{key}") for key in ("fluid", "p_in", "T_in"))
            if name is None or p is None or T is None:
                return " and ".join(f"{side}.{k}" for k, v in (("fluid", name), ("p_in", p), ("T_in", T)) if v is None)
            return fluids.fluid_at(fluids.Pure(str(name)), absolute(p, ATMOSPHERE), float(T))
        except fluids.FluidError as error:
            return f"{side}.fluid by a name of the property library ({error})"

    def crosses_saturation(self, side: Side) -> bool:
        """Whether a fluid of the library would boil or condense between the printed temperatures of its side."""
        ends = [float(T) for end in ("T_in", "T_out") if (T := self.values.get(f"{side}.{end}")) is not None]
        if len(ends) < 2 or not self.library(side):
            return False
        saturated = self._once(f"saturation {side}", lambda: self._saturation(side))
        return saturated is not None and min(ends) - SATURATED <= saturated <= max(ends) + SATURATED

    def _saturation(self, side: Side) -> float | None:
        p = self.values.get(f"{side}.p_in")
        if self.case is not None:
            return self.fluid(side).saturation_temperature(self.case.p_in(side))
        return None if p is None else self.fluid(side).saturation_temperature(absolute(p, ATMOSPHERE))

    def library(self, side: Side) -> bool:
        """Whether the side's fluid is known by a name or a table."""
        return not isinstance(self._once(f"fluid {side}", lambda: self._fluid(side)), str)

    @property
    def rating(self) -> Rating:
        """Our own rating of the case. Missing where there is no case, or no answer."""
        if self.case is None:
            raise Missing("the case: without it there is no rating of our own")
        case = self.case
        found: Rating = self._once("rating", lambda: rate(case))
        if not found.states:
            raise Missing(f"a rating of our own: {found.problem}")
        return found

    def _once(self, name: str, compute: Any) -> Any:
        if name not in self._known:
            self._known[name] = compute()
        return self._known[name]


SHELL_NAMES = {"inside": "tube side", "outside": "shell side"}


def _kind(values: Mapping[str, Any]) -> str:
    piped = any(name in values for name in ("leg_length", "legs_in_series", "inner_pipe.nps", "inner_pipe.od"))
    return DOUBLE_PIPE if piped else SHELL_AND_TUBE


def _of_case(case: Case) -> Iterable[tuple[str, Any]]:
    """The exchanger, what enters it and its limits, by the sheet's paths."""
    yield "type", case.exchanger.type
    for side in SIDES:
        stream = case.stream(side)
        if isinstance(stream.fluid, PureFluid):
            yield f"{side}.fluid", stream.fluid.name
        for name in ("flow", "T_in", "p_in", "dp_allowed", "R_fouling"):
            value = getattr(stream, name)
            if value is not None and name in stream.model_fields_set:
                yield f"{side}.{name}", value
        for name in ("design_pressure", "test_pressure", "design_temperature"):
            value = getattr(case.limits, f"{side}_{name}")
            if value is not None:
                yield f"{side}.{name}", value
    exchanger = case.exchanger
    known = sheet_fields()
    for name in type(exchanger).model_fields:
        value = getattr(exchanger, name)
        if name in known and value is not None:
            yield name, value
    if isinstance(exchanger, ShellAndTube):
        yield "arrangement", exchanger.arrangement
        nozzles = {"inside": exchanger.tube_nozzle_id, "outside": exchanger.shell_nozzle_id}
    else:
        nozzles = {"inside": exchanger.inside_nozzle_id, "outside": exchanger.outside_nozzle_id}
        yield "tube_od", exchanger.tube_od
        yield "tube_id", exchanger.tube_id
        yield "shell_id", exchanger.shell_id
    yield from ((f"{side}.nozzle_id", bore) for side, bore in nozzles.items() if bore is not None)
    if isinstance(exchanger, DoublePipe):
        yield "banks_in_parallel", exchanger.banks


# --- rounding ---------------------------------------------------------------------------------------------------------

RESULTS = frozenset(
    ("duty", "area", "area_per_shell", "lmtd", "mtd", "U_service", "U_dirty", "U_clean", "h", "dp", "velocity", "p_out",
     "weight_bundle", "weight_empty", "weight_full", "nozzle_rho_v2", "bundle_rho_v2", "latent_heat",
     *(f"{name}{end}" for name in FLUID_PROPERTIES for end in ("", "_in", "_out")))
)  # fmt: skip
"""Figures that somebody computed or looked up and rounded; the others were prescribed."""


AGREED = 0.15
"""Of a fouling resistance, which is agreed and not computed: 0.0002 stands for 0.000176 m²K/W at the most."""


def half_width(path: str, value: Any) -> tuple[float, float]:
    """By how much a typed figure may be off for its rounding: as its digits say, and with trailing zeros as rounding.

    Half of the last digit; where a deviation is typed with it, two of them. "740" may stand for 735 to 745: a result
    is then taken to hold two significant digits at least, what was prescribed three.
    """
    if not isinstance(value, Figure):
        return 0.0, 0.0
    spread = 2 * (value.sd or 0.0)
    if not value.digit or not value:  # the digit of a plain 0 says nothing
        return spread, spread
    strict = max(value.digit / 2, spread)
    if value.quantity == "fouling_resistance":
        strict = min(strict, AGREED * value)
    number = re.match(r"[\d ]+(?![\d.,])", value.text)
    if value.quantity == "temperature" or number is None:
        return strict, strict
    digits = str(round(abs(value) / value.digit))
    zeros = len(digits) - len(digits.rstrip("0"))
    kept = 2 if path.rpartition(".")[2] in RESULTS else 3
    rounded = max(0, min(zeros, len(digits) - kept))
    return strict, max(strict, value.digit * 10**rounded / 2)


# --- what follows from several figures --------------------------------------------------------------------------------


def pressure(v: Figures, path: str) -> float:
    """Absolute [Pa]."""
    p = v[path]
    atmosphere = float(v.subject.case.atmosphere) if v.subject.case else ATMOSPHERE
    kind = v.subject.values[path]
    gauge = isinstance(kind, Figure) and kind.quantity == "pressure_gauge"
    return float(p) + atmosphere if gauge else float(p)


def sides(v: Figures) -> tuple[Side, Side]:
    """The hot and the cold side."""
    T = {side: v.get(f"{side}.T_in") for side in SIDES}
    if T["inside"] is not None and T["outside"] is not None:
        return ("inside", "outside") if T["inside"] > T["outside"] else ("outside", "inside")
    for side, other in (SIDES, SIDES[::-1]):
        T_out = v.get(f"{side}.T_out")
        if T[side] is not None and T_out is not None and T_out != T[side]:
            return (side, other) if T_out < T[side] else (other, side)
    raise Missing(" and ".join(f"{side}.T_in" for side in SIDES if T[side] is None))


def gas(v: Figures, side: Side) -> bool:
    if v.subject.library(side):
        return v.subject.fluid(side).phase == "gas"
    rho = v.get(f"{side}.rho") or v.get(f"{side}.rho_in")
    return rho is not None and rho < GAS_DENSITY


def changes_phase(v: Figures, side: Side) -> bool:
    case = v.subject.case
    if case is not None and case.stream(side).condenses:
        return True
    if f"{side}.latent_heat" in v or v.subject.crosses_saturation(side):
        return True
    return any(
        abs((v.get(f"{side}.{part}_in") or 0.0) - (v.get(f"{side}.{part}_out") or 0.0))
        > 0.01 * (v.get(f"{side}.flow") or 1e-9)
        for part in ("vapour", "steam")
        if f"{side}.{part}_in" in v or f"{side}.{part}_out" in v
    )


def single_phase(v: Figures, side: Side) -> None:
    """Missing where the side changes its phase."""
    if changes_phase(v, side):
        raise Missing(f"a single phase; the {v.subject.side_name(side)} changes its phase")


def mean_T(v: Figures, side: Side) -> float:
    return 0.5 * float(v[f"{side}.T_in"] + v[f"{side}.T_out"])


def property_of(v: Figures, side: Side, name: str) -> float:
    """A property at the mean temperature: printed, or the mean of both ends. Missing where the sheet has none."""
    path = f"{side}.{name}"
    ends = [f"{path}_in", f"{path}_out"]
    if path in v:
        return _dynamic(v, side, path)
    found = [_dynamic(v, side, end) for end in ends if end in v]
    if not found:
        raise Missing(path)
    return sum(found) / len(found)


def _dynamic(v: Figures, side: Side, path: str) -> float:
    kind = v.subject.values[path]
    if isinstance(kind, Figure) and kind.quantity == "kinematic_viscosity":
        return float(v[path]) * property_of(v, side, "rho")
    return float(v[path])


def mass_flow(v: Figures, side: Side) -> float:
    """Total [kg/s]. A volume flow is that at the inlet."""
    flow = v[f"{side}.flow"]
    kind = v.subject.values[f"{side}.flow"]
    if not (isinstance(kind, Figure) and kind.quantity == "volume_flow"):
        return float(flow)
    if f"{side}.rho_in" in v or f"{side}.rho" in v:
        return float(flow) * float(v.any_of(f"{side}.rho_in", f"{side}.rho"))
    return float(flow) * float(v.subject.fluid(side).at(v[f"{side}.T_in"]).rho)


def specific_heat(v: Figures, side: Side) -> tuple[float, bool]:
    """Mean over the side, and whether it is the sheet's own; what is printed for one end only is no mean."""
    one_end = f"{side}.cp" not in v and (f"{side}.cp_in" in v) != (f"{side}.cp_out" in v)
    try:
        return property_of(v, side, "cp"), not one_end
    except Missing:
        if not v.subject.library(side):
            raise
    return float(v.subject.fluid(side).mean_cp(v[f"{side}.T_in"], v[f"{side}.T_out"])), False


def heat(v: Figures, side: Side) -> float:
    """Duty of a side from its flow, specific heat and temperatures, positive [W]. Sensible only."""
    single_phase(v, side)
    cp, _ = specific_heat(v, side)
    change = v[f"{side}.T_out"] - v[f"{side}.T_in"]
    sign = -1.0 if sides(v)[0] == side else 1.0
    return sign * mass_flow(v, side) * cp * float(change)


def condensed_heat(v: Figures, side: Side) -> float:
    """Duty of a side that changes its phase: latent and sensible [W]."""
    changed = 0.0
    known = False
    for part in ("vapour", "steam"):
        ends = (v.get(f"{side}.{part}_in"), v.get(f"{side}.{part}_out"))
        if ends != (None, None):
            known = True
            changed += (ends[0] or 0.0) - (ends[1] or 0.0)
    if not known:
        if not changes_phase(v, side):
            raise Missing(f"{side}.vapour_in and {side}.vapour_out")
        changed = mass_flow(v, side)
    if not changes_phase(v, side):
        raise Missing(f"a change of phase; the {v.subject.side_name(side)} keeps its phase")
    latent = v.get(f"{side}.latent_heat")
    if latent is None:
        latent = _steam_latent_heat(v, side)
    total = abs(changed) * float(latent)
    T_in, T_out = v.get(f"{side}.T_in"), v.get(f"{side}.T_out")
    if T_in is not None and T_out is not None and abs(T_in - T_out) > 1.0:
        total += mass_flow(v, side) * property_of(v, side, "cp") * abs(float(T_in - T_out))
    return float(total)


def _steam_latent_heat(v: Figures, side: Side) -> float:
    named = str(v.get(f"{side}.fluid") or "").lower() in ("water", "steam")
    if not named and f"{side}.steam_in" not in v and f"{side}.steam_out" not in v:
        raise Missing(f"{side}.latent_heat")
    p = pressure(v, f"{side}.p_in")
    try:
        return fluids.saturation(p).h_fg
    except fluids.FluidError as error:
        raise Missing(f"{side}.latent_heat ({error})") from None


def side_heat(v: Figures, side: Side) -> float:
    return condensed_heat(v, side) if changes_phase(v, side) else heat(v, side)


def shells(v: Figures) -> int:
    """In series and in parallel together."""
    return int(v.get("shells_in_series") or 1) * int(v.get("shells_in_parallel") or 1)


def surface(v: Figures) -> float:
    """Of the whole unit, as printed [m²]."""
    area = v.get("area")
    if area is None:
        return float(v.any_of("area", "area_per_shell")) * shells(v)
    return float(area) * (shells(v) if v.get("basis") == "shell" else 1)


def bore(v: Figures) -> float:
    """Inside diameter of the tubes [m]."""
    if v.subject.double_pipe and ("tube_id" not in v or _piped(v, "inner_pipe")):
        return _pipe(v, "inner_pipe")[1]
    if "tube_id" in v:
        return float(v["tube_id"])
    od = float(v["tube_od"])
    if "tube_wall" in v:
        wall = float(v["tube_wall"]) * (MINIMUM_WALL if v.get("tube_wall_is") == "minimum" else 1.0)
    elif "gauge" in v:
        wall = gauge_wall(str(v["gauge"]))
    else:
        raise Missing("tube_wall or gauge or tube_id")
    if 2 * wall >= od:
        raise Impossible("a wall that leaves a bore")
    return od - 2 * wall


def outside_diameter(v: Figures) -> float:
    """Of the tubes or the inner pipe [m]."""
    if v.subject.double_pipe and ("tube_od" not in v or _piped(v, "inner_pipe")):
        return _pipe(v, "inner_pipe")[0]
    return float(v["tube_od"])


def shell_bore(v: Figures) -> float:
    if v.subject.double_pipe and ("shell_id" not in v or _piped(v, "outer_pipe")):
        return _pipe(v, "outer_pipe")[1]
    return float(v["shell_id"])


def _piped(v: Figures, which: str) -> bool:
    """Whether the sheet states this pipe as a pipe, which stands before any diameter from elsewhere."""
    return any(f"{which}.{name}" in v for name in ("nps", "od"))


def _pipe(v: Figures, which: str) -> tuple[float, float]:
    """Outside and inside diameter of a stated pipe [m]."""
    od, bore = v.get(f"{which}.od"), v.get(f"{which}.id")
    if od is not None and bore is not None:
        return float(od), float(bore)
    try:
        return _standard_pipe(str(v[f"{which}.nps"]), str(v[f"{which}.schedule"]))
    except ValueError as error:
        raise Missing(f"{which} ({error})") from None


@cache
def _standard_pipe(nps: str, schedule: str) -> tuple[float, float]:
    return standard_sizes.pipe(nps, schedule)


def gauge_wall(gauge: str) -> float:
    try:
        return standard_sizes.gauge_wall(gauge)
    except ValueError as error:
        raise Missing(f"gauge ({error})") from None


def tube_count(v: Figures) -> float:
    """Straight tubes of one shell, or legs of U-tubes."""
    return float(v["tubes"]) * (2 if v.get("tubes_are") == "U-tubes" else 1)


def heated_length(v: Figures) -> float:
    """Of one tube [m]; between the tubesheets where their thickness is stated."""
    L = float(v["tube_length"])
    if v.get("area_kind") != "gross" and "tubesheet_thickness" in v:
        u_tubes = str(v.get("tema") or "   ")[2:3].upper() == "U"
        L -= (1 if u_tubes else 2) * float(v["tubesheet_thickness"])
    return L


def bare_area(v: Figures) -> float:
    """From the tubes, outside, of the whole unit [m²]."""
    if v.subject.double_pipe:
        legs = float(v["legs_in_series"]) * float(v.get("banks_in_parallel") or 1)
        return math.pi * outside_diameter(v) * float(v["leg_length"]) * legs
    return math.pi * float(v["tube_od"]) * heated_length(v) * tube_count(v) * shells(v)


def passage(v: Figures, side: Side) -> tuple[float, float, float]:
    """Flow area for the whole stream [m²], hydraulic diameter and length of one leg or pass [m]."""
    parallel = float(v.get("banks_in_parallel") or 1) if v.subject.double_pipe else 1.0
    if v.subject.double_pipe:
        case = v.subject.case
        if case is not None and isinstance(case.exchanger, DoublePipe):
            parallel = case.exchanger.branches(side)
            if case.exchanger.fins is not None and side == "outside":
                raise Missing("a plain annulus; fins narrow it")
        d = bore(v)
        if side == "outside":
            D, d_o = shell_bore(v), outside_diameter(v)
            if d_o >= D:
                raise Impossible("an outer pipe that is wider than the inner one")
            return math.pi / 4 * (D**2 - d_o**2) * parallel, D - d_o, float(v["leg_length"])
        return math.pi / 4 * d**2 * parallel, d, float(v["leg_length"])
    if side == "outside":
        raise Missing("a velocity of the shell side, for which there is no single definition")
    d = bore(v)
    open_tubes = tube_count(v) / float(v["tube_passes"]) * float(v.get("shells_in_parallel") or 1)
    return math.pi / 4 * d**2 * open_tubes, d, float(v["tube_length"])


def wall_resistance(v: Figures) -> float:
    """Of the tube wall on its outside surface [m²K/W]."""
    d_o, d_i = outside_diameter(v), bore(v)
    return d_o * math.log(d_o / d_i) / (2 * wall_conductivity(v))


def wall_conductivity(v: Figures) -> float:
    if "wall_conductivity" in v:
        return float(v["wall_conductivity"])
    T = [v.get(f"{side}.{end}") for side in SIDES for end in ("T_in", "T_out")]
    known = [float(t) for t in T if t is not None]
    return metal_conductivity(str(v.any_of("material", "wall_conductivity")), sum(known) / len(known) if known else 300)


def metal_conductivity(material: str, T: float) -> float:
    try:
        return float(standard_sizes.conductivity(material, T))
    except ValueError as error:
        raise Missing(f"material by a known name, or wall_conductivity ({error})") from None


def fouling(v: Figures, on_own_surface: bool = True) -> float:
    """Of both sides on the outside surface [m²K/W]; the inside one taken over unconverted where not on its own."""
    outside, inside = v["outside.R_fouling"], v["inside.R_fouling"]
    ratio = outside_diameter(v) / bore(v) if on_own_surface else 1.0
    return float(outside) + float(inside) * ratio


def is_field(path: str) -> bool:
    """Whether a path is a figure of the sheet that can be off."""
    return isinstance(sheet_fields().get(path), Stated)


__all__ = ["PARTS", "Figures", "Impossible", "Missing", "Subject"]
