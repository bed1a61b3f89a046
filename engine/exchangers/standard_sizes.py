"""Sizes, materials and usual figures of the trade: pipes, gauges, metals.

Lengths in metres, temperatures in kelvin. Data with their sources, and look-ups that refuse what the data do not cover:
they raise `ValueError` with a sentence that names what is offered.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches
from fractions import Fraction
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from engine.correlations import Array, Source


def _sentence_list(words: Iterable[str]) -> str:
    return ", ".join(words)


# --- pipes and gauges ------------------------------------------------------------------------------------------------

ASME_B36 = Source(
    key="asme-b36",
    text="ASME B36.10M, Welded and Seamless Wrought Steel Pipe, and B36.19M, Stainless Steel Pipe (schedules with S), "
    "Table 1",
    checked=False,
)

_NPS = ("1/2", "3/4", "1", "1 1/4", "1 1/2", "2", "2 1/2", "3", "3 1/2", "4", "5", "6", "8", "10", "12")
_OD = (21.3, 26.7, 33.4, 42.2, 48.3, 60.3, 73.0, 88.9, 101.6, 114.3, 141.3, 168.3, 219.1, 273.0, 323.8)
_: None = None  # not made
_WALLS: dict[str, tuple[float | None, ...]] = {
    "5S": (1.65, 1.65, 1.65, 1.65, 1.65, 1.65, 2.11, 2.11, 2.11, 2.11, 2.77, 2.77, 2.77, 3.40, 3.96),
    "10S": (2.11, 2.11, 2.77, 2.77, 2.77, 2.77, 3.05, 3.05, 3.05, 3.05, 3.40, 3.40, 3.76, 4.19, 4.57),
    "STD": (2.77, 2.87, 3.38, 3.56, 3.68, 3.91, 5.16, 5.49, 5.74, 6.02, 6.55, 7.11, 8.18, 9.27, 9.53),
    "XS": (3.73, 3.91, 4.55, 4.85, 5.08, 5.54, 7.01, 7.62, 8.08, 8.56, 9.53, 10.97, 12.70, 12.70, 12.70),
    "XXS": (7.47, 7.82, 9.09, 9.70, 10.15, 11.07, 14.02, 15.24, _, 17.12, 19.05, 21.95, 22.23, 25.40, 25.40),
    "20": (_, _, _, _, _, _, _, _, _, _, _, _, 6.35, 6.35, 6.35),
    "30": (2.41, 2.41, 2.90, 2.97, 3.18, 3.18, 4.78, 4.78, 4.78, 4.78, _, _, 7.04, 7.80, 8.38),
    "40": (2.77, 2.87, 3.38, 3.56, 3.68, 3.91, 5.16, 5.49, 5.74, 6.02, 6.55, 7.11, 8.18, 9.27, 10.31),
    "60": (_, _, _, _, _, _, _, _, _, _, _, _, 10.31, 12.70, 14.27),
    "80": (3.73, 3.91, 4.55, 4.85, 5.08, 5.54, 7.01, 7.62, 8.08, 8.56, 9.53, 10.97, 12.70, 15.09, 17.48),
    "100": (_, _, _, _, _, _, _, _, _, _, _, _, 15.09, 18.26, 21.44),
    "120": (_, _, _, _, _, _, _, _, _, 11.13, 12.70, 14.27, 18.26, 21.44, 25.40),
    "140": (_, _, _, _, _, _, _, _, _, _, _, _, 20.62, 25.40, 28.58),
    "160": (4.78, 5.56, 6.35, 6.35, 7.14, 8.74, 9.53, 11.13, _, 13.49, 15.88, 18.26, 23.01, 28.58, 33.32),
}
_WALLS |= {same: _WALLS[one] for same, one in {"5": "5S", "10": "10S", "40S": "STD", "80S": "XS"}.items()}


def _inches(nps: str) -> Fraction | None:
    """ "1 1/2", "1-1/2" and "1.5" are one size; None where it is no number."""
    try:
        return sum((Fraction(part) for part in nps.replace("-", " ").split()), Fraction(0))
    except (ValueError, ZeroDivisionError):
        return None


def pipe(nps: str, schedule: str) -> tuple[float, float]:
    """Outside and inside diameter [m] of a steel pipe at its nominal wall.

    `nps` is the nominal size in inches ("2", "1 1/2", "1.5"), `schedule` "40", "Sch 40", "STD", "10S", ...

    Raises ValueError where the size or its schedule is not offered. Source: ASME_B36.
    """
    asked = _inches(nps)
    column = next((i for i, size in enumerate(_NPS) if _inches(size) == asked), None)
    if column is None:
        raise ValueError(f"there is no pipe of NPS {nps!r} in the table; offered are {_sentence_list(_NPS)}")
    key = schedule.upper().replace("SCHEDULE", "").replace("SCH", "").strip(" .")
    wall = _WALLS[key][column] if key in _WALLS else None
    if wall is None:
        offered = _sentence_list(name for name, walls in _WALLS.items() if walls[column] is not None)
        raise ValueError(f"NPS {_NPS[column]} has no schedule {schedule!r} in the table; offered are {offered}")
    return _OD[column] / 1e3, (_OD[column] - 2 * wall) / 1e3


BWG = Source(key="bwg", text="Birmingham (Stubs iron) wire gauge, decimals of an inch", checked=True)

_GAUGE_INCHES = {
    7: 0.180, 8: 0.165, 9: 0.148, 10: 0.134, 11: 0.120, 12: 0.109, 13: 0.095, 14: 0.083, 15: 0.072, 16: 0.065,
    17: 0.058, 18: 0.049, 19: 0.042, 20: 0.035, 21: 0.032, 22: 0.028, 23: 0.025, 24: 0.022,
}  # fmt: skip


def gauge_wall(gauge: str) -> float:
    """Tube wall [m] of a Birmingham gauge: "14 BWG", "BWG 14" or "14".

    Raises ValueError where the gauge is not in the table. Source: BWG.
    """
    number = gauge.upper().replace("BWG", "").strip()
    if not number.isdecimal() or int(number) not in _GAUGE_INCHES:
        raise ValueError(f"{gauge!r} is no tube gauge in the table; offered are {min(_GAUGE_INCHES)} to 24 BWG")
    return _GAUGE_INCHES[int(number)] * 0.0254


# --- metals ----------------------------------------------------------------------------------------------------------

INCROPERA_A1 = Source(
    key="incropera-a1",
    text="F. P. Incropera, D. P. DeWitt et al., Fundamentals of Heat and Mass Transfer, 6th ed. 2007, Table A.1",
    checked=False,
)
ASME_IID = Source(
    key="asme-iid",
    text="ASME Boiler and Pressure Vessel Code, Section II Part D, Tables TE, TM, TCD and PRD",
    checked=False,
)
CDA = Source(
    key="cda", text="Copper Development Association, properties of wrought copper alloys, by UNS number", checked=False
)
EN_10088 = Source(key="en-10088", text="EN 10088-1, Stainless steels, Annex E", checked=False)
ALLOY_SHEETS = Source(key="alloy-sheets", text="mill data sheets of the nickel and aluminium alloys", checked=False)

SpanGroup = Literal["steel and nickel", "copper, aluminium and titanium"]
_STEEL: SpanGroup = "steel and nickel"
_LIGHT: SpanGroup = "copper, aluminium and titanium"


@dataclass(frozen=True, kw_only=True)
class Metal:
    """A tube or pipe metal. Typical values, not those of a heat of steel; from memory where the source says so.

    `k_table` holds (T [K], k [W/mK]), linear between; `E` [Pa] and `density` [kg/m³] at 20 °C; `expansion` [1/K] is the
    mean from 20 to 100 °C. Below 300 K the tables are carried to 250 K along their first slope.
    """

    name: str
    trade_names: tuple[str, ...]
    k_table: tuple[tuple[float, float], ...]
    E: float
    density: float
    expansion: float
    span_group: SpanGroup
    source: Source

    def conductivity(self, T: ArrayLike) -> Array:
        """k [W/mK] at the metal temperature T [K], of T's shape; ValueError outside the table."""
        at, k = np.array(self.k_table).T
        T = np.asarray(T, dtype=float)
        if not ((at[0] <= T) & (at[-1] >= T)).all():
            worst = T[~((at[0] <= T) & (at[-1] >= T))].flat[0]
            raise ValueError(
                f"the conductivity of {self.name} is known from {at[0]:g} K to {at[-1]:g} K; {worst:g} K was asked"
            )
        return np.asarray(np.interp(T, at, k))


