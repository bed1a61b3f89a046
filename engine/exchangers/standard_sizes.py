"""Sizes, materials and usual figures of the trade: pipes, gauges, metals, clearances, tube counts, ranges.

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


# Pipes and gauges

ASME_B36 = Source(
    key="asme-b36",
    text="ASME B36.10M, Welded and Seamless Wrought Steel Pipe, and B36.19M, Stainless Steel Pipe (schedules with S), "
    "Table 1",
    checked=False,
)

_NPS = ("1/2", "3/4", "1", "1 1/4", "1 1/2", "2", "2 1/2", "3", "3 1/2", "4", "5", "6", "8", "10", "12")
_OD = (21.3, 26.7, 33.4, 42.2, 48.3, 60.3, 73.0, 88.9, 101.6, 114.3, 141.3, 168.3, 219.1, 273.0, 323.8)
x: None = None  # not made
_WALLS: dict[str, tuple[float | None, ...]] = {
    "5S": (1.65, 1.65, 1.65, 1.65, 1.65, 1.65, 2.11, 2.11, 2.11, 2.11, 2.77, 2.77, 2.77, 3.40, 3.96),
    "10S": (2.11, 2.11, 2.77, 2.77, 2.77, 2.77, 3.05, 3.05, 3.05, 3.05, 3.40, 3.40, 3.76, 4.19, 4.57),
    "STD": (2.77, 2.87, 3.38, 3.56, 3.68, 3.91, 5.16, 5.49, 5.74, 6.02, 6.55, 7.11, 8.18, 9.27, 9.53),
    "XS": (3.73, 3.91, 4.55, 4.85, 5.08, 5.54, 7.01, 7.62, 8.08, 8.56, 9.53, 10.97, 12.70, 12.70, 12.70),
    "XXS": (7.47, 7.82, 9.09, 9.70, 10.15, 11.07, 14.02, 15.24, x, 17.12, 19.05, 21.95, 22.23, 25.40, 25.40),
    "20": (x, x, x, x, x, x, x, x, x, x, x, x, 6.35, 6.35, 6.35),
    "30": (2.41, 2.41, 2.90, 2.97, 3.18, 3.18, 4.78, 4.78, 4.78, 4.78, x, x, 7.04, 7.80, 8.38),
    "40": (2.77, 2.87, 3.38, 3.56, 3.68, 3.91, 5.16, 5.49, 5.74, 6.02, 6.55, 7.11, 8.18, 9.27, 10.31),
    "60": (x, x, x, x, x, x, x, x, x, x, x, x, 10.31, 12.70, 14.27),
    "80": (3.73, 3.91, 4.55, 4.85, 5.08, 5.54, 7.01, 7.62, 8.08, 8.56, 9.53, 10.97, 12.70, 15.09, 17.48),
    "100": (x, x, x, x, x, x, x, x, x, x, x, x, 15.09, 18.26, 21.44),
    "120": (x, x, x, x, x, x, x, x, x, 11.13, 12.70, 14.27, 18.26, 21.44, 25.40),
    "140": (x, x, x, x, x, x, x, x, x, x, x, x, 20.62, 25.40, 28.58),
    "160": (4.78, 5.56, 6.35, 6.35, 7.14, 8.74, 9.53, 11.13, x, 13.49, 15.88, 18.26, 23.01, 28.58, 33.32),
}
_WALLS |= {same: _WALLS[one] for same, one in {"5": "5S", "10": "10S", "40S": "STD", "80S": "XS"}.items()}


def _inches(nps: str) -> Fraction | None:
    """The size that 1 1/2, 1-1/2, 1.5 and 1.5 in stand for; None where it is no number."""
    try:
        return sum((Fraction(part) for part in nps.rstrip('in "').replace("-", " ").split()), Fraction(0))
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


# Metals

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
    mean from 20 to 100 °C. Below room temperature the tables are carried to 250 K along their first slope; an alloy
    with one known conductivity keeps it over its whole range.
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
               {250: 62.4, 300: 60.5, 400: 56.7, 600: 48.0, 800: 39.2}, 202, 7850, 11.9, INCROPERA_A1),
        _metal("1Cr-0.5Mo steel", ("low-alloy steel", "t12", "t11"),
               {250: 42.45, 300: 42.3, 400: 42.0, 600: 39.1, 800: 34.5}, 204, 7850, 12.0, INCROPERA_A1),
        _metal("stainless steel 304", ("304", "304l", "ss304", "ss 304", "stainless steel", "1.4301"),
               {250: 14.05, 300: 14.9, 400: 16.6, 600: 19.8, 800: 22.6}, 195, 7900, 16.6, INCROPERA_A1),
        _metal("stainless steel 316", ("316", "316l", "ss316", "ss 316", "1.4401", "1.4404"),
               {250: 12.5, 300: 13.4, 400: 15.2, 600: 18.3, 800: 21.3}, 195, 8000, 16.2, INCROPERA_A1),
        _metal("stainless steel 321/347", ("321", "347", "stainless steel 321", "stainless steel 347", "1.4541"),
               {250: 13.4, 300: 14.2, 400: 15.8, 600: 18.9, 800: 21.9}, 195, 7950, 16.6, INCROPERA_A1),
        _metal("duplex 2205", ("duplex", "2205", "s31803", "s32205", "1.4462"),
               {250: 14.5, 293: 15, 373: 16, 473: 17, 573: 18}, 200, 7800, 13.0, EN_10088),
        _metal("super duplex 2507", ("super duplex", "2507", "s32750", "1.4410"),
               {250: 14.5, 293: 15, 373: 16, 473: 17, 573: 18}, 200, 7800, 13.0, EN_10088),
        _metal("titanium", ("ti", "titanium grade 2", "grade 2"),
               {250: 22.65, 300: 21.9, 400: 20.4, 600: 19.4, 800: 19.7}, 107, 4510, 8.6, INCROPERA_A1, _LIGHT),
        _metal("copper", ("cu", "c12200", "dhp copper"),
               {250: 405, 300: 401, 400: 393, 600: 379}, 117, 8940, 16.9, INCROPERA_A1, _LIGHT),
        _metal("brass 70/30", ("brass", "cartridge brass", "c26000"),
               {250: 96.5, 300: 110, 400: 137, 600: 149}, 110, 8530, 19.9, INCROPERA_A1, _LIGHT),
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
               {250: 20.4, 293: 21.8, 366: 24.1, 477: 27.8, 589: 31.0}, 179, 8800, 13.9, ALLOY_SHEETS),
        _metal("alloy 600", ("inconel", "inconel 600"),
               {250: 14.4, 293: 14.9, 373: 15.9, 473: 17.3, 573: 19.0}, 214, 8470, 13.3, ALLOY_SHEETS),
        _metal("alloy 625", ("inconel 625",),
               {250: 9.2, 294: 9.8, 366: 10.8, 477: 12.5, 589: 14.1}, 207, 8440, 12.8, ALLOY_SHEETS),
        _metal("alloy 825", ("incoloy 825",),
               {250: 10.2, 299: 11.1, 366: 12.3, 477: 14.1, 589: 15.8}, 196, 8140, 14.0, ALLOY_SHEETS),
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
        hint = f"did you mean {' or '.join(near)}?" if near else f"offered are {_sentence_list(METALS)}"
        raise ValueError(f"{name!r} is no metal in the table; {hint}")
    return found


def conductivity(material: str, T: ArrayLike) -> Array:
    """k [W/mK] of a metal by its trade name at T [K], of T's shape; ValueError for a name or T not in the table."""
    return metal(material).conductivity(T)


