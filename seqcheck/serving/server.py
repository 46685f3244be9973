"""The server: its life, the texts that an editor opens, and the answers to what the editor asks."""

import importlib
import importlib.util
from collections.abc import Callable
from threading import RLock
from typing import Any

from seqcheck import __version__
from seqcheck.drive import Drive, Library
from seqcheck.language.names import Kind
from seqcheck.language.tidy import Altered
from seqcheck.messages import Problems
from seqcheck.serving import meanings
from seqcheck.serving.diagnostics import Diagnostic, Teller, waiting
from seqcheck.serving.documents import Desk, Document, Study, path_of
from seqcheck.serving.proofs import Limits, Proofs, Task
from seqcheck.serving.wire import Broken, Reader, Writer
from seqcheck.verdict import Answer, Budget, Failed, Unread

PARSE_ERROR, INVALID_REQUEST, METHOD_NOT_FOUND, INVALID_PARAMS, INTERNAL_ERROR = -32700, -32600, -32601, -32602, -32603
NOT_INITIALIZED, REQUEST_FAILED = -32002, -32803
_FULL = 1  # TextDocumentSyncKind
_WARN = 2  # MessageType
FORMATTER = "seqcheck.language.tidy"
"""Where `tidy(text, file, fetch)` is, which lines a text up and raises Problems where it cannot. Formatting is offered
only where that exists."""

ALTERED = "tidied, the text would say something else, so it stays as it is"
Formatter = Callable[[str, str, Callable[[str], str]], str]

_ITEM = {  # CompletionItemKind
    Kind.QUANTITY: 21,
    Kind.PART: 9,
    Kind.CARRIER: 9,
    Kind.SWITCH: 6,
    Kind.NODE: 5,
    Kind.MODE: 20,
    Kind.EVENT: 23,
    Kind.TRIP: 23,
    Kind.PORT: 5,
    Kind.WAIVED: 18,
    None: 14,
}


class Refusal(Exception):  # noqa: N818 - an answer, not a failure
    """An answer that says why there is none: a code of JSON-RPC or of the protocol, and words."""

    def __init__(self, code: int, text: str) -> None:
        super().__init__(text)
        self.code = code


