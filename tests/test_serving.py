"""The language server as an editor sees it: a process of its own, and real messages of the protocol (LSP 3.17)."""

import json
from pathlib import Path
from typing import Any

import pytest
from editor import ROOT, Editor, at, framed
from proofs import leg

URI = "file:///drives/leg.dseq"
STEPS = "  start a\n  a -> b when go\n    set A off\n    wait {} ps\n  b -> a when back\n    set B off\n    wait 9 ps"
HEAD = "clock 1 GHz, late by at most 0 ps\nwrites together"
SAFE = leg("a on off\nb off on", STEPS.format(5), head=HEAD)
UNSAFE = SAFE.replace("wait 5 ps", "wait 4 ps")
HEAVY = leg(
    "i off off\nw k off\nz keep off\nn off on",
    "  start i\n  i -> w when go earliest 200 ps\n  w -> i after 4 ps\n  z -> n after 215 ps\n"
    "  n -> i when back earliest 1 ns",
    parts="p on 3 ps off 8 ps",
    more="carriers\n  k 50 GHz duty 50 % updates at rise",
    trips="  stop from w -> z at once",
)
"""Safe, but only hundreds of zones show it."""
VENT = (ROOT / "samples" / "vent.dseq").read_text(encoding="utf-8")
PUMP = (ROOT / "samples" / "faulty" / "pump_short_pause.dseq").read_text(encoding="utf-8")


def asking(uri: str, position: dict[str, int]) -> dict[str, Any]:
    """The parameters of a question about a place."""
    return {"textDocument": {"uri": uri}, "position": position}


def texts(range_: dict[str, Any], text: str) -> str:
    """What stands in a range of one line."""
    start, end = range_["start"], range_["end"]
    assert start["line"] == end["line"]
    units = text.split("\n")[start["line"]].encode("utf-16-le")
    return units[2 * start["character"] : 2 * end["character"]].decode("utf-16-le")


# Findings while typing


def test_a_faulty_sample_shows_its_finding_with_the_run_and_a_cured_one_none() -> None:
    with Editor() as editor:
        found = editor.judged(URI, editor.open(URI, PUMP))
        assert [one["code"] for one in found] == ["overlap"]
        assert found[0]["severity"] == 1
        assert found[0]["source"] == "seqcheck"
        assert found[0]["range"]["start"] == {"line": 54, "character": 2}
        assert "L1 can be joined to L2 through KM, KY and KD" in found[0]["message"]
        beside = found[0]["relatedInformation"]
        assert {one["location"]["uri"] for one in beside} == {URI}
        shown = [(one["location"]["range"]["start"]["line"], one["message"]) for one in beside]
        assert any(line == 54 and "t = 0 s: " in text for line, text in shown)
        assert any(text.endswith("overlap begins") for _, text in shown)
        assert shown[-1] == (56, "to cure it: make this wait at least 17.34 ms")
        waits = PUMP.split("\n")[56]
        cured = PUMP.replace(waits, "    wait 17.34 ms")
        assert editor.judged(URI, editor.edit(URI, cured)) == []
        assert editor.end() == (0, b"")


def test_nothing_looks_proven_before_it_is() -> None:
    """An empty list means proven, so that a text of which nothing is known has a diagnostic that says so."""
    with Editor() as editor:
        editor.open(URI, SAFE)
        (first,) = editor.said(URI)
        assert (first["code"], first["severity"]) == ("unproven", 3)
        assert editor.said(URI) == []


def test_mistakes_of_reading_come_at_once_with_their_ranges() -> None:
    wrong = SAFE.replace("wait 5 ps", "wait 5 pss").replace("when go", "when")
    with Editor() as editor:
        editor.open(URI, wrong)
        found = editor.said(URI)
        assert [one["code"] for one in found] == ["syntax", "unknown-unit"]
        assert texts(found[1]["range"], wrong) == "pss"
        assert found[1]["message"] == "'pss' is no unit; did you mean 'ps'?"
        assert editor.judged(URI, editor.edit(URI, SAFE)) == []


def test_undecided_is_said_as_such() -> None:
    with Editor("--most-zones", "60") as editor:
        found = editor.judged(URI, editor.open(URI, HEAVY))
        assert {one["code"] for one in found} == {"undecided"}
        assert {one["severity"] for one in found} == {2}
        assert all("60 zones in the editor" in one["message"] for one in found)
    with Editor() as editor:
        found = editor.judged(URI, editor.open(URI, HEAVY))
        assert "undecided" not in {one["code"] for one in found}