# Clearances and bundles

TEMA = Source(
    key="tema",
    text="Standards of the Tubular Exchanger Manufacturers Association, 9th ed. 2007, RCB-4.2 and 4.3 (clearances), "
    "RCB-4.52 (spans), RCB-4.61, 4.62 and 10.32 (rho v²), RGP-T-2.4 (fouling)",
    checked=False,
)
SINNOTT_BUNDLE = Source(
    key="sinnott-bundle",
    text="R. K. Sinnott, Chemical Engineering Design (Coulson & Richardson vol. 6), 4th ed. 2005, Table 12.4 (bundle "
    "diameter) and Fig. 12.10 (bundle clearance)",
    checked=False,
)
INCH = 0.0254


def tube_hole_clearance(tube_od: float, span: float) -> float:
    """Diametral clearance [m] of baffle holes over the tube, from the longest unsupported span [m]. Source: TEMA."""
    return 0.0008 if span <= 36 * INCH or tube_od > 1.25 * INCH else 0.0004


_SHELL_BAFFLE = ((17, 0.0032), (39, 0.0048), (54, 0.0064), (69, 0.0079), (84, 0.0095), (100, 0.0111))


def shell_baffle_clearance(shell_id: float) -> float:
    """Design clearance [m] between shell bore and baffle edge, diametral. An old or oval shell may have twice as much.

    Raises ValueError outside the 6 to 100 inch shells of the table. Source: TEMA.
    """
    inches = shell_id / INCH
    # the table speaks of nominal whole inches: a 17 1/4 in shell still is its 17 in row
    row = next((clearance for upto, clearance in _SHELL_BAFFLE if inches < upto + 0.5), None)
    if inches < 5.5 or row is None:
        raise ValueError(
            f"no usual shell-to-baffle clearance is known for a shell of {shell_id:g} m; the table spans 6 to 100 "
            "inches (0.152 to 2.54 m), so state the clearance"
        )
    return row


