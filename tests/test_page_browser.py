"""The pages in a real browser: each user's whole job, on a desk and on a phone; nothing may leave the machine."""

from __future__ import annotations

import os
import shutil
import socket
import subprocess
import sys
import time
import urllib.request
from pathlib import Path

import polars as pl
import pytest
from pypdf import PdfReader

from envcorr.cli_page import OPTIONS

REQUIRED = "ENVCORR_BROWSER"
"""Set to "required" it turns a missing browser into a failure."""
ARGUMENTS = ["--no-sandbox", "--disable-dev-shm-usage", "--disable-gpu", "--disable-background-networking"]
SETTLED = "[data-testid=stApp][data-test-script-state=notRunning][data-test-connection-state=CONNECTED]"
FORGIVEN = ("_stcore", "404")  # opened directly, a sub-page asks twice for what is not there


def browser_path():
    """Return an installed browser, Debian's where this is root, or that of playwright; None where none can be had."""
    for name in ("chromium", "chromium-browser", "google-chrome"):
        if found := shutil.which(name):
            return found
    if os.geteuid() == 0 and shutil.which("apt-get"):
        subprocess.run(["apt-get", "update", "-qq"], check=False, capture_output=True)
        subprocess.run(["apt-get", "install", "-y", "-qq", "chromium"], check=False, capture_output=True)
        if found := shutil.which("chromium"):
            return found
    done = subprocess.run(
        [sys.executable, "-m", "playwright", "install", "chromium"], check=False, capture_output=True, timeout=600
    )
    return "" if done.returncode == 0 else None


@pytest.fixture(scope="module")
def browser():
    from playwright.sync_api import sync_playwright

    path = browser_path()
    if path is None:
        if os.environ.get(REQUIRED) == "required":
            pytest.fail("no browser could be found or installed")
        pytest.skip("no browser could be found or installed, so the pages were not tried in one")
    with sync_playwright() as playwright:
        found = playwright.chromium.launch(executable_path=path or None, args=ARGUMENTS)
        yield found
        found.close()


@pytest.fixture(scope="module")
def server(tmp_path_factory):
    """The page as ``envcorr page`` starts it, from an empty folder."""
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        port = free.getsockname()[1]
    folder = tmp_path_factory.mktemp("empty")
    environment = {**os.environ, "PYTHONPATH": os.getcwd()}
    with (folder.parent / "page.log").open("w") as log:
        process = subprocess.Popen(
            [sys.executable, "-m", "envcorr", "page", f"--port={port}"],
            cwd=folder,
            env=environment,
            stdout=log,
            stderr=log,
        )
    address = f"http://localhost:{port}"
    for _ in range(150):
        try:
            with urllib.request.urlopen(f"{address}/_stcore/health", timeout=1):
                break
        except OSError:
            time.sleep(0.2)
    yield address
    subprocess.run(["pkill", "-f", f"server.port={port}"], check=False)
    process.wait(timeout=20)
    assert list(folder.iterdir()) == []


@pytest.fixture
def page(browser, server, request):
    """A page of a fresh session; console errors and requests that leave the machine fail the test."""
    width, height = getattr(request, "param", (1280, 900))
    context = browser.new_context(viewport={"width": width, "height": height}, accept_downloads=True)
    found = context.new_page()
    errors, abroad = [], []
    found.on("console", lambda message: errors.append(message.text) if message.type == "error" else None)
    found.on(
        "request",
        lambda asked: (
            abroad.append(asked.url)
            if not asked.url.startswith((server, server.replace("http", "ws"), "data:", "blob:"))
            else None
        ),
    )
    found.server = server
    yield found
    context.close()
    assert abroad == []
    assert [text for text in errors if not any(part in text for part in FORGIVEN)] == []


def open_page(page, path=""):
    page.goto(f"{page.server}/{path}")
    page.wait_for_selector("h1")
    settle(page)


def settle(page):
    page.wait_for_timeout(150)
    page.wait_for_selector(SETTLED, timeout=30_000)


def choose(page, key, text):
    page.locator(f".st-key-{key} input").click()
    page.keyboard.type(text)
    page.wait_for_timeout(300)
    page.keyboard.press("Enter")
    settle(page)


def fill(page, key, text):
    page.locator(f".st-key-{key} input, .st-key-{key} textarea").first.fill(text)
    page.keyboard.press("Tab")
    settle(page)


def slug(name):
    return name.replace("|", "-").replace(".", "-").replace(" ", "-")


@pytest.mark.parametrize("page", [(1280, 900), (390, 844)], indirect=True, ids=["desk", "phone"])
def test_the_planner(page, tmp_path):
    """From an example to a verdict, a what-if, a report, the file, and the file read again."""
    open_page(page)
    choose(page, "begin-room", "Powder")
    page.get_by_text("Reached once treated").first.wait_for()
    bottom = page.locator("[data-testid=stBottom], [data-testid=stBottomBlockContainer]").first
    assert "Reached once treated" in bottom.inner_text()  # always in view
    assert page.evaluate("document.documentElement.scrollWidth") <= page.viewport_size["width"] + 1
    choose(page, "what-if-first", "load.mass")
    thumb = page.locator("[data-testid=stSlider] input").first
    thumb.focus()
    for _ in range(5):
        page.keyboard.press("ArrowRight")
    settle(page)
    page.get_by_text("Back to the set-up").click()
    settle(page)
    with page.expect_download() as saved:
        page.get_by_text("Set-up as a file").click()
    target = tmp_path / "setup.toml"
    saved.value.save_as(target)
    page.get_by_text("Report to file").click()
    page.locator(".st-key-prepare-room button").click()
    page.locator(".st-key-pdf-room button").wait_for()
    with page.expect_download() as saved:
        page.locator(".st-key-pdf-room button").click()
    saved.value.save_as(tmp_path / "room.pdf")
    assert "Reached once treated" in " ".join(p.extract_text() for p in PdfReader(tmp_path / "room.pdf").pages)
    open_page(page)
    page.locator(".st-key-file-room input[type=file]").set_input_files(target)
    page.get_by_text("Reached once treated").first.wait_for()


