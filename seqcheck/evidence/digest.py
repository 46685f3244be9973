"""A digest of what a drive means: places, comments and the title may change, nothing else."""

import hashlib
import json
from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from enum import Enum
from fractions import Fraction

from seqcheck.drive import Drive
from seqcheck.source import Place

_UNSAID = {"place", "title"}


def digest(drive: Drive) -> str:
    """The SHA-256 of a canonical rendering of the drive, as hexadecimal digits."""
    return hashlib.sha256(json.dumps(_rendered(drive), ensure_ascii=True).encode()).hexdigest()


def _rendered(value: object) -> object:
    if isinstance(value, Enum):
        return [type(value).__name__, value.name]
    if is_dataclass(value) and not isinstance(value, type):
        said = [(one.name, getattr(value, one.name)) for one in fields(value) if one.name not in _UNSAID]
        return [type(value).__name__, *([name, _rendered(part)] for name, part in said)]
    if isinstance(value, Mapping):
        return [[_rendered(key), _rendered(part)] for key, part in value.items()]
    if isinstance(value, frozenset):
        return sorted(map(str, value))
    if isinstance(value, tuple):
        return [_rendered(part) for part in value]
    if isinstance(value, Fraction):
        return str(value)
    assert value is None or isinstance(value, str | int), type(value)
    assert not isinstance(value, Place)
    return value