# clearance [m] at a bundle of 0.2 m and of 1.2 m, by TEMA rear-head letter
_BUNDLE_CLEARANCE = {
    **dict.fromkeys("LMNU", (0.010, 0.020)),
    **dict.fromkeys("PW", (0.038, 0.038)),
    "S": (0.050, 0.078),
    "T": (0.088, 0.098),
}


def bundle_clearance(bundle_diameter: float, rear_head: str) -> float:
    """Shell bore minus bundle (outer tube limit) diameter [m], by rear-head letter, within about 15 %.

    Linear between bundles of 0.2 m and 1.2 m, the ends of the source's chart, and held beyond them.
    Raises ValueError for a letter that is no rear head. Source: SINNOTT_BUNDLE.
    """
    if rear_head not in _BUNDLE_CLEARANCE:
        raise ValueError(f"{rear_head!r} is no rear head; offered are {_sentence_list(_BUNDLE_CLEARANCE)}")
    return float(np.interp(bundle_diameter, (0.2, 1.2), _BUNDLE_CLEARANCE[rear_head]))


def outer_tube_limit(shell_id: float, rear_head: str) -> float:
    """The bundle diameter [m] that leaves its usual clearance in that shell. Errors and source of bundle_clearance."""
    bundle = shell_id
    for _ in range(20):  # the clearance changes by 3 % of the diameter at most: contracts by 30 a turn
        bundle = shell_id - bundle_clearance(bundle, rear_head)
    return bundle


Pattern = Literal["triangular", "square"]
LAYOUTS: dict[float, Pattern] = {30.0: "triangular", 60.0: "triangular", 45.0: "square", 90.0: "square"}

_BUNDLE_K1_N1: dict[Pattern, dict[int, tuple[float, float]]] = {
    "triangular": {1: (0.319, 2.142), 2: (0.249, 2.207), 4: (0.175, 2.285), 6: (0.0743, 2.499), 8: (0.0365, 2.675)},
    "square": {1: (0.215, 2.207), 2: (0.156, 2.291), 4: (0.158, 2.263), 6: (0.0402, 2.617), 8: (0.0331, 2.643)},
}