def test_the_analyst(page, tmp_path):
    """One reading by keyboard, then a table with a bad row and a formula in it."""
    open_page(page, "mass")
    for name, text in (
        ("reading", "1.25 g"),
        ("load.density", "1050 kg/m³"),
        ("air.temperature", "21.4 °C"),
        ("air.pressure", "943.1 hPa"),
        ("air.humidity", "42 %"),
    ):
        fill(page, slug(f"mass|{name}"), text)
    page.get_by_text("1.25115").first.wait_for()
    page.get_by_role("tab", name="A table").click()
    table = tmp_path / "=cmd <b>.csv"
    table.write_text("reading [g],load.density [kg/m³],remark\n1.25,1050,=1+1\nx,1050,\n", encoding="utf-8")
    page.locator(".st-key-table input[type=file]").set_input_files(table)
    settle(page)
    page.get_by_text("Compute the masses").click()
    page.get_by_text("The table with its masses").wait_for()
    with page.expect_download() as saved:
        page.get_by_text("The table with its masses").click()
    saved.value.save_as(tmp_path / "masses.csv")
    found = pl.read_csv(tmp_path / "masses.csv")
    assert found["mass [g]"][0] == pytest.approx(1.25115, abs=2e-5)
    assert found["remark"][0] == "=1+1"
    assert "is not a number" in found["notices"][1]
    assert page.locator("b", has_text="cmd").count() == 0


def test_the_technician(page):
    open_page(page, "level")
    page.get_by_text("Not level enough").first.wait_for()
    fill(page, "level-bubble", "0.1 mm right")
    page.get_by_text("Level enough").first.wait_for()
    fill(page, "level-pitch", "0 mm")
    page.get_by_text("is not above zero").wait_for()


def test_the_air_and_a_wrong_unit(page):
    open_page(page, "air")
    fill(page, "air-air-temperature", "20 hPa")
    page.get_by_text("a temperature is wanted").first.wait_for()
    text = page.locator("body").inner_text()
    assert "Traceback" not in text
    assert str(Path.cwd()) not in text


def test_the_keyboard_alone(page):
    """No mouse: by Tab from field to field, to the density of the air (CIPM-2007: 1.1993 kg/m³)."""
    open_page(page, "air")
    told = {"air-temperature": "20 °C", "air-pressure": "101325 Pa", "air-humidity": "50 %", "air-co2": "400 ppm"}
    for key, text in told.items():
        for _ in range(40):
            page.keyboard.press("Tab")
            if page.evaluate("k => !!document.activeElement.closest('.st-key-air-' + k)", key):
                break
        page.keyboard.type(text)
        page.keyboard.press("Enter")
        settle(page)
    page.get_by_text("1.1993").first.wait_for()


def test_a_million_draws(page):
    """Long work says that it goes on, and the answer comes."""
    open_page(page)
    choose(page, "begin-room", "Powder")
    page.get_by_text("Reached once treated").first.wait_for()
    choose(page, "draws", "1 048")
    page.get_by_text("1048576 draws (JCGM").first.wait_for(timeout=60_000)


def test_every_answer_carries_a_policy(server):
    with urllib.request.urlopen(server, timeout=5) as answer:
        policy = answer.headers["content-security-policy"]
    assert "default-src 'self'" in policy
    assert "unsafe-eval" not in policy
    assert "frame-ancestors 'none'" in policy


def test_a_shared_link(page):
    """The link that the page gives leads another session to the same set-up."""
    open_page(page)
    choose(page, "begin-room", "Milligram")
    page.get_by_text("Set-up as a link").click()
    settle(page)
    link = page.locator("[data-testid=stCode]").first.inner_text().strip()
    other = page.context.browser.new_context().new_page()
    other.goto(f"{page.server}/{link}")
    other.get_by_text("Milligram bench, workshop office").first.wait_for()
    other.context.close()


def test_accessibility(page):
    """axe-core finds nothing but faults of Streamlit's own widgets, by name."""
    from axe_playwright_python.sync_playwright import Axe

    own = {
        "aria-allowed-attr",
        "aria-required-children",
        "nested-interactive",
        "presentation-role-conflict",
        "region",
        "scrollable-region-focusable",
    }
    for path in ("", "mass", "level", "air"):
        open_page(page, path)
        if not path:
            choose(page, "begin-room", "Powder")
            page.get_by_text("Reached once treated").first.wait_for()
        found = Axe().run(page).response["violations"]
        mine = [(one["id"], [node["html"][:200] for node in one["nodes"][:2]]) for one in found if one["id"] not in own]
        assert mine == []


def test_only_this_machine_and_nothing_is_told():
    assert OPTIONS["server.address"] == "127.0.0.1"
    assert OPTIONS["browser.gatherUsageStats"] == "false"
    assert OPTIONS["server.enableXsrfProtection"] == "true"
    written = Path(".streamlit/config.toml").read_text(encoding="utf-8")
    for name, value in OPTIONS.items():
        key = name.partition(".")[2]
        assert f"{key} = {value}" in written or f'{key} = "{value}"' in written
