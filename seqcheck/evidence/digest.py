"""A digest of what a drive means: places, comments and the title may change, nothing else."""

import hashlib
import json
from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from enum import Enum
from fractions import Fraction
from functools import cache
from typing import Any

from seqcheck.drive import Drive
from seqcheck.source import Place

_UNSAID = {"place", "title"}


def digest(drive: Drive) -> str:
    """The SHA-256 of a canonical rendering of the drive, as hexadecimal digits."""
    return hashlib.sha256(json.dumps(_rendered(drive), ensure_ascii=True).encode()).hexdigest()


def _rendered(value: object) -> object:
    if value is None or isinstance(value, (str, int)):
        return value
    if isinstance(value, Enum):
        return [type(value).__name__, value.name]
    if isinstance(value, tuple):
        return [_rendered(part) for part in value]
    kind: Any = type(value)
    names = _said(kind)
    if names is not None:
        return [kind.__name__, *([name, _rendered(getattr(value, name))] for name in names)]
    if isinstance(value, frozenset):
        return sorted(map(str, value))
    if isinstance(value, Fraction):
        return str(value)
    assert isinstance(value, Mapping), type(value)
    return [[_rendered(key), _rendered(part)] for key, part in value.items()]


@cache
def _said(kind: Any) -> tuple[str, ...] | None:
    """The fields of a dataclass that are part of its meaning; None for any other type."""
    assert kind is not Place
    return tuple(one.name for one in fields(kind) if one.name not in _UNSAID) if is_dataclass(kind) else None