def pattern(layout_angle: float) -> Pattern:
    """Triangular or square, from the layout angle in degrees; ValueError for an angle that is no tube layout."""
    if layout_angle not in LAYOUTS:
        raise ValueError(f"a layout angle of {layout_angle:g} degrees is not offered; offered are 30, 45, 60 and 90")
    return LAYOUTS[layout_angle]


def bundle_diameter(tubes: int, tube_od: float, tube_pitch: float, layout_angle: float, tube_passes: int) -> float:
    """Diameter [m] that so many tubes usually fill: do (Nt/K1)^(1/n1), which holds at pt = 1.25 do; scaled by pt.

    Raises ValueError for a layout or a number of passes that the source does not give. Source: SINNOTT_BUNDLE.
    """
    rows = _BUNDLE_K1_N1[pattern(layout_angle)]
    if tube_passes not in rows:
        raise ValueError(f"no bundle diameter is known for {tube_passes} tube passes; offered are 1, 2, 4, 6 and 8")
    K1, n1 = rows[tube_passes]
    return float(tube_pitch / 1.25 * (tubes / K1) ** (1 / n1))


# Tube counts: for a warning, never for a verdict

LUDWIG_COUNTS = Source(
    key="ludwig-counts",
    text="E. E. Ludwig, Applied Process Design for Chemical and Petrochemical Plants, vol. 3, 3rd ed. 2001, Table 10-9",
    checked=True,
)
KERN_COUNTS = Source(
    key="kern-counts",
    text="D. Q. Kern, Process Heat Transfer, 1950, Table 9, as given by S. Ray, G. Das, Process Equipment and Plant "
    "Design, 2020, Table 4.8b",
    checked=True,
)
COUNT_ESTIMATE = Source(
    key="count-estimate",
    text="tubes on the area of the bundle: 0.785 CTP/CL (D/pt)², CL 1 square, 0.87 triangular, CTP 0.93, 0.90, 0.85 "
    "for 1, 2, more passes; common practice",
    checked=False,
)

_LUDWIG_SHELLS = (8, 10, 12, 13.25, 15.25, 17.25, 19.25, 21.25, 23.25, 25, 27, 29, 31, 33, 35, 37)
_KERN_SHELLS = (*_LUDWIG_SHELLS, 39)

# pitch in sixteenths of an inch, on 3/4 inch tubes up to 1 inch, on 1 inch tubes at 1 1/4 inch
_Bundle = tuple[float, float, Pattern]
_T15: _Bundle = (0.75 * INCH, 0.9375 * INCH, "triangular")
_T16: _Bundle = (0.75 * INCH, 1.0 * INCH, "triangular")
_S16: _Bundle = (0.75 * INCH, 1.0 * INCH, "square")
_T20: _Bundle = (1.0 * INCH, 1.25 * INCH, "triangular")
_S20: _Bundle = (1.0 * INCH, 1.25 * INCH, "square")

