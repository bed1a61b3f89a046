"""Heat transfer and pressure drop across the tube bundle of a baffled shell.

Bell-Delaware in Taborek's form is the default; Kern's method stands beside it for both, the drag of Gaddis and
Gnielinski for the pressure drop, Zukauskas for the ideal bank. Re is taken on the tube outside diameter and the mass
velocity through the smallest cross-flow area, unless a relation says otherwise; `mu_ratio` is mu_w/mu. Numbers of a
bundle are those of one shell, arrays broadcast. Nozzles are not part of any drop here.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from engine.correlations import Array, Range, Source, correlation
from engine.correlations.sources import KERN_1950

TABOREK_HEDH = Source(
    key="Taborek-HEDH",
    text="Taborek, J., Shell-and-tube heat exchangers: single-phase flow, in: Heat Exchanger Design Handbook, "
    "Hemisphere 1983, section 3.3; after Bell, K. J., Univ. Delaware Eng. Exp. Sta. Bull. 5 (1963)",
    checked=False,
)
GADDIS_GNIELINSKI = Source(
    key="Gaddis-Gnielinski",
    text="Gaddis, E. S., Gnielinski, V., Pressure drop in cross flow across tube bundles and on the shell side, in: "
    "VDI Heat Atlas, 2nd ed., Springer 2010, sections L1.4 and L1.5",
    checked=False,
)
ZUKAUSKAS_1972 = Source(
    key="Zukauskas-1972",
    text="Zukauskas, A., Heat transfer from tubes in crossflow, Adv. Heat Transfer 8 (1972) 93-160, as given by "
    "Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed., Eq. 7.64 and Table 7.7",
    checked=False,
)

Real = Array | float

PITCH_RATIO = Range(argument="pitch_ratio", low=1.25, high=1.5)
BAFFLE_CUT = Range(argument="baffle_cut", low=0.15, high=0.45)


# Tube layouts

_ROW_ENDS = np.array([10.0, 1e2, 1e3, 1e4])
STEP_WIDTH = 0.01
"""Relative half-width in Re over which a cell is led from one printed row to the next: our choice."""


@dataclass(frozen=True)
class _Curve:
    """c1 (1.33/(pt/do))^c Re^c2, c = c3/(1 + 0.14 Re^c4): c1 and c2 by Re row on [low, high), c3 and c4 for all."""

    rows: tuple[tuple[float, float], ...]
    """(c1, c2) for Re below 10, 1e2, 1e3, 1e4 and above."""
    c3: float
    c4: float

    def __call__(self, Re: Array, pitch_ratio: Real) -> Array:
        row = np.searchsorted(_ROW_ENDS, Re, side="right")
        ln_Re = np.log(Re)
        c1, c2 = np.array(self.rows).T
        spread = self.c3 / (1.0 + 0.14 * np.exp(self.c4 * ln_Re))
        return np.asarray(np.exp(np.log(c1)[row] + c2[row] * ln_Re + spread * np.log(1.33 / np.asarray(pitch_ratio))))

    def over_steps(self, Re: Array) -> Array:
        """Factor that joins the rows linearly in ln Re within STEP_WIDTH of their ends; 1 elsewhere."""
        factor = np.ones_like(Re)
        for k, end in enumerate(_ROW_ENDS):
            way = 0.5 + 0.5 * np.log(Re / end) / np.log1p(STEP_WIDTH)
            if ((way > 0) & (way < 1)).any():
                (c1, c2), (d1, d2) = self.rows[k : k + 2]
                step = d1 / c1 * end ** (d2 - c2)
                joined = (1 + way * (step - 1)) / np.where(way < 0.5, 1.0, step)
                factor = np.where((way > 0) & (way < 1), joined, factor)
        return factor


@dataclass(frozen=True, kw_only=True)
class TubeLayout:
    """A layout's pitches over the tube pitch, and its curves for the ideal bank (60 degrees has those of 30)."""

    staggered: bool
    transverse: float
    """Transverse pitch over tube pitch."""
    row: float
    """Row pitch along the flow over tube pitch."""
    gap: float
    """Bundle width per free gap (pt - do), over tube pitch: below `transverse` where the diagonal gaps govern."""
    j: _Curve
    f: _Curve


