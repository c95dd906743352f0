"""The page in a browser: the first view from cold, a slider's way to new figures, and memory (no ratios)."""

from __future__ import annotations

import os
import shutil
import socket
import statistics
import subprocess
import sys
import time
import urllib.request
from collections.abc import Iterator

from benchmarks.side_by_side import Outcome

__all__ = ["outcomes"]

ARGUMENTS = ["--no-sandbox", "--disable-dev-shm-usage", "--disable-gpu", "--disable-background-networking"]
STEPS = 25


def outcomes() -> Iterator[Outcome]:
    """Yield the latencies as shares of what they may be, and the memory of five more sessions."""
    from playwright.sync_api import sync_playwright

    path = shutil.which("chromium") or shutil.which("google-chrome")
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        port = free.getsockname()[1]
    command = [sys.executable, "-m", "envcorr", "page", f"--port={port}"]
    process = subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, env=os.environ)
    address = f"http://localhost:{port}"
    try:
        for _ in range(150):
            try:
                urllib.request.urlopen(f"{address}/_stcore/health", timeout=1).close()
                break
            except OSError:
                time.sleep(0.1)
        with sync_playwright() as playwright:
            browser = playwright.chromium.launch(executable_path=path, args=ARGUMENTS)
            page = browser.new_page()
            start = time.perf_counter()
            page.goto(address)
            page.wait_for_selector("text=Not computed yet")
            first = time.perf_counter() - start
            yield Outcome("first useful view from cold [s]", first, 4.0, "until the answer stands on the page")
            for key, text in (("begin-room", "Powder"), ("what-if-first", "load.mass")):
                page.locator(f".st-key-{key} input").click()
                page.keyboard.type(text)
                page.wait_for_timeout(400)
                page.keyboard.press("Enter")
                page.wait_for_timeout(1500)
            thumb = page.locator("[data-testid=stSlider] input").first
            thumb.focus()
            table = page.locator(".envcorr table").first
            taken = []
            for _ in range(STEPS):
                before = table.inner_text()
                start = time.perf_counter()
                page.keyboard.press("ArrowRight")
                while table.inner_text() == before and time.perf_counter() - start < 5:
                    page.wait_for_timeout(5)
                taken.append(time.perf_counter() - start)
                page.wait_for_timeout(100)
            middle = 1e3 * statistics.median(taken)
            yield Outcome("slider to new figures, median [ms]", middle, 150.0, f"{STEPS} steps, 16384 draws each")
            memory = [_memory(port)]
            for _ in range(5):
                other = browser.new_context().new_page()
                other.goto(address)
                other.wait_for_selector("text=Not computed yet")
                memory.append(_memory(port))
            browser.close()
        growth = (memory[-1] - memory[0]) / 5
        yield Outcome("memory of one more session [MiB]", growth, 5.0, f"{memory[0]:.0f} MiB before")
    finally:
        subprocess.run(["pkill", "-f", f"server.port={port}"], check=False)
        process.wait(timeout=20)


def _memory(port: int) -> float:
    """Return the resident memory of the server [MiB]."""
    found = subprocess.run(
        ["pgrep", "-f", f"streamlit.*server.port={port}"], capture_output=True, text=True, check=True
    )
    sizes = []
    for pid in found.stdout.split():
        with open(f"/proc/{pid}/status", encoding="utf-8") as file:
            sizes += [int(line.split()[1]) / 1024 for line in file if line.startswith("VmRSS")]
    return max(sizes)
