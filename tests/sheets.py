"""Datasheets as a vendor would print them, and the errors that are seen on them.

A vendor rates a case of ours with films off ours by up to 15 %, drops likewise, properties by up to 2 %, takes the duty
that leaves him some excess, and prints every figure to 2 to 4 digits in units of his own. Nothing here uses the checks.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from engine import effectiveness as exact
from engine import units
from engine.case import Case
from engine.casefile import parse_case
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.rating import rate
from engine.sheet import Sheet, sheet_fields
from engine.stated import SIDES, CaseError, Count, Stated
from engine.states import Rating

Random = np.random.Generator

# --- cases ------------------------------------------------------------------------------------------------------------

COLD = ("Water", {"solution": "ethylene glycol", "mass_fraction": "30 %"})
OIL = {
    "name": "oil",
    "table": [
        {"T": "20 degC", "rho": "875 kg/m3", "cp": "1.87 kJ/kgK", "k": "0.133 W/mK", "mu": "30 cP"},
        {"T": "60 degC", "rho": "848 kg/m3", "cp": "2.03 kJ/kgK", "k": "0.130 W/mK", "mu": "9 cP"},
        {"T": "120 degC", "rho": "810 kg/m3", "cp": "2.27 kJ/kgK", "k": "0.125 W/mK", "mu": "2.9 cP"},
    ],
}
HOT = ("Water", "Toluene", "Methanol", "Benzene", OIL)
TUBES = ((19.05, 2.11), (19.05, 1.65), (25.4, 2.77), (25.4, 2.11), (20.0, 2.0), (15.88, 1.65))
LENGTHS = (2.44, 3.05, 3.66, 4.88, 6.1)
PIPES = (("2", "3"), ("1 1/2", "3"), ("1 1/4", "2"), ("3", "4"))


def _pick(rng: Random, options: Any) -> Any:
    return options[int(rng.integers(len(options)))]


def _streams(rng: Random, cold_flow: float, hot_inside: bool) -> dict[str, Any]:
    T_cold, span = rng.uniform(15, 35), rng.uniform(20, 60)
    fouling = (0.00009, 0.00018, 0.00035)
    cold = {"fluid": _pick(rng, COLD), "T_in": f"{T_cold:.1f} degC", "flow": f"{cold_flow:.4g} kg/s"}
    hot = {
        "fluid": _pick(rng, HOT),
        "T_in": f"{T_cold + span:.1f} degC",
        "flow": f"{cold_flow * rng.uniform(0.6, 2.0):.4g} kg/s",
    }
    for stream in (cold, hot):
        stream |= {"p_in": f"{rng.uniform(4, 9):.1f} barg", "R_fouling": f"{_pick(rng, fouling)} m2K/W"}
    return {"inside": hot, "outside": cold} if hot_inside else {"inside": cold, "outside": hot}


def _shell_and_tube(rng: Random) -> dict[str, Any]:
    od, wall = _pick(rng, TUBES)
    passes = _pick(rng, (1, 2, 2, 4))
    rear = _pick(rng, "MSU" if passes > 1 else "M")
    angle = _pick(rng, (30, 90, 45))
    pitch = round(1.25 * od, 2)
    shell_id = rng.uniform(0.3, 1.0)
    layout = 1.0 if angle in (45, 90) else 0.87
    most = 0.785 * {1: 0.93, 2: 0.90, 4: 0.85}[passes] / layout * ((shell_id - 0.05) / (pitch / 1e3)) ** 2
    tubes = max(4 * passes, int(most * rng.uniform(0.75, 0.95)) // (2 * passes) * 2 * passes)
    velocity = rng.uniform(0.4, 1.8)
    flow = velocity * 990 * tubes / passes * math.pi / 4 * ((od - 2 * wall) / 1e3) ** 2
    parallel, series = _pick(rng, ((1, 1), (1, 1), (1, 2), (2, 1)))
    exchanger = {
        "type": "shell-and-tube", "tema": f"A{'E'}{rear}", "shell_id": f"{1e3 * shell_id:.0f} mm",
        "tube_od": f"{od} mm", "tube_wall": f"{wall} mm", "tube_length": f"{_pick(rng, LENGTHS)} m",
        "tube_pitch": f"{pitch} mm", "layout_angle": f"{angle} deg", "tubes": tubes, "tube_passes": passes,
        "baffle_cut": f"{_pick(rng, (20, 25, 30))} %",
        "baffle_spacing": f"{1e3 * shell_id * rng.uniform(0.3, 0.6):.0f} mm",
        "wall_conductivity": f"{_pick(rng, (50, 16, 110))} W/mK",
        "shells_in_series": series, "shells_in_parallel": parallel,
    }  # fmt: skip
    return {**_streams(rng, flow * parallel, hot_inside=bool(rng.random() < 0.3)), "exchanger": exchanger}


def _double_pipe(rng: Random) -> dict[str, Any]:
    inner, outer = _pick(rng, PIPES)
    legs = 2 * int(rng.integers(2, 7))
    exchanger = {
        "type": "double-pipe", "arrangement": _pick(rng, ("counter", "counter", "co-current")),
        "inner_pipe": {"nps": inner, "schedule": "40"}, "outer_pipe": {"nps": outer, "schedule": "40"},
        "leg_length": f"{_pick(rng, (3, 4.5, 6))} m", "legs_in_series": legs, "wall_conductivity": "50 W/mK",
    }  # fmt: skip
    return {**_streams(rng, rng.uniform(1.0, 4.0), hot_inside=bool(rng.random() < 0.5)), "exchanger": exchanger}


def random_rating(rng: Random) -> Rating:
    """A random case that can be rated, with liquids on both sides and drops that leave most of the pressure."""
    while True:
        raw = _double_pipe(rng) if rng.random() < 0.25 else _shell_and_tube(rng)
        try:
            case = parse_case({"format": "countercheck-case", "version": 1, **raw})
        except CaseError:
            continue
        rating = rate(case)
        if rating.states and all(rating.fouled.sides[side].dp < 0.4 * case.p_in(side) for side in SIDES):
            return rating


# --- the vendor's figures ---------------------------------------------------------------------------------------------


@dataclass(frozen=True, kw_only=True)
class Vendor:
    """A vendor's sheet before it is printed: figures in SI, counts and words by path."""

    values: Mapping[str, Any]
    rating: Rating
    seed: int
    """Of the units and digits in which it is printed."""
    digits: Mapping[str, int] = field(default_factory=dict)

    @property
    def case(self) -> Case:
        return self.rating.case

    def printed(self) -> dict[str, str | int]:
        """As typed: in units and to digits of the vendor's own."""
        rng = np.random.default_rng(self.seed)
        system = _pick(rng, ("si", "si", "us", "metric"))
        coarse = int(rng.integers(2, 5))
        return {path: _printed(path, value, system, coarse, rng) for path, value in self.values.items()}

    def sheet(self) -> Sheet:
        return Sheet.model_validate(self.printed(), context={"file": True})

    def exact_sheet(self) -> Sheet:
        """With all digits, so that its misfits are those of errors alone."""
        typed = {path: _printed(path, value, "si", 15, np.random.default_rng(0)) for path, value in self.values.items()}
        return Sheet.model_validate(typed, context={"file": True})

    def having(self, changes: Mapping[str, Any]) -> Vendor:
        kept = {**self.values, **changes}
        return replace(self, values={path: value for path, value in kept.items() if value is not None})