def test_a_library_has_nothing_to_prove() -> None:
    with Editor() as editor:
        (found,) = editor.judged(URI, editor.open(URI, 'drive "parts"\nlet a = 1 us\n'))
        assert (found["code"], found["severity"]) == ("nothing-to-prove", 3)


def test_an_editor_that_shows_no_places_beside_gets_none() -> None:
    with Editor(related=False) as editor:
        found = editor.judged(URI, editor.open(URI, UNSAFE))
        assert found
        assert all("relatedInformation" not in one for one in found)


def test_columns_are_utf_16_code_units() -> None:
    """One code unit for µ, two for what lies beyond the basic plane."""
    with Editor() as editor:
        for sign, units in (("x", 1), ("µ", 1), ("漢", 1), ("\U0001f525", 2), ("e\u0301", 2)):
            text = f'{SAFE}\nrules\n  waive short for A because "{sign}" more\n'
            editor.open(URI, text)
            (found,) = editor.said(URI)
            assert found["range"]["start"]["character"] == len('  waive short for A because "" ') + units
            assert texts(found["range"], text) == "more"
            (idle,) = editor.judged(URI, editor.edit(URI, text.replace(" more", "")))
            assert idle["code"] == "idle-waiver"
            assert texts(idle["range"], text) == f'waive short for A because "{sign}"'


def test_a_byte_order_mark_is_a_character_to_the_editor() -> None:
    with Editor() as editor:
        editor.open(URI, '\ufeffdrive "leg" x\n')
        starts = [one["range"]["start"] for one in editor.said(URI) if one["code"] == "syntax"]
        assert starts == [{"line": 0, "character": len('\ufeffdrive "leg" ')}]


def test_what_is_no_text_is_a_mistake_with_its_place() -> None:
    with Editor() as editor:
        editor.open(URI, b'drive "a\\ud800"'.decode("unicode_escape"))
        (found,) = editor.said(URI)
        assert found["code"] == "encoding"
        assert found["range"]["start"] == {"line": 0, "character": 8}


# Files that others use


def folder(path: Path) -> tuple[str, str, str, str]:
    """A library and a drive that uses it: their addresses and texts."""
    library = 'drive "parts µ"\nlet pause = 5 ps\nparts\n  q on 3 ps off 8 ps\n'
    user = SAFE.replace(HEAD, f'{HEAD}\nuse "parts µ.dseq"').replace("wait 5 ps", "wait pause")
    (path / "parts µ.dseq").write_text(library, encoding="utf-8")
    (path / "user.dseq").write_text(user, encoding="utf-8")
    return (path / "parts µ.dseq").as_uri(), library, (path / "user.dseq").as_uri(), user


def test_a_text_is_judged_again_when_one_that_it_uses_is_edited(tmp_path: Path) -> None:
    library_uri, library, uri, user = folder(tmp_path)
    with Editor() as editor:
        version = editor.open(uri, user)
        assert editor.judged(uri, version) == []
        editor.open(library_uri, library)
        assert editor.judged(uri, version) == []
        editor.edit(library_uri, library.replace("5 ps", "4 ps"))
        assert [one["code"] for one in editor.judged(uri, version)] == ["overlap"]
        editor.edit(library_uri, library.replace("5 ps", "5 pss"))
        (found,) = editor.judged(uri, version)
        assert texts(found["range"], user) == 'use "parts µ.dseq"'
        assert found["message"].startswith("in parts µ.dseq:2:15: 'pss' is no unit")
        assert found["relatedInformation"][0]["location"]["uri"] == library_uri
        editor.tell("textDocument/didClose", {"textDocument": {"uri": library_uri}})
        assert editor.judged(uri, version) == [], "the file on disk counts again"


def test_a_used_file_that_changes_on_disk(tmp_path: Path) -> None:
    library_uri, library, uri, user = folder(tmp_path)
    with Editor(watches=True) as editor:
        asked = editor.next(method="client/registerCapability")
        assert asked["params"]["registrations"][0]["method"] == "workspace/didChangeWatchedFiles"
        editor.send(framed({"jsonrpc": "2.0", "id": asked["id"], "result": None}))
        version = editor.open(uri, user)
        assert editor.judged(uri, version) == []
        (tmp_path / "parts µ.dseq").write_text(library.replace("5 ps", "4 ps"), encoding="utf-8")
        editor.tell("workspace/didChangeWatchedFiles", {"changes": [{"uri": library_uri, "type": 2}]})
        assert [one["code"] for one in editor.judged(uri, version)] == ["overlap"]
        (tmp_path / "parts µ.dseq").unlink()
        editor.tell("textDocument/didSave", {"textDocument": {"uri": uri}})
        (found, *_) = editor.judged(uri, version)
        assert found["code"] == "unreadable-file"
        assert texts(found["range"], user) == '"parts µ.dseq"'


