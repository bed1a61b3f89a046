"""Check values for pipes, gauges, metals, clearances and usual ranges."""

from __future__ import annotations

from functools import partial

from engine.exchangers.standard_sizes import (
    FOULING,
    INCH,
    RHO_V2_LIMITS,
    SpanGroup,
    bundle_clearance,
    bundle_diameter,
    conductivity,
    gauge_wall,
    pipe,
    shell_baffle_clearance,
    unsupported_span,
)
from engine.proofs import Proof

SCHEDULE_40 = {
    "1/2": 15.76, "3/4": 20.96, "1": 26.64, "1 1/4": 35.08, "1 1/2": 40.94, "2": 52.48, "2 1/2": 62.68, "3": 77.92,
    "4": 102.26, "5": 128.2, "6": 154.08, "8": 202.74, "10": 254.46, "12": 303.18,
}  # fmt: skip
"""NPS: inside diameter [mm] of schedule 40."""

TUBE_BORES = (
    (0.75, 10, 0.482),
    (0.75, 12, 0.532),
    (0.75, 14, 0.584),
    (0.75, 16, 0.620),
    (1.0, 10, 0.732),
    (1.0, 12, 0.782),
    (1.0, 14, 0.834),
    (1.0, 16, 0.870),
    (1.25, 14, 1.084),
    (1.5, 12, 1.282),
)
"""Outside diameter [in], gauge, inside diameter [in]."""

TEMA_FOULING = (
    ("sea water", 8.8e-5),
    ("cooling-tower water, treated", 1.76e-4),
    ("cooling-tower water, untreated", 5.28e-4),
    ("city or well water", 1.76e-4),
    ("hard water", 5.28e-4),
    ("engine jacket water", 1.76e-4),
    ("distilled water or closed-cycle condensate", 8.8e-5),
    ("treated boiler feed water", 8.8e-5),
    ("boiler blowdown", 3.52e-4),
    ("compressed air", 1.76e-4),
    ("engine exhaust gas", 1.76e-3),
    ("refrigerant vapour, oil-bearing", 3.52e-4),
    ("vegetable oil", 5.28e-4),
    ("glycol solution", 3.52e-4),
    ("amine solution", 3.52e-4),
    ("caustic solution", 3.52e-4),
)
"""Lowest resistance [m²K/W] of the service as printed in SI; the engine holds the imperial column."""

IS_4503_SPANS: dict[SpanGroup, tuple[tuple[float, float], ...]] = {
    "steel and nickel": ((12, 1.1), (16, 1.3), (19, 1.5), (25, 1.8), (31.8, 2.2), (38, 2.5)),
    "copper, aluminium and titanium": ((12, 0.9), (16, 1.1), (19, 1.3), (25, 1.6), (31.8, 1.9), (38, 2.2)),
}
"""Tube outside diameter [mm], longest span [m] of a metric standard."""

SHELL_BAFFLE = ((12, 3.2), (24, 4.8), (48, 6.4), (60, 7.9), (80, 9.5), (90, 11.1))
"""Nominal shell [in], diametral clearance [mm]."""


def k(material: str, T: float) -> float:
    return float(conductivity(material, T))


def bore_by_gauge(od: float, gauge: int) -> float:
    return od - 2 * gauge_wall(f"{gauge} BWG") / INCH


