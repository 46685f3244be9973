"""An editor for tests: it starts the server as a process of its own and speaks the protocol to it."""

import json
import os
import subprocess
import sys
import threading
from pathlib import Path
from queue import Empty, Queue
from typing import Any

ROOT = Path(__file__).parent.parent
PATIENCE = 60.0
"""Seconds that a test waits for a message; what is not there by then never comes."""


def framed(message: Any) -> bytes:
    """A message as bytes."""
    body = message if isinstance(message, bytes) else json.dumps(message).encode("utf-8")
    return b"Content-Length: %d\r\n\r\n" % len(body) + body


class Editor:
    """Speaks to one server; used with `with`, which ends it."""

    def __init__(self, *arguments: str, related: bool = True, start: bool = True, watches: bool = False) -> None:
        world = {**os.environ, "PYTHONPATH": str(ROOT)}
        call = [sys.executable, "-m", "seqcheck", "serve", *arguments]
        pipe = subprocess.PIPE
        self.process = subprocess.Popen(call, stdin=pipe, stdout=pipe, stderr=pipe, env=world)
        self.got: Queue[dict[str, Any]] = Queue()
        self.kept: list[dict[str, Any]] = []
        self.stray = b""  # what was on standard output and no message
        self._number = 0
        self._version = 0
        self._listener = threading.Thread(target=self._listen, daemon=True)
        self._listener.start()
        if start:
            capabilities = {
                "textDocument": {"publishDiagnostics": {"relatedInformation": related}},
                "workspace": {"didChangeWatchedFiles": {"dynamicRegistration": watches}},
            }
            self.hello = self.ask("initialize", {"processId": None, "rootUri": None, "capabilities": capabilities})
            self.tell("initialized", {})

    def __enter__(self) -> "Editor":
        return self

    def __exit__(self, *_: object) -> None:
        if self.process.poll() is None:
            self.process.kill()
        self.process.wait(PATIENCE)

    def _listen(self) -> None:
        out = self.process.stdout
        assert out is not None
        while header := out.readline():
            if not header.startswith(b"Content-Length: "):
                self.stray += header
                continue
            assert out.readline() == b"\r\n"
            body = out.read(int(header.removeprefix(b"Content-Length: ")))
            message = json.loads(body)
            assert message["jsonrpc"] == "2.0"
            self.got.put(message)

    # Saying

    def send(self, data: bytes) -> None:
        """Raw bytes."""
        assert self.process.stdin is not None
        self.process.stdin.write(data)
        self.process.stdin.flush()

    def tell(self, method: str, params: Any) -> None:
        """A notification."""
        self.send(framed({"jsonrpc": "2.0", "method": method, "params": params}))

    def request(self, method: str, params: Any) -> dict[str, Any]:
        """The whole answer to a request."""
        self._number += 1
        self.send(framed({"jsonrpc": "2.0", "id": self._number, "method": method, "params": params}))
        return self.next(id=self._number)

    def ask(self, method: str, params: Any = None) -> Any:
        """The result of a request that must have one."""
        answer = self.request(method, params)
        assert "error" not in answer, answer
        return answer["result"]

    # Hearing

    def next(self, **fields: Any) -> dict[str, Any]:
        """The next message with these fields; others are kept for later."""
        for message in self.kept:
            if all(message.get(name) == value for name, value in fields.items()):
                self.kept.remove(message)
                return message
        while True:
            try:
                message = self.got.get(timeout=PATIENCE)
            except Empty:
                raise AssertionError(f"nothing came with {fields}; kept: {self.kept}") from None
            if all(message.get(name) == value for name, value in fields.items()):
                return message
            self.kept.append(message)

    # Texts

    def open(self, uri: str, text: str) -> int:
        """Open a text; its version."""
        self._version += 1
        item = {"uri": uri, "languageId": "dseq", "version": self._version, "text": text}
        self.tell("textDocument/didOpen", {"textDocument": item})
        return self._version

    def edit(self, uri: str, text: str) -> int:
        """Put another text in place of one; its version."""
        self._version += 1
        document = {"uri": uri, "version": self._version}
        self.tell("textDocument/didChange", {"textDocument": document, "contentChanges": [{"text": text}]})
        return self._version

    def said(self, uri: str) -> list[dict[str, Any]]:
        """The next diagnostics of a text."""
        while True:
            message = self.next(method="textDocument/publishDiagnostics")
            if message["params"]["uri"] == uri:
                return list(message["params"]["diagnostics"])

    def judged(self, uri: str, version: int) -> list[dict[str, Any]]:
        """The diagnostics of one version of a text when no proof is under way any more."""
        while True:
            params = self.next(method="textDocument/publishDiagnostics")["params"]
            own = params["uri"] == uri and params.get("version") == version
            if own and not any(one["code"] == "unproven" for one in params["diagnostics"]):
                return list(params["diagnostics"])

    def end(self) -> tuple[int, bytes]:
        """Shut down and leave; the exit code, and what stood on standard error."""
        self.ask("shutdown")
        self.tell("exit", None)
        code = self.process.wait(PATIENCE)
        self._listener.join(PATIENCE)
        assert self.stray == b""
        assert self.process.stderr is not None
        return code, self.process.stderr.read()


def at(text: str, word: str, inside: str = "", nth: int = 0) -> dict[str, int]:
    """The position of a word in the line that contains `inside`, in UTF-16 code units."""
    lines = text.split("\n")
    number = next(place for place, line in enumerate(lines) if inside in line and word in line)
    column = -1
    for _ in range(nth + 1):
        column = lines[number].index(word, column + 1)
    return {"line": number, "character": len(lines[number][:column].encode("utf-16-le")) // 2}
