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
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from urllib.parse import urlsplit

import pytest
from playwright.sync_api import Browser, Page, Response, sync_playwright
from screens import PAGES

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
    """The system's browser; a machine that only develops may lack it, continuous integration may not."""
    found = shutil.which("chromium") or shutil.which("chromium-browser")
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
def address(demo_file: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """The app as a user starts it, with the demo season in a file of its own, from another folder."""
    chromium()
    folder = tmp_path_factory.mktemp("served")
    shutil.copyfile(demo_file, folder / "planner.db")
    port = free_port()
    log = (folder / "server.log").open("w")
    command = [sys.executable, "-m", "planner", "--store", str(folder / "planner.db"), "--port", str(port)]
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


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    with sync_playwright() as playwright:
        opened = playwright.chromium.launch(executable_path=chromium(), args=FLAGS)
        yield opened
        opened.close()


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


def opened(browser: Browser, address: str, path: str, window: str, scheme: str) -> Watched:
    width, height = WINDOWS[window]
    context = browser.new_context(viewport={"width": width, "height": height}, color_scheme=scheme)
    watched = Watched(context.new_page(), urlsplit(address).netloc)
    watched.begin()
    watched.page.goto(f"{address}/{path}")
    settled(watched.page)
    return watched


def settled(page: Page) -> None:
    """Wait until the script has drawn the foot of the page and nothing is running any more."""
    page.wait_for_selector(".p-foot", timeout=30_000)
    page.wait_for_selector('[data-testid="stApp"][data-test-script-state="notRunning"]', timeout=30_000)
    page.wait_for_timeout(400)  # charts are drawn after the script has ended


def path_of(stem: str) -> str:
    return "" if stem == "this_morning" else stem.replace("_", "-")


@pytest.mark.parametrize("window", WINDOWS)
@pytest.mark.parametrize("stem", PAGES)
def test_a_page_is_whole(browser: Browser, address: str, stem: str, window: str) -> None:
    watched = opened(browser, address, path_of(stem), window, "light")
    page = watched.page
    assert page.locator('[data-testid="stException"], [data-testid="stAlertContentError"]').count() == 0
    assert "Traceback" not in page.inner_text("body")
    assert overflow(page) == []
    assert page.locator("h1.p-answer").count() == 1
    assert watched.failed == []
    assert watched.left == []
    assert watched.said == []
    page.context.close()


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
def test_the_page_follows_the_readers_theme(browser: Browser, address: str, scheme: str) -> None:
    from planner.charts.theme import colour

    watched = opened(browser, address, "", "laptop", scheme)
    seen = {
        "page": watched.page.evaluate("getComputedStyle(document.querySelector('.stApp')).backgroundColor"),
        "muted": watched.page.evaluate("getComputedStyle(document.querySelector('.p-over')).color"),
    }
    wanted = {name: rgb(colour(name, scheme)) for name in seen}
    assert seen == wanted
    watched.page.context.close()


def rgb(hex_colour: str) -> str:
    return "rgb({}, {}, {})".format(*(int(hex_colour[i : i + 2], 16) for i in (1, 3, 5)))


def test_a_reading_is_typed_on_a_phone(browser: Browser, address: str) -> None:
    """Driver and circumstances are set already: a number, perhaps a pulse, one button."""
    watched = opened(browser, address, "", "phone", "light")
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
    page.context.close()


def test_the_emergency_signs_are_one_tap_away(browser: Browser, address: str) -> None:
    watched = opened(browser, address, "", "phone", "light")
    page = watched.page
    page.get_by_role("button", name="Emergency signs").click()
    panel = page.locator('[data-testid="stPopoverBody"]')
    panel.wait_for()
    assert "Blue lips" in panel.inner_text()
    assert overflow(page) == []
    page.context.close()


def test_the_server_answers_on_this_machine_only(address: str) -> None:
    """Bound to the loopback: the machine's own other addresses refuse."""
    port = urlsplit(address).port
    assert port is not None
    others = {info[4][0] for info in socket.getaddrinfo(socket.gethostname(), None, socket.AF_INET)}
    for other in others - {"127.0.0.1", "127.0.1.1"}:
        with socket.socket() as probe:
            probe.settimeout(2.0)
            assert probe.connect_ex((other, port)) != 0