# 1.498 (45 degrees, Re 10 to 100), 0.391 and +0.022 (90 degrees), the minus of 30 degrees b2: other prints differ, and
# only these join the neighbouring rows
_J_30 = _Curve(((1.400, -0.667), (1.360, -0.657), (0.593, -0.477), (0.321, -0.388), (0.321, -0.388)), 1.450, 0.519)
_J_45 = _Curve(((1.550, -0.667), (1.498, -0.656), (0.730, -0.500), (0.370, -0.396), (0.370, -0.396)), 1.930, 0.500)
_J_90 = _Curve(((0.970, -0.667), (0.900, -0.631), (0.408, -0.460), (0.107, -0.266), (0.370, -0.395)), 1.187, 0.370)
_F_30 = _Curve(((48.0, -1.000), (45.1, -0.973), (4.570, -0.476), (0.486, -0.152), (0.372, -0.123)), 7.00, 0.500)
_F_45 = _Curve(((32.0, -1.000), (26.2, -0.913), (3.500, -0.476), (0.333, -0.136), (0.303, -0.126)), 6.59, 0.520)
_F_90 = _Curve(((35.0, -1.000), (32.1, -0.963), (6.090, -0.602), (0.0815, 0.022), (0.391, -0.148)), 6.30, 0.378)

TUBE_LAYOUTS: Mapping[float, TubeLayout] = {
    30.0: TubeLayout(staggered=True, transverse=1.0, row=0.75**0.5, gap=1.0, j=_J_30, f=_F_30),
    45.0: TubeLayout(staggered=True, transverse=2.0**0.5, row=0.5**0.5, gap=0.5**0.5, j=_J_45, f=_F_45),
    60.0: TubeLayout(staggered=True, transverse=3.0**0.5, row=0.5, gap=0.75**0.5, j=_J_30, f=_F_30),
    90.0: TubeLayout(staggered=False, transverse=1.0, row=1.0, gap=1.0, j=_J_90, f=_F_90),
}
"""By layout angle in degrees."""


def tube_layout(layout_angle: float) -> TubeLayout:
    """Raises ValueError for an angle that is no tube layout."""
    if layout_angle not in TUBE_LAYOUTS:
        raise ValueError(f"a layout angle of {layout_angle:g} degrees is not offered; offered are 30, 45, 60 and 90")
    return TUBE_LAYOUTS[layout_angle]


# Geometry


@dataclass(frozen=True, kw_only=True)
class BundleGeometry:
    """The areas and rows of one single-segmental shell, in the symbols of Taborek; lengths in m, areas in m².

    Areas are those that one path of the shell-side fluid sees: `flow_share` is the share of the shell's flow that
    takes this path, `Nb` the baffles on it.
    """

    layout_angle: float
    Ds: float
    Dotl: float
    do: float
    pt: float
    Nt: float
    baffle_cut: float
    Lbc: float
    Lbi: float
    Lbo: float
    Nb: float
    flow_share: float
    shell_passes: int
    Xl: float
    """Row pitch along the flow."""
    Fw: float
    Fc: float
    """Share of the tubes in one window, and in pure cross-flow."""
    Ncc: float
    Ncw: float
    """Rows crossed between the baffle edges, and effectively in one window."""
    Sm: float
    """Smallest cross-flow area at the middle of the shell, one bay."""
    Sw: float
    Dw: float
    """Free area and hydraulic diameter of one window."""
    Ssb: float
    Stb: float
    Sb: float
    """Leakage areas shell to baffle and tube to baffle of one baffle, bypass area of one bay."""
    rs: float
    rlm: float
    Fbp: float
    rss: float
    """Ssb/(Ssb + Stb), (Ssb + Stb)/Sm, Sb/Sm, sealing strip pairs per row crossed."""

    @property
    def pitch_ratio(self) -> float:
        return round(self.pt / self.do, 9)  # 15/16 over 3/4 inch, stated in metres, still is 1.25: the end of the range

    def mass_velocity(self, m: Real) -> Real:
        """Cross-flow G [kg/(m² s)] from the flow of the whole shell [kg/s]."""
        return self.flow_share * m / self.Sm

    def window_mass_velocity(self, m: Real) -> Real:
        """G [kg/(m² s)] on the geometric mean of cross-flow and window area."""
        return self.flow_share * m / float(np.sqrt(self.Sm * self.Sw))