GEOMETRY = (
    "tube_od", "tube_wall", "tube_length", "tube_pitch", "shell_id", "leg_length", "baffle_cut", "wall_conductivity",
)  # fmt: skip
"""Trade sizes, printed as they are."""
PRESCRIBED = ("flow", "p_in", "R_fouling", "dp_allowed")


def _printed(path: str, value: Any, system: str, coarse: int, rng: Random) -> Any:
    declared = sheet_fields()[path]
    if isinstance(declared, Count):
        return round(value)
    if not isinstance(declared, Stated):
        return value
    name = path.rpartition(".")[2]
    quantity = declared.quantities[0]
    if coarse > 10 or path in GEOMETRY:
        unit = units.unit_of(quantity, "si")
        return f"{units.to_unit(value, quantity, unit):.15g} {unit}"
    unit = units.unit_of(quantity, system)
    x = units.to_unit(value, quantity, unit)
    if quantity == "temperature":
        return f"{x:.{1 if coarse > 2 else 0}f} {unit}"
    digits = max(coarse, 3) if name in PRESCRIBED else int(np.clip(coarse + rng.integers(-1, 2), 2, 4))
    return f"{_rounded(x, digits)} {unit}"


def _rounded(x: float, digits: int) -> str:
    """To so many significant digits, without an exponent."""
    if x == 0:
        return "0"
    last = math.floor(math.log10(abs(x))) - digits + 1
    return f"{round(x, -last):.{max(0, -last)}f}"


