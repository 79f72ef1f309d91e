"""A real browser over the running app: every page on a laptop and on a phone, in light and in dark."""

from __future__ import annotations

import os
import re
import shutil
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TypeAlias
from urllib.parse import urlsplit

import pytest
from playwright.sync_api import Browser, BrowserContext, Page, Response, sync_playwright
from screens import PAGES

from planner.charts.theme import colour
from planner.season.model import Driver
from planner.store.store import Store

pytestmark = pytest.mark.browser

WINDOWS = {"laptop": (1280, 900), "phone": (390, 844)}
# The frontend looks for these two under the page's own path first; it finds them at the root.
HARMLESS = re.compile(r"^/[a-z-]+/_stcore/(health|host-config)$")
FLAGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]


def chromium() -> str:
    """The system's browser, else the test library's; a machine that only develops may lack both."""
    found = shutil.which("chromium") or shutil.which("chromium-browser")
    if found is None:
        own = sorted(Path.home().glob(".cache/ms-playwright/chromium-*/chrome-linux*/chrome"))
        found = str(own[-1]) if own else None
    if found is None and os.environ.get("CI"):
        pytest.fail("chromium is missing; .ci/prepare --tests installs it")
    if found is None:
        pytest.skip("chromium is not installed on this machine")
    return found


def free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


