"""A digest of what a drive means: places, comments and the title may change, nothing else."""

import hashlib
from collections.abc import Callable, Mapping
from dataclasses import fields, is_dataclass
from enum import Enum
from fractions import Fraction
from functools import cache
from json.encoder import encode_basestring_ascii as quoted
from operator import attrgetter
from typing import Any

from seqcheck.drive import Drive
from seqcheck.source import Place

_UNSAID = {"place", "title"}


def digest(drive: Drive) -> str:
    """The SHA-256 of a canonical rendering of the drive, as hexadecimal digits."""
    return hashlib.sha256(_rendered(drive).encode("ascii")).hexdigest()


def _rendered(value: object) -> str:
    kind: Any = type(value)
    return _way(kind)(value)


@cache
def _way(kind: Any) -> Callable[[Any], str]:
    """How values of a type are rendered: as text that is the same for equal values only."""
    assert kind is not Place
    if kind is str:
        return quoted
    if kind in (int, bool, type(None)):
        return str
    if issubclass(kind, Enum):
        return lambda value: f"{kind.__name__}.{value.name}"
    if issubclass(kind, tuple):
        return lambda value: f"[{','.join(map(_rendered, value))}]"
    if is_dataclass(kind):
        return _fields(kind)
    if issubclass(kind, frozenset):
        return lambda value: f"<{','.join(sorted(map(_rendered, value)))}>"
    if kind is Fraction:
        return lambda value: f"{value.numerator}/{value.denominator}"
    assert issubclass(kind, Mapping), kind
    return lambda value: f"{{{','.join(f'{_rendered(key)}:{_rendered(part)}' for key, part in value.items())}}}"


def _fields(kind: Any) -> Callable[[Any], str]:
    """The fields of a dataclass that are part of its meaning, with its name and theirs."""
    names = [one.name for one in fields(kind) if one.name not in _UNSAID]
    head = f"{kind.__name__}{' '.join(names)}"
    if not names:
        return lambda _: f"({head})"
    if len(names) == 1:
        (name,) = names
        return lambda value: f"({head}:{_rendered(getattr(value, name))})"
    parts = attrgetter(*names)
    return lambda value: f"({head}:{','.join(map(_rendered, parts(value)))})"
