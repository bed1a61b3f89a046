"""`python -m tests.bench`: what a rating costs, as ratios to scalar loops over library calls in the same run.

Loop A asks the property library by its high-level calls, as a notebook would; loop B reuses one low-level state a
stream. Both do a mean-property ε-NTU rating with the engine's own relations on single numbers, to 1e-6 in outlet
temperature. A report, never a test.
"""

from __future__ import annotations

import os
import subprocess
import sys
import time
import tracemalloc
from math import exp, log, log10, pi, sqrt

for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(name, "1")

import numpy as np
import pandas as pd

from engine.casefile import parse_case
from engine.correlations.across_bundle import film_factors
from engine.rating import rate, rate_points
from engine.uncertainty import propagate
from tests.cases import OIL_COOLER, changed

WATER = changed(
    OIL_COOLER,
    inside__flow="10 t/h",
    outside__fluid="Water",
    outside__flow="12 t/h",
    outside__T_in="80 degC",
    outside__p_in="4 barg",
    outside__T_out=None,
)

SHELL = {
    **changed(WATER, inside__flow="30 kg/s", outside__flow="20 kg/s"),
    "exchanger": {
        "type": "shell-and-tube",
        "tema": "AES",
        "shell_id": "590 mm",
        "tube_od": "19.05 mm",
        "gauge": "14 BWG",
        "tube_length": "4.88 m",
        "tube_pitch": "25.4 mm",
        "layout_angle": "90 deg",
        "tubes": 324,
        "tube_passes": 2,
        "baffle_cut": "25 %",
        "baffle_spacing": "250 mm",
        "baffles": 18,
        "wall_conductivity": "50 W/mK",
    },
}


def operating_points(case, n: int) -> pd.DataFrame:
    random = np.random.default_rng(0)
    return pd.DataFrame(
        {
            "inside.flow": case.flow("inside") * random.uniform(0.6, 1.4, n),
            "outside.flow": case.flow("outside") * random.uniform(0.6, 1.4, n),
            "inside.T_in": case.T_in("inside") + random.uniform(-8, 8, n),
            "outside.T_in": case.T_in("outside") + random.uniform(-8, 8, n),
            "inside.R_fouling": random.uniform(0, 4e-4, n),
        }
    )


class HighLevel:
    """Properties by one call each, as in a notebook."""

    def __init__(self, name: str, p: float) -> None:
        from CoolProp.CoolProp import PropsSI

        self.ask = lambda key, T: PropsSI(key, "T", T, "P", p, name)

    def at(self, T: float) -> tuple[float, float, float, float]:
        return self.ask("D", T), self.ask("C", T), self.ask("V", T), self.ask("L", T)


class LowLevel:
    """Properties from one reused state."""

    def __init__(self, name: str, p: float) -> None:
        import CoolProp

        self.state, self.pair, self.p = CoolProp.AbstractState("HEOS", name), CoolProp.PT_INPUTS, p

    def at(self, T: float) -> tuple[float, float, float, float]:
        s = self.state
        s.update(self.pair, self.p, T)
        return s.rhomass(), s.cpmass(), s.viscosity(), s.conductivity()


def tube_film(Re: float, Pr: float, d: float, L: float) -> float:
    """Turbulent Nu of the default method on plain floats, without the wall's factor."""
    xi = (1.8 * log10(Re) - 1.5) ** -2
    return xi / 8 * Re * Pr / (1 + 12.7 * sqrt(xi / 8) * (Pr ** (2 / 3) - 1)) * (1 + (d / L) ** (2 / 3))


def double_pipe_films(case):
    """Films and ε of a plain counter-current double pipe on plain floats."""
    x = case.exchanger
    di, do, Ds, L = x.tube_id, x.tube_od, x.shell_id, float(x.leg_length)
    dh, a = Ds - do, do / Ds

    def inside(m: float, cp: float, mu: float, k: float, mu_w: float) -> float:
        return tube_film(m / (pi / 4 * di**2) * di / mu, cp * mu / k, di, L) * k / di

    def outside(m: float, cp: float, mu: float, k: float, mu_w: float) -> float:
        Re, Pr = m / (pi / 4 * (Ds**2 - do**2)) * dh / mu, cp * mu / k
        Re_star = Re * ((1 + a * a) * log(a) + 1 - a * a) / ((1 - a) ** 2 * log(a))
        xi = (1.8 * log10(Re_star) - 1.5) ** -2
        k1 = 1.07 + 900 / Re - 0.63 / (1 + 10 * Pr)
        Nu = xi / 8 * Re * Pr * 0.75 * a**-0.17 / (k1 + 12.7 * sqrt(xi / 8) * (Pr ** (2 / 3) - 1))
        return Nu * (1 + (dh / L) ** (2 / 3)) * k / dh

    def effectiveness(NTU: float, Cr: float) -> float:
        e = exp(-NTU * (1 - Cr))
        return (1 - e) / (1 - Cr * e)

    return inside, outside, effectiveness, 0.11