def _metal(
    name: str,
    trade_names: tuple[str, ...],
    k_table: dict[float, float],
    E: float,
    density: float,
    expansion: float,
    source: Source,
    span_group: SpanGroup = _STEEL,
) -> Metal:
    return Metal(
        name=name,
        trade_names=trade_names,
        k_table=tuple(k_table.items()),
        E=E * 1e9,
        density=density,
        expansion=expansion * 1e-6,
        span_group=span_group,
        source=source,
    )


METALS: dict[str, Metal] = {
    metal.name: metal
    for metal in (
        _metal("carbon steel", ("cs", "steel", "mild steel", "sa-179", "a106"),
               {250: 63.7, 300: 60.5, 400: 56.7, 600: 48.0, 800: 39.2}, 202, 7850, 11.9, INCROPERA_A1),
        _metal("1Cr-0.5Mo steel", ("low-alloy steel", "t12", "t11"),
               {250: 42.5, 300: 42.3, 400: 42.0, 600: 39.1, 800: 34.5}, 204, 7850, 12.0, INCROPERA_A1),
        _metal("stainless steel 304", ("304", "304l", "ss304", "ss 304", "stainless steel", "1.4301"),
               {250: 14.0, 300: 14.9, 400: 16.6, 600: 19.8, 800: 22.6}, 195, 7900, 16.6, INCROPERA_A1),
        _metal("stainless steel 316", ("316", "316l", "ss316", "ss 316", "1.4401", "1.4404"),
               {250: 12.5, 300: 13.4, 400: 15.2, 600: 18.3, 800: 21.3}, 195, 8000, 16.2, INCROPERA_A1),
        _metal("stainless steel 321/347", ("321", "347", "stainless steel 321", "stainless steel 347", "1.4541"),
               {250: 13.4, 300: 14.2, 400: 15.8, 600: 18.9, 800: 21.9}, 195, 7950, 16.6, INCROPERA_A1),
        _metal("duplex 2205", ("duplex", "2205", "s31803", "s32205", "1.4462"),
               {250: 14.5, 293: 15, 373: 16, 473: 17, 573: 18}, 200, 7800, 13.0, EN_10088),
        _metal("super duplex 2507", ("super duplex", "2507", "s32750", "1.4410"),
               {250: 14.5, 293: 15, 373: 16, 473: 17, 573: 18}, 200, 7800, 13.0, EN_10088),
        _metal("titanium", ("ti", "titanium grade 2", "grade 2"),
               {250: 22.7, 300: 21.9, 400: 20.4, 600: 19.4, 800: 19.7}, 107, 4510, 8.6, INCROPERA_A1, _LIGHT),
        _metal("copper", ("cu", "c12200", "dhp copper"),
               {250: 405, 300: 401, 400: 393, 600: 379}, 117, 8940, 16.9, INCROPERA_A1, _LIGHT),
        _metal("brass 70/30", ("brass", "cartridge brass", "c26000"),
               {250: 97, 300: 110, 400: 137, 600: 149}, 110, 8530, 19.9, INCROPERA_A1, _LIGHT),
        _metal("admiralty brass", ("admiralty", "c44300"),
               {250: 111, 473: 111}, 110, 8530, 20.2, CDA, _LIGHT),
        _metal("aluminium brass", ("aluminum brass", "c68700"),
               {250: 101, 473: 101}, 110, 8330, 18.5, CDA, _LIGHT),
        _metal("copper-nickel 90/10", ("cu-ni 90/10", "cuni 90/10", "90/10", "c70600"),
               {250: 50, 573: 50}, 124, 8940, 17.1, CDA, _LIGHT),
        _metal("copper-nickel 70/30", ("cu-ni 70/30", "cuni 70/30", "70/30", "c71500"),
               {250: 29, 573: 29}, 152, 8940, 16.2, CDA, _LIGHT),
        _metal("aluminium", ("aluminum", "al", "6061"),
               {250: 165, 298: 167, 400: 172}, 69, 2700, 23.6, ALLOY_SHEETS, _LIGHT),
        _metal("nickel 200", ("nickel", "ni 200"),
               {250: 72.2, 293: 70.2, 373: 66.5, 473: 61.6, 573: 56.8}, 205, 8890, 13.3, ALLOY_SHEETS),
        _metal("alloy 400", ("monel", "monel 400"),
               {250: 20.6, 293: 21.8, 366: 24.1, 477: 27.8, 589: 31.0}, 179, 8800, 13.9, ALLOY_SHEETS),
        _metal("alloy 600", ("inconel", "inconel 600"),
               {250: 14.4, 293: 14.9, 373: 15.9, 473: 17.3, 573: 19.0}, 214, 8470, 13.3, ALLOY_SHEETS),
        _metal("alloy 625", ("inconel 625",),
               {250: 9.2, 294: 9.8, 366: 10.8, 477: 12.5, 589: 14.1}, 207, 8440, 12.8, ALLOY_SHEETS),
        _metal("alloy 825", ("incoloy 825",),
               {250: 10.3, 299: 11.1, 366: 12.3, 477: 14.1, 589: 15.8}, 196, 8140, 14.0, ALLOY_SHEETS),
        _metal("alloy C-276", ("hastelloy", "hastelloy c-276", "hastelloy c276", "c-276", "c276"),
               {250: 9.6, 297: 10.2, 366: 11.1, 477: 13.0, 589: 14.9}, 205, 8890, 11.2, ALLOY_SHEETS),
    )
}  # fmt: skip
_METAL_NAMES = {
    spelling.casefold(): metal for metal in METALS.values() for spelling in (metal.name, *metal.trade_names)
}


def metal(name: str) -> Metal:
    """The metal of that trade name, whatever the case of its letters; ValueError that names the nearest ones."""
    found = _METAL_NAMES.get(" ".join(name.casefold().split()))
    if found is None:
        near = {_METAL_NAMES[word].name: None for word in get_close_matches(name.casefold(), _METAL_NAMES, n=3)}
        raise ValueError(f"{name!r} is no metal in the table; offered are {_sentence_list(near or METALS)}")
    return found


def conductivity(material: str, T: ArrayLike) -> Array:
    """k [W/mK] of a metal by its trade name at T [K], of T's shape; ValueError for a name or T not in the table."""
    return metal(material).conductivity(T)