def crossflow_area(layout_angle: float, Ds: float, Dotl: float, do: float, pt: float, length: float) -> float:
    """Sm [m²] at the middle of a shell over so much of its length: one baffle spacing, or all of an X shell.

    At 45 and 60 degrees the diagonal gaps govern. Source: TABOREK_HEDH.
    """
    return length * (Ds - Dotl + (Dotl - do) / (tube_layout(layout_angle).gap * pt) * (pt - do))


def bundle_geometry(
    *,
    layout_angle: float,
    shell_id: float,
    bundle_diameter: float,
    tube_od: float,
    tube_pitch: float,
    tubes: float,
    baffle_cut: float,
    baffles: float,
    baffle_spacing: float,
    inlet_spacing: float,
    outlet_spacing: float,
    tube_hole_clearance: float,
    shell_baffle_clearance: float,
    sealing_strip_pairs: float = 0.0,
    pass_lanes: float = 0.0,
    pass_lane_width: float = 0.0,
    shell_passes: int = 1,
    flow_share: float = 1.0,
    length_share: float = 1.0,
) -> BundleGeometry:
    """Taborek's areas from a shell's stated dimensions [m].

    `bundle_diameter` is the outer tube limit, `tubes` the holes in use or plugged, `baffle_cut` a fraction of
    shell_id, both clearances diametral, `pass_lanes` only those parallel to the cross-flow. A split shell is one path
    with its shares: F has 2 shell passes; J half the flow over half the length; G both.

    Raises ValueError with a sentence where the dimensions contradict each other. Source: TABOREK_HEDH.
    """
    lay = tube_layout(layout_angle)
    Ds, Dotl, do, pt, Nt, Nb = shell_id, bundle_diameter, tube_od, tube_pitch, tubes, baffles * length_share
    Lbc, lc = baffle_spacing, baffle_cut * shell_id
    Dctl = Dotl - do
    for wrong, sentence in (
        (not 0 < do < pt, f"tube_od must be above 0 and below tube_pitch; given are {do:g} m and {pt:g} m"),
        (not do < Dotl < Ds, f"bundle_diameter must lie between tube_od and shell_id; given is {Dotl:g} m in {Ds:g} m"),
        (min(Lbc, inlet_spacing, outlet_spacing) <= 0, "baffle, inlet and outlet spacing must be above 0"),
        (baffles < 1, f"a baffled shell has at least 1 baffle; given are {baffles:g}"),
        (tubes < 1, f"a bundle has at least 1 tube; given are {tubes:g}"),
        (
            not (Ds - Dctl) / 2 < lc < Ds / 2,
            f"baffle_cut must leave tubes in the window and be below 0.5: {(1 - Dctl / Ds) / 2:.3g} to 0.5 for this "
            f"bundle; given is {baffle_cut:g}",
        ),
        (min(tube_hole_clearance, shell_baffle_clearance) < 0, "clearances must not be negative"),
    ):
        if wrong:
            raise ValueError(sentence)

    th_ds = 2 * np.arccos(1 - 2 * baffle_cut)
    th_ctl = 2 * np.arccos((Ds - 2 * lc) / Dctl)
    Fw = (th_ctl - np.sin(th_ctl)) / (2 * np.pi)
    Ntw = Fw * Nt
    Sw = Ds**2 / 8 * (th_ds - np.sin(th_ds)) - Ntw * np.pi * do**2 / 4
    if Sw <= 0:
        raise ValueError(f"{Nt:g} tubes fill the baffle window completely; state fewer tubes or a larger shell")
    Sm = crossflow_area(layout_angle, Ds, Dotl, do, pt, Lbc)
    Ncc = (Ds - 2 * lc) / (lay.row * pt)
    Ssb = Ds * shell_baffle_clearance / 4 * (2 * np.pi - th_ds)
    Stb = np.pi / 4 * ((do + tube_hole_clearance) ** 2 - do**2) * Nt * (1 - Fw)
    Sb = Lbc * (Ds - Dotl + 0.5 * pass_lanes * pass_lane_width)
    leakage = Ssb + Stb
    return BundleGeometry(
        layout_angle=layout_angle,
        Ds=Ds,
        Dotl=Dotl,
        do=do,
        pt=pt,
        Nt=Nt,
        baffle_cut=baffle_cut,
        Lbc=Lbc,
        Lbi=inlet_spacing,
        Lbo=outlet_spacing,
        Nb=Nb * shell_passes,
        flow_share=flow_share,
        shell_passes=shell_passes,
        Xl=lay.row * pt,
        Fw=float(Fw),
        Fc=float(1 - 2 * Fw),
        Ncc=float(Ncc),
        Ncw=float(0.8 / (lay.row * pt) * (lc - (Ds - Dctl) / 2)),
        Sm=float(Sm / shell_passes),
        Sw=float(Sw / shell_passes),
        Dw=float(4 * Sw / (np.pi * do * Ntw + Ds * th_ds / 2)),
        Ssb=float(Ssb / shell_passes),
        Stb=float(Stb / shell_passes),
        Sb=float(Sb / shell_passes),
        rs=float(Ssb / leakage) if leakage > 0 else 0.0,
        rlm=float(leakage / Sm),
        Fbp=float(Sb / Sm),
        rss=float(sealing_strip_pairs / Ncc),
    )


