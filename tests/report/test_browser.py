"""Pages in a real browser: accessible in light and dark, narrow and wide, and asking for nothing outside themselves."""

from __future__ import annotations

import base64
import os
import shutil
import subprocess

import pytest
from browser import browser, look, missing, requests, violations
from pages import PAGES, made

LACKS = missing()
IN_CI = "LAMPLIT_CI" in os.environ
needs_browser = pytest.mark.skipif(bool(LACKS) and not IN_CI, reason=f"no browser to look with: {LACKS} not installed")
SIZES_MM = {"A4": (210, 297), "Letter": (215.9, 279.4)}


@pytest.fixture(scope="module")
def driver(tmp_path_factory):
    assert not LACKS, f"LAMPLIT_CI wants a browser: {LACKS} not installed"
    with browser(tmp_path_factory.mktemp("profile")) as found:
        yield found


@pytest.fixture(scope="module")
def files(tmp_path_factory):
    return {name: made(name, tmp_path_factory.mktemp("pages")) for name in PAGES}


def opened(driver, path, **how):
    """The page alone in the log of the network: the start page's own requests are read off first."""
    driver.get("about:blank")
    requests(driver)
    look(driver, **how)
    driver.get(path.as_uri())


@needs_browser
@pytest.mark.parametrize(
    ("scheme", "width"), [("light", 1100), ("dark", 1100), ("light", 360)], ids=["light", "dark", "narrow"]
)
@pytest.mark.parametrize("name", PAGES)
def test_no_violation_of_level_a_or_aa(driver, files, name, scheme, width):
    opened(driver, files[name], scheme=scheme, width=width)
    assert driver.execute_script(f"return matchMedia('(prefers-color-scheme: {scheme})').matches")
    assert violations(driver) == []
    assert driver.execute_script("return document.documentElement.scrollWidth <= innerWidth")


@needs_browser
@pytest.mark.parametrize("name", PAGES)
def test_no_request_leaves_the_page(driver, files, name):
    opened(driver, files[name])
    asked = [address for address in requests(driver) if not address.startswith("data:")]
    assert asked == [files[name].as_uri()]
    entries = driver.execute_script("return performance.getEntriesByType('resource').map(entry => entry.name)")
    assert [address for address in entries if not address.startswith("data:")] == []
    assert [entry for entry in driver.get_log("browser") if entry["level"] == "SEVERE"] == []


@needs_browser
def test_the_check_sees_what_is_wrong(driver, tmp_path):
    """The means of the tests above: a page with faults is found out."""
    path = tmp_path / "bad.html"
    path.write_text(
        "<!DOCTYPE html><html><title>x</title><body><p style='color:#999;background:#fff'>pale words</p>"
        "<img src='http://127.0.0.1:9/x.png'>" + "<p>plain</p>" * 3 + "</body></html>",
        encoding="utf-8",
    )
    opened(driver, path)
    assert {line.split(":")[0] for line in violations(driver)} >= {"color-contrast", "image-alt", "html-has-lang"}
    assert "http://127.0.0.1:9/x.png" in requests(driver)


@needs_browser
@pytest.mark.parametrize("size", SIZES_MM)
def test_it_prints_on_paper(driver, files, tmp_path, size):
    opened(driver, files["check"])
    width, height = (side / 25.4 for side in SIZES_MM[size])
    printed = driver.execute_cdp_cmd("Page.printToPDF", {"paperWidth": width, "paperHeight": height})
    data = base64.b64decode(printed["data"])
    assert data.startswith(b"%PDF")
    if shutil.which("pdftotext") is None:
        assert not IN_CI, "LAMPLIT_CI wants poppler-utils"
        pytest.skip("poppler-utils is not installed")
    path = tmp_path / "printed.pdf"
    path.write_bytes(data)
    text = subprocess.run(["pdftotext", "-layout", path, "-"], capture_output=True, text=True, check=True).stdout
    assert text.count("\f") <= 5
    assert "SHA-256" in text.split("\f")[-2]
    assert all(f"S-{i:03d}" in text for i in range(1, 13))


@needs_browser
def test_a_figure_stays_on_a_light_panel_in_the_dark(driver, files):
    opened(driver, files["check"], scheme="dark")
    ground = "return getComputedStyle(document.querySelector(arguments[0])).backgroundColor"
    assert driver.execute_script(ground, ".panel") == "rgb(251, 250, 247)"
    assert driver.execute_script(ground, "body") == "rgb(22, 25, 28)"