ROWS: tuple[Proof, ...] = (
    *(
        Proof(
            subject="pipe",
            what=f"bore of NPS {nps} schedule 40",
            ours=partial(lambda nps: 1e3 * pipe(nps, "40")[1], nps),
            value=bore,
            unit="mm",
            tolerance=0.005,
            relative=False,
            reason="two decimals",
            kind="independent",
            source="ASME B36.10M as tabulated in the library fluids 1.0",
        )
        for nps, bore in SCHEDULE_40.items()
    ),
    *(
        Proof(
            subject="gauge_wall",
            what=f"bore of a {od:g} in tube, {gauge} BWG",
            ours=partial(bore_by_gauge, od, gauge),
            value=bore,
            unit="in",
            tolerance=0.0005,
            relative=False,
            reason="three decimals",
            kind="printed",
            source="Curtiss-Wright, Nominal Tube Dimension Chart",
        )
        for od, gauge, bore in TUBE_BORES
    ),
    Proof(
        subject="conductivity",
        what="stainless steel 304 at 300 K",
        ours=partial(k, "304", 300.0),
        value=15.1,
        unit="W/mK",
        tolerance=0.02,
        reason="another book's figure for the same alloy",
        kind="printed",
        source="Y. A. Cengel, Heat Transfer, AISI 304",
    ),
    Proof(
        subject="conductivity",
        what="carbon steel at 293 K",
        ours=partial(k, "carbon steel", 293.15),
        value=54.0,
        unit="W/mK",
        tolerance=0.15,
        reason="0.5 % carbon there, plain carbon steel here",
        kind="printed",
        source="J. P. Holman, Heat Transfer, Table A-2",
    ),
    Proof(
        subject="conductivity",
        what="copper at 300 K",
        ours=partial(k, "copper", 300.0),
        value=401.0,
        unit="W/mK",
        tolerance=0.002,
        reason="three digits",
        kind="printed",
        source="Incropera et al., Fundamentals of Heat and Mass Transfer, Table A.1",
    ),
    *(
        Proof(
            subject="FOULING",
            what=service,
            ours=partial(lambda service: FOULING[service].low, service),
            value=R,
            unit="m²K/W",
            tolerance=0.005,
            reason="three digits of a converted figure",
            kind="printed",
            source="TEMA Standards, RGP-T-2.4, SI column",
        )
        for service, R in TEMA_FOULING
    ),
    *(
        Proof(
            subject="shell_baffle_clearance",
            what=f"shell of {inches} in",
            ours=partial(shell_baffle_clearance, inches * INCH),
            value=clearance * 1e-3,
            unit="m",
            tolerance=0.001,
            reason="same table",
            kind="independent",
            source="TEMA Standards, 9th ed. 2007, Table RCB-4.3, as tabulated in the library ht 1.2",
        )
        for inches, clearance in SHELL_BAFFLE
    ),
    *(
        Proof(
            subject="bundle_diameter",
            what=f"{tubes} tubes of 20 mm, two passes, triangular",
            ours=partial(bundle_diameter, tubes, 0.020, 0.025, 30.0, 2),
            value=diameter,
            unit="m",
            tolerance=0.001,
            reason="three digits",
            kind="from memory",
            source=source,
        )
        for tubes, diameter, source in (
            (918, 0.826, "R. K. Sinnott, Chemical Engineering Design (vol. 6), Ex. 12.1"),
            (1210, 0.937, "Coulson, Richardson et al., Chemical Engineering vol. 1, 6th ed., Ex. 9.28"),
        )
    ),
    Proof(
        subject="bundle_clearance",
        what="split-ring floating head, bundle of 826 mm",
        ours=partial(bundle_clearance, 0.826, "S"),
        value=0.068,
        unit="m",
        tolerance=0.03,
        reason="source reads a chart",
        kind="from memory",
        source="Coulson, Richardson et al., Chemical Engineering vol. 1, 6th ed., Ex. 9.28",
    ),
    *(
        Proof(
            subject="unsupported_span",
            what=f"{od:g} mm tube, {group}",
            ours=partial(unsupported_span, od * 1e-3, group),
            value=span,
            unit="m",
            tolerance=0.08,
            relative=False,
            reason="a metric standard that rounds to 0.1 m and is otherwise the same",
            kind="printed",
            source="IS 4503, as given by S. Ray, G. Das, Process Equipment and Plant Design, 2020, Table 4.13a",
        )
        for group, spans in IS_4503_SPANS.items()
        for od, span in spans
    ),
    *(
        Proof(
            subject="RHO_V2_LIMITS",
            what=what,
            ours=partial(lambda what: RHO_V2_LIMITS[what].high / (0.45359237 / 0.3048), what),
            value=limit,
            unit="lb/(ft s²)",
            tolerance=0.0005,
            reason="four digits of a converted figure",
            kind="printed",
            source="TEMA Standards, RCB-4.61, RCB-4.62 and RCB-10.32",
        )
        for what, limit in zip(RHO_V2_LIMITS, (1500.0, 500.0, 4000.0, 6000.0), strict=True)
    ),
)