# (bundle, passes, U-tubes): counts from the largest shell down; 0 where the table has none or a plain misprint
# fmt: off
_LUDWIG: dict[tuple[_Bundle, int, bool], tuple[int, ...]] = {
    (_T15, 1, False): (1269, 1143, 1019, 881, 763, 663, 553, 481, 391, 307, 247, 193, 135, 105, 69, 33),
    (_T16, 1, False): (1127, 1007, 889, 765, 667, 577, 493, 423, 343, 277, 217, 157, 117, 91, 57, 33),
    (_S16, 1, False): (965, 865, 765, 665, 587, 495, 419, 355, 287, 235, 183, 139, 101, 85, 53, 33),
    (_T20, 1, False): (699, 633, 551, 481, 427, 361, 307, 247, 205, 163, 133, 103, 73, 57, 33, 15),
    (_S20, 1, False): (595, 545, 477, 413, 359, 303, 255, 215, 179, 139, 111, 83, 65, 45, 33, 17),
    (_T15, 2, False): (1242, 1088, 964, 846, 734, 626, 528, 452, 370, 300, 228, 166, 124, 94, 58, 32),
    (_T16, 2, False): (1088, 972, 858, 746, 646, 556, 468, 398, 326, 264, 208, 154, 110, 90, 56, 28),
    (_S16, 2, False): (946, 840, 746, 644, 560, 486, 408, 346, 280, 222, 172, 126, 94, 78, 48, 26),
    (_T20, 2, False): (688, 608, 530, 462, 410, 346, 292, 244, 204, 162, 126, 92, 62, 52, 32, 16),
    (_S20, 2, False): (584, 522, 460, 402, 348, 298, 248, 218, 172, 136, 106, 76, 56, 40, 26, 12),
    (_T15, 4, False): (0, 1024, 904, 788, 680, 576, 484, 412, 332, 266, 196, 154, 108, 84, 48, 0),
    (_T16, 4, False): (1024, 912, 802, 692, 596, 508, 424, 360, 292, 232, 180, 134, 96, 72, 44, 0),
    (_S16, 4, False): (880, 778, 688, 590, 510, 440, 366, 308, 242, 192, 142, 126, 88, 72, 48, 0),
    (_T20, 4, False): (638, 560, 486, 422, 368, 308, 258, 212, 176, 138, 104, 78, 60, 44, 24, 0),
    (_T15, 2, True): (1126, 1008, 882, 768, 648, 558, 460, 398, 304, 234, 180, 134, 94, 64, 34, 8),
    (_T16, 2, True): (1000, 882, 772, 674, 566, 484, 406, 336, 270, 212, 158, 108, 72, 60, 26, 8),
    (_S16, 2, True): (884, 778, 688, 586, 506, 436, 362, 304, 242, 188, 142, 100, 72, 52, 30, 12),
    (_T20, 2, True): (610, 532, 466, 396, 340, 284, 234, 192, 154, 120, 84, 58, 42, 26, 8, 0),
    (_S20, 2, True): (526, 464, 406, 356, 304, 256, 214, 180, 134, 100, 76, 58, 38, 22, 12, 0),
}
_KERN: dict[tuple[_Bundle, int, bool], tuple[int, ...]] = {
    (_T15, 1, False): (1377, 1240, 1102, 974, 847, 721, 637, 532, 442, 361, 301, 239, 170, 127, 109, 62, 36),
    (_T15, 2, False): (1330, 1200, 1068, 938, 822, 692, 602, 506, 420, 342, 282, 224, 160, 114, 98, 56, 32),
    (_T15, 4, False): (1258, 1144, 1004, 878, 766, 640, 550, 468, 386, 314, 252, 194, 140, 96, 86, 47, 26),
    (_T15, 6, False): (1248, 1104, 988, 852, 722, 620, 536, 446, 378, 306, 244, 188, 136, 90, 82, 42, 24),
    (_T15, 8, False): (1212, 1072, 958, 826, 720, 594, 524, 434, 364, 290, 234, 178, 128, 86, 78, 36, 18),
    (_T16, 1, False): (1206, 1074, 970, 856, 745, 630, 559, 470, 384, 316, 262, 203, 151, 109, 92, 61, 37),
    (_T16, 2, False): (1176, 1044, 938, 830, 728, 604, 534, 452, 376, 302, 250, 196, 138, 106, 82, 52, 30),
    (_T16, 4, False): (1128, 1012, 882, 774, 678, 556, 488, 422, 352, 278, 226, 178, 122, 86, 76, 40, 24),
    (_T16, 6, False): (1100, 986, 864, 760, 666, 538, 474, 394, 342, 272, 216, 172, 118, 82, 74, 36, 24),
    (_T16, 8, False): (1078, 0, 848, 732, 640, 508, 464, 382, 328, 260, 210, 166, 110, 74, 70, 0, 0),
}
# fmt: on


