"""Takes the pictures of the README: `.venv/bin/python .screenshots/take.py` (after `.ci/prepare --tests`).

Starts the program on the demo season in a folder of its own, visits its pages with the system's chromium, and
writes `<page>.png` (laptop, light) and `<page>-phone.png` (telephone, dark) beside this file.
"""

from __future__ import annotations

import os
import shutil
import socket
import subprocess
import sys
import tempfile
import time
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from playwright.sync_api import Browser, Page, sync_playwright

from planner.ui.navigation import FIRST_PAGE

HERE = Path(__file__).resolve().parent
ON_A_LAPTOP = ("this_morning", "season", "arrival", "driver")
ON_A_PHONE = ("this_morning", "readings", "fluids")
LAPTOP, PHONE = (1280, 960), (390, 844)
FLAGS = ["--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking"]
STARTS_WITHIN_S = 60.0
SETTLES_MS = 2500  # charts are drawn after the text


@contextmanager
def running_demo() -> Iterator[str]:
    """The program on a fresh demo season; gives its address."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = str(probe.getsockname()[1])
    with tempfile.TemporaryDirectory() as folder:
        store = ["--store", str(Path(folder) / "planner.db")]
        planner = [sys.executable, "-m", "planner", *store]
        subprocess.run([*planner, "demo"], check=True, stdout=subprocess.DEVNULL)
        environment = {**os.environ, "STREAMLIT_SERVER_HEADLESS": "true"}
        server = subprocess.Popen([*planner, "--port", port], env=environment, stdout=subprocess.DEVNULL)
        try:
            wait_for(f"http://localhost:{port}/_stcore/health", server)
            yield f"http://localhost:{port}"
        finally:
            server.terminate()
            server.wait(timeout=20)


def wait_for(address: str, server: subprocess.Popen[bytes]) -> None:
    """Return when the address answers."""
    end = time.monotonic() + STARTS_WITHIN_S
    while time.monotonic() < end and server.poll() is None:
        try:
            with urllib.request.urlopen(address, timeout=2):
                return
        except OSError:
            time.sleep(0.2)
    raise SystemExit("the program did not start")


def take(browser: Browser, address: str, stem: str, size: tuple[int, int], scheme: str, name: str) -> None:
    """One picture of the upper part of a page."""
    width, height = size
    context = browser.new_context(viewport={"width": width, "height": height}, color_scheme=scheme)
    page: Page = context.new_page()
    page.goto(f"{address}/{'' if stem == FIRST_PAGE else stem.replace('_', '-')}")
    page.wait_for_selector(".p-foot", timeout=60_000)
    page.wait_for_timeout(SETTLES_MS)
    page.screenshot(path=HERE / name)
    context.close()


def main() -> None:
    """Take every picture."""
    executable = shutil.which("chromium") or shutil.which("chromium-browser")
    with running_demo() as address, sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=executable, args=FLAGS)
        for stem in ON_A_LAPTOP:
            take(browser, address, stem, LAPTOP, "light", f"{stem}.png")
        for stem in ON_A_PHONE:
            take(browser, address, stem, PHONE, "dark", f"{stem}-phone.png")
        browser.close()


if __name__ == "__main__":
    main()
