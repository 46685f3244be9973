"""The language server from inside: what it does how often, and what it does when the program itself fails."""

import os
import subprocess
import sys
import threading
from collections.abc import Iterator
from io import BytesIO
from pathlib import Path
from typing import Any

import pytest
from editor import PATIENCE, ROOT, at, framed
from reading import no_file
from test_serving import SAFE, UNSAFE, URI, VENT

from seqcheck import checking, confirming
from seqcheck.language.tidy import tidy
from seqcheck.messages import Problem, Problems
from seqcheck.serving import documents, meanings, server
from seqcheck.serving.positions import Lines
from seqcheck.serving.proofs import Limits
from seqcheck.serving.server import Server
from seqcheck.serving.wire import Broken, Reader
from seqcheck.source import Place


class Wire:
    """Both ends of a server in this process: messages in by `put`, messages out in `said`."""

    def __init__(self, pause: float = 0.0, seconds: float = PATIENCE) -> None:
        self.said: list[dict[str, Any]] = []
        self.heard = threading.Condition()
        self.server = Server(self, self, Limits(10**6, seconds, pause))  # type: ignore[arg-type]
        self.ask("initialize", {"capabilities": {}})

    def put(self, message: dict[str, Any]) -> None:
        """Take a message of the server."""
        with self.heard:
            self.said.append(message)
            self.heard.notify_all()

    def ask(self, method: str, params: Any) -> dict[str, Any]:
        """The answer to a request."""
        self.server._take({"jsonrpc": "2.0", "id": 0, "method": method, "params": params})
        return next(one for one in reversed(self.said) if one.get("id") == 0)

    def open(self, text: str, version: int = 1) -> None:
        """Open a text, or put another in its place."""
        item = {"uri": URI, "version": version, "text": text}
        self.server._take({"jsonrpc": "2.0", "method": "textDocument/didOpen", "params": {"textDocument": item}})

    def codes(self, version: int) -> list[list[str]]:
        """The codes of all diagnostics of a version, in the order in which they were published."""
        own = [one["params"] for one in self.said if one.get("method") == "textDocument/publishDiagnostics"]
        return [[each["code"] for each in one["diagnostics"]] for one in own if one["version"] == version]

    def judged(self, version: int) -> list[str]:
        """The codes of a version, once its proof is over."""
        with self.heard:
            done = self.heard.wait_for(lambda: any(one != ["unproven"] for one in self.codes(version)), PATIENCE)
        assert done
        return self.codes(version)[-1]


@pytest.fixture
def proofs(monkeypatch: pytest.MonkeyPatch) -> list[str]:
    """The titles of all drives whose proof was begun."""
    begun: list[str] = []
    real = checking.check

    def counted(drive: Any, *rest: Any) -> Any:
        begun.append(drive.title)
        return real(drive, *rest)

    monkeypatch.setattr(checking, "check", counted)
    return begun


# How often