@pytest.fixture(scope="module")
def store_file(demo_file: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The demo season in a file of its own, which the server of this module uses."""
    path = tmp_path_factory.mktemp("served") / "planner.db"
    shutil.copyfile(demo_file, path)
    return path


@pytest.fixture(scope="module")
def address(store_file: Path) -> Iterator[str]:
    """The app as a user starts it, from another folder than the checkout."""
    chromium()
    folder = store_file.parent
    port = free_port()
    log = (folder / "server.log").open("w")
    command = [sys.executable, "-m", "planner", "--store", str(store_file), "--port", str(port)]
    server = subprocess.Popen(command, cwd=folder, stdout=log, stderr=subprocess.STDOUT)
    url = f"http://localhost:{port}"
    try:
        wait_until_it_answers(url, server)
        yield url
    finally:
        server.terminate()
        server.wait(timeout=20)
        log.close()


def wait_until_it_answers(url: str, server: subprocess.Popen[bytes]) -> None:
    until = time.monotonic() + 60.0
    while time.monotonic() < until:
        assert server.poll() is None, "the server ended before it answered"
        try:
            with urllib.request.urlopen(f"{url}/_stcore/health", timeout=2.0):
                return
        except (urllib.error.URLError, ConnectionError, TimeoutError):
            time.sleep(0.2)
    pytest.fail("the server did not answer within a minute")


@dataclass
class Watched:
    """A page with all that went wrong on it."""

    page: Page
    host: str
    left: list[str] = field(default_factory=list)
    failed: list[str] = field(default_factory=list)
    said: list[str] = field(default_factory=list)

    def begin(self) -> None:
        self.page.on("request", lambda request: self._asked(request.url))
        self.page.on("response", self._answered)
        self.page.on("requestfailed", lambda request: self.failed.append(f"{request.url}: {request.failure}"))
        self.page.on("pageerror", lambda error: self.said.append(str(error)))

    def _asked(self, url: str) -> None:
        parts = urlsplit(url)
        if parts.scheme in ("http", "https", "ws", "wss") and parts.netloc != self.host:
            self.left.append(url)

    def _answered(self, response: Response) -> None:
        if response.status >= 400 and not HARMLESS.match(urlsplit(response.url).path):
            self.failed.append(f"{response.url}: {response.status}")


Visit: TypeAlias = Callable[..., Watched]


@pytest.fixture(scope="module")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Browser]:
    # The browser keeps a folder for reports of its crashes, in the user's home unless told otherwise.
    environment = {**os.environ, "XDG_CONFIG_HOME": str(tmp_path_factory.mktemp("browser"))}
    with sync_playwright() as playwright:
        launched = playwright.chromium.launch(executable_path=chromium(), args=FLAGS, env=environment)
        yield launched
        launched.close()


@pytest.fixture
def visit(browser: Browser, address: str) -> Iterator[Visit]:
    """Opens a page of the app in a window of its own kind; closed again after the test."""
    pages: list[Page] = []

    def opened(path: str = "", window: str = "laptop", scheme: str = "light") -> Watched:
        watched = Watched(context_of(browser, window, scheme).new_page(), urlsplit(address).netloc)
        pages.append(watched.page)
        watched.begin()
        watched.page.goto(f"{address}/{path}")
        settled(watched.page)
        return watched

    yield opened
    for page in pages:
        page.close()


def context_of(browser: Browser, window: str, scheme: str) -> BrowserContext:
    """One context for each kind of window and theme, so that the frontend is fetched once for it."""
    width, height = WINDOWS[window]
    for context in browser.contexts:
        if context.pages and context.pages[0].title() == f"{window} {scheme}":
            return context
    context = browser.new_context(viewport={"width": width, "height": height}, color_scheme=scheme)
    context.new_page().set_content(f"<title>{window} {scheme}</title>")
    return context


def settled(page: Page) -> None:
    """Wait until the script has drawn the foot of the page and nothing is running any more."""
    page.wait_for_selector(".p-foot", timeout=30_000)
    page.wait_for_selector('[data-testid="stApp"][data-test-script-state="notRunning"]', timeout=30_000)
    page.wait_for_timeout(400)  # charts are drawn after the script has ended


def path_of(stem: str) -> str:
    return "" if stem == "this_morning" else stem.replace("_", "-")


@pytest.mark.parametrize("window", WINDOWS)
@pytest.mark.parametrize("stem", PAGES)
def test_a_page_is_whole(visit: Visit, stem: str, window: str) -> None:
    watched = visit(path_of(stem), window)
    page = watched.page
    assert page.locator('[data-testid="stException"], [data-testid="stAlertContentError"]').count() == 0
    assert "Traceback" not in page.inner_text("body")
    assert overflow(page) == []
    assert page.locator("h1.p-answer").count() == 1
    assert watched.failed == []
    assert watched.left == []
    assert watched.said == []


def overflow(page: Page) -> list[str]:
    """What reaches beyond the right edge, by tag and class; the document must not scroll sideways."""
    return page.evaluate(
        """() => {
          const wide = document.documentElement.scrollWidth > innerWidth
            || document.querySelector('[data-testid=stMain]').scrollWidth > innerWidth;
          if (!wide) return [];
          return [...document.querySelectorAll('[data-testid=stMain] *')]
            .filter(e => e.getBoundingClientRect().right > innerWidth + 1)
            .map(e => `${e.tagName}.${e.className}`).slice(0, 5).concat('the page scrolls sideways');
        }"""
    )


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_the_page_follows_the_readers_theme(visit: Visit, scheme: str) -> None:
    watched = visit(scheme=scheme)
    seen = {
        "page": watched.page.evaluate("getComputedStyle(document.querySelector('.stApp')).backgroundColor"),
        "muted": watched.page.evaluate("getComputedStyle(document.querySelector('.p-over')).color"),
    }
    wanted = {name: rgb(colour(name, scheme)) for name in seen}
    assert seen == wanted


def rgb(hex_colour: str) -> str:
    return "rgb({}, {}, {})".format(*(int(hex_colour[i : i + 2], 16) for i in (1, 3, 5)))


def test_a_reading_is_typed_on_a_phone(visit: Visit, address: str) -> None:
    """Driver and circumstances are set already: a number, perhaps a pulse, one button."""
    watched = visit(window="phone")
    page = watched.page
    assert "1 not measured" in page.inner_text("h1.p-answer")
    page.get_by_role("button", name="Measure", exact=True).click()
    page.get_by_label("SpO2, %").fill("93")
    page.get_by_label("Pulse, 1/min").fill("58")
    page.get_by_role("button", name="Keep the reading").click()
    page.wait_for_selector(".st-key-p-card-last")
    settled(page)
    assert "in range" in page.inner_text(".st-key-p-card-last")
    assert overflow(page) == []
    page.goto(address)
    settled(page)
    assert "not measured" not in page.inner_text("h1.p-answer")
    assert watched.failed == []
    assert watched.left == []


def test_what_is_half_typed_survives_the_menu_and_the_back_button(visit: Visit) -> None:
    """The link is pressed while the cursor still stands in the field."""
    page = visit("readings").page
    page.get_by_label("SpO2, %").fill("91")
    page.get_by_role("link", name="Places").click()
    page.wait_for_url("**/places")
    settled(page)
    page.go_back()
    page.wait_for_url("**/readings")
    settled(page)
    assert page.get_by_label("SpO2, %").input_value() == "91"


def test_the_menu_of_a_narrow_screen_leads_to_the_page_and_closes(visit: Visit) -> None:
    page = visit("readings", window="phone").page
    page.get_by_role("button", name="Readings", exact=True).click()
    page.locator('[data-testid="stPopoverBody"]').get_by_role("link", name="Places").click()
    page.wait_for_url("**/places")
    settled(page)
    assert page.locator('[data-testid="stPopoverBody"]').count() == 0
    assert page.get_by_role("button", name="Places", exact=True).is_visible()


def test_the_keyboard_keeps_a_reading_once(visit: Visit) -> None:
    page = visit("readings").page
    page.get_by_role("radio", name="Ilse Varnholt").click()
    page.get_by_label("SpO2, %").fill("94")
    page.keyboard.press("Control+Enter")
    page.keyboard.press("Control+Enter")
    page.wait_for_selector(".st-key-p-card-last")
    settled(page)
    assert "94 %" in page.inner_text(".st-key-p-card-last").replace("\u00a0", " ")
    assert page.get_by_label("SpO2, %").input_value() == ""
    page.get_by_role("button", name="Take it back").click()
    page.wait_for_selector(".p-kept")
    settled(page)
    assert page.locator(".st-key-p-card-last").count() == 0


def test_the_emergency_signs_are_one_tap_away(visit: Visit) -> None:
    watched = visit(window="phone")
    page = watched.page
    page.get_by_role("button", name="Emergency signs").click()
    panel = page.locator('[data-testid="stPopoverBody"]')
    panel.wait_for()
    assert "Blue lips" in panel.inner_text()
    assert overflow(page) == []


HOSTILE = '<img src="http://leaves.invalid/a.png"> ![x](http://leaves.invalid/b.png) **bold** `c`'


def test_stored_text_stays_text(visit: Visit, address: str, store_file: Path) -> None:
    """A name that is markup in HTML and in Markdown is shown as typed and asks for nothing."""
    store = Store.open(store_file)
    driver = sorted(store.all(Driver), key=lambda each: each.name)[0]
    store.change(replace(driver, name=HOSTILE), by="coach")
    try:
        watched = visit()
        for stem in PAGES:
            watched.page.goto(f"{address}/{path_of(stem)}")
            settled(watched.page)
            assert watched.page.locator('[src*="leaves.invalid"], [href*="leaves.invalid"]').count() == 0
            if stem in ("this_morning", "readings"):
                shown = watched.page.inner_text("body").replace("\u2060", "")  # keeps addresses from linking
                assert HOSTILE in shown
        assert watched.left == []
    finally:
        store.change(driver, by="coach")
        store.close()


def test_the_server_answers_on_this_machine_only(address: str) -> None:
    """Bound to the loopback: the machine's own other addresses refuse."""
    port = urlsplit(address).port
    assert port is not None
    others = {info[4][0] for info in socket.getaddrinfo(socket.gethostname(), None, socket.AF_INET)}
    for other in others - {"127.0.0.1", "127.0.1.1"}:
        with socket.socket() as probe:
            probe.settimeout(2.0)
            assert probe.connect_ex((other, port)) != 0