# The ideal bank


@correlation(
    gives="Colburn factor j",
    applies="ideal tube bank in cross-flow; 60 degrees by the row of 30 degrees",
    source=TABOREK_HEDH,
    valid=(Range(argument="Re", high=1e5), PITCH_RATIO),
    scatter=0.13,
)
def taborek_j(layout_angle: float, Re: Array, pitch_ratio: Real) -> Array:
    """j = h/(cp G) Pr^(2/3). Steps by 4.0 % at Re 1e3 (45 degrees) and 5.4 % at Re 1e4 (90 degrees), as printed."""
    return tube_layout(layout_angle).j(Re, pitch_ratio)


@correlation(
    gives="friction factor of the method",
    applies="ideal tube bank in cross-flow; 60 degrees by the row of 30 degrees",
    source=TABOREK_HEDH,
    valid=(Range(argument="Re", high=1e5), PITCH_RATIO),
    scatter=0.25,
)
def taborek_f(layout_angle: float, Re: Array, pitch_ratio: Real) -> Array:
    """dP = 2 f G²/rho a row: neither Darcy's factor nor Fanning's."""
    return tube_layout(layout_angle).f(Re, pitch_ratio)


def over_steps(layout_angle: float, Re: Array) -> Array:
    """Factor on j that leads a cell over the printed steps between two rows.

    A cell covers a range of Re, and at a step no single temperature may satisfy both rows: without this the march
    would swing between them for ever. The relation itself keeps its steps.
    """
    return tube_layout(layout_angle).j.over_steps(Re)


def ideal_film(
    layout_angle: float, pitch_ratio: Real, *, G: Real, Re: Array, Pr: Real, cp: Real, mu_ratio: Real
) -> Array:
    """h [W/m²K] of an ideal bank: j cp G Pr^(-2/3) (mu/mu_w)^0.14."""
    wall = np.exp(-2 / 3 * np.log(Pr) - 0.14 * np.log(mu_ratio))
    return np.asarray(taborek_j(layout_angle, Re, pitch_ratio) * cp * G * wall)


def ideal_drop(
    layout_angle: float, pitch_ratio: Real, rows: Real, *, G: Real, Re: Array, rho: Real, mu_ratio: Real
) -> Array:
    """dP [Pa] of so many rows of an ideal bank: 2 f rows G²/rho (mu/mu_w)^-0.14."""
    return np.asarray(2 * taborek_f(layout_angle, Re, pitch_ratio) * rows * G**2 / rho * mu_ratio**0.14)


@correlation(
    gives="Nu",
    applies="ideal tube bank of 20 rows and more in cross-flow",
    source=ZUKAUSKAS_1972,
    valid=(Range(argument="Re", low=1e3, high=2e5), Range(argument="Pr", low=0.7, high=500.0)),
    scatter=0.125,
    scatter_origin="printed as ±25 % (Incropera et al., section 7.6, for cross-flow)",
    role="second opinion",
)
def zukauskas_bank(Re: Array, Pr: Real, Pr_ratio: Real, ST: Real, SL: Real, staggered: bool) -> Array:
    """Nu on the tube outside diameter; Pr_ratio is Pr_w/Pr, ST and SL the transverse and the row pitch."""
    ratio = np.asarray(ST, dtype=float) / SL
    C, m = (np.where(ratio < 2, 0.35 * ratio**0.2, 0.40), 0.60) if staggered else (0.27, 0.63)
    return np.asarray(C * Re**m * Pr**0.36 * Pr_ratio**-0.25)