def test_a_text_that_is_no_file_uses_none() -> None:
    with Editor() as editor:
        editor.open("untitled:Untitled-1", SAFE.replace(HEAD, f'{HEAD}\nuse "a.dseq"'))
        (found,) = editor.said("untitled:Untitled-1")
        assert (found["code"], "no file yet" in found["message"]) == ("unreadable-file", True)


def test_definitions_lead_into_a_used_file(tmp_path: Path) -> None:
    library_uri, library, uri, user = folder(tmp_path)
    with Editor() as editor:
        editor.open(uri, user)
        (place,) = editor.ask("textDocument/definition", asking(uri, at(user, "pause", "wait pause")))
        assert place["uri"] == library_uri
        assert texts(place["range"], library) == "pause"
        (place,) = editor.ask("textDocument/definition", asking(uri, at(user, "parts µ", "use")))
        assert (place["uri"], place["range"]["start"]) == (library_uri, {"line": 0, "character": 0})


# Names


DEFINED = [
    ("coupler", "through coupler", "  coupler ", "coupler"),
    ("UH", "set UH off", "  leg U ", "UH"),
    ("open", "-> open", "  open ", "open"),
    ("V", "winding", "  leg V ", "V"),
    ("main", "open     main", "  main ", "main"),
]


@pytest.mark.parametrize(("word", "inside", "line", "target"), DEFINED, ids=[one[0] for one in DEFINED])
def test_go_to_definition(word: str, inside: str, line: str, target: str) -> None:
    text = VENT.replace("    set all off", "    set UH off\n    set all off", 1)
    with Editor() as editor:
        editor.open(URI, text)
        (place,) = editor.ask("textDocument/definition", asking(URI, at(text, word, inside)))
        assert place["uri"] == URI
        assert text.split("\n")[place["range"]["start"]["line"]].startswith(line)
        assert texts(place["range"], text) == target


def test_what_has_no_definition_leads_nowhere() -> None:
    with Editor() as editor:
        editor.open(URI, VENT)
        assert editor.ask("textDocument/definition", asking(URI, at(VENT, "reset", "start reset"))) == []
        assert editor.ask("textDocument/definition", asking(URI, {"line": 0, "character": 3})) == []
        assert editor.ask("textDocument/definition", asking(URI, {"line": 9999, "character": 9999})) == []


def hovered(editor: Editor, text: str, word: str, inside: str = "") -> list[str]:
    """What the editor shows over a word, by lines."""
    found = editor.ask("textDocument/hover", asking(URI, at(text, word, inside)))
    assert found["contents"]["kind"] == "plaintext"
    return list(found["contents"]["value"].split("\n"))


def test_hover_says_what_a_name_means() -> None:
    """Clock 48 MHz within 1 %, late by at most 3 us: values worked out by hand from section 2 of the meaning."""
    text = VENT.replace("writes one", "let tick = 1 / 48 MHz\nlet share = 1 / 3 * 100 %\nwrites one", 1)
    with Editor() as editor:
        editor.open(URI, text)
        assert hovered(editor, text, "coupler", "on 1.5") == [
            "part coupler",
            "turns on after 1.5 us to 4 us",
            "turns off after 3 us to 12 us",
        ]
        assert "  turns on 1.52 us to 4.06 us after its command" in hovered(editor, text, "UH", "leg U")
        assert "pin PA8 of UH: active high, rests low, which is off" in hovered(editor, text, "UH", "leg U")
        assert hovered(editor, text, "main", "20 kHz")[:3] == [
            "carrier main, 20 kHz",
            "period 49.50495 us to 50.505051 us",
            "duty 5 % to 95 %: high for 2.475247 us to 47.979798 us and low for 2.475247 us to 47.979798 us",
        ]
        assert hovered(editor, text, "settle") == [
            "settle = 16 us",
            "a wait of it takes 15.841584 us to 19.161617 us",
        ]
        assert hovered(editor, text, "tick")[0] == "tick = 20.833 ns to 20.834 ns, which is about 20833.333333 ps"
        assert hovered(editor, text, "share") == ["share = about 33.333333 %"]
        does = "does: driven from U to V (P to N); by turns one end held, V at N"
        assert does in hovered(editor, text, "open", "main")
        assert hovered(editor, text, "overheat")[:2] == [
            "trip overheat: from close or open -> idle",
            "is taken at most 33 us after it arrives",
        ]
        assert hovered(editor, text, "->", "reverse_cmd")[0] == "move open -> close"
        assert hovered(editor, text, "reverse_cmd")[:2] == ["event reverse_cmd", "move open -> close"]
        assert editor.ask("textDocument/hover", asking(URI, {"line": 0, "character": 0})) is None


