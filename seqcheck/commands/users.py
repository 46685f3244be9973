"""Which files a change concerns: those that it touches, and those that `use` them."""

import os
import re
from collections.abc import Iterable, Iterator

SUFFIX = ".dseq"
_USE = re.compile(rb'(?:^|(?<=[\r\n]))[ \t]*use[ \t]*"([^"\r\n]*)"')


def concerned(changed: Iterable[str], top: str = ".") -> list[str]:
    """The `*.dseq` files among the changed ones, then those below a folder that must be proven again, in order.

    These use a changed file, by themselves or by others, or a file that is not there: it may have been taken away.
    Hidden folders are left out. A file that cannot be read is passed over here; who uses it is told so.
    """
    touched = list(dict.fromkeys(os.path.normpath(path) for path in changed))
    uses = {path: set(_used(path)) for path in _files(top)}
    hit = {os.path.abspath(path) for path in touched}
    found: set[str] = set()
    while more := {path for path, used in uses.items() if path not in found and _asks(used, hit)}:
        found |= more
        hit |= {os.path.abspath(path) for path in more}
    own = [path for path in touched if path.endswith(SUFFIX)]
    return own + sorted(found - set(own))


def _asks(used: set[str], hit: set[str]) -> bool:
    return not used.isdisjoint(hit) or any(not os.path.exists(path) for path in used)


def _files(top: str) -> Iterator[str]:
    for folder, inner, names in os.walk(top):
        inner[:] = [name for name in inner if not name.startswith(".")]
        yield from (os.path.normpath(os.path.join(folder, name)) for name in names if name.endswith(SUFFIX))


def _used(path: str) -> Iterator[str]:
    """The absolute paths that the `use` lines of a file name."""
    try:
        with open(path, "rb") as stream:
            data = stream.read()
    except OSError:
        return
    folder = os.path.dirname(os.path.abspath(path))
    for said in _USE.findall(data):
        yield os.path.normpath(os.path.join(folder, os.fsdecode(said)))
