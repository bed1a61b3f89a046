"""The pages Trust and Datasheet check without a browser."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

pytest.importorskip("streamlit")
from streamlit.testing.v1 import AppTest

import engine
from app import page_trust


@pytest.fixture(autouse=True)
def _own_drafts(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COUNTERCHECK_DATA", str(tmp_path))


def page(name: str, token: str = "") -> AppTest:
    app = AppTest.from_string(
        f"from app import frame, page_{name}\nframe.drawn(page_{name}.show)()", default_timeout=60
    )
    if token:
        app.query_params["draft"] = token
    app = app.run()
    assert not app.exception
    assert "went wrong" not in words(app)
    return app


def words(app: AppTest) -> str:
    shown = [*app.title, *app.subheader, *app.markdown, *app.caption, *app.error, *app.warning, *app.info]
    return "\n".join(str(element.value) for element in shown)


# --- trust ------------------------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def lines() -> list[dict[str, Any]]:
    return engine.proof_table()


def test_the_trust_page_counts_what_the_engine_reproduces(lines):
    said = words(page("trust"))
    assert f"**{len(lines)} values" in said
    assert "all hold" in said
    assert "Values that do not hold" not in said
    for kind, says in engine.PROOF_KINDS.items():
        assert f"| {kind.capitalize()} | {sum(line['kind'] == kind for line in lines)} | {says} |" in said


def test_a_chosen_subject_shows_its_values_sources_and_allowances(lines):
    app = page("trust")
    app.selectbox(key="trust subject").set_value("rate").run()
    said = words(app)
    for line in (line for line in lines if line["subject"] == "rate"):
        assert page_trust.plain(line["what"]) in said
        assert page_trust.plain(f"{line['source']}. Allowance: {line['reason']}.") in said


def test_a_value_that_is_off_stands_first(lines, monkeypatch):
    wrong = {**lines[7], "what": "a wrong one", "ours": 1.5 * lines[7]["value"], "difference": 0.5, "holds": False}
    monkeypatch.setattr(engine, "proof_table", lambda: [*lines[:7], wrong, *lines[8:]])
    page_trust.computed.clear()
    said = words(page("trust"))
    page_trust.computed.clear()
    assert "1 of them off" in said
    assert said.index("Values that do not hold") < said.index("a measured exchanger")
    assert "✗ off" in said


def test_the_measured_range_stands_beside_ours_by_both_methods():
    said = words(page("trust"))
    found = engine.measured_exchanger()
    for _, at, _ in found.ours.values():
        assert f"| {at:.0f} |" in said
    assert "3373" in said
    assert "3725" in said
