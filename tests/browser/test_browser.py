"""The app in a real browser: it comes up whole, stays on this machine, follows a change, in dark and on a phone."""

import os
import shutil
import signal
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from pathlib import Path

import pytest

pytestmark = pytest.mark.browser

ROOT = Path(__file__).resolve().parents[2]
NAMES = ("chromium", "chromium-browser", "google-chrome")
QUIET = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
)
LAST = "it certifies nothing"  # what the page prints last
LIMIT_MS = 30_000


def missing(what: str) -> None:
    """Skip with a line; where the checks must be whole, fail."""
    said = f"{what} is not installed: the browser checks are left out"
    (pytest.fail if os.environ.get("CI") else pytest.skip)(said)


@pytest.fixture(scope="module")
def browser() -> Iterator:
    program = next(filter(None, map(shutil.which, NAMES)), None)
    if program is None:
        missing("chromium")
    try:
        from playwright.sync_api import sync_playwright
    except ImportError:
        missing("playwright")
    with sync_playwright() as driver:
        window = driver.chromium.launch(executable_path=program, args=list(QUIET))
        yield window
        window.close()


@pytest.fixture(scope="module")
def address(browser) -> Iterator[str]:
    """A server of its own on a free port, stopped with all that it started."""
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        port = free.getsockname()[1]
    command = [
        sys.executable,
        "-m",
        "streamlit",
        "run",
        "app.py",
        "--server.port",
        str(port),
        "--server.fileWatcherType",
        "none",
    ]
    server = subprocess.Popen(
        command, cwd=ROOT, start_new_session=True, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL
    )
    try:
        wait_for(f"http://127.0.0.1:{port}/_stcore/health")
        yield f"http://127.0.0.1:{port}/"
    finally:
        os.killpg(server.pid, signal.SIGTERM)
        server.wait(10)


def wait_for(url: str) -> None:
    until = time.monotonic() + LIMIT_MS / 1000
    while time.monotonic() < until:
        try:
            with urllib.request.urlopen(url, timeout=1):
                return
        except (urllib.error.URLError, OSError):
            time.sleep(0.1)
    raise TimeoutError(url)


class Watched:
    """A page, with what it complained of and whom it asked."""

    def __init__(self, browser, address: str, *, dark: bool = False, phone: bool = False):
        size = {"width": 390, "height": 844} if phone else {"width": 1360, "height": 900}
        self.context = browser.new_context(color_scheme="dark" if dark else "light", viewport=size)
        self.page = self.context.new_page()
        self.page.set_default_timeout(LIMIT_MS)
        self.errors, self.hosts = [], set()
        self.page.on("console", lambda message: self.errors.append(message.text) if message.type == "error" else None)
        self.page.on("pageerror", lambda error: self.errors.append(str(error)))
        self.page.on("request", lambda request: self.hosts.add(host(request.url)))
        self.page.goto(address)
        self.settled()

    def settled(self) -> None:
        self.page.get_by_text(LAST).last.wait_for()
        self.page.wait_for_function("!document.querySelector('[data-test-script-state=running]')")

    def check(self) -> None:
        """Nothing raised, nothing complained of, nobody else asked, every picture there, nothing wider than the window."""
        page = self.page
        assert page.get_by_test_id("stException").count() == 0
        assert self.errors == []
        assert self.hosts <= {"127.0.0.1", ""}
        page.wait_for_function(
            "[...document.images].length && [...document.images].every(i => i.complete && i.naturalWidth > 0)"
        )
        assert page.evaluate("document.querySelector('[data-testid=stMain]').scrollWidth <= innerWidth")


def host(url: str) -> str:
    """The host of a request, nothing for what lies in the page itself."""
    return "" if url.startswith(("data:", "blob:")) else url.split("/")[2].split(":")[0]


@pytest.mark.parametrize(("dark", "phone"), [(False, False), (True, False), (False, True), (True, True)])
def test_the_page_comes_up_whole(browser, address, dark, phone):
    seen = Watched(browser, address, dark=dark, phone=phone)
    seen.check()
    shown = seen.page.locator(".st-key-strip-narrow img" if phone else ".st-key-strip-wide img")
    shown.wait_for(state="visible")
    assert seen.page.locator(".st-key-strip-wide img" if phone else ".st-key-strip-narrow img").is_hidden()
    paper = seen.page.evaluate("getComputedStyle(document.querySelector('.stApp')).backgroundColor")
    assert (sum(int(part) for part in paper[4:-1].split(",")[:3]) < 200) is dark
    seen.context.close()


def test_a_change_reaches_the_answer_the_picture_and_the_link(browser, address):
    seen = Watched(browser, address)
    page = seen.page
    strip, light = page.locator(".st-key-strip-wide img"), page.get_by_test_id("stMetricValue").first
    before, picture, first = light.inner_text(), strip.get_attribute("src"), page.url
    page.locator(".st-key-fold-guide summary").first.click()
    box = page.locator(".st-key-guide-bundle-length_m input")
    box.fill("4")
    box.press("Enter")
    page.wait_for_function("old => document.querySelector('.st-key-strip-wide img').src !== old", arg=picture)
    page.wait_for_function("old => location.href !== old", arg=first)
    assert light.inner_text() != before
    assert "d=" in page.url
    for tab in ("Target", "Detail", "View", "Fit", "Working range", "Screening", "Needs", "Sources", "Caveats"):
        page.get_by_role("tab", name=tab).click()
        seen.settled()
    seen.check()
    page.reload()
    seen.settled()
    assert box.input_value() == "4"
    page.go_back()
    page.wait_for_function("document.querySelector('.st-key-guide-bundle-length_m input').value === '1.8'")
    assert light.inner_text() == before
    seen.context.close()


def test_a_wrong_value_is_a_sentence_beside_the_widget(browser, address):
    seen = Watched(browser, address)
    page = seen.page
    page.locator(".st-key-fold-guide summary").first.click()
    box = page.locator(".st-key-guide-bundle-length_m input")
    box.fill("-1")
    box.press("Enter")
    page.get_by_test_id("stSidebar").get_by_text("it must be above 0").wait_for()
    seen.check()
    seen.context.close()
