"""Published and derived values that the engine must reproduce: one row a value, read by the tests, by
`python -m engine prove` and by the app's trust page. A row is written once, here.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from importlib import import_module
from typing import Any, Literal

Kind = Literal["printed", "derived", "independent", "from memory"]
PROOF_KINDS: Mapping[Kind, str] = {
    "printed": "The value stands in a publication that was at hand.",
    "derived": "The value was solved a second way, such as from the differential equations, in code of its own.",
    "independent": "The value comes from a library that shares no code with this program.",
    "from memory": "The value is known from a publication that was not at hand, so it may be misremembered.",
}
"""What a value of each kind is worth."""

PARTS = (
    "inside_tubes",
    "annulus",
    "losses",
    "across_bundle",
    "condensing",
    "vibration",
    "standard_sizes",
    "fluids",
    "effectiveness",
    "double_pipe",
    "shell_and_tube",
    "refinement",
)
"""The modules that hold the rows, each in its `ROWS`; imported when rows are asked for."""


@dataclass(frozen=True, kw_only=True)
class Proof:
    """One value that did not come from this code, and how to compute ours.

    `tolerance` is relative when `relative` is True, else in `unit`. `reason` says why the tolerance has that size.
    """

    subject: str
    """Name of the correlation or function that is checked."""
    what: str
    ours: Callable[[], float]
    value: float
    unit: str
    tolerance: float
    reason: str
    kind: Kind
    source: str
    relative: bool = True

    def difference(self, ours: float | None = None) -> float:
        """Ours minus the published value, relative or in `unit` as the tolerance is."""
        off = (float(self.ours()) if ours is None else ours) - self.value
        return off / self.value if self.relative else off

    def holds(self, ours: float | None = None) -> bool:
        return abs(self.difference(ours)) <= self.tolerance


def rows(*parts: str) -> tuple[Proof, ...]:
    """Every row of some parts, or of all."""
    return tuple(row for part in parts or PARTS for row in import_module(f"engine.proofs.{part}").ROWS)


def proof_table() -> list[dict[str, Any]]:
    """Every row computed, as plain values: what it is, theirs, ours, how far off, how far is allowed and why."""
    found = []
    for part, row in ((name, row) for name in PARTS for row in rows(name)):
        ours = float(row.ours())
        found.append(
            {
                "part": part,
                "subject": row.subject,
                "what": row.what,
                "value": row.value,
                "ours": ours,
                "unit": row.unit,
                "difference": row.difference(ours),
                "tolerance": row.tolerance,
                "relative": row.relative,
                "holds": row.holds(ours),
                "kind": row.kind,
                "source": row.source,
                "reason": row.reason,
            }
        )
    return found