# Bell-Delaware

RE_BLEND = (80.0, 125.0)
"""The printed constants switch at Re 100, with steps of up to 1.7 in the result; they are blended linearly in ln Re
over this span (a choice of this work, not of the source)."""


def turbulent_share(Re_mean: Real) -> Array:
    """Weight of the constants for Re above 100: 0 below 80, 1 above 125, linear in ln Re between."""
    low, high = np.log(RE_BLEND)
    return np.asarray(np.clip((np.log(Re_mean) - low) / (high - low), 0.0, 1.0))


def _blend(Re_mean: Real, laminar: float, turbulent: float) -> Array:
    return np.asarray(laminar + (turbulent - laminar) * turbulent_share(Re_mean))


@dataclass(frozen=True, kw_only=True)
class FilmFactors:
    """Corrections on h of the ideal bank: baffle cut, leakage, bypass, end spacing, laminar temperature gradient."""

    Jc: float
    Jl: float
    Jb: Array
    Js: Array
    Jr: Array

    @property
    def product(self) -> Array:
        return self.Jc * self.Jl * self.Jb * self.Js * self.Jr


@dataclass(frozen=True, kw_only=True)
class DropFactors:
    """Corrections on the drop of the ideal bank: leakage, bypass, end spacing (2 at equal spacing: both ends)."""

    Rl: float
    Rb: Array
    Rs: Array


def _bypass(g: BundleGeometry, C: Array) -> Array:
    return np.asarray(np.exp(-C * g.Fbp * (1 - min(2 * g.rss, 1.0) ** (1 / 3))))


def film_factors(g: BundleGeometry, Re_mean: Real) -> FilmFactors:
    """Jc, Jl, Jb, Js and Jr at the mean Re of the shell, arrays of its shape. Source: TABOREK_HEDH."""
    heavy = 0.44 * (1 - g.rs)
    n = _blend(Re_mean, 1 / 3, 0.6)
    Li, Lo = g.Lbi / g.Lbc, g.Lbo / g.Lbc
    # the source prints (10/Nc)^0.18 for more than 10 rows: fewer have no gradient to lose
    Jr_20 = np.clip((10 / ((g.Ncc + g.Ncw) * (g.Nb + 1))) ** 0.18, 0.4, 1.0)
    return FilmFactors(
        Jc=0.55 + 0.72 * g.Fc,
        Jl=float(heavy + (1 - heavy) * np.exp(-2.2 * g.rlm)),
        Jb=_bypass(g, _blend(Re_mean, 1.35, 1.25)),
        Js=(g.Nb - 1 + Li ** (1 - n) + Lo ** (1 - n)) / (g.Nb - 1 + Li + Lo),
        Jr=np.interp(Re_mean, (20.0, 100.0), (Jr_20, 1.0)),
    )


def leakage_factor(g: BundleGeometry) -> float:
    """Rl, on the pressure drop. Source: TABOREK_HEDH."""
    p = 0.8 - 0.15 * (1 + g.rs)
    return float(np.exp(-1.33 * (1 + g.rs) * g.rlm**p))


def drop_factors(g: BundleGeometry, Re_mean: Real) -> DropFactors:
    """Rl, Rb and Rs at the mean Re of the shell, arrays of its shape. Source: TABOREK_HEDH."""
    exponent = 2 - _blend(Re_mean, 1.0, 0.2)
    return DropFactors(
        Rl=leakage_factor(g),
        Rb=_bypass(g, _blend(Re_mean, 4.5, 3.7)),
        Rs=(g.Lbc / g.Lbi) ** exponent + (g.Lbc / g.Lbo) ** exponent,
    )


