"""A real browser for the pages: Debian's Chromium and its driver, without network."""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from importlib.util import find_spec
from pathlib import Path
from typing import Any

CHROMIUM, DRIVER = shutil.which("chromium"), shutil.which("chromedriver")
OPTIONS = (
    "--headless=new",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--disable-dev-shm-usage",
)


def missing() -> str:
    """What of a browser is not there; empty where all is."""
    lacks = [] if CHROMIUM else ["chromium"]
    lacks += [] if DRIVER else ["chromium-driver"]
    lacks += [name for name in ("selenium", "axe_playwright_python") if find_spec(name) is None]
    return ", ".join(lacks)


def axe_source() -> str:
    """axe-core from the installed package that bundles it; the package is not imported."""
    found = find_spec("axe_playwright_python")
    assert found is not None
    assert found.origin is not None
    return (Path(found.origin).parent / "axe.min.js").read_text(encoding="utf-8")


@contextmanager
def browser(profile: Path) -> Iterator[Any]:
    """A driver with a fresh profile and the network log on."""
    from selenium import webdriver
    from selenium.webdriver.chrome.service import Service

    options = webdriver.ChromeOptions()
    options.binary_location = CHROMIUM
    for option in (*OPTIONS, f"--user-data-dir={profile}"):
        options.add_argument(option)
    options.set_capability("goog:loggingPrefs", {"performance": "ALL", "browser": "ALL"})
    os.environ["SE_OFFLINE"] = "true"  # the driver is named, nothing is to be fetched
    driver = webdriver.Chrome(options=options, service=Service(DRIVER))
    try:
        yield driver
    finally:
        driver.quit()


def look(driver: Any, *, width: int = 1100, height: int = 900, scheme: str = "light") -> None:
    """Set the size of the window and the colour scheme that the page is asked for."""
    size = {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": False}
    driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", size)
    features = [{"name": "prefers-color-scheme", "value": scheme}]
    driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": features})


def violations(driver: Any) -> list[str]:
    """Violations of level A and AA that axe-core finds, with the elements."""
    driver.execute_script(axe_source())
    found = driver.execute_async_script(
        "const done = arguments[arguments.length - 1];"
        "axe.run(document, {runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice']})"
        ".then(r => done({bad: r.violations, good: r.passes.length}), e => done({error: String(e)}));"
    )
    assert "error" not in found, found
    assert found["good"] > 3, "axe-core looked at next to nothing"
    return [f"{one['id']}: {node['html'][:200]}" for one in found["bad"] for node in one["nodes"]]


def requests(driver: Any) -> list[str]:
    """Addresses of everything that was asked for since the last call, the page itself included."""
    import json

    messages = (json.loads(entry["message"])["message"] for entry in driver.get_log("performance"))
    return [m["params"]["request"]["url"] for m in messages if m["method"] == "Network.requestWillBeSent"]
