"""The page for a design review."""

import re
from html.parser import HTMLParser
from pathlib import Path

import pytest
from proofs import leg

from seqcheck import cli
from seqcheck.checking import check
from seqcheck.commands.review import page
from seqcheck.evidence.digest import digest
from seqcheck.language import decode, read
from seqcheck.proving.search import LimitReached
from seqcheck.reports.standing import sorted_out
from seqcheck.verdict import Outcome

ROOT = Path(__file__).parents[1]
SAMPLES = [
    "vent.dseq",
    "hail.dseq",
    "pump.dseq",
    "faulty/vent_short_pause.dseq",
    "faulty/vent_half_brake.dseq",
    "faulty/vent_floating_pin.dseq",
    "faulty/hail_way_on_forgotten.dseq",
]
VOID = {"meta", "br"}


class Page(HTMLParser):
    """A page read back: its text, ids, links and headings; that its elements are nested is asked on the way."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.open: list[str] = []
        self.text: list[str] = []
        self.ids: list[str] = []
        self.links: list[str] = []
        self.heads: list[str] = []
        self.tags: set[str] = set()
        self.feed(text)
        assert self.open == []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.add(tag)
        if tag not in VOID:
            self.open.append(tag)
        for name, value in attrs:
            assert not name.startswith("on")
            assert name not in ("src", "style")
            if name == "id":
                self.ids.append(value or "")
            if name == "href":
                self.links.append(value or "")

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if "style" in self.open:
            return
        self.text.append(data)
        if self.open and re.fullmatch("h[1-6]", self.open[-1]):
            self.heads.append(self.open[-1])


def text_of(path: str) -> str:
    return decode(Path(path).read_bytes(), path)


def outcome_of(text: str, file: str) -> Outcome:
    return check(read(text, file, text_of), file, frozenset(), lambda _: None)


def read_back(text: str) -> Page:
    """A page that keeps the house rules: no script, nothing from elsewhere, no id twice, every link lands."""
    assert text.startswith("<!DOCTYPE html>\n")
    found = Page(text)
    assert not {"script", "link", "img", "iframe", "object", "base", "form"} & found.tags
    assert "://" not in text.replace("http://www.w3.org/2000/svg", "")
    assert not re.search(r"@import|url\((?!#)", text)
    assert len(found.ids) == len(set(found.ids))
    assert all(link.startswith("#") and link[1:] in found.ids for link in found.links)
    assert found.heads[0] == "h1"
    assert found.heads.count("h1") == 1
    return found


@pytest.mark.parametrize("name", SAMPLES)
def test_everything_found_is_on_the_page(name: str) -> None:
    outcome = outcome_of(text_of(str(ROOT / "samples" / name)), name)
    text = page(outcome, f"seqcheck report {name}", lambda _: None)
    found = read_back(text)
    said, parts = " ".join(found.text), sorted_out(outcome)
    assert parts.standing.value in said
    for one in (*parts.unsafe, *(one for one, _ in parts.waived if hasattr(one, "trace"))):
        assert str(one.place) in said
    assert text.count("-run-t\"") >= len(parts.unsafe)
    for finding in outcome.findings:
        assert f"{finding.text}." in said
    for _, why in parts.waived:
        assert f"Waived because: {why}." in said
    drive = outcome.drive
    for names in (drive.modes, drive.parts, drive.pins, drive.carriers, drive.columns):
        assert all(re.search(rf"\b{re.escape(one)}\b", said) for one in names)
    assert digest(drive) in said
    assert f"seqcheck report {name}" in said
    assert "A proof is about the file, not about the board." in said


def test_margins_have_a_bar_each() -> None:
    outcome = outcome_of(text_of(str(ROOT / "samples/vent.dseq")), "vent.dseq")
    text = page(outcome, "", lambda _: None)
    assert "UH, then UL" in text
    bars = re.search(r'<svg[^>]*aria-labelledby="margins-t.*?</svg>', text, re.DOTALL)
    assert bars is not None
    assert len(re.findall(r'<rect class="(?:sure|doubt)"', bars[0])) == 4


def test_margins_that_a_limit_stops_are_said_not_to_be_told() -> None:
    outcome = outcome_of(text_of(str(ROOT / "samples/vent.dseq")), "vent.dseq")

    def stop(_: int) -> None:
        raise LimitReached("1 zone (--most-zones)")

    said = " ".join(read_back(page(outcome, "", stop)).text)
    assert said.count("at least 0 s 1 zone (--most-zones)") == 4
    assert "nothing to keep apart" not in said


def test_a_short_that_was_found_is_no_limit_of_the_margins() -> None:
    """The verdicts that the outcome has are taken; what is possible has no margin, whatever the limit."""
    outcome = outcome_of(text_of(str(ROOT / "samples/faulty/vent_short_pause.dseq")), "vent.dseq")

    def stop(_: int) -> None:
        raise LimitReached("1 zone (--most-zones)")

    said = " ".join(read_back(page(outcome, "", stop)).text)
    assert "Undecided, not proven" not in said
    assert said.count("they meet for up to 709.01 ns") == 2


def test_no_text_of_a_file_is_taken_for_markup() -> None:
    evil = '</title><script>x()</script> <img src=x onerror=y> & "'
    drive = leg("a off off\nb on on", "  start a\n  a -> b when go\n  b -> a when back")
    drive = drive.replace('drive "leg"', f"drive \"{evil.replace(chr(34), chr(39))}\"")
    text = page(outcome_of(drive, "<b>.dseq"), "seqcheck report '<b>.dseq'", lambda _: None)
    found = read_back(text)
    assert evil.replace('"', "'") in found.text
    assert "<b>.dseq" in found.text


def test_an_undecided_hazard_is_never_shown_as_proven(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    source = ROOT / "samples/faulty/vent_short_pause.dseq"
    code = cli.main(["report", str(source), "--most-zones", "1"])
    out, _ = capsys.readouterr()
    said = " ".join(read_back(out).text)
    assert code == 3
    assert "Neither proven nor disproven." in said
    assert "possible in no run" not in said


def test_the_command(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    monkeypatch.chdir(tmp_path)
    Path("a b.dseq").write_text(text_of(str(ROOT / "samples/vent.dseq")), encoding="utf-8")
    Path("library.dseq").write_text('drive "parts"\nlet settle = 3 us\n', encoding="utf-8")
    assert cli.main(["report", "a b.dseq", "--out", "page.html"]) == 0
    assert capsys.readouterr() == ("", "")
    assert "seqcheck report 'a b.dseq' --out page.html" in read_back(Path("page.html").read_text("utf-8")).text
    assert cli.main(["report", "library.dseq"]) == 2
    assert capsys.readouterr()[1] == "seqcheck: error: library.dseq only serves 'use'; there is nothing to review\n"
    assert cli.main(["report", "missing.dseq"]) == 2
    assert cli.main(["report"]) == 2