@dataclass(frozen=True, kw_only=True)
class TubeCount:
    """How many tubes usually fit: the span of published layouts, which differ in bundle limit and pass lanes."""

    low: float
    high: float
    most: float
    """The largest published or estimated count itself, without the slack."""
    sources: tuple[Source, ...]


def tube_count(
    shell_id: float, tube_od: float, tube_pitch: float, layout_angle: float, tube_passes: int, *, u_tubes: bool = False
) -> TubeCount:
    """Tubes (U-tubes: legs) that usually fit a shell, from the published tables with 5 % or 4 tubes of slack, else the
    area estimate between the outer tube limit of a split-ring head and the bore, within 12 %.

    Raises ValueError for an angle that is no tube layout.
    """
    layout = pattern(layout_angle)
    found = []
    for table, shells, source in ((_LUDWIG, _LUDWIG_SHELLS, LUDWIG_COUNTS), (_KERN, _KERN_SHELLS, KERN_COUNTS)):
        for ((od, pitch, its_layout), *rest), counts in table.items():
            same_tubes = np.isclose((tube_od, tube_pitch), (od, pitch), rtol=0.01).all()
            if same_tubes and its_layout == layout and rest == [tube_passes, u_tubes]:
                bore, tubes = np.array([(d * INCH, n) for d, n in zip(shells, counts[::-1], strict=True) if n]).T
                if bore[0] <= shell_id <= bore[-1]:
                    found.append((float(np.interp(shell_id**2, bore**2, tubes)), source))
    if found:
        least, most = min(n for n, _ in found), max(n for n, _ in found)
        return TubeCount(
            low=max(0.0, least - max(4.0, 0.05 * least)),
            high=most + max(4.0, 0.05 * most),
            most=most,
            sources=tuple(source for _, source in found),
        )
    CL = 1.0 if layout == "square" else 0.87
    CTP = {1: 0.93, 2: 0.90}.get(tube_passes, 0.85)
    per_area = 0.785 * CTP / CL / tube_pitch**2
    return TubeCount(
        low=0.88 * per_area * outer_tube_limit(shell_id, "S") ** 2,
        high=1.12 * per_area * shell_id**2,
        most=per_area * shell_id**2,
        sources=(COUNT_ESTIMATE,),
    )


# Spans, limits, usual ranges

_SPAN_OD = (0.25, 0.375, 0.5, 0.625, 0.75, 0.875, 1, 1.25, 1.5, 2, 2.5, 3)
_SPANS: dict[SpanGroup, tuple[float, ...]] = {
    "steel and nickel": (26, 35, 44, 52, 60, 69, 74, 88, 100, 125, 125, 125),
    "copper, aluminium and titanium": (22, 30, 38, 45, 52, 60, 64, 76, 87, 110, 110, 110),
}


def unsupported_span(tube_od: float, span_group: SpanGroup) -> float:
    """Longest unsupported straight span [m] of a tube, linear between the sizes of the table; no verdict on vibration.

    It holds up to 399 °C for carbon and high-alloy steel, 454 °C for low-alloy steel and nickel, 316 °C for
    nickel-copper. Raises ValueError outside tubes of 1/4 to 3 inches. Source: TEMA.
    """
    inches = tube_od / INCH
    if not _SPAN_OD[0] <= inches <= _SPAN_OD[-1]:
        raise ValueError(f"the longest usual span is known for tubes of 6.35 to 76.2 mm, not of {1e3 * tube_od:g} mm")
    return float(np.interp(inches, _SPAN_OD, _SPANS[span_group])) * INCH


@dataclass(frozen=True, kw_only=True)
class Usual:
    """A range that practice keeps to, in SI; advice and not a limit, unless the source makes it one."""

    low: float
    high: float
    source: Source


SINNOTT_PRACTICE = Source(
    key="sinnott-practice",
    text="R. K. Sinnott, Chemical Engineering Design (Coulson & Richardson vol. 6), 4th ed. 2005, 12.7.2 and 12.7.3",
    checked=False,
)