def test_hover_and_definition_work_while_another_line_is_mistaken() -> None:
    text = VENT.replace("rails P N", "rails P N\n  winding", 1)
    with Editor() as editor:
        editor.open(URI, text)
        assert editor.said(URI)[0]["code"] == "syntax"
        assert hovered(editor, text, "coupler", "on 1.5")[0] == "part coupler"
        assert hovered(editor, text, "open", "main")[-1] == "what its row does is shown once the file has no mistakes"


def offered(editor: Editor, text: str, line: str, old: str) -> list[str]:
    """What the editor offers at the end of a line that is put in place of an old one."""
    changed = text.replace(old, line, 1)
    assert changed != text
    editor.edit(URI, changed)
    number = changed[: changed.index(line) + len(line)].count("\n")
    character = len(changed.split("\n")[number].encode("utf-16-le")) // 2
    found = editor.ask("textDocument/completion", asking(URI, {"line": number, "character": character}))
    assert [one["sortText"] for one in found] == sorted(one["sortText"] for one in found)
    return [one["label"] for one in found]


def test_completion_offers_what_may_stand_there() -> None:
    old = next(line for line in VENT.split("\n") if "when reverse_cmd" in line)
    modes = ["idle", "open", "close", "brake", "service", "reset"]
    with Editor() as editor:
        editor.open(URI, VENT)
        assert offered(editor, VENT, "  open -> cl", old) == modes
        assert offered(editor, VENT, f"{old}\n    wait ", old) == ["settle", "at", "up"]
        assert offered(editor, VENT, f"{old}\n    wait 5 u", old)[:3] == ["to", "ps", "ns"]
        assert offered(editor, VENT, f"{old}\n    set ", old) == ["UH", "UL", "VH", "VL", "all"]
        assert set(offered(editor, VENT, f"{old}\n    set UH ", old)) == {"main", "on", "off", "keep", "free"}
        assert offered(editor, VENT, f"{old}\n    set UH ~m", old) == ["main"]
        assert offered(editor, VENT, f"{old}  # wait ", old) == []
        start = offered(editor, VENT, f"{old}\n  ", old)
        assert {"set", "wait", "any", "rules", *modes} <= set(start)
        assert not {"clock", "moves", "stage"} & set(start), "a file has these once"


def test_a_completion_takes_the_place_of_what_is_begun() -> None:
    text = VENT.replace("start reset", "start res", 1)
    with Editor() as editor:
        editor.open(URI, text)
        place = at(text, "start res")
        position = {"line": place["line"], "character": place["character"] + len("start res")}
        found = editor.ask("textDocument/completion", asking(URI, position))
        assert {texts(one["textEdit"]["range"], text) for one in found} == {"res"}


# The protocol


def test_life() -> None:
    """Sections "Server lifecycle" of the specification: -32002 before `initialize`, -32600 after `shutdown`."""
    with Editor(start=False) as editor:
        assert editor.request("textDocument/hover", {})["error"]["code"] == -32002
        assert editor.request("initialize", None)["error"]["code"] == -32602
        hello = editor.ask("initialize", {"capabilities": {}})
        assert hello["capabilities"]["positionEncoding"] == "utf-16"
        assert hello["capabilities"]["textDocumentSync"]["change"] == 1
        assert editor.request("initialize", {"capabilities": {}})["error"]["code"] == -32600
        assert editor.request("nonsense", {})["error"]["code"] == -32601
        assert editor.ask("shutdown") is None
        assert editor.request("textDocument/hover", {})["error"]["code"] == -32600
        editor.tell("exit", None)
        assert editor.process.wait(60) == 0