PROPERTIES = ("rho", "cp", "mu", "k")
FILM_OFF, TUBE_DROP_OFF, SHELL_DROP_OFF, PROPERTY_OFF = 0.15, 0.12, 0.25, 0.02


def vendor_sheet(rng: Random, rating: Rating) -> Vendor:
    """A sheet that closes on itself, computed by a vendor whose methods are not ours."""
    case, clean = rating.case, rating.clean
    exchanger = case.exchanger
    values: dict[str, Any] = {}
    C: dict[str, float] = {}
    for side in SIDES:
        state = rating.fouled.sides[side]
        T_mean = 0.5 * (state.T_in + state.T_out)
        at = case.fluid(side).at(np.asarray(T_mean))
        own = {name: float(getattr(at, name)) * (1 + rng.uniform(-1, 1) * PROPERTY_OFF) for name in PROPERTIES}
        stream = case.stream(side)
        flow = case.flow(side)
        assert flow is not None
        C[side] = flow * own["cp"]
        off = TUBE_DROP_OFF if side == "inside" or not isinstance(exchanger, ShellAndTube) else SHELL_DROP_OFF
        dp = state.dp * (1 + rng.uniform(-1, 1) * off)
        p_in = float(stream.p_in or 0.0)
        values |= {f"{side}.{name}": x for name, x in own.items()}
        values |= {
            f"{side}.flow": flow, f"{side}.T_in": case.T_in(side), f"{side}.p_in": p_in, f"{side}.p_out": p_in - dp,
            f"{side}.dp": dp, f"{side}.dp_allowed": dp * rng.uniform(1.05, 2.0),
            f"{side}.R_fouling": float(stream.R_fouling),
            f"{side}.h": clean.sides[side].h * (1 + rng.uniform(-1, 1) * FILM_OFF),
        }  # fmt: skip
        if hasattr(stream.fluid, "name") and hasattr(stream.fluid, "spec") and not hasattr(stream.fluid, "table"):
            values[f"{side}.fluid"] = stream.fluid.name
    ratio = exchanger.area_ratio
    R_wall = clean.wall_R
    R_clean = 1 / values["outside.h"] + R_wall + ratio / values["inside.h"]
    R_dirty = R_clean + values["outside.R_fouling"] + ratio * values["inside.R_fouling"]
    U_dirty = 1 / R_dirty
    excess = rng.uniform(0.0, 0.2)
    U = U_dirty / (1 + excess)
    area = exchanger.area
    C_min, C_max = min(C.values()), max(C.values())
    NTU, Cr = U * area / C_min, C_min / C_max
    reached = _effectiveness(exchanger, NTU, Cr)
    hot, cold = case.hot, case.cold
    duty = reached * C_min * (case.T_in(hot) - case.T_in(cold))
    T_out = {hot: case.T_in(hot) - duty / C[hot], cold: case.T_in(cold) + duty / C[cold]}
    mtd = duty / (U * area)
    lmtd = _lmtd(case, T_out)
    values |= {f"{side}.T_out": T_out[side] for side in SIDES}
    values |= {
        "duty": duty, "area": area, "mtd": mtd, "F": mtd / lmtd, "U_service": U, "U_dirty": U_dirty,
        "U_clean": 1 / R_clean, "excess_area": excess, "wall_conductivity": float(exchanger.wall_conductivity or 50.0),
    }  # fmt: skip
    values |= _construction(rng, rating, values)
    return Vendor(values=values, rating=rating, seed=int(rng.integers(1 << 31)))


