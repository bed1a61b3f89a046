"""How often the audit of a datasheet raises a false alarm, finds an error, names the slip and points at the field.

`python -m tests.sheet_study [SHEETS] [SEED]` prints the rates. An error is scored where what it does to a check exceeds
two of its tolerances, both taken without the vendor's own scatter. Such an error is missed only where rounding and
scatter hide it, so that the rate found says little; the false alarms, the names and the ranks say more.
"""

from __future__ import annotations

import sys
from collections import defaultdict
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from scipy.stats import beta

from engine.datasheet import Audit, Repair, check_datasheet
from tests.sheets import ERRORS, Injected, Vendor, random_rating, vendor_sheet

SHEETS_A_CASE = 5
SCORED = 2.0
"""Tolerances."""


@dataclass(frozen=True)
class Score:
    """What became of one injected error; `rank` is that of the best guilty field, `named` None where it is no slip."""

    kind: str
    scored: bool
    found: bool = False
    named: bool | None = None
    rank: float = np.inf


def sheets(count: int, rng: np.random.Generator) -> Iterator[Vendor]:
    """Consistent sheets, some of each random case."""
    for i in range(count):
        if i % SHEETS_A_CASE == 0:
            rating = random_rating(rng)
        yield vendor_sheet(rng, rating)


def alarmed(audit: Audit) -> list[str]:
    return [f"{c.check.id} {c.where}".strip() for c in audit.checks if c.grade in ("stop", "act")]


def _misfits(audit: Audit) -> dict[tuple[str, str], float]:
    return {(c.check.id, c.where): c.line.misfit for c in audit.checks if c.line is not None}


def score(injected: Injected, clean: Vendor, with_case: bool = False) -> Score:
    """Audit a sheet with an error, alone or beside the case it was made from."""

    def audit(vendor: Vendor, exactly: bool = False) -> Audit:
        sheet = vendor.exact_sheet() if exactly else vendor.sheet()
        return check_datasheet(clean.case.model_copy(update={"sheet": sheet}) if with_case else sheet)

    without, by_error = _misfits(audit(clean, True)), _misfits(audit(injected.vendor, True))
    printed = audit(injected.vendor)
    # A check that the error makes impossible, or possible, is moved by it without measure.
    moved = [
        c
        for c in printed.checks
        if c.line is not None
        and c.check.closes
        and (key := (c.check.id, c.where)) in by_error
        and abs(by_error[key] - without.get(key, np.inf)) > SCORED * c.tolerance
    ]
    if not moved:
        return Score(injected.kind, scored=False)
    named = None
    if injected.slip:
        named = any(
            slip.field in injected.guilty and abs(slip.factor / injected.slip - 1) < 0.01 for slip in printed.slips
        )
    return Score(
        injected.kind,
        scored=True,
        found=any(c.outcome == "found" for c in moved),
        named=named,
        rank=min((_rank(printed.repairs, field) for field in injected.guilty), default=np.inf),
    )


def _rank(repairs: Sequence[Repair], field: str) -> float:
    """Place of a field in the repairs, by the failures it clears; ties at their mean rank."""
    net = {r.field: r.clears - r.breaks for r in repairs}
    if field not in net:
        return np.inf
    better = sum(n > net[field] for n in net.values())
    equal = sum(n == net[field] for n in net.values())
    return better + (equal + 1) / 2


def bound(hits: int, of: int) -> float:
    """Upper end of the exact one-sided 95 % interval of a rate."""
    return float(beta.ppf(0.95, hits + 1, of - hits)) if hits < of else 1.0


def false_alarms(count: int, seed: int, with_case: bool = False) -> list[list[str]]:
    """Checks graded stop or act, for each of so many consistent sheets."""
    found = []
    for vendor in sheets(count, np.random.default_rng(seed)):
        sheet = vendor.sheet()
        subject = vendor.case.model_copy(update={"sheet": sheet}) if with_case else sheet
        found.append(alarmed(check_datasheet(subject)))
    return found


def scores(count: int, seed: int, with_case: bool = False) -> list[Score]:
    """One error in each of so many sheets, the kinds in turn; a sheet on which a kind cannot be made is passed over."""
    rng = np.random.default_rng(seed)
    drawn = sheets(sys.maxsize, rng)
    kinds = list(ERRORS)
    found = []
    for i in range(count):
        injected = None
        while injected is None:
            vendor = next(drawn)
            injected = ERRORS[kinds[i % len(kinds)]](rng, vendor)
        found.append(score(injected, vendor, with_case))
    return found


def table(found: Sequence[Score]) -> str:
    """The rates by kind of error."""
    groups: dict[str, list[Score]] = defaultdict(list)
    for one in found:
        groups[one.kind].append(one)
    lines = [f"{'error':42} {'made':>5} {'scored':>6} {'found':>6} {'named':>6} {'1st-2nd':>7}"]
    for kind in [*sorted(groups), "all"]:
        members = list(found) if kind == "all" else groups[kind]
        scored = [one for one in members if one.scored]
        named = [one.named for one in scored if one.named is not None]
        lines.append(
            f"{kind:42} {len(members):5} {len(scored):6} {_share([one.found for one in scored])} {_share(named)} "
            f"{_share([one.rank <= 2 for one in scored]):>7}"
        )
    return "\n".join(lines)


def _share(hits: Sequence[bool]) -> str:
    return f"{100 * sum(hits) / len(hits):5.1f}%" if hits else f"{'–':>6}"


def main(arguments: Sequence[str]) -> None:
    count = int(arguments[0]) if arguments else 1000
    seed = int(arguments[1]) if len(arguments) > 1 else 1
    for with_case in (False, True):
        print("Beside the case" if with_case else "Sheets alone")
        alarms = false_alarms(count, seed, with_case)
        hits = sum(map(bool, alarms))
        print(f"{hits} of {count} consistent sheets carry a false stop or act: {hits / count:.2%}, ", end="")
        print(f"below {bound(hits, count):.2%} with 95 % confidence", [names for names in alarms if names])
        print(table(scores(count, seed + 1, with_case)), "\n")


if __name__ == "__main__":
    main(sys.argv[1:])
