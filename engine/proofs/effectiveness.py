"""Check values for the exact relations and for the march over shells of constant properties."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import partial
from typing import Any

from engine import effectiveness as exact
from engine.exchangers import layout
from engine.march import temperatures
from engine.proofs import Kind, Proof

NTU = (0.25, 0.5, 1.0, 1.5, 2.0, 3.0, 5.0)
CR = (0.0, 0.25, 0.5, 0.75, 1.0)
COUNTER = (
    (0.221199, 0.215670, 0.210296, 0.205073, 0.200000),
    (0.393469, 0.377589, 0.362266, 0.347511, 0.333333),
    (0.632121, 0.598286, 0.564733, 0.531857, 0.500000),
    (0.776870, 0.735003, 0.690785, 0.645386, 0.600000),
    (0.864665, 0.822766, 0.774600, 0.721827, 0.666667),
    (0.950213, 0.918811, 0.874425, 0.817118, 0.750000),
    (0.993262, 0.982257, 0.957201, 0.908771, 0.833333),
)
COCURRENT = (
    (0.221199, 0.214707, 0.208474, 0.202487, 0.196735),
    (0.393469, 0.371791, 0.351756, 0.333222, 0.316060),
    (0.632121, 0.570796, 0.517913, 0.472129, 0.432332),
    (0.776870, 0.677316, 0.596401, 0.530034, 0.475106),
    (0.864665, 0.734332, 0.633475, 0.554173, 0.490842),
    (0.950213, 0.781186, 0.659261, 0.568430, 0.498761),
    (0.993262, 0.798456, 0.666298, 0.571338, 0.499977),
)
ONE_SHELL = (
    (0.221199, 0.215187, 0.209380, 0.203770, 0.198351),
    (0.393469, 0.374661, 0.356912, 0.340173, 0.324397),
    (0.632121, 0.584108, 0.539940, 0.499516, 0.462671),
    (0.776870, 0.704487, 0.638549, 0.579235, 0.526393),
    (0.864665, 0.774781, 0.693092, 0.620431, 0.556810),
    (0.950213, 0.840755, 0.741017, 0.653550, 0.578796),
    (0.993262, 0.872313, 0.761494, 0.665594, 0.585374),
)
TWO_SHELLS = (
    (0.221199, 0.215549, 0.210066, 0.204746, 0.199584),
    (0.393469, 0.376855, 0.360911, 0.345640, 0.331039),
    (0.632121, 0.594730, 0.558304, 0.523252, 0.489878),
    (0.776870, 0.727379, 0.676850, 0.626857, 0.578695),
    (0.864665, 0.810905, 0.752227, 0.691849, 0.632639),
    (0.950213, 0.900302, 0.835897, 0.763427, 0.689721),
    (0.993262, 0.959470, 0.896575, 0.814551, 0.727389),
)

CROSSFLOW_NTU = (0.5, 1.0, 2.0, 3.0)
CROSSFLOW_CR = (0.25, 0.5, 1.0)
BOTH_UNMIXED = (
    (0.375094, 0.357827, 0.326330),
    (0.588011, 0.547490, 0.476222),
    (0.797422, 0.732409, 0.614247),
    (0.888457, 0.819708, 0.681291),
)
MAX_MIXED = (
    (0.374736, 0.357183, 0.325288),
    (0.584704, 0.541969, 0.468536),
    (0.777594, 0.702013, 0.578807),
    (0.845780, 0.756362, 0.613341),
)
MIN_MIXED = (
    (0.375005, 0.357506, 0.325288),
    (0.587202, 0.544764, 0.468536),
    (0.792760, 0.717546, 0.578807),
    (0.878827, 0.788544, 0.613341),
)

F_OF_P_R_SHELLS = (
    (0.20, 0.5, 1, 0.995355),
    (0.40, 0.5, 1, 0.971654),
    (0.50, 0.5, 1, 0.942046),
    (0.30, 1.0, 1, 0.968600),
    (0.45, 1.0, 1, 0.876223),
    (0.25, 2.0, 1, 0.942046),
    (0.60, 0.8, 2, 0.939681),
    (0.50, 1.0, 2, 0.956845),
    (0.35, 2.0, 2, 0.947601),
    (0.60, 0.9, 3, 0.966546),
)

SHELL_NTU_R = ((0.5, 0.5), (1.0, 1 / 3), (1.0, 0.5), (2.0, 0.8), (0.5, 2.0), (3.0, 1.2))
Build = Callable[[int], layout.Layout]
Marched = tuple[tuple[str, Build, tuple[float, ...]], ...]
BY_ODE: Marched = (
    (
        "E, 3 tube passes, 2 of them counter",
        partial(layout.shell_pass, tube_passes=3),
        (0.357494, 0.570862, 0.542501, 0.616225, 0.271353, 0.546139),
    ),
    (
        "E, 3 tube passes, 1 of them counter",
        partial(layout.shell_pass, tube_passes=3, first_pass="co-current"),
        (0.356319, 0.566964, 0.537185, 0.593593, 0.268494, 0.496701),
    ),
    ("J, 1 tube pass", layout.j_shell, (0.357142, 0.569909, 0.541854, 0.626087, 0.272020, 0.577790)),
    (
        "G, 1 tube pass",
        partial(layout.g_shell, tube_passes=1),
        (0.357618, 0.573015, 0.545959, 0.652975, 0.272980, 0.625969),
    ),
)
CLOSED_FORM_NTU_R = ((1.5, 5 / 3), (2.5, 0.6))
BY_CLOSED_FORM: Marched = (
    ("E, 4 tube passes", partial(layout.shell_pass, tube_passes=4), (0.4114302, 0.6855758)),
    ("G, 2 tube passes, counter", layout.g_shell, (0.4670136, 0.7743281)),
    ("G, 2 tube passes, co-current", partial(layout.g_shell, first_pass="co-current"), (0.3646092, 0.6143951)),
    ("H, 1 tube pass", partial(layout.h_shell, tube_passes=1), (0.4487485, 0.7439349)),
    ("H, 2 tube passes, counter", layout.h_shell, (0.4675622, 0.7755046)),
    ("H, 2 tube passes, co-current", partial(layout.h_shell, first_pass="co-current"), (0.3653018, 0.6160940)),
    ("J, 2 tube passes", partial(layout.j_shell, tube_passes=2), (0.4096701, 0.6849638)),
    ("J, 4 tube passes", partial(layout.j_shell, tube_passes=4), (0.4105840, 0.6844395)),
)

HOLMAN = "J. P. Holman, Heat Transfer, Ex. {} (printed page not checked)"
LIENHARD = "J. H. Lienhard, A Heat Transfer Textbook, Ex. {} (printed page not checked)"
KERN = "D. Q. Kern, Process Heat Transfer (1950), Ex. {} (printed page not checked)"
GEANKOPLIS = "C. J. Geankoplis, Transport Processes and Unit Operations, 3rd ed., Ex. 4.9-1 (printed page not checked)"
SUKHATME = "S. P. Sukhatme, A Textbook on Heat Transfer, Ex. 7.2 (printed page not checked)"
CENGEL = "Y. A. Çengel, Heat Transfer, 2nd ed., Ex. 11-3 (printed page not checked)"
MASSOUD = "M. Massoud, Engineering Thermofluids (2005), Ex. VIa.2.1, p. 694"
HICKS = "T. G. Hicks, Handbook of Energy Engineering Calculations (2012), actual LMTD of a shell-and-tube exchanger"
HT = "closed forms of R. K. Shah and D. P. Sekulić as held by the Python library ht 1.2.0"
BOWMAN = "relation of R. A. Bowman, A. C. Mueller, W. M. Nagle, Trans. ASME 62 (1940) 283"

CHART = "the source reads F off a chart of two digits; the curves are steep here"
EQUATIONS = "the energy balances of both fluids solved by matrix exponential, printed to 6 digits"


def march_P(build: Build, NTU1: float, R: float) -> float:
    """P of the outside fluid by the march with 48 and 96 bays, extrapolated to infinitely many."""

    def P(n: int) -> float:
        order = build(n)
        return float(temperatures(order, NTU1 * order.area_share, [1 / R], [1.0], 1.0, 0.0).heat.sum())

    return (4 * P(96) - P(48)) / 3


def _of(function: Callable[..., Any], *arguments: Any, **options: Any) -> Callable[[], float]:
    return lambda: float(function(*arguments, **options))


def _F(hot: tuple[float, float], cold: tuple[float, float], shells: int = 1) -> float:
    return float(exact.correction_factor(*exact.terminal_ratios(*hot, *cold), shells))


def _F_sukhatme() -> float:
    P, R = exact.terminal_ratios(50, 40, 35, 40)
    return float(exact.ntu_counter(P, R) / exact.ntu(exact.effectiveness_crossflow_unmixed, P, R))


def _grids() -> Iterator[Proof]:
    one_mixed = exact.effectiveness_crossflow_one_mixed
    two = partial(exact.effectiveness_shell, shells=2)
    for subject, what, relation, sizes, ratios, values, source in (
        ("effectiveness_counter", "counterflow", exact.effectiveness_counter, NTU, CR, COUNTER, "closed form"),
        ("effectiveness_cocurrent", "co-current", exact.effectiveness_cocurrent, NTU, CR, COCURRENT, "closed form"),
        ("effectiveness_shell", "1-2 shell", exact.effectiveness_shell, NTU, CR, ONE_SHELL, BOWMAN),
        ("effectiveness_shell", "two 1-2 shells in series", two, NTU, CR, TWO_SHELLS, BOWMAN),
        (
            "effectiveness_crossflow_unmixed",
            "cross-flow, both unmixed",
            exact.effectiveness_crossflow_unmixed,
            CROSSFLOW_NTU,
            CROSSFLOW_CR,
            BOTH_UNMIXED,
            "series of J. L. Mason (1955)",
        ),
        (
            "effectiveness_crossflow_one_mixed",
            "cross-flow, C_max mixed",
            partial(one_mixed, min_is_mixed=False),
            CROSSFLOW_NTU,
            CROSSFLOW_CR,
            MAX_MIXED,
            "relation of Kays and London",
        ),
        (
            "effectiveness_crossflow_one_mixed",
            "cross-flow, C_min mixed",
            partial(one_mixed, min_is_mixed=True),
            CROSSFLOW_NTU,
            CROSSFLOW_CR,
            MIN_MIXED,
            "relation of Kays and London",
        ),
    ):
        for size, row in zip(sizes, values, strict=True):
            for ratio, value in zip(ratios, row, strict=True):
                yield Proof(
                    subject=subject,
                    what=f"{what}, NTU {size:g}, Cr {ratio:g}",
                    ours=_of(relation, size, ratio),
                    value=value,
                    unit="-",
                    tolerance=3e-6 if "cross" in what else 1e-6,
                    reason=EQUATIONS,
                    kind="derived",
                    source=f"the differential equations solved separately; {source}",
                    relative="cross" in what,
                )


def _shells() -> Iterator[Proof]:
    for P, R, shells, value in F_OF_P_R_SHELLS:
        yield Proof(
            subject="correction_factor",
            what=f"F at P {P:g}, R {R:g}, {shells} shell(s) in series",
            ours=_of(exact.correction_factor, P, R, shells),
            value=value,
            unit="-",
            tolerance=3e-6,
            reason="root of the effectiveness by the differential equations, printed to 6 digits",
            kind="derived",
            source=f"the differential equations solved separately; {BOWMAN}",
        )
    marched: tuple[tuple[Marched, tuple[tuple[float, float], ...], Kind, str, str], ...] = (
        (BY_ODE, SHELL_NTU_R, "derived", EQUATIONS, "the differential equations solved separately"),
        (BY_CLOSED_FORM, CLOSED_FORM_NTU_R, "independent", "given to 7 digits; the march extrapolated", HT),
    )
    for shells_of, points, kind, reason, source in marched:
        for what, build, values in shells_of:
            for (size, R), value in zip(points, values, strict=True):
                yield Proof(
                    subject="temperatures",
                    what=f"P of the shell fluid, TEMA {what}, NTU {size:g}, R {R:.3g}",
                    ours=_of(march_P, build, size, R),
                    value=value,
                    unit="-",
                    tolerance=2e-6,
                    reason=reason,
                    kind=kind,
                    source=source,
                )
    for size, R, value in (
        (1.0, 0.5, 0.539795),
        (1.0, 1.0, 0.462259),
        (2.0, 0.5, 0.691418),
        (2.0, 1.0, 0.552994),
        (3.0, 0.5, 0.735726),
        (3.0, 1.0, 0.568736),
    ):
        yield Proof(
            subject="effectiveness_shell",
            what=f"P of the shell fluid, four tube passes, NTU {size:g}, R {R:g}",
            ours=_of(exact.effectiveness_shell, size, R, tube_passes=4, tubes_are_min=False),
            value=value,
            unit="-",
            tolerance=2e-6,
            reason="printed to 6 digits",
            kind="derived",
            source=f"the differential equations solved separately; {HT}",
        )


def _sources() -> Iterator[Proof]:
    """Values from books and from another program."""

    def row(
        kind: Kind,
        source: str,
        what: str,
        subject: str,
        ours: Callable[[], Any],
        value: float,
        tolerance: float,
        why: str,
    ) -> Proof:
        unit = "-" if subject != "log_mean" else "°F" if "°F" in what else "K"
        return Proof(
            subject=subject,
            what=what,
            ours=ours,
            value=value,
            unit=unit,
            tolerance=tolerance,
            reason=why,
            kind=kind,
            source=source,
        )

    rounded = "half the last printed digit"
    mean, F = exact.log_mean, "correction_factor"
    for ends, value in (((130.0, 55.0), 87.2), ((90.0, 95.0), 92.5)):
        what = f"log mean of {ends[0]:g} and {ends[1]:g} °F"
        ours = _of(mean, *ends)
        yield row("printed", MASSOUD, what, "log_mean", ours, value, 6e-4, rounded)
    ours = _of(_F, (300, 250), (100, 230))
    yield row("printed", HICKS, "F, 300 to 250 °F against 100 to 230 °F", F, ours, 0.90, 0.02, CHART)

    for source, hot, cold, shells, value, tolerance in (
        (HOLMAN.format("10-5"), (110, 75), (35, 75), 1, 0.81, 0.015),
        (HOLMAN.format("10-6"), (93, 59), (38, 55), 1, 0.88, 0.02),
        (GEANKOPLIS, (115.6, 48.9), (21.1, 54.4), 1, 0.74, 0.02),
        (LIENHARD.format("3.4"), (181, 38), (32, 49), 2, 0.92, 0.015),
        (KERN.format("7.3"), (390, 200), (100, 170), 1, 0.905, 0.016),
    ):
        what = f"F, {hot[0]} to {hot[1]} against {cold[0]} to {cold[1]} degrees, {shells} shell(s)"
        yield row("from memory", source, what, F, _of(_F, hot, cold, shells), value, tolerance, CHART)
    yield row(
        "from memory",
        SUKHATME,
        "F, cross-flow unmixed, 50 to 40 °C against 35 to 40 °C",
        "ntu",
        _F_sukhatme,
        0.91,
        0.02,
        CHART,
    )
    for source, ends, unit, value, tolerance in (
        (HOLMAN.format("10-4"), (35.0, 40.0), "K", 37.44, 1e-3),
        (GEANKOPLIS, (61.2, 27.8), "K", 42.3, 2e-3),
        (KERN.format("5.1"), (150.0, 100.0), "°F", 123.5, 2e-3),
        (KERN.format("5.1"), (200.0, 50.0), "°F", 108.0, 2e-3),
        (KERN.format("5.3"), (25.0, 100.0), "°F", 54.3, 4e-3),
        (CENGEL, (16.0, 8.0), "K", 11.5, 4e-3),
    ):
        what = f"log mean of {ends[0]:g} and {ends[1]:g} {unit}"
        yield row("from memory", source, what, "log_mean", _of(mean, *ends), value, tolerance, "rounded logarithms")
    counter, cocurrent = exact.effectiveness_counter, exact.effectiveness_cocurrent
    one_mixed = partial(exact.effectiveness_crossflow_one_mixed, min_is_mixed=False)
    for source, what, subject, ours, value, tolerance in (
        (
            LIENHARD.format("3.5"),
            "co-current, NTU 1.5, Cr 0.5",
            "effectiveness_cocurrent",
            _of(cocurrent, 1.5, 0.5),
            0.596,
            2e-3,
        ),
        (
            CENGEL,
            "steam condenser",
            "effectiveness_counter",
            _of(counter, 45 * 2100 / (32.5848 * 4184), 0.0),
            0.5,
            1e-5,
        ),
        (
            HOLMAN.format("10-9"),
            "cross-flow, steam mixed, oil unmixed",
            "effectiveness_crossflow_one_mixed",
            _of(one_mixed, 2978.25 / 1377.5, 1377.5 / 9672),
            0.831,
            5e-3,
        ),
    ):
        yield row("from memory", source, what, subject, ours, value, tolerance, "rounded to the digits shown")


ROWS: tuple[Proof, ...] = (*_grids(), *_shells(), *_sources())
