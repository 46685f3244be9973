"""Pages and pictures in a real Chromium, where there is one: the log is clean, nothing is asked for, all has size."""

import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from seqcheck import cli

webdriver: Any = pytest.importorskip("selenium.webdriver", reason="selenium is not installed")
BROWSER, DRIVER = shutil.which("chromium"), shutil.which("chromedriver")
pytestmark = pytest.mark.skipif(not BROWSER or not DRIVER, reason="there is no chromium with its driver")
SAMPLES = Path(__file__).parents[1] / "samples"
OVERFLOWING = """
return [...document.querySelectorAll('svg.sq')].flatMap(svg => { const sheet = svg.getBoundingClientRect();
  return [...svg.querySelectorAll('text')].map(one => [one.textContent, one.getBoundingClientRect()])
    .filter(([, box]) => box.width === 0 || box.left < sheet.left - 1 || box.right > sheet.right + 1
      || box.top < sheet.top - 1 || box.bottom > sheet.bottom + 1).map(([text]) => text); })"""


@pytest.fixture(scope="module")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Any]:
    options = webdriver.ChromeOptions()
    options.binary_location = BROWSER
    profile = tmp_path_factory.mktemp("profile")
    for flag in ("--headless=new", "--no-sandbox", "--disable-dev-shm-usage", f"--user-data-dir={profile}"):
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL"})
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("SE_OFFLINE", "true")
        found = webdriver.Chrome(options=options, service=webdriver.ChromeService(executable_path=DRIVER))
    found.set_window_size(1200, 900)
    yield found
    found.quit()


@pytest.mark.parametrize("name", ["vent", "selector", "faulty/vent_short_pause", "faulty/selector_broken_change"])
def test_a_page(browser: Any, tmp_path: Path, name: str) -> None:
    out = tmp_path / "page.html"
    assert cli.main(["report", str(SAMPLES / f"{name}.dseq"), "--out", str(out)]) == ("faulty" in name)
    browser.get(out.as_uri())
    assert [one for one in browser.get_log("browser") if one["level"] == "SEVERE"] == []
    assert browser.execute_script("return performance.getEntriesByType('resource').length") == 0
    assert browser.execute_script(OVERFLOWING) == []
    findings = browser.find_elements("css selector", "section.finding")
    assert bool(findings) == ("faulty" in name)
    assert all(one.is_displayed() for one in findings)
    assert browser.execute_script("return document.documentElement.scrollWidth") <= 1200


@pytest.mark.parametrize("more", [[], ["--trace", "overlap"]])
def test_a_picture(browser: Any, tmp_path: Path, more: list[str]) -> None:
    out = tmp_path / "picture.svg"
    assert cli.main(["draw", str(SAMPLES / "faulty/vent_short_pause.dseq"), *more, "--out", str(out)]) == 1
    browser.get(out.as_uri())
    assert [one for one in browser.get_log("browser") if one["level"] == "SEVERE"] == []
    assert browser.execute_script(OVERFLOWING) == []
    assert "Roof vent" in browser.title or "Roof vent" in browser.page_source