def _effectiveness(exchanger: Any, NTU: float, Cr: float) -> float:
    if isinstance(exchanger, ShellAndTube):
        if exchanger.tube_passes > 1:
            return float(exact.effectiveness_shell(NTU, Cr, exchanger.shells_in_series))
        return float(exact.effectiveness_counter(NTU, Cr))
    counter = exchanger.arrangement == "counter"
    return float((exact.effectiveness_counter if counter else exact.effectiveness_cocurrent)(NTU, Cr))


def _lmtd(case: Case, T_out: Mapping[Any, float]) -> float:
    hot, cold = case.hot, case.cold
    ends = [case.T_in(hot) - T_out[cold], T_out[hot] - case.T_in(cold)]
    if getattr(case.exchanger, "arrangement", "") == "co-current":
        ends = [case.T_in(hot) - case.T_in(cold), T_out[hot] - T_out[cold]]
    return float(exact.log_mean(*ends))


def _construction(rng: Random, rating: Rating, values: Mapping[str, Any]) -> dict[str, Any]:
    exchanger = rating.case.exchanger
    inside_flow, rho = values["inside.flow"], values["inside.rho"]
    bore_area = math.pi / 4 * exchanger.tube_id**2
    if not isinstance(exchanger, ShellAndTube):
        ring = math.pi / 4 * (exchanger.shell_id**2 - exchanger.tube_od**2)
        return {
            "inside.velocity": inside_flow / (rho * bore_area),
            "outside.velocity": values["outside.flow"] / (values["outside.rho"] * ring),
            "arrangement": exchanger.arrangement,
            "inner_pipe.nps": exchanger.inner_pipe.nps, "inner_pipe.schedule": "40",
            "outer_pipe.nps": exchanger.outer_pipe.nps, "outer_pipe.schedule": "40",
            "leg_length": float(exchanger.leg_length), "legs_in_series": exchanger.legs_in_series,
        }  # fmt: skip
    per_pass = exchanger.tubes / exchanger.tube_passes * exchanger.shells_in_parallel
    count, inlet, outlet = exchanger.path_spacings
    metal = exchanger.tubes * (exchanger.tube_od**2 - exchanger.tube_id**2)
    volume = math.pi / 4 * exchanger.tube_length * (exchanger.shell_id**2 - metal) * exchanger.shells
    empty = rng.uniform(1.5, 3.0) * 1000 * volume
    return {
        "inside.velocity": inside_flow / (rho * bore_area * per_pass),
        "tema": exchanger.tema, "shells_in_series": exchanger.shells_in_series,
        "shells_in_parallel": exchanger.shells_in_parallel, "area_per_shell": values["area"] / exchanger.shells,
        **{name: float(getattr(exchanger, name)) for name in
           ("shell_id", "tube_od", "tube_wall", "tube_length", "tube_pitch", "baffle_cut", "baffle_spacing")},
        "layout_angle": exchanger.layout_angle, "tubes": exchanger.tubes, "tube_passes": exchanger.tube_passes,
        "baffles": int(count), "inlet_spacing": inlet, "outlet_spacing": outlet,
        "weight_empty": empty, "weight_full": empty + rng.uniform(1.0, 1.3) * 1000 * volume,
    }  # fmt: skip


# --- errors -----------------------------------------------------------------------------------------------------------


@dataclass(frozen=True, kw_only=True)
class Injected:
    """A sheet with one error: which fields it makes guilty, and the slip that it is, where it is one."""

    kind: str
    vendor: Vendor
    guilty: tuple[str, ...]
    slip: float = 0.0
    """Factor of a unit slip; 0 where it is none."""


