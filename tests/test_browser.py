"""The app in a real browser, as a user meets it: typing, reading, downloading, coming back."""

from __future__ import annotations

import io
import json
import os
import re
import shutil
import socket
import subprocess
import sys
import time
import urllib.request
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from tests.cases import OIL_COOLER

ROOT = Path(__file__).resolve().parent.parent
REQUIRED = os.environ.get("BROWSER_TESTS") == "require"
CHROMIUM = shutil.which("chromium") or shutil.which("chromium-browser") or shutil.which("google-chrome")
SETTLED = """() => {
  const app = document.querySelector('[data-testid=stApp]');
  return app && app.getAttribute('data-test-script-state') === 'notRunning'
    && !document.querySelector('[data-stale=true]') && !document.querySelector('[data-testid=stSkeleton]')
}"""

pytestmark = pytest.mark.browser


def _missing(what: str) -> None:
    if REQUIRED:
        pytest.fail(f"{what}, and BROWSER_TESTS=require asks for it")
    pytest.skip(what)


@pytest.fixture(scope="module")
def chromium() -> Iterator[Any]:
    try:
        from playwright.sync_api import sync_playwright
    except ImportError:
        _missing("playwright is not installed")
    if CHROMIUM is None:
        _missing("no chromium is installed")
    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(
            executable_path=CHROMIUM, args=["--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage"]
        )
        yield browser
        browser.close()