def test_typing_reads_each_text_once_and_proves_only_the_last(
    proofs: list[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    read = []
    real = documents.drafted
    monkeypatch.setattr(documents, "drafted", lambda *all_: read.append(1) or real(*all_))
    wire = Wire(pause=1.0)
    for version in range(1, 11):
        wire.open(SAFE.replace('"leg"', f'"leg {version}"'), version)
    assert wire.judged(10) == []
    assert len(read) == 10
    assert proofs == ["leg 10"]
    assert all(wire.codes(version) == [["unproven"]] for version in range(1, 10))


def test_questions_read_and_prove_nothing(proofs: list[str], monkeypatch: pytest.MonkeyPatch) -> None:
    wire = Wire()
    wire.open(SAFE)
    wire.judged(1)
    monkeypatch.setattr(documents, "drafted", lambda *_: pytest.fail("it is read already"))
    for method in ("hover", "definition", "completion"):
        params = {"textDocument": {"uri": URI}, "position": at(SAFE, "go", "when go")}
        assert wire.ask(f"textDocument/{method}", params)["result"]
    assert len(proofs) == 1


def test_reading_and_answering_does_not_load_the_prover() -> None:
    """What costs most of the start of a lint is loaded in the thread that proves, when it first does."""
    code = (
        "import io, sys\n"
        "from seqcheck.serving.server import *\n"
        "server = Server(Reader(io.BytesIO(sys.stdin.buffer.read())), Writer(io.BytesIO()), Limits(1, 1, 3600))\n"
        "server.run()\n"
        "print(*({'networkx', 'rich', 'seqcheck.checking', 'seqcheck.proving.prove'} & sys.modules.keys()))\n"
        "print(len(server._desk.open))\n"
    )
    opened = {"textDocument": {"uri": URI, "version": 1, "text": VENT}}
    place = {"textDocument": {"uri": URI}, "position": {"line": 20, "character": 10}}
    data = framed({"jsonrpc": "2.0", "id": 1, "method": "initialize", "params": {"capabilities": {}}})
    data += framed({"jsonrpc": "2.0", "method": "textDocument/didOpen", "params": opened})
    for number, method in enumerate(("hover", "definition", "completion")):
        data += framed({"jsonrpc": "2.0", "id": number, "method": f"textDocument/{method}", "params": place})
    world = {**os.environ, "PYTHONPATH": str(ROOT)}
    ran = subprocess.run([sys.executable, "-c", code], input=data, env=world, capture_output=True, check=True)
    assert ran.stdout.decode().split("\n") == ["", "1", ""]


# Cancelling


def test_an_edit_ends_the_proof_that_runs(monkeypatch: pytest.MonkeyPatch) -> None:
    real, running, ended = checking.check, threading.Event(), []

    def endless(drive: Any, file: str, only: Any, observer: Any) -> Any:
        if drive.title != "endless":
            return real(drive, file, only, observer)
        running.set()
        try:
            while True:
                observer(0)
        except BaseException as stop:
            ended.append(type(stop).__name__)
            raise

    monkeypatch.setattr(checking, "check", endless)
    wire = Wire()
    wire.open(SAFE.replace('"leg"', '"endless"'), 1)
    assert running.wait(PATIENCE)
    wire.open(UNSAFE, 2)
    assert wire.judged(2) == ["overlap"]
    assert ended == ["_Old"]
    assert wire.codes(1) == [["unproven"]]


def test_a_closed_text_is_not_answered_for(monkeypatch: pytest.MonkeyPatch) -> None:
    running, go_on = threading.Event(), threading.Event()
    real = checking.check

    def slow(*all_: Any) -> Any:
        running.set()
        assert go_on.wait(PATIENCE)
        return real(*all_)

    monkeypatch.setattr(checking, "check", slow)
    wire = Wire()
    wire.open(UNSAFE, 1)
    assert running.wait(PATIENCE)
    closed = {"textDocument": {"uri": URI}}
    wire.server._take({"jsonrpc": "2.0", "method": "textDocument/didClose", "params": closed})
    go_on.set()
    running.clear()
    wire.open(UNSAFE, 2)
    assert wire.judged(2) == ["overlap"]
    assert wire.codes(1) == [["unproven"], []]


def test_a_limit_of_time_leaves_it_undecided() -> None:
    wire = Wire(seconds=0.0)
    wire.open(SAFE)
    assert wire.judged(1) == ["undecided"]


# Faults of the program


def raising(*_: Any) -> Any:
    raise RuntimeError("broken")


def test_a_fault_of_the_prover_is_a_finding_and_the_next_text_is_proven(monkeypatch: pytest.MonkeyPatch) -> None:
    wire = Wire()
    real = checking.check
    for fault in (raising, lambda *_: (_ for _ in ()).throw(confirming.Fault("it does not replay"))):
        monkeypatch.setattr(checking, "check", fault)
        wire.said.clear()
        wire.open(SAFE, 1)
        assert wire.judged(1) == ["internal-error"]
    monkeypatch.setattr(checking, "check", real)
    wire.open(SAFE, 2)
    assert wire.judged(2) == []


def test_a_fault_in_an_answer_is_an_error_of_the_protocol(monkeypatch: pytest.MonkeyPatch) -> None:
    wire = Wire()
    wire.open(SAFE)
    monkeypatch.setattr(meanings, "meaning", raising)
    params = {"textDocument": {"uri": URI}, "position": {"line": 0, "character": 0}}
    answer = wire.ask("textDocument/hover", params)
    assert answer["error"]["code"] == -32603
    assert answer["error"]["message"] == "internal error, please report it: RuntimeError: broken"
    monkeypatch.setattr(documents, "drafted", raising)
    wire.open(UNSAFE, 2)
    assert wire.said[-1]["method"] == "window/logMessage"


def test_what_cannot_be_proven_is_said(monkeypatch: pytest.MonkeyPatch) -> None:
    """What the pipeline refuses is a mistake here too."""
    problem = Problem(Place("leg.dseq", 1, 1, 1, 2), "not-proven-yet", "this cannot be proven yet", "take it out")

    def refusing(*_: Any) -> Any:
        raise Problems([problem])

    monkeypatch.setattr(checking, "check", refusing)
    wire = Wire()
    wire.open(SAFE)
    assert wire.judged(1) == ["not-proven-yet"]


# Formatting, which another part of the program offers


def test_formatting_is_offered_only_where_there_is_a_formatter(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(server, "FORMATTER", "no_such_formatter")
    wire = Wire()
    wire.open(SAFE)
    assert "documentFormattingProvider" not in wire.said[0]["result"]["capabilities"]
    assert wire.ask("textDocument/formatting", {"textDocument": {"uri": URI}})["error"]["code"] == -32601


FLUSH = "\n".join(line.strip() for line in SAFE.split("\n"))


@pytest.fixture
def formatter(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[None]:
    """A formatter that takes margins out."""
    code = (
        "from seqcheck.messages import Problem, Problems\n"
        "from seqcheck.source import Place\n"
        "def tidy(text, file, fetch):\n"
        "    if 'wide' in text:\n"
        "        raise Problems([Problem(Place(file, 1, 1, 1, 2), 'line-too-long', 'too wide')])\n"
        "    return '\\n'.join(line.strip() for line in text.split('\\n'))\n"
    )
    (tmp_path / "no_margins.py").write_text(code)
    monkeypatch.syspath_prepend(tmp_path)
    monkeypatch.setattr(server, "FORMATTER", "no_margins")
    yield
    sys.modules.pop("no_margins", None)


@pytest.mark.usefixtures("formatter")
def test_formatting_puts_the_tidy_text_in_place_of_all() -> None:
    wire = Wire()
    assert wire.said[0]["result"]["capabilities"]["documentFormattingProvider"] is True
    wire.open(SAFE)
    (edit,) = wire.ask("textDocument/formatting", {"textDocument": {"uri": URI}})["result"]
    assert edit["newText"] == FLUSH
    assert edit["range"]["start"] == {"line": 0, "character": 0}
    assert edit["range"]["end"] == {"line": SAFE.count("\n"), "character": 0}
    wire.open("\ufeff" + FLUSH)
    assert wire.ask("textDocument/formatting", {"textDocument": {"uri": URI}})["result"] == []
    wire.open(SAFE.replace('"leg"', '"wide"'))
    answer = wire.ask("textDocument/formatting", {"textDocument": {"uri": URI}})
    assert answer["error"] == {"code": -32803, "message": "leg.dseq:1:1: error: too wide [line-too-long]"}
    wire.open("stage\n")  # it has mistakes, which are shown already
    assert wire.ask("textDocument/formatting", {"textDocument": {"uri": URI}})["result"] is None


def test_a_text_that_tidying_would_alter_is_left_alone(monkeypatch: pytest.MonkeyPatch) -> None:
    """The formatter's own law is broken on purpose: it is an answer, in words, and no edit."""
    monkeypatch.setattr("seqcheck.language.tidy._written", lambda lines: [SAFE.replace("5 ps", "4 ps")])
    wire = Wire()
    wire.open(FLUSH)
    said = "tidied, the text would say something else, so it stays as it is"
    assert wire.ask("textDocument/formatting", {"textDocument": {"uri": URI}})["error"] == {
        "code": -32803,
        "message": f"internal error, please report it with the file: {said}",
    }


def test_the_formatter_of_this_version_is_offered() -> None:
    wire = Wire()
    wire.open(FLUSH)
    (edit,) = wire.ask("textDocument/formatting", {"textDocument": {"uri": URI}})["result"]
    assert edit["newText"] == tidy(FLUSH, "leg.dseq", no_file) != FLUSH
    wire.open(edit["newText"])
    assert wire.ask("textDocument/formatting", {"textDocument": {"uri": URI}})["result"] == []


# Positions and framing alone


@pytest.mark.parametrize("text", ["", "abc", "a\nb", "µ\U0001f525x\r\ny", "\ufeffab\rc", "e\u0301\U0001f525\U0001f525"])
def test_places_and_positions_are_each_others_inverse(text: str) -> None:
    lines = Lines(text)
    for number, line in enumerate(text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n").split("\n"), 1):
        assert lines.line(number) == line
        for column in range(1, len(line) + 2):
            position = lines.position(number, column)
            mark = int(number == 1 and text.startswith("\ufeff"))
            assert position["character"] == len(line[: column - 1].encode("utf-16-le")) // 2 + mark
            assert lines.place(position) == (number, column)


def test_positions_beyond_a_text_are_its_nearest() -> None:
    lines = Lines("a\U0001f525\nb")
    assert lines.place({"line": 0, "character": 2}) == (1, 2), "within a pair it is the first of the pair"
    assert lines.place({"line": 0, "character": 99}) == (1, 3)
    assert lines.place({"line": 99, "character": 0}) == (2, 1)
    assert lines.range(Place("f", 9, 9, 9, 9))["start"] == {"line": 1, "character": 1}
    assert lines.line(3) == ""


def test_framing_is_found_again_after_rubbish() -> None:
    """The body of a message without a length ends in the line that the next header begins in."""
    rubbish, cut_off = b'Content-Length: x\r\n\r\n{"a": 1}', b"Content-Length: 9\r\n\r\n12"
    reader = Reader(BytesIO(rubbish + framed(1) + b"\n\n" + framed(2) + cut_off))
    assert isinstance(reader.next(), Broken)
    assert [reader.next(), reader.next(), reader.next()] == [1, 2, None]


def test_a_message_that_is_too_long_is_passed_over(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("seqcheck.serving.wire.LARGEST", 10)
    reader = Reader(BytesIO(framed("x" * 100_000) + framed(3)))
    assert "100002 bytes" in reader.next().why
    assert reader.next() == 3


@pytest.mark.parametrize("path", ["/a b/µ.dseq", "/a/%41#?.dseq", "/a/\U0001f525.dseq"])
@pytest.mark.skipif(os.name == "nt", reason="these are paths of POSIX")
def test_paths_and_addresses_are_each_others_inverse(path: str) -> None:
    assert documents.path_of(documents.uri_of(path)) == path
    assert documents.uri_of(path) == Path(path).as_uri()
    assert documents.path_of("untitled:x") is None
    assert documents.path_of("file://elsewhere/x") is None


def test_a_problem_keeps_its_kind_as_the_code() -> None:
    problem = Problem(Place("leg.dseq", 1, 1, 1, 2), "some-kind", "what is wrong", "a way out")
    desk = documents.Desk()
    document = documents.Document(URI, 1, "x")
    (said,) = server.Teller(desk, True).said(document, server.Unread("leg.dseq", (problem,)))
    assert (said["code"], said["message"]) == ("some-kind", "what is wrong; a way out")


def test_no_place_of_a_text_makes_an_answer_fail() -> None:
    wire = Wire(pause=3600)
    for text in (VENT, VENT.replace("  U", " \U0001f525U"), VENT[:900], "", "\ufeff\r"):
        wire.open(text)
        lines = text.split("\n")
        for number in range(0, len(lines) + 1, 2):
            width = len(lines[number]) if number < len(lines) else 0
            for character in range(number % 5, width + 3, 5):
                params = {"textDocument": {"uri": URI}, "position": {"line": number, "character": character}}
                for method in ("hover", "definition", "completion"):
                    assert "result" in wire.ask(f"textDocument/{method}", params)
                    wire.said.clear()
