"""Messages on two streams: the base protocol of the Language Server Protocol 3.17, which carries JSON-RPC 2.0.

A message is a header block, whose `Content-Length` counts bytes, an empty line, and a body of UTF-8.
"""

import json
import re
from threading import Lock
from typing import Any, BinaryIO

from seqcheck.records import dataclass

LARGEST = 2**26
"""Bytes of a body; a larger one is passed over unread."""

_PIECE = 2**16
_LENGTH = re.compile(rb"content-length[ \t]*:[ \t]*([0-9]{1,15})[ \t]*$", re.IGNORECASE)
_FIELD = re.compile(rb"[A-Za-z][A-Za-z0-9-]*[ \t]*:")
_TYPE = re.compile(rb"content-type[ \t]*:(.*)$", re.IGNORECASE)
_CHARSET = re.compile(rb"charset[ \t]*=[ \t]*\"?([^\s;\"]+)", re.IGNORECASE)
_UTF8 = (b"utf-8", b"utf8")


@dataclass(frozen=True, slots=True)
class Broken:
    """Bytes that were no message, and why."""

    why: str


class Reader:
    """Takes messages off a stream."""

    def __init__(self, stream: BinaryIO) -> None:
        self._stream = stream
        self._lost = False  # what came last was no header, so a body may stand before the next one on its line

    def next(self) -> Any | Broken | None:
        """The next body as JSON data, what was broken, or None at the end of the stream.

        After broken bytes the next header is looked for, and all up to it is one Broken.
        """
        length: int | None = None
        strange, begun = b"", False
        while line := self._stream.readline(_PIECE):
            said = line.strip()
            if match := (_LENGTH.search if self._lost else _LENGTH.match)(said):
                length, begun, self._lost = int(match[1]), True, False
            elif said == b"" and length is not None:
                return self._body(length, strange)
            elif (said == b"" and begun) or (said and not _FIELD.match(said)):
                if self._lost:
                    continue
                self._lost = True
                return Broken("no 'Content-Length' where a message should begin")
            elif said:
                begun = not self._lost
                strange = _strange(said) or strange
        return None

    def _body(self, length: int, strange: bytes) -> Any | Broken | None:
        if length > LARGEST:
            left = length
            while left and (piece := self._stream.read(min(left, _PIECE))):
                left -= len(piece)
            return Broken(f"a message of {length} bytes, more than {LARGEST}")
        body = self._stream.read(length)
        if len(body) < length:
            return None
        if strange:
            return Broken(f"a message in '{ascii(strange.decode('latin-1'))[1:-1]}', not in utf-8")
        try:
            return json.loads(body.decode("utf-8"))
        except (ValueError, RecursionError) as why:
            return Broken(f"a body that is no JSON: {type(why).__name__}")


def _strange(field: bytes) -> bytes:
    """The encoding that a field names, if it is not UTF-8."""
    kind = _TYPE.match(field)
    charset = _CHARSET.search(kind[1]) if kind else None
    return charset[1] if charset and charset[1].lower() not in _UTF8 else b""


class Writer:
    """Puts messages on a stream, each whole, from any thread."""

    def __init__(self, stream: BinaryIO) -> None:
        self._stream = stream
        self._lock = Lock()

    def put(self, message: dict[str, Any]) -> None:
        """Write one message; raises OSError where nobody listens."""
        body = json.dumps({"jsonrpc": "2.0", **message}, separators=(",", ":")).encode("ascii")
        with self._lock:
            self._stream.write(b"Content-Length: %d\r\n\r\n" % len(body) + body)
            self._stream.flush()