class Server:
    """Serves one editor."""

    def __init__(self, reader: Reader, writer: Writer, limits: Limits) -> None:
        self._reader = reader
        self._writer = writer
        self._desk = Desk()
        self._proofs = Proofs(limits, self._proven, self._measured)
        self._teller = Teller(self._desk, related=False)
        self._lock = RLock()  # of what is published: an answer of the thread must not come after a newer text's
        self._watches = False
        self._state = "new"  # then "ready", "shut down"
        self._requests: dict[str, Callable[[Any], Any]] = {
            "shutdown": self._shutdown,
            "textDocument/hover": self._hover,
            "textDocument/definition": self._definition,
            "textDocument/completion": self._completion,
            "textDocument/formatting": self._formatting,
        }
        self._notices: dict[str, Callable[[Any], None]] = {
            "initialized": self._initialized,
            "textDocument/didOpen": self._opened,
            "textDocument/didChange": self._edited,
            "textDocument/didSave": self._saved,
            "textDocument/didClose": self._closed,
            "workspace/didChangeWatchedFiles": self._files_changed,
        }

    def run(self) -> int:
        """Serve until `exit` or the end of the input; 0 where `shutdown` came before, else 1."""
        while (message := self._reader.next()) is not None:
            if isinstance(message, Broken):
                self._refuse(None, PARSE_ERROR, message.why)
            elif isinstance(message, dict) and message.get("method") == "exit" and "id" not in message:
                break
            else:
                self._take(message)
        return 0 if self._state == "shut down" else 1

    # One message

    def _take(self, message: Any) -> None:
        if not isinstance(message, dict) or message.get("jsonrpc") != "2.0":
            self._refuse(None, INVALID_REQUEST, "this is no message of JSON-RPC 2.0")
            return
        number, method = message.get("id"), message.get("method")
        if method is None and "id" in message and ("result" in message or "error" in message):
            return  # an answer to what we asked
        if not isinstance(method, str) or isinstance(number, bool) or not isinstance(number, int | str | None):
            known = number if isinstance(number, int | str) and not isinstance(number, bool) else None
            self._refuse(known, INVALID_REQUEST, "a message needs a 'method' that is a text, and a fitting 'id'")
        elif "id" in message:
            self._answer(number, method, message.get("params"))
        else:
            self._notice(method, message.get("params"))

    def _answer(self, number: int | str | None, method: str, params: Any) -> None:
        try:
            result = self._result(method, params)
        except Refusal as refusal:
            self._refuse(number, refusal.code, str(refusal))
        except OSError:
            raise
        except Exception as fault:
            self._refuse(number, INTERNAL_ERROR, _fault(fault))
        else:
            self._writer.put({"id": number, "result": result})

    def _result(self, method: str, params: Any) -> Any:
        if self._state == "shut down":
            raise Refusal(INVALID_REQUEST, "the server is shut down")
        if method == "initialize":
            if self._state != "new":
                raise Refusal(INVALID_REQUEST, "the server is initialized already")
            return self._initialize(params)
        if self._state == "new":
            raise Refusal(NOT_INITIALIZED, "'initialize' must come first")
        if method not in self._requests:
            raise Refusal(METHOD_NOT_FOUND, f"there is no method '{method[:80]}' here")
        return self._requests[method](params)

    def _notice(self, method: str, params: Any) -> None:
        """Take a notification; it has no answer, so that what is wrong with it is logged."""
        if self._state != "ready" or method not in self._notices:
            return
        try:
            self._notices[method](params)
        except Refusal as refusal:
            self._log(f"{method}: {refusal}")
        except OSError:
            raise
        except Exception as fault:
            self._log(f"{method}: {_fault(fault)}")

    def _refuse(self, number: int | str | None, code: int, text: str) -> None:
        self._writer.put({"id": number, "error": {"code": code, "message": text}})

    def _log(self, text: str) -> None:
        self._writer.put({"method": "window/logMessage", "params": {"type": _WARN, "message": f"seqcheck: {text}"}})

    # Life

    def _initialize(self, params: Any) -> Any:
        if not isinstance(params, dict):
            raise Refusal(INVALID_PARAMS, "'initialize' needs its parameters")
        related = _inside(params, "capabilities", "textDocument", "publishDiagnostics", "relatedInformation")
        self._teller = Teller(self._desk, related is True)
        watching = _inside(params, "capabilities", "workspace", "didChangeWatchedFiles", "dynamicRegistration")
        self._watches = watching is True
        self._state = "ready"
        capabilities = {
            "positionEncoding": "utf-16",
            "textDocumentSync": {"openClose": True, "change": _FULL, "save": True},
            "hoverProvider": True,
            "definitionProvider": True,
            "completionProvider": {"triggerCharacters": ["~"]},
        }
        if _formatter() is not None:
            capabilities["documentFormattingProvider"] = True
        return {"capabilities": capabilities, "serverInfo": {"name": "seqcheck", "version": __version__}}

    def _initialized(self, params: Any) -> None:
        """Ask to be told of files that are changed outside the editor: an open text may use them."""
        if self._watches:
            options = {"watchers": [{"globPattern": "**/*.dseq"}]}
            asked = {"id": "files", "method": "workspace/didChangeWatchedFiles", "registerOptions": options}
            registered = {"registrations": [asked]}
            self._writer.put({"id": "files", "method": "client/registerCapability", "params": registered})

    def _shutdown(self, params: Any) -> None:
        self._state = "shut down"
        for uri in self._desk.open:
            self._proofs.forget(uri)

    # Texts

    def _opened(self, params: Any) -> None:
        uri = _need(params, str, "textDocument", "uri")
        text = _need(params, str, "textDocument", "text")
        self._put(uri, _inside(params, "textDocument", "version"), text)

    def _edited(self, params: Any) -> None:
        document = self._known(params)
        changes = _need(params, list, "contentChanges")
        if not changes:
            return
        text = _need(changes[-1], str, "text")
        if any(_inside(one, "range") is not None for one in changes):
            raise Refusal(INVALID_PARAMS, "only whole texts were agreed on, not changes of a part")
        self._put(document.uri, _inside(params, "textDocument", "version"), text)

    def _put(self, uri: str, version: Any, text: str) -> None:
        document = Document(uri, version if isinstance(version, int) else None, text)
        self._desk.open[uri] = document
        self._judge(document)
        self._judge_users(document)

    def _saved(self, params: Any) -> None:
        self._judge(self._known(params))

    def _closed(self, params: Any) -> None:
        document = self._known(params)
        with self._lock:
            self._proofs.forget(document.uri)
            del self._desk.open[document.uri]
            self._publish(document, [])
        self._judge_users(document)

    def _files_changed(self, params: Any) -> None:
        paths = [path_of(_need(one, str, "uri")) for one in _need(params, list, "changes")]
        users = {user.uri: user for path in paths for user in self._desk.users(path)}
        for user in users.values():
            self._judge(user)

    def _judge_users(self, document: Document) -> None:
        for user in self._desk.users(document.path):
            if user is not document:
                self._judge(user)

    def _judge(self, document: Document) -> None:
        """Read a text and say at once what is wrong with it; prove it later, if it is a drive without mistakes."""
        with self._lock:
            self._proofs.forget(document.uri)
            document.margins = None
        document.study = self._desk.read(document)
        found, problems = document.study.found, document.study.problems
        with self._lock:
            if isinstance(found, Drive):
                self._publish(document, waiting(document, found))
                self._proofs.ask(document.uri, document.file, found)
            elif isinstance(found, Library):
                self._publish(document, self._teller.said(document, found))
            else:
                self._publish(document, self._teller.said(document, Unread(document.file, problems)))

    def _proven(self, task: Task, answer: Answer) -> None:
        """Say what a proof came to, in the thread that made it."""
        with self._lock:
            document = self._desk.open.get(task.key)
            if document is None or not self._proofs.asked(task):
                return
            try:
                said = self._teller.said(document, answer)
            except Exception as fault:
                said = self._teller.said(document, Failed(document.file, _fault(fault)))
            self._publish(document, said)

    def _measured(self, task: Task, found: Budget | str) -> None:
        """Keep the margins of a text for whoever asks what stands in it, in the thread that measured them."""
        with self._lock:
            document = self._desk.open.get(task.key)
            if document is not None and self._proofs.asked(task):
                document.margins = found

    def _publish(self, document: Document, found: list[Diagnostic]) -> None:
        version = {} if document.version is None else {"version": document.version}
        params = {"uri": document.uri, **version, "diagnostics": found}
        self._writer.put({"method": "textDocument/publishDiagnostics", "params": params})

    # Questions

    def _known(self, params: Any) -> Document:
        uri = _need(params, str, "textDocument", "uri")
        if uri not in self._desk.open:
            raise Refusal(INVALID_PARAMS, "this text is not open")
        return self._desk.open[uri]

    def _at(self, params: Any) -> tuple[Document, Study, int, int]:
        document = self._known(params)
        line, character = (_need(params, int, "position", one) for one in ("line", "character"))
        if line < 0 or character < 0 or document.study is None:
            raise Refusal(INVALID_PARAMS, "there is no such position")
        return document, document.study, *document.lines.place({"line": line, "character": character})

    def _hover(self, params: Any) -> Any:
        document, study, line, column = self._at(params)
        text, place = meanings.meaning(study, line, column, document.margins)
        if not text:
            return None
        hover = {"contents": {"kind": "plaintext", "value": text}}
        return hover if place is None else {**hover, "range": document.lines.range(place)}

    def _definition(self, params: Any) -> Any:
        document, study, line, column = self._at(params)
        named = meanings.named_at(study, line, column)
        places = [] if named is None else meanings.definitions(study, named)
        return [self._desk.location(document, place) for place in places]

    def _completion(self, params: Any) -> Any:
        document, study, line, column = self._at(params)
        start, found = meanings.offers(study, document.lines, line, column)
        span = {"start": document.lines.position(line, start), "end": document.lines.position(line, column)}
        return [
            {
                "label": name,
                "kind": _ITEM[kind],
                "detail": kind.value if kind else "word of the language",
                "sortText": f"{order:05}",
                "textEdit": {"range": span, "newText": name},
            }
            for order, (name, kind) in enumerate(found)
        ]

    def _formatting(self, params: Any) -> Any:
        document, formatter = self._known(params), _formatter()
        if formatter is None:
            raise Refusal(METHOD_NOT_FOUND, "formatting is not offered")
        if document.study is None or document.study.problems:
            return None  # its mistakes are on the screen already
        mark = "\ufeff" if document.text.startswith("\ufeff") else ""
        fetch = self._desk.fetching(document, set())
        try:
            tidy = mark + formatter(document.text.removeprefix(mark), document.file, fetch)
        except Problems as problems:
            raise Refusal(REQUEST_FAILED, problems.found[0].line()) from None
        except Altered:
            raise Refusal(REQUEST_FAILED, f"internal error, please report it with the file: {ALTERED}") from None
        if tidy == document.text:
            return []
        return [{"range": document.lines.whole(), "newText": tidy}]


def _formatter() -> Formatter | None:
    """The formatter, where this version has one."""
    if importlib.util.find_spec(FORMATTER) is None:
        return None
    tidy: Formatter = importlib.import_module(FORMATTER).tidy
    return tidy


def _fault(fault: Exception) -> str:
    return f"internal error, please report it: {type(fault).__name__}: {fault}"


def _inside(data: Any, *path: str) -> Any:
    """What lies at a path in JSON data; None where there is nothing."""
    for step in path:
        data = data.get(step) if isinstance(data, dict) else None
    return data


def _need(data: Any, kind: type, *path: str) -> Any:
    """What lies at a path in JSON data, and must be of a kind."""
    found = _inside(data, *path)
    if not isinstance(found, kind) or (kind is int and isinstance(found, bool)):
        raise Refusal(INVALID_PARAMS, f"'{'.'.join(path)}' is missing or of the wrong kind")
    return found