@correlation(
    gives="h [W/m²K]",
    applies="shell side with single-segmental baffles",
    source=TABOREK_HEDH,
    valid=(Range(argument="Re", high=1e5), PITCH_RATIO, BAFFLE_CUT),
    scatter=0.13,
)
def bell_delaware_film(
    g: BundleGeometry, *, G: Real, Re: Array, Re_mean: Real, Pr: Real, cp: Real, mu_ratio: Real
) -> Array:
    """h on the tube outside. Re is local, (P, n); Re_mean that of the shell, (P, 1), decides the factors."""
    ideal = ideal_film(g.layout_angle, g.pitch_ratio, G=G, Re=Re, Pr=Pr, cp=cp, mu_ratio=mu_ratio)
    return np.asarray(ideal * film_factors(g, Re_mean).product)


@dataclass(frozen=True, kw_only=True)
class ShellDrop:
    """Pressure drop [Pa] of one shell, by part: cross-flow between baffles, windows, both end bays."""

    crossflow: Array
    window: Array
    ends: Array

    @property
    def total(self) -> Array:
        return self.crossflow + self.window + self.ends


@correlation(
    gives="pressure drop by part [Pa]",
    applies="shell side with single-segmental baffles",
    source=TABOREK_HEDH,
    valid=(Range(argument="Re", high=1e5), PITCH_RATIO, BAFFLE_CUT),
    scatter=0.25,
)
def bell_delaware_drop(g: BundleGeometry, *, m: Real, rho: Real, mu: Real, mu_ratio: Real, Re_mean: Real) -> ShellDrop:
    """The drop of the whole shell as if the given state held all through it.

    m is the flow of the whole shell. The drop along changing properties is the mean over its bays.
    """
    G, Gw = g.mass_velocity(m), g.window_mass_velocity(m)
    R = drop_factors(g, Re_mean)
    bay = ideal_drop(
        g.layout_angle, g.pitch_ratio, g.Ncc, G=G, Re=np.asarray(g.do * G / mu), rho=rho, mu_ratio=mu_ratio
    )
    turbulent = (2 + 0.6 * g.Ncw) * Gw**2 / (2 * rho)
    laminar = 26 * Gw * mu / rho * (g.Ncw / (g.pt - g.do) + g.Lbc / g.Dw**2) + Gw**2 / rho
    window = laminar + (turbulent - laminar) * turbulent_share(Re_mean)
    return ShellDrop(
        crossflow=(g.Nb - 1) * bay * R.Rb * R.Rl,
        window=g.Nb * window * R.Rl,
        ends=bay * (1 + g.Ncw / g.Ncc) * R.Rb * R.Rs,
    )


# Second opinion: Kern


def kern_equivalent_diameter(layout_angle: float, tube_od: float, tube_pitch: float) -> float:
    """De [m]: four times the free area between tubes over the tubes' perimeter, along the tubes. Source: KERN_1950."""
    lay = tube_layout(layout_angle)
    return float(4 * (lay.transverse * lay.row * tube_pitch**2 - np.pi * tube_od**2 / 4) / (np.pi * tube_od))


def kern_area(
    shell_id: float, tube_od: float, tube_pitch: float, baffle_spacing: float, shell_passes: int = 1
) -> float:
    """As [m²], the cross-flow area at the middle of the shell. Source: KERN_1950."""
    return shell_id * (tube_pitch - tube_od) * baffle_spacing / tube_pitch / shell_passes


@correlation(
    gives="h [W/m²K]",
    applies="shell side with 25 % cut segmental baffles, leakage and bypass as usual",
    source=KERN_1950,
    valid=(Range(argument="Re", low=2e3, high=1e6),),
    scatter=0.20,
    role="second opinion",
)
def kern_film(De: float, *, k: Real, Re: Array, Pr: Real, mu_ratio: Real) -> Array:
    """h on the tube outside; Re = De Gs/mu with Gs = m/As."""
    return np.asarray(0.36 * k / De * Re**0.55 * np.cbrt(Pr) * mu_ratio**-0.14)


@correlation(
    gives="pressure drop [Pa]",
    applies="shell side with 25 % cut segmental baffles, leakage and bypass as usual",
    source=KERN_1950,
    valid=(Range(argument="Re", low=400.0, high=1e6),),
    scatter=0.25,
    role="second opinion",
)
def kern_drop(De: float, *, shell_id: float, crossings: Real, Gs: Real, rho: Real, Re: Array, mu_ratio: Real) -> Array:
    """Drop of `crossings` bays, Nb + 1 of an E shell, twice that of an F shell; Re = De Gs/mu."""
    f = np.exp(0.576 - 0.19 * np.log(Re))
    return np.asarray(f * Gs**2 * shell_id * crossings / (2 * rho * De) * mu_ratio**0.14)