Error = Callable[[Random, Vendor], "Injected | None"]
ERRORS: dict[str, Error] = {}


def _error(kind: str) -> Callable[[Error], Error]:
    def register(inject: Error) -> Error:
        ERRORS[kind] = inject
        return inject

    return register


def _scaled(kind: str, path: str, factor: float) -> Error:
    """A unit slip of one field."""

    def inject(rng: Random, vendor: Vendor) -> Injected | None:
        if path not in vendor.values:
            return None
        changed = vendor.having({path: vendor.values[path] * factor})
        return Injected(kind=kind, vendor=changed, guilty=(path,), slip=factor)

    return inject


BTU_U = units.from_unit(1.0, "heat_transfer_coefficient", "Btu/h·ft²·°F")
KCAL_U = units.from_unit(1.0, "heat_transfer_coefficient", "kcal/h·m²·°C")
UNIT_SLIPS: Mapping[str, tuple[tuple[str, float], ...]] = {
    "unit: heat exchanged": (("duty", 1 / 1.163), ("duty", 1.163), ("duty", 3.6)),
    "unit: flow": tuple((f"{side}.flow", factor) for side in SIDES for factor in (2.20462, 1 / 2.20462, 3.6)),
    "unit: transfer rate": tuple(
        (name, factor) for name in ("U_service", "U_dirty", "U_clean") for factor in (1 / BTU_U, 1 / KCAL_U)
    ),
    "unit: fouling": tuple((f"{side}.R_fouling", factor) for side in SIDES for factor in (BTU_U, 1 / BTU_U)),
    "unit: specific heat": tuple((f"{side}.cp", factor) for side in SIDES for factor in (1 / 4.1868, 4.1868)),
    "unit: conductivity": tuple((f"{side}.k", factor) for side in SIDES for factor in (1 / 1.730735, 1.163)),
    "unit: viscosity": tuple((f"{side}.mu", factor) for side in SIDES for factor in (1 / 0.4133789, 10.0)),
    "unit: surface": (("area", 10.7639), ("area", 1 / 10.7639)),
    "unit: tube length": (("tube_length", 3.28084), ("leg_length", 3.28084)),
    "unit: velocity": (("inside.velocity", 3.28084), ("inside.velocity", 1 / 3.28084)),
    "unit: mean difference": (("mtd", 1.8), ("mtd", 1 / 1.8)),
}
for _kind, _slips in UNIT_SLIPS.items():

    def _of_kind(rng: Random, vendor: Vendor, kind: str = _kind, slips: Any = _slips) -> Injected | None:
        path, factor = _pick(rng, slips)
        return _scaled(kind, path, factor)(rng, vendor)

    ERRORS[_kind] = _of_kind


@_error("outlet left over from an older duty")
def _old_outlet(rng: Random, vendor: Vendor) -> Injected:
    side = _pick(rng, SIDES)
    T_in, T_out = (vendor.values[f"{side}.{end}"] for end in ("T_in", "T_out"))
    moved = T_in + (T_out - T_in) * _pick(rng, (0.75, 0.85, 1.15, 1.25))
    return Injected(
        kind="outlet left over from an older duty", vendor=vendor.having({f"{side}.T_out": moved}),
        guilty=(f"{side}.T_out",),
    )  # fmt: skip


@_error("duty forced to the request")
def _forced_duty(rng: Random, vendor: Vendor) -> Injected:
    duty = vendor.values["duty"] * _pick(rng, (0.85, 0.9, 1.1, 1.2))
    return Injected(kind="duty forced to the request", vendor=vendor.having({"duty": duty}), guilty=("duty",))


@_error("uncorrected MTD printed as corrected")
def _uncorrected(rng: Random, vendor: Vendor) -> Injected | None:
    values = vendor.values
    if values["F"] > 0.97:
        return None
    changes = {"mtd": values["mtd"] / values["F"]}
    return Injected(kind="uncorrected MTD printed as corrected", vendor=vendor.having(changes), guilty=("mtd",))