def shell_films(case):
    """Films and ε of a 1-2 shell on plain floats; the bundle's factors are taken once, as a notebook would."""
    x = case.exchanger
    di, do, L = x.tube_id, x.tube_od, float(x.tube_length)
    bundle, per_pass = x.geometry, x.tubes / x.tube_passes
    factor = float(film_factors(bundle, np.asarray(2e4)).product)

    def inside(m: float, cp: float, mu: float, k: float, mu_w: float) -> float:
        return tube_film(m / (per_pass * pi / 4 * di**2) * di / mu, cp * mu / k, di, L) * k / di

    def outside(m: float, cp: float, mu: float, k: float, mu_w: float) -> float:
        G = m / bundle.Sm
        Re = do * G / mu
        j = 0.107 * Re**-0.266 if Re < 1e4 else 0.370 * (1.33 / 1.3333) ** (1.187 / (1 + 0.14 * Re**0.370)) * Re**-0.395
        return j * cp * G * (cp * mu / k) ** (-2 / 3) * (mu / mu_w) ** 0.14 * factor

    def effectiveness(NTU: float, Cr: float) -> float:
        s = sqrt(1 + Cr * Cr)
        e = exp(-NTU * s)
        return 2 / (1 + Cr + s * (1 + e) / (1 - e))

    return inside, outside, effectiveness, 0.0


def scalar_rating(case, films, row, props) -> tuple[float, float]:
    """Mean-property ε-NTU rating on plain floats, to 1e-6 in outlet temperature."""
    x = case.exchanger
    inside, outside, effectiveness, outside_wall = films
    do, di, area = x.tube_od, x.tube_id, x.area
    rest = do * log(do / di) / (2 * float(x.wall_conductivity)) + row["inside.R_fouling"] * do / di
    m = {"inside": row["inside.flow"], "outside": row["outside.flow"]}
    T_in = {"inside": row["inside.T_in"], "outside": row["outside.T_in"]}
    out = dict(T_in)
    wall = {side: 0.5 * (T_in["inside"] + T_in["outside"]) for side in T_in}
    for _ in range(100):
        h, C = {}, {}
        for side, film, n in (("inside", inside, 0.11), ("outside", outside, outside_wall)):
            _, cp, mu, k = props[side].at(0.5 * (T_in[side] + out[side]))
            _, cp_w, mu_w, k_w = props[side].at(wall[side])
            h[side] = film(m[side], cp, mu, k, mu_w) * (cp * mu / k / (cp_w * mu_w / k_w)) ** n
            C[side] = m[side] * cp
        r_i, r_o = do / di / h["inside"], 1 / h["outside"]
        U = 1 / (r_i + r_o + rest)
        C_min, C_max = min(C.values()), max(C.values())
        q = effectiveness(U * area / C_min, C_min / C_max) * C_min * (T_in["outside"] - T_in["inside"])
        new = {"inside": T_in["inside"] + q / C["inside"], "outside": T_in["outside"] - q / C["outside"]}
        flux = q / area
        wall = {
            "inside": 0.5 * (T_in["inside"] + new["inside"]) + flux * r_i,
            "outside": 0.5 * (T_in["outside"] + new["outside"]) - flux * r_o,
        }
        change = max(abs(new[s] - out[s]) for s in out)
        out = new
        if change < 1e-6:
            break
    return out["inside"], out["outside"]


def seconds(run, least: float = 0.5) -> float:
    """Seconds a run, best of several."""
    best, spent = np.inf, 0.0
    while spent < least or best == np.inf:
        start = time.perf_counter()
        run()
        took = time.perf_counter() - start
        best, spent = min(best, took), spent + took
    return best


def cold_import() -> float:
    code = "import time; t=time.perf_counter(); import engine; engine.rate; print(time.perf_counter()-t)"
    return float(subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout)


def study(title: str, raw: dict, n: int, loops=None) -> None:
    case = parse_case(raw)
    frame = operating_points(case, n)
    rate_points(case, frame.head(50))
    start = time.perf_counter()
    found = rate_points(case, frame)
    each = (time.perf_counter() - start) / n
    print(f"\n{title}: {n} points, {int((found.problem != '').sum())} with a problem")
    print(f"  batch                     {each * 1e6:9.1f} µs a point")
    if loops:
        films, names = loops(case), {"inside": "Water", "outside": "Water"}
        rows = frame.head(40).to_dict("records")
        for word, kind in (("A, high-level calls", HighLevel), ("B, one low-level state", LowLevel)):
            props = {side: kind(names[side], case.p_in(side)) for side in names}
            scalar_rating(case, films, rows[0], props)
            loop = seconds(lambda props=props: [scalar_rating(case, films, row, props) for row in rows], 1.0) / len(
                rows
            )
            print(f"  loop {word:23s} {loop * 1e6:7.1f} µs a point, {loop / each:6.1f} times the batch")
        apart = max(
            abs(found["inside.T_out"].iloc[i] - scalar_rating(case, films, row, props)[0]) for i, row in enumerate(rows)
        )
        print(f"  largest difference of the inside outlet between batch and loop: {apart:.3f} K")
    rating = rate(case)
    print(f"  one rating                {seconds(lambda: rate(case)) * 1e3:9.1f} ms")
    both = seconds(lambda: propagate(case, rate(case)))
    print(f"  one rating with intervals {both * 1e3:9.1f} ms ({len(rating.states)} states)")
    tracemalloc.start()
    rate_points(case, frame.head(1000))
    small = tracemalloc.get_traced_memory()[1]
    tracemalloc.reset_peak()
    rate_points(case, frame)
    large = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    print(f"  peak memory               {small / 1e6:9.1f} MB at 1000 points, {large / 1e6:.1f} MB at {n}")


def main() -> None:
    n = int(sys.argv[1]) if len(sys.argv) > 1 else 10_000
    print(f"cold import of the engine with numpy, pandas and scipy: {cold_import():.2f} s")
    study("double pipe, water and water", WATER, n, double_pipe_films)
    study("double pipe, oil turning laminar", OIL_COOLER, n)
    study("shell and tube 1-2, 18 baffles, water and water", SHELL, n, shell_films)


if __name__ == "__main__":
    main()