# Second opinion on the drop: Gaddis and Gnielinski


@correlation(
    gives="drag coefficient of one row",
    applies="ideal tube bank in cross-flow, without inlet and outlet effects",
    source=GADDIS_GNIELINSKI,
    valid=(Range(argument="Re", low=1.0, high=3e5),),
    scatter=0.175,
    scatter_origin="printed as ±35 %",
    role="second opinion",
)
def gaddis_gnielinski_drag(layout_angle: float, Re: Array, pitch_ratio: Real, mu_ratio: Real = 1.0) -> Array:
    """xi of dP = xi rows rho u²/2, u in the smallest gap: xi stands where Taborek has 4 f."""
    lay = tube_layout(layout_angle)
    a, b = lay.transverse * np.asarray(pitch_ratio), lay.row * np.asarray(pitch_ratio)
    if lay.staggered:
        X = np.where(b >= 0.5 * np.sqrt(2 * a + 1), a, np.sqrt((a / 2) ** 2 + b**2))
        B = 2.5 + 1.2 / (a - 0.85) ** 1.08 + 0.4 * (b / a - 1) ** 3 - 0.01 * (a / b - 1) ** 3
        turbulent = B * Re**-0.25 * -np.expm1(-(Re + 200) / 1000)
    else:
        X = a
        B = (0.22 + 1.2 * (1 - 0.94 / b) ** 0.6 / (a - 0.85) ** 1.3) * 10 ** (0.47 * (b / a - 1.5))
        B = B + 0.03 * (a - 1) * (b - 1)
        turbulent = B * Re ** (-0.1 * b / a) * -np.expm1(-(Re + 1000) / 2000)
    A = 280 * np.pi * ((np.sqrt(b) - 0.6) ** 2 + 0.75) / ((4 * a * b - np.pi) * X**1.6)
    wall_laminar = mu_ratio ** (0.57 / ((4 * a * b / np.pi - 1) * Re) ** 0.25)
    return np.asarray(A / Re * wall_laminar + turbulent * mu_ratio**0.14)


@correlation(
    gives="pressure drop by part [Pa]",
    applies="shell side with single-segmental baffles",
    source=GADDIS_GNIELINSKI,
    valid=(Range(argument="Re", low=1.0, high=5e4), BAFFLE_CUT),
    scatter=0.25,
    role="second opinion",
)
def gaddis_gnielinski_drop(
    g: BundleGeometry, *, m: Real, rho: Real, mu: Real, mu_ratio: Real, Re_mean: Real
) -> ShellDrop:
    """The drop of the whole shell as if the given state held all through it; arguments of bell_delaware_drop.

    Leakage and bypass as there; the window counts 0.8 rows over the full height of the cut.
    """
    R = drop_factors(g, Re_mean)
    u = g.mass_velocity(m) / rho
    Re = np.asarray(u * rho * g.do / mu)
    rows_w = 0.8 * g.baffle_cut * g.Ds / g.Xl

    def bay(spacing: float, rows: float) -> Array:
        slower = g.Lbc / spacing
        xi = gaddis_gnielinski_drag(g.layout_angle, Re * slower, g.pitch_ratio, mu_ratio)
        return np.asarray(xi * rows * rho * (u * slower) ** 2 / 2 * R.Rb)

    w = g.window_mass_velocity(m) / rho
    laminar = 56 * rows_w * mu / ((g.pt - g.do) * w * rho) + 52 * g.Lbc * mu / (g.Dw**2 * w * rho) + 2
    turbulent = 0.6 * rows_w + 2
    return ShellDrop(
        crossflow=(g.Nb - 1) * bay(g.Lbc, g.Ncc) * R.Rl,
        window=g.Nb * np.sqrt(laminar**2 + turbulent**2) * rho * w**2 / 2 * mu_ratio**0.14 * R.Rl,
        ends=bay(g.Lbi, g.Ncc + rows_w) + bay(g.Lbo, g.Ncc + rows_w),
    )
