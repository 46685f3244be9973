"""What is read from the world: files, standard input, folders of files."""

import errno
import os
import sys
from collections.abc import Iterator
from typing import BinaryIO

from seqcheck.arguments import wrong
from seqcheck.messages import Problem, Problems
from seqcheck.source import Place, printable

STDIN = "-"
SUFFIX = ".dseq"
_LARGEST = 1 << 28
"""Bytes of a file that are read; evidence may be long, a drive-sequence file is far shorter."""


def reason_of(refusal: Exception) -> str:
    """Why the world refused a file or stream, in its own words."""
    return getattr(refusal, "strerror", None) or str(refusal)


def files_of(paths: list[str]) -> Iterator[str]:
    """The files that a call names: a folder stands for every *.dseq in it."""
    for path in paths:
        if path == STDIN or not os.path.isdir(path):
            yield path
            continue
        found = sorted(name for name in os.listdir(path) if name.endswith(SUFFIX))
        if not found:
            wrong(f"there is no *.dseq file in the folder '{printable(path)}'; name a file or another folder")
        yield from (name if path == "." else os.path.join(path, name) for name in found)


def text_of(file: str) -> str:
    """The text of a file named in the call, or of standard input; raises Problems where there is none."""
    return _decoded(data_of(file), file)


def used_text(file: str) -> str:
    """The text of a file that `use` names, which is never standard input; raises OSError where it cannot be opened."""
    return _decoded(_data(file), file)


def data_of(file: str) -> bytes:
    """As `text_of`, the bytes."""
    try:
        return _whole(sys.stdin.buffer) if file == STDIN else _data(file)
    except (OSError, ValueError) as refusal:
        text = f"cannot read this file: {reason_of(refusal)}"
        problem = Problem(Place(file, 1, 1, 1, 1), "cannot-read", text, "check its name and rights")
        raise Problems([problem]) from refusal


def _decoded(data: bytes, file: str) -> str:
    from seqcheck.language import decode

    return decode(data, file)


def _data(file: str) -> bytes:
    with open(file, "rb") as stream:
        return _whole(stream)


def _whole(stream: BinaryIO) -> bytes:
    """All of a stream, unless it has no end in sight, as some devices."""
    data = stream.read(_LARGEST + 1)
    if len(data) > _LARGEST:
        raise OSError(errno.EFBIG, f"it is larger than {_LARGEST >> 20} MB")
    return data