def test_leaving_without_shutdown_is_code_1() -> None:
    with Editor() as editor:
        editor.tell("exit", None)
        assert editor.process.wait(60) == 1
    with Editor() as editor:
        assert editor.process.stdin is not None
        editor.process.stdin.close()
        assert editor.process.wait(60) == 1
        assert editor.process.stderr is not None
        assert editor.process.stderr.read() == b""


MALFORMED = [
    (b"this is no message\r\n", -32700),
    (b"Content-Type: x\r\n\r\n", -32700),
    (b"Content-Length: many\r\n\r\n", -32700),
    (b'Content-Length: x\r\n\r\n{"jsonrpc": "2.0"}', -32700),
    (framed(b'{"jsonrpc": '), -32700),
    (framed(b'"\xff"'), -32700),
    (framed(b"[" * 100_000), -32700),
    (b"Content-Type: text; charset=latin-1\r\n" + framed({"jsonrpc": "2.0", "id": 1, "method": "shutdown"}), -32700),
    (framed([]), -32600),
    (framed([{"jsonrpc": "2.0", "id": 1, "method": "shutdown"}]), -32600),
    (framed(17), -32600),
    (framed({"id": 1, "method": "shutdown"}), -32600),
    (framed({"jsonrpc": "2.0", "id": 1}), -32600),
    (framed({"jsonrpc": "2.0", "id": True, "method": "shutdown"}), -32600),
    (framed({"jsonrpc": "2.0", "id": {}, "method": 5}), -32600),
]


@pytest.mark.parametrize(("data", "code"), MALFORMED, ids=[str(one[0][:40]) for one in MALFORMED])
def test_a_malformed_message_is_answered_and_the_next_one_read(data: bytes, code: int) -> None:
    with Editor() as editor:
        editor.send(data)
        editor.send(framed({"jsonrpc": "2.0", "id": "after", "method": "nonsense"}))
        answer = editor.next()
        assert answer["error"]["code"] == code
        assert editor.next(id="after")["error"]["code"] == -32601
        assert editor.end() == (0, b"")


def test_headers_may_be_in_any_case_and_order() -> None:
    body = json.dumps({"jsonrpc": "2.0", "id": "x", "method": "nonsense"}).encode()
    with Editor() as editor:
        kind = b"Content-Type: application/vscode-jsonrpc; charset=utf8\r\n"
        editor.send(b"content-length:%d\r\n%s\r\n%s" % (len(body), kind, body))
        editor.send(b"\r\n%sCONTENT-LENGTH : %d\r\n\r\n%s" % (kind, len(body), body))
        assert [editor.next()["error"]["code"] for _ in range(2)] == [-32601, -32601]


WRONG = [
    ("textDocument/hover", None),
    ("textDocument/hover", []),
    ("textDocument/hover", {"textDocument": {"uri": 5}, "position": {"line": 0, "character": 0}}),
    ("textDocument/hover", {"textDocument": {"uri": "file:///no"}, "position": {"line": 0, "character": 0}}),
    ("textDocument/hover", {"textDocument": {"uri": URI}, "position": {"line": -1, "character": 0}}),
    ("textDocument/definition", {"textDocument": {"uri": URI}, "position": {"line": "0", "character": 0}}),
    ("textDocument/completion", {"textDocument": {"uri": URI}, "position": {"line": True, "character": 0}}),
]


@pytest.mark.parametrize(("method", "params"), WRONG)
def test_wrong_parameters_are_answered_as_such(method: str, params: Any) -> None:
    with Editor() as editor:
        editor.open(URI, SAFE)
        assert editor.request(method, params)["error"]["code"] == -32602


def test_a_wrong_notification_is_logged_and_changes_nothing() -> None:
    with Editor() as editor:
        version = editor.open(URI, SAFE)
        assert editor.judged(URI, version) == []
        part = {"start": {"line": 0, "character": 0}, "end": {"line": 0, "character": 1}}
        for params in (
            None,
            {"textDocument": {"uri": "file:///no"}, "contentChanges": [{"text": ""}]},
            {"textDocument": {"uri": URI}, "contentChanges": [{"range": part, "text": ""}]},
            {"textDocument": {"uri": URI}, "contentChanges": [{}]},
        ):
            editor.tell("textDocument/didChange", params)
            logged = editor.next(method="window/logMessage")["params"]
            assert logged["message"].startswith("seqcheck: textDocument/didChange: ")
        editor.tell("$/setTrace", {"value": "off"})
        assert editor.request("$/nonsense", {})["error"]["code"] == -32601
        assert hovered(editor, SAFE, "A", "leg")[0] == "switch A"
