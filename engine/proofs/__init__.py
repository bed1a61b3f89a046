"""Published and derived values that the engine must reproduce: one row a value, read by the tests, by
`python -m engine prove` and by the app's trust page. A row is written once, here.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

Kind = Literal["printed", "derived", "independent", "from memory"]


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

    def difference(self) -> float:
        """Ours minus the published value, relative or in `unit` as the tolerance is."""
        off = float(self.ours()) - self.value
        return off / self.value if self.relative else off

    def holds(self) -> bool:
        return abs(self.difference()) <= self.tolerance