@_error("F of two shells for one")
def _two_shells(rng: Random, vendor: Vendor) -> Injected | None:
    values, exchanger = vendor.values, vendor.case.exchanger
    if not isinstance(exchanger, ShellAndTube) or exchanger.shells_in_series > 1 or exchanger.tube_passes == 1:
        return None
    C = {side: values[f"{side}.flow"] * values[f"{side}.cp"] for side in SIDES}
    P = values["duty"] / (min(C.values()) * abs(values["inside.T_in"] - values["outside.T_in"]))
    F = float(exact.correction_factor(P, min(C.values()) / max(C.values()), 2))
    if 1.03 * values["F"] > F:
        return None
    mtd = values["mtd"] / values["F"] * F
    changes = {"F": F, "mtd": mtd, "U_service": values["duty"] / (values["area"] * mtd)}
    return Injected(
        kind="F of two shells for one", vendor=vendor.having(changes), guilty=("F", "mtd", "shells_in_series")
    )


@_error("dirty U copied from service U")
def _copied_U(rng: Random, vendor: Vendor) -> Injected:
    changes = {"U_dirty": vendor.values["U_service"], "excess_area": None}
    return Injected(kind="dirty U copied from service U", vendor=vendor.having(changes), guilty=("U_dirty",))


@_error("fouling below the enquiry")
def _less_fouling(rng: Random, vendor: Vendor) -> Injected:
    side = _pick(rng, SIDES)
    return Injected(
        kind="fouling below the enquiry",
        vendor=vendor.having({f"{side}.R_fouling": vendor.values[f"{side}.R_fouling"] * _pick(rng, (0.25, 0.5))}),
        guilty=(f"{side}.R_fouling",),
    )


@_error("fouling on one side only")
def _one_sided(rng: Random, vendor: Vendor) -> Injected:
    side = _pick(rng, SIDES)
    return Injected(
        kind="fouling on one side only", vendor=vendor.having({f"{side}.R_fouling": 0.0}),
        guilty=(f"{side}.R_fouling",),
    )  # fmt: skip


@_error("excess counted on the clean U")
def _clean_excess(rng: Random, vendor: Vendor) -> Injected:
    values = vendor.values
    excess = values["U_clean"] / values["U_service"] - 1
    return Injected(
        kind="excess counted on the clean U", vendor=vendor.having({"excess_area": excess}), guilty=("excess_area",)
    )


@_error("U-tubes for legs, or legs for U-tubes")
def _holes(rng: Random, vendor: Vendor) -> Injected | None:
    if "tubes" not in vendor.values:
        return None
    factor = _pick(rng, (0.5, 2.0))
    changes = {"tubes": vendor.values["tubes"] * factor}
    kind = "U-tubes for legs, or legs for U-tubes"
    return Injected(kind=kind, vendor=vendor.having(changes), guilty=("tubes",), slip=factor)


@_error("flow of one shell for the total")
def _flow_per_shell(rng: Random, vendor: Vendor) -> Injected | None:
    n = vendor.values.get("shells_in_parallel", 1)
    if n == 1:
        return None
    side = _pick(rng, SIDES)
    changes = {f"{side}.flow": vendor.values[f"{side}.flow"] / n}
    kind = "flow of one shell for the total"
    return Injected(kind=kind, vendor=vendor.having(changes), guilty=(f"{side}.flow",), slip=1 / n)


@_error("surface of one shell for the unit")
def _area_of_shell(rng: Random, vendor: Vendor) -> Injected | None:
    exchanger = vendor.case.exchanger
    if not isinstance(exchanger, ShellAndTube) or exchanger.shells == 1:
        return None
    changes = {"area": vendor.values["area"] / exchanger.shells, "area_per_shell": None}
    kind = "surface of one shell for the unit"
    return Injected(kind=kind, vendor=vendor.having(changes), guilty=("area",), slip=1 / exchanger.shells)


@_error("gross surface for effective")
def _gross(rng: Random, vendor: Vendor) -> Injected | None:
    if "tubes" not in vendor.values:
        return None
    area = vendor.values["area"] * _pick(rng, (1.06, 1.08, 1.10))
    changes = {"area": area, "area_per_shell": None}
    return Injected(kind="gross surface for effective", vendor=vendor.having(changes), guilty=("area",))