class Server:
    """One running app; `restart` ends it and starts another on the same port and drafts."""

    def __init__(self, drafts: Path) -> None:
        with socket.socket() as free:
            free.bind(("127.0.0.1", 0))
            self.port = free.getsockname()[1]
        self.address = f"http://127.0.0.1:{self.port}"
        self.environment = {**os.environ, "COUNTERCHECK_DATA": str(drafts)}
        self.start()

    def start(self) -> None:
        command = [sys.executable, "-m", "streamlit", "run", "app/main.py", "--server.headless", "true"]
        self.process = subprocess.Popen(
            [*command, "--server.port", str(self.port)],
            cwd=ROOT,
            env=self.environment,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
        for _ in range(120):
            try:
                with urllib.request.urlopen(f"{self.address}/_stcore/health", timeout=1):
                    return
            except OSError:
                time.sleep(0.25)
        raise RuntimeError("the app does not start")

    def stop(self) -> None:
        self.process.terminate()
        self.process.wait(10)


@pytest.fixture(scope="module")
def server(chromium: Any, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Server]:
    server = Server(tmp_path_factory.mktemp("drafts"))
    yield server
    server.stop()


class User:
    """A browser window of its own."""

    def __init__(self, chromium: Any, server: Server, **settings: Any) -> None:
        self.context = chromium.new_context(viewport={"width": 1280, "height": 1000}, **settings)
        self.context.set_default_timeout(20_000)
        self.page = self.context.new_page()
        self.outside: list[str] = []
        self.page.on("request", lambda r: self.outside.append(r.url) if not r.url.startswith(server.address) else None)
        self.page.goto(server.address)
        self.settle()

    def settle(self) -> None:
        # A change is on its way to the server for a moment before the page shows that it runs.
        self.page.wait_for_timeout(250)
        self.page.wait_for_function(SETTLED)
        self.page.wait_for_timeout(100)

    def box(self, place: str) -> Any:
        name = re.sub(r"[^A-Za-z0-9_]", "-", place)
        views = ", ".join(f"[class*='st-key-{name}-{view}-']" for view in ("typed", "si", "us", "metric"))
        return self.page.locator(views).locator("input[type=text]").first

    def fill(self, place: str, text: str) -> None:
        self.box(place).fill(text)
        self.box(place).press("Tab")
        self.settle()

    def open_page(self, title: str) -> None:
        self.page.locator("[data-testid=stSidebarNav]").get_by_text(title, exact=True).click(delay=120)
        self.settle()

    def open_case(self, raw: dict[str, Any]) -> None:
        self.unfold("Open")
        self.page.set_input_files(
            "input[type=file]",
            {"name": "case.json", "mimeType": "application/json", "buffer": json.dumps(raw).encode()},
        )
        self.settle()
        self.page.keyboard.press("Escape")

    def unfold(self, label: str) -> None:
        self.page.locator("[data-testid=stPopover] button").filter(has_text=label).first.click(delay=120)
        self.page.wait_for_timeout(300)

    def download(self, label: str) -> bytes:
        with self.page.expect_download() as waiting:
            self.page.get_by_role("button", name=re.compile(re.escape(label))).click(delay=120)
        return Path(waiting.value.path()).read_bytes()

    def metric(self, label: str) -> float:
        found = self.page.locator("[data-testid=stMetric]").filter(has_text=label)
        return float(found.locator("[data-testid=stMetricValue]").inner_text())

    def text(self) -> str:
        return str(self.page.locator("[data-testid=stMain]").inner_text()).replace("\N{NO-BREAK SPACE}", " ")

    def close(self) -> None:
        self.context.close()


@pytest.fixture
def user(chromium: Any, server: Server) -> Iterator[User]:
    user = User(chromium, server)
    yield user
    user.close()


def test_a_case_typed_in_is_rated_and_its_units_are_switched(user: User) -> None:
    entries = {
        "inside.fluid": "Water",
        "inside.flow": "12 m3/h",
        "inside.T_in": "27 degC",
        "inside.p_in": "4.2 barg",
        "outside.fluid": "Water",
        "outside.flow": "6 t/h",
        "outside.T_in": "68 degC",
        "outside.p_in": "6 barg",
        "exchanger.leg_length": "6 m",
        "exchanger.legs_in_series": "8",
        "exchanger.wall_conductivity": "50 W/mK",
        "exchanger.inner_pipe.nps": "2",
        "exchanger.inner_pipe.schedule": "40",
        "exchanger.outer_pipe.nps": "3",
        "exchanger.outer_pipe.schedule": "40",
    }
    for place, text in entries.items():
        user.fill(place, text)
    assert "✓ Complete" in user.text()
    user.open_page("Rating")
    in_kw = user.metric("Duty, kW")
    assert in_kw > 0
    user.page.get_by_role("combobox", name="Show figures in").click(delay=120)
    user.page.get_by_role("option", name="US customary").click(delay=120)
    user.settle()
    assert user.metric("Duty, Btu/h") == pytest.approx(in_kw * 3412.14, rel=5e-3)
    user.open_page("Case")
    assert user.box("inside.T_in").input_value() == "80.6 °F"
    user.page.get_by_role("combobox", name="Show figures in").click(delay=120)
    user.page.get_by_role("option", name="As typed").click(delay=120)
    user.settle()
    assert user.box("inside.T_in").input_value() == "27 degC"


def test_the_report_and_the_case_are_downloaded_and_the_case_opens_again(user: User) -> None:
    pypdf = pytest.importorskip("pypdf")
    user.open_case(OIL_COOLER)
    user.open_page("Rating")
    duty = user.metric("Duty, kW")
    user.open_page("Report")
    document = pypdf.PdfReader(io.BytesIO(user.download("Report (PDF)")))
    text = "\n".join(sheet.extract_text() for sheet in document.pages)
    assert "E-1402" in text
    assert f"{duty:g} kW" in text
    saved = json.loads(user.download("Case (file)"))
    assert saved["outside"]["flow"] == "6 t/h ± 3 %"
    user.open_page("Case")
    user.unfold("New")
    user.page.get_by_role("button", name="Start an empty case").click(delay=120)
    user.settle()
    assert user.box("inside.flow").input_value() == ""
    user.open_case(saved)
    assert user.box("inside.flow").input_value() == "12 m3/h"
    user.open_page("Rating")
    assert user.metric("Duty, kW") == duty


def test_a_bad_figure_stays_with_its_sentence_and_the_old_rating_is_marked(user: User) -> None:
    user.open_case(OIL_COOLER)
    user.fill("inside.p_in", "4.2 bar")
    assert user.box("inside.p_in").input_value() == "4.2 bar"
    assert "does not say whether it is absolute or gauge" in user.text()
    user.open_page("Rating")
    assert "Not the present case" in user.text()
    user.open_page("Case")
    assert user.box("inside.p_in").input_value() == "4.2 bar"


def test_a_refresh_and_a_restart_of_the_server_keep_the_draft(user: User, server: Server) -> None:
    user.open_case(OIL_COOLER)
    user.fill("tag", "E-99")
    user.fill("outside.T_in", "hot")
    user.page.reload()
    user.settle()
    assert user.box("tag").input_value() == "E-99"
    assert user.box("outside.T_in").input_value() == "hot"
    server.stop()
    server.start()
    user.page.reload()
    user.settle()
    assert user.box("tag").input_value() == "E-99"
    assert user.box("outside.T_in").input_value() == "hot"


def test_two_users_see_their_own_case_alone(chromium: Any, server: Server, user: User) -> None:
    other = User(chromium, server)
    user.fill("tag", "SECRET-1")
    other.fill("tag", "OTHER-2")
    assert "SECRET-1" not in other.page.content()
    assert user.box("tag").input_value() == "SECRET-1"
    assert user.page.url != other.page.url
    other.page.goto(f"{server.address}/rating")
    other.settle()
    assert "OTHER-2" not in other.text(), "without its address a draft is not found"
    other.close()


def test_a_what_if_is_rated_at_once_and_adopted(user: User) -> None:
    user.open_case(OIL_COOLER)
    user.open_page("Rating")
    before = user.metric("Duty, kW")
    user.fill("try outside.flow", "7 t/h")
    assert "Back to the case" in user.text()
    assert user.metric("Duty, kW") == before
    user.page.get_by_role("button", name="Adopt this in the case").click(delay=120)
    user.settle()
    assert user.metric("Duty, kW") > before
    user.open_page("Case")
    assert user.box("outside.flow").input_value() == "7 t/h ± 3 %"


def test_nothing_is_asked_of_any_other_host_and_every_field_has_a_name(user: User) -> None:
    user.open_case(OIL_COOLER)
    for title in ("Rating", "Report", "Case"):
        user.open_page(title)
        nameless = user.page.evaluate(
            """() => [...document.querySelectorAll('input:not([type=file]):not([aria-hidden=true]), textarea')]
            .filter(e => !(e.getAttribute('aria-label') || e.getAttribute('aria-labelledby') || e.labels?.length))
            .map(e => e.outerHTML.slice(0, 200))"""
        )
        assert nameless == []
    assert [url for url in user.outside if not url.startswith(("data:", "blob:"))] == []


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_nothing_sticks_out_of_a_narrow_screen(chromium: Any, server: Server, user: User, scheme: str) -> None:
    user.open_case(OIL_COOLER)
    token = user.page.url.partition("?")[2]
    phone = chromium.new_context(viewport={"width": 390, "height": 844}, color_scheme=scheme)
    page = phone.new_page()
    for name in ("", "rating", "report"):
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
