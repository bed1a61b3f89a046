"""A datasheet in a real browser: uploaded, its slip read, its questions copied, its check taken along."""

from __future__ import annotations

import io
from typing import Any

import pytest

import engine
from app import fields
from tests.test_app_sheet import SHEET, SLIPPED
from tests.test_browser import SETTLED, Server, User, chromium, server, user

__all__ = ["chromium", "server", "user"]
pytestmark = pytest.mark.browser


def csv(sheet: dict[str, Any]) -> bytes:
    return engine.sheet_csv(engine.sheet_as_typed(sheet)[0])


def upload(user: User, place: str, name: str, data: bytes) -> None:
    user.page.locator(f"[class*='st-key-{place}'] input[type=file]").set_input_files(
        {"name": name, "mimeType": "text/csv", "buffer": data}
    )
    user.settle()


def opened(user: User) -> None:
    user.open_page("Datasheet check")
    user.unfold("Upload")
    upload(user, "sheet-file", "vendor.csv", csv(SLIPPED))


def view(user: User, title: str) -> None:
    user.page.get_by_role("radio", name=title).or_(user.page.get_by_role("button", name=title)).first.click(delay=120)
    user.settle()


def test_a_sheet_with_a_slip_is_uploaded_read_asked_about_and_printed(user: User) -> None:
    pypdf = pytest.importorskip("pypdf")
    opened(user)
    text = user.text()
    assert "Looks like a slip" in text
    assert "Btu/h·ft²·°F" in text
    assert "1613 kW / (111.3 m2 × 23.07 K) = 628.2 W/m²K" in text
    user.context.grant_permissions(["clipboard-read", "clipboard-write"])
    block = user.page.locator("[data-testid=stCode]").first
    block.hover()
    block.locator("button").first.click(delay=120)
    user.page.wait_for_timeout(300)
    copied = user.page.evaluate("() => navigator.clipboard.readText()")
    assert copied.startswith("Questions on the datasheet E-2107\n\n1. ")
    assert "3566 W/m2K" in copied
    assert user.download("Questions (text)").decode() == copied
    paper = pypdf.PdfReader(io.BytesIO(user.download("Check (PDF)")))
    printed = " ".join(" ".join(page.extract_text() for page in paper.pages).split())
    assert "Datasheet of E-2107" in printed
    assert "Questions to the vendor" in printed


def test_figures_are_typed_kept_and_checked_at_once(user: User) -> None:
    opened(user)
    view(user, "Figures of the sheet")
    assert user.box("sheet.U_service").input_value() == "3566 W/m2K"
    user.fill("sheet.U_service", "628 W/m2K")
    user.fill("sheet.inside.T_out", "33,4")
    assert user.box("sheet.inside.T_out").input_value() == "33,4"
    user.page.reload()
    user.settle()
    assert user.box("sheet.inside.T_out").input_value() == "33,4"
    user.fill("sheet.inside.T_out", "33.4 degC")
    view(user, "What was found")
    assert "None: what can be recomputed agrees" in user.text()


def test_bids_stand_side_by_side(user: User) -> None:
    opened(user)
    view(user, "Bids side by side")
    user.page.get_by_role("button", name="Add the present sheet").click(delay=120)
    user.settle()
    upload(user, "bid-files", "other.csv", csv(fields.put(SHEET, ("area",), "120 m2")))
    assert "Surface as printed" in user.text()
    assert "120.0 m²" in user.text()


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_the_pages_fit_a_narrow_screen(chromium: Any, server: Server, user: User, scheme: str) -> None:
    opened(user)
    token = user.page.url.partition("?")[2]
    phone = chromium.new_context(viewport={"width": 390, "height": 844}, color_scheme=scheme)
    page = phone.new_page()
    page.set_default_timeout(60_000)
    for name in ("datasheet-check", "trust"):
        page.goto(f"{server.address}/{name}?{token}")
        page.wait_for_timeout(300)
        page.wait_for_function(SETTLED)
        page.wait_for_timeout(500)
        over = page.evaluate(
            "() => { const m = document.querySelector('[data-testid=stMain]'); return m.scrollWidth - m.clientWidth }"
        )
        assert over <= 0, name
        assert "went wrong" not in page.locator("[data-testid=stMain]").inner_text()
    phone.close()


def test_the_trust_page_opens_and_shows_the_values_of_a_part(user: User) -> None:
    user.page.set_default_timeout(60_000)
    user.open_page("Trust")
    assert "all hold" in user.text()
    user.page.get_by_text("Shell and tube ·").click(delay=120)
    user.settle()
    assert "ORNL-TM-3002" in user.text()
    assert "±24 %" in user.text()