@_error("gauge for absolute")
def _gauge(rng: Random, vendor: Vendor) -> Injected:
    side = _pick(rng, SIDES)
    path = f"{side}.{_pick(rng, ('p_in', 'p_out'))}"
    changes = {path: vendor.values[path] + _pick(rng, (-101325.0, 101325.0))}
    return Injected(kind="gauge for absolute", vendor=vendor.having(changes), guilty=(path,), slip=1.0)


@_error("end spacing hidden in an average")
def _average_spacing(rng: Random, vendor: Vendor) -> Injected | None:
    if "baffles" not in vendor.values:
        return None
    spacing = vendor.values["baffle_spacing"] * _pick(rng, (0.8, 1.2, 1.3))
    return Injected(
        kind="end spacing hidden in an average", vendor=vendor.having({"baffle_spacing": spacing}),
        guilty=("baffle_spacing", "inlet_spacing", "outlet_spacing"),
    )  # fmt: skip


@_error("tube length of an older revision")
def _old_length(rng: Random, vendor: Vendor) -> Injected | None:
    path = "tube_length" if "tube_length" in vendor.values else "leg_length"
    length = vendor.values[path] * _pick(rng, (0.75, 0.8, 1.25, 1.33))
    return Injected(kind="tube length of an older revision", vendor=vendor.having({path: length}), guilty=(path,))


@_error("minimum wall for average")
def _minimum_wall(rng: Random, vendor: Vendor) -> Injected | None:
    if "tube_wall" not in vendor.values:
        return None
    changes = {"tube_wall": vendor.values["tube_wall"] * 1.3}
    return Injected(kind="minimum wall for average", vendor=vendor.having(changes), guilty=("tube_wall",))


@_error("specific heat of water for the fluid")
def _water_cp(rng: Random, vendor: Vendor) -> Injected | None:
    sides = [side for side in SIDES if vendor.values[f"{side}.cp"] < 3900]
    if not sides:
        return None
    side = _pick(rng, sides)
    changes = {f"{side}.cp": 4186.8}
    kind = "specific heat of water for the fluid"
    return Injected(kind=kind, vendor=vendor.having(changes), guilty=(f"{side}.cp",))


@_error("viscosity at the inlet only")
def _inlet_viscosity(rng: Random, vendor: Vendor) -> Injected | None:
    side = _pick(rng, SIDES)
    fluid = vendor.case.fluid(side)
    T_in, T_out = (vendor.values[f"{side}.{end}"] for end in ("T_in", "T_out"))
    ratio = float(fluid.at(np.asarray(T_in)).mu / fluid.at(np.asarray(0.5 * (T_in + T_out))).mu)
    if abs(ratio - 1) < 0.2:
        return None
    changes = {f"{side}.mu": vendor.values[f"{side}.mu"] * ratio}
    return Injected(kind="viscosity at the inlet only", vendor=vendor.having(changes), guilty=(f"{side}.mu",))


@_error("plugged and tie-rod positions counted")
def _tie_rods(rng: Random, vendor: Vendor) -> Injected | None:
    if "tubes" not in vendor.values:
        return None
    changes = {"tubes": round(vendor.values["tubes"] * _pick(rng, (1.05, 1.08, 1.12)))}
    return Injected(kind="plugged and tie-rod positions counted", vendor=vendor.having(changes), guilty=("tubes",))


@_error("drop without nozzles and returns")
def _half_drop(rng: Random, vendor: Vendor) -> Injected:
    side = _pick(rng, SIDES)
    changes = {f"{side}.dp": vendor.values[f"{side}.dp"] * 0.5}
    return Injected(kind="drop without nozzles and returns", vendor=vendor.having(changes), guilty=(f"{side}.dp",))


__all__ = ["ERRORS", "UNIT_SLIPS", "Injected", "Vendor", "random_rating", "vendor_sheet"]
