"""Every published, derived or remembered value is reproduced, and no relation goes without one."""

from __future__ import annotations

from collections import Counter
from importlib import import_module
from itertools import groupby
from pathlib import Path
from pkgutil import iter_modules

import pytest

import engine.proofs
from engine import correlations
from engine.correlations import ARGUMENTS, REGISTER
from engine.proofs import PARTS, PROOF_KINDS, Proof, proof_table, rows
from engine.proofs.double_pipe import oil_cooler

for module in iter_modules(correlations.__path__):
    import_module(f"{correlations.__name__}.{module.name}")

ROWS = rows()
BY_SUBJECT = {
    subject: list(held) for subject, held in groupby(sorted(ROWS, key=lambda r: r.subject), lambda r: r.subject)
}


@pytest.mark.parametrize("subject", BY_SUBJECT)
def test_every_value_of_a_subject_is_reproduced(subject):
    off = [
        f"{row.what}: {row.ours():.8g} for {row.value:.8g} {row.unit}, off by {row.difference():.3g} where "
        f"{row.tolerance:g} is allowed ({row.source})"
        for row in BY_SUBJECT[subject]
        if not row.holds()
    ]
    assert not off, "\n".join(off)


@pytest.mark.parametrize("name", REGISTER)
def test_every_registered_relation_has_a_value_that_is_not_its_own(name):
    assert name in BY_SUBJECT


def test_every_argument_that_has_a_limit_has_its_plain_name():
    assert {limit.argument for relation in REGISTER.values() for limit in relation.valid} == set(ARGUMENTS)
    assert str(REGISTER["churchill"].valid[0]) == "roughness over diameter 0 to 0.05"


def test_every_module_of_rows_is_read():
    held = {path.stem for path in Path(engine.proofs.__file__).parent.glob("*.py")} - {"__init__"}
    assert held == set(PARTS)
    assert all(import_module(f"engine.proofs.{part}").ROWS for part in PARTS)


def test_every_row_says_what_it_is_worth():
    for row in ROWS:
        assert row.kind in PROOF_KINDS
        assert row.source
        assert row.reason
        assert row.tolerance > 0
        assert not (row.relative and row.value == 0), row.what


def test_no_value_stands_twice():
    twice = [key for key, n in Counter((row.subject, row.what, row.source) for row in ROWS).items() if n > 1]
    assert twice == []


def test_a_row_that_is_off_does_not_hold():
    row = ROWS[0]
    wrong = Proof(**{**row.__dict__, "value": row.value * (1 + 3 * row.tolerance) + 3 * row.tolerance})
    assert row.holds()
    assert not wrong.holds()


def test_there_are_values_of_each_kind(capsys):
    counts = Counter(row.kind for row in ROWS)
    with capsys.disabled():
        print(f"\n{len(ROWS)} values: " + ", ".join(f"{counts[kind]} {kind}" for kind in PROOF_KINDS))
    assert all(counts[kind] > 20 for kind in PROOF_KINDS)


def test_the_table_holds_every_row_with_plain_values():
    held = proof_table()
    assert len(held) == len(ROWS)
    assert all(type(line["ours"]) is float and type(line["holds"]) is bool for line in held)
    assert all(line["holds"] for line in held)


def test_laminar_friction_in_an_annulus_is_not_that_of_a_tube():
    """Incropera, 6th ed., Ex. 11.2 takes f = 64/Re on the hydraulic diameter: 18 287 Pa, a third too little."""
    ours = oil_cooler("clean").sides["outside"].drops["friction"]
    assert ours / 18287.0 == pytest.approx(95.457 / 64.0, rel=1e-3)