RHO_V2_LIMITS: dict[str, Usual] = {
    what: Usual(low=0.0, high=high, source=TEMA)
    for what, high in {
        "shell nozzle without impingement protection, clean single-phase fluid": 2232.0,
        "shell nozzle without impingement protection, other liquids": 744.0,
        "shell or bundle entrance and exit": 5953.0,
        "tube-side nozzle without thickened pass partition": 8929.0,
    }.items()
}
"""rho v² [kg/(m s²)]; gases that corrode or abrade, saturated vapours and two-phase flow need protection always."""

VELOCITIES: dict[str, Usual] = {
    what: Usual(low=low, high=high, source=SINNOTT_PRACTICE)
    for what, (low, high) in {
        "tube-side process liquid": (1.0, 2.0),
        "tube-side cooling water": (1.5, 2.5),
        "shell-side liquid": (0.3, 1.0),
        "vapour in vacuum": (50.0, 70.0),
        "vapour at atmospheric pressure": (10.0, 30.0),
        "vapour at high pressure": (5.0, 10.0),
    }.items()
}
"""m/s; up to 4 m/s in tubes against fouling, not below about 1 m/s for cooling water."""

BAFFLE_SPACING = Usual(low=0.2, high=1.0, source=SINNOTT_PRACTICE)
"""Over the shell bore; never below 50 mm."""
BAFFLE_CUT = Usual(low=0.15, high=0.45, source=SINNOTT_PRACTICE)
"""Over the shell bore; best 0.20 to 0.25."""

# thousandths of h ft² °F/Btu as the table prints them, lowest and highest over its temperatures and velocities
_FOULING = {
    "sea water": (0.5, 1.0),
    "brackish water": (1.0, 3.0),
    "cooling-tower water, treated": (1.0, 2.0),
    "cooling-tower water, untreated": (3.0, 5.0),
    "city or well water": (1.0, 2.0),
    "river water": (2.0, 4.0),
    "muddy or silty water": (2.0, 4.0),
    "hard water": (3.0, 5.0),
    "engine jacket water": (1.0, 1.0),
    "distilled water or closed-cycle condensate": (0.5, 0.5),
    "treated boiler feed water": (0.5, 1.0),
    "boiler blowdown": (2.0, 2.0),
    "steam": (0.5, 0.5),
    "exhaust steam, oil-bearing": (1.5, 2.0),
    "compressed air": (1.0, 1.0),
    "engine exhaust gas": (10.0, 10.0),
    "refrigerant vapour, oil-bearing": (2.0, 2.0),
    "refrigerant liquid": (1.0, 1.0),
    "natural gas": (1.0, 2.0),
    "lube, transformer or hydraulic oil": (1.0, 1.0),
    "fuel oil, light": (2.0, 2.0),
    "fuel oil, heavy": (5.0, 7.0),
    "quench oil": (4.0, 4.0),
    "vegetable oil": (3.0, 3.0),
    "organic heat-transfer fluid": (2.0, 2.0),
    "glycol solution": (2.0, 2.0),
    "amine solution": (2.0, 2.0),
    "caustic solution": (2.0, 2.0),
    "gasoline": (2.0, 2.0),
    "naphtha or kerosene": (2.0, 3.0),
    "gas oil": (2.0, 5.0),
    "crude oil": (2.0, 7.0),
}
_HFT2F_PER_BTU = 3600 * (5 / 9) * 0.3048**2 / 1055.05585262  # of which one is so many m²K/W

FOULING: dict[str, Usual] = {
    service: Usual(low=low * 1e-3 * _HFT2F_PER_BTU, high=high * 1e-3 * _HFT2F_PER_BTU, source=TEMA)
    for service, (low, high) in _FOULING.items()
}
"""Fouling resistance [m²K/W] by service, of the fouled surface. The user's own figure always stands first."""
