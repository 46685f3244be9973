"""Pages and pictures in a real Chromium, where there is one: the log is clean, nothing is asked for, all has size."""

import re
from collections.abc import Iterator
from pathlib import Path

import pytest
from browser import PROGRAM, Browser

from seqcheck import cli

pytestmark = pytest.mark.skipif(PROGRAM is None, reason="there is no chromium")
SAMPLES = Path(__file__).parents[1] / "samples"
OVERFLOWING = """
[...document.querySelectorAll('svg.sq')].flatMap(svg => { const sheet = svg.getBoundingClientRect();
  return [...svg.querySelectorAll('text')].map(one => [one.textContent, one.getBoundingClientRect()])
    .filter(([, box]) => box.width === 0 || box.left < sheet.left - 1 || box.right > sheet.right + 1
      || box.top < sheet.top - 1 || box.bottom > sheet.bottom + 1).map(([text]) => text); })"""
FAINT = """
(() => { const part = one => one <= 0.03928 ? one / 12.92 : ((one + 0.055) / 1.055) ** 2.4;
  const light = colour => { const [r, g, b] = colour.match(/[0-9.]+/g).map(one => part(one / 255));
    return 0.2126 * r + 0.7152 * g + 0.0722 * b; };
  const behind = one => { for (; one; one = one.parentElement) { const colour = getComputedStyle(one).backgroundColor;
    if (!/, 0\\)$|transparent/.test(colour)) return colour; } return 'rgb(255, 255, 255)'; };
  return [...document.querySelectorAll('body *')].filter(one => !one.closest('svg') && [...one.childNodes]
    .some(node => node.nodeType === 3 && node.textContent.trim())).filter(one => { const two =
      [light(getComputedStyle(one).color), light(behind(one))].sort((a, b) => b - a);
      return (two[0] + 0.05) / (two[1] + 0.05) < 4.5; }).map(one => one.textContent); })()"""
"""The texts of a page whose contrast with what is behind them is below 4.5 (WCAG 2.1, 1.4.3 and 'contrast ratio')."""


@pytest.fixture(scope="module")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Browser]:
    with Browser(tmp_path_factory.mktemp("profile")) as found:
        yield found


@pytest.mark.parametrize("name", ["vent", "selector", "faulty/vent_short_pause", "faulty/selector_broken_change"])
def test_a_page(browser: Browser, tmp_path: Path, name: str) -> None:
    out = tmp_path / "page.html"
    assert cli.main(["report", str(SAMPLES / f"{name}.dseq"), "--out", str(out)]) == ("faulty" in name)
    for dark in (False, True):
        browser.like(dark=dark)
        browser.open(out.as_uri())
        assert browser.complaints() == []
        assert browser.requests() == [out.as_uri()]
        assert browser.ask(OVERFLOWING) == []
        assert browser.ask(FAINT) == []
    sizes = browser.ask(
        "[...document.querySelectorAll('section.finding')].map(one => one.getBoundingClientRect().height)"
    )
    assert bool(sizes) == ("faulty" in name)
    assert all(size > 50 for size in sizes)
    assert browser.ask("document.documentElement.scrollWidth") <= 1200
    assert len(re.findall(rb"/Type\s*/Page\b", browser.paper())) >= 2


@pytest.mark.parametrize("more", [[], ["--trace", "overlap"]])
def test_a_picture(browser: Browser, tmp_path: Path, more: list[str]) -> None:
    out = tmp_path / "picture.svg"
    assert cli.main(["draw", str(SAMPLES / "faulty/vent_short_pause.dseq"), *more, "--out", str(out)]) == 1
    browser.open(out.as_uri())
    assert browser.complaints() == []
    assert browser.requests() == [out.as_uri()]
    assert browser.ask(OVERFLOWING) == []
    assert "Roof vent" in browser.ask("document.querySelector('title').textContent")


def test_the_browser_does_complain(browser: Browser, tmp_path: Path) -> None:
    """What the tests above rely on: errors, requests and faint texts are seen."""
    page = tmp_path / "bad.html"
    page.write_text("<p style='color:#bbb'>faint</p><img src='none.png'><script>console.error('x'); nothing()</script>")
    browser.like()
    browser.open(page.as_uri())
    assert len(browser.complaints()) >= 2
    assert browser.requests() == [page.as_uri(), (tmp_path / "none.png").as_uri()]
    assert browser.ask(FAINT) == ["faint"]
