"""A private cache of built parsers: building one from the grammar's text costs more than a small proof.

The folder belongs to the user alone: what it holds decides how files are read, so nobody else may write there. Whatever
goes wrong, from a foreign folder to a damaged file, the answer is that there is nothing in the cache.
"""

import contextlib
import marshal
import os
import stat
import sys
from importlib.util import source_hash
from pathlib import Path
from typing import Any

_CHECK = 8  # bytes in front that tell whether the others are whole
_KEPT = 4  # files of older grammars and versions that may stay


def key_of(*parts: str) -> str:
    """A name for what depends on these texts and on this Python."""
    whole = "\0".join((*parts, sys.version))
    return source_hash(whole.encode("utf-8")).hex()


def recalled(key: str) -> Any | None:
    """What was kept under a key, or None."""
    with contextlib.suppress(Exception):
        file = private_folder() / key
        with file.open("rb") as stream:
            if private(os.fstat(stream.fileno())):
                check, data = stream.read(_CHECK), stream.read()
                return marshal.loads(data) if check == source_hash(data) else None
    return None


def kept(key: str, thing: Any) -> None:
    """Keep plain data under a key, whole or not at all."""
    with contextlib.suppress(Exception):
        folder = private_folder()
        draft = folder / f"{key}.{os.getpid()}"
        try:
            with draft.open("xb") as stream:
                os.fchmod(stream.fileno(), 0o600)
                data = marshal.dumps(thing)
                stream.write(source_hash(data) + data)
            draft.replace(folder / key)
        finally:
            draft.unlink(missing_ok=True)
        _forget_old(folder)


def private_folder() -> Path:
    """The cache folder, made if need be; raises OSError where it is not private."""
    base = os.environ.get("XDG_CACHE_HOME") or ""
    root = Path(base) if os.path.isabs(base) else Path.home() / ".cache"
    folder = root / "seqcheck"
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    if not private(folder.lstat()):
        raise PermissionError(folder)
    return folder


def private(status: os.stat_result) -> bool:
    """Whether a file or folder, not a link, belongs to this user and others cannot write to it."""
    own = not hasattr(os, "getuid") or status.st_uid == os.getuid()
    return own and not stat.S_ISLNK(status.st_mode) and not status.st_mode & 0o022


def _forget_old(folder: Path) -> None:
    own = (file for file in folder.iterdir() if file.is_file())  # the folders in it are others'
    files = sorted(own, key=lambda file: file.stat().st_mtime, reverse=True)
    for file in files[_KEPT:]:
        file.unlink()
