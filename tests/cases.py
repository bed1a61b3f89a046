"""Cases that the tests build on: plain dictionaries as a case file holds them, with some keys changed."""

from __future__ import annotations

import copy
from typing import Any

from engine.case import Case
from engine.casefile import parse_case

OIL_TABLE = [
    {"T": "20 degC", "rho": "875 kg/m3", "cp": "1.87 kJ/kgK", "k": "0.133 W/mK", "mu": "110 cP"},
    {"T": "40 degC", "rho": "862 kg/m3", "cp": "1.95 kJ/kgK", "k": "0.131 W/mK", "mu": "39.6 cP"},
    {"T": "100 degC", "rho": "824 kg/m3", "cp": "2.19 kJ/kgK", "k": "0.127 W/mK", "mu": "5.6 cP"},
]

OIL_COOLER: dict[str, Any] = {
    "format": "countercheck-case",
    "version": 1,
    "tag": "E-1402",
    "service": "lube oil cooler",
    "inside": {
        "fluid": "Water",
        "flow": "12 m3/h",
        "T_in": "27 degC",
        "p_in": "4.2 barg",
        "R_fouling": "0.00018 m2K/W",
        "dp_allowed": "70 kPa",
    },
    "outside": {
        "fluid": {"name": "lube oil", "table": OIL_TABLE},
        "flow": "6 t/h ± 3 %",
        "T_in": "68 degC",
        "p_in": "6 barg",
        "T_out": "60 degC",
    },
    "exchanger": {
        "type": "double-pipe",
        "arrangement": "counter",
        "inner_pipe": {"nps": "2", "schedule": "40"},
        "outer_pipe": {"nps": "3", "schedule": "40"},
        "leg_length": "6 m",
        "legs_in_series": 8,
        "wall_conductivity": "50 W/mK",
    },
}

CONSTANT_HOT = {
    "name": "hot",
    "constant": {"rho": "960 kg/m3", "cp": "4.2 kJ/kgK", "k": "0.67 W/mK", "mu": "0.3 cP"},
}
CONSTANT_COLD = {
    "name": "cold",
    "constant": {"rho": "990 kg/m3", "cp": "4.1 kJ/kgK", "k": "0.62 W/mK", "mu": "0.8 cP"},
}


def changed(raw: dict[str, Any], **changes: Any) -> dict[str, Any]:
    """A copy with keys set by path, dots written as two underscores; None removes the key."""
    raw = copy.deepcopy(raw)
    for path, value in changes.items():
        at = raw
        *way, last = path.split("__")
        for step in way:
            at = at.setdefault(step, {})
        if value is None:
            at.pop(last, None)
        else:
            at[last] = value
    return raw


def oil_cooler(**changes: Any) -> Case:
    return parse_case(changed(OIL_COOLER, **changes))


def constant(**changes: Any) -> Case:
    """Both fluids with constant properties, so that films depend on the place in a leg only."""
    base = {
        "inside__fluid": CONSTANT_COLD,
        "outside__fluid": CONSTANT_HOT,
        "inside__flow": "2 kg/s",
        "outside__flow": "2.5 kg/s",
        "inside__T_in": "20 degC",
        "outside__T_in": "80 degC",
        "outside__T_out": None,
        "inside__p_in": "4 barg",
        "outside__p_in": "4 barg",
    }
    return parse_case(changed(OIL_COOLER, **{**base, **changes}))
