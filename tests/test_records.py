"""Our data classes, held against twins that the standard library makes."""

import copy
import dataclasses
import pickle
from typing import Any

import pytest

from seqcheck import records


class Plain:
    one: int
    other: str = "x"


class Single:
    only: tuple[int, ...]


class Empty:
    pass


class Growing:
    name: str
    found: list[int] = records.field(default_factory=list)


def both(said: type, **how: bool) -> tuple[Any, Any]:
    """A class made by us and its twin; under its own name, so that it can be pickled."""
    ours = records.dataclass(slots=True, **how)(type(said.__name__, (), _body(said)))
    theirs = dataclasses.dataclass(slots=True, **how)(type(said.__name__, (), _body(said, theirs=True)))
    return ours, theirs


def _body(said: type, theirs: bool = False) -> dict[str, Any]:
    body = {name: one for name, one in vars(said).items() if name not in ("__dict__", "__weakref__")}
    if theirs and "found" in body:
        body["found"] = dataclasses.field(default_factory=list)
    return {**body, "__annotations__": said.__annotations__, "__qualname__": said.__name__}


FROZEN = {"frozen": True}
KINDS = (FROZEN, {}, {"eq": False}, {"frozen": True, "order": True}, {"frozen": True, "eq": False})


@pytest.mark.parametrize("how", KINDS, ids=str)
@pytest.mark.parametrize(("said", "calls"), [
    (Plain, [((1,), {}), ((1, "y"), {}), ((), {"one": 2}), ((1,), {"other": "z"}), ((2, "a"), {})]),
    (Single, [(((1, 2),), {}), (((),), {})]),
    (Empty, [((), {})]),
])  # fmt: skip
def test_a_record_is_what_its_twin_is(said: type, calls: list[Any], how: dict[str, bool]) -> None:
    ours, theirs = both(said, **how)
    mine, others = ([cls(*args, **named) for args, named in calls] for cls in (ours, theirs))
    assert list(map(repr, mine)) == list(map(repr, others))
    assert ours.__match_args__ == theirs.__match_args__
    assert ours.__slots__ == theirs.__slots__
    for a, x in zip(mine, others, strict=True):
        assert not hasattr(a, "__dict__")
        assert (a == copy.deepcopy(a)) == (x == copy.deepcopy(x))
        assert (a == x) is False
        for b, y in zip(mine, others, strict=True):
            assert (a == b) == (x == y)
            if how.get("order"):
                assert [a < b, a <= b, a > b, a >= b] == [x < y, x <= y, x > y, x >= y]
            if how.get("eq", True) and how.get("frozen"):
                assert (hash(a) == hash(b)) == (hash(x) == hash(y))


def test_who_cannot_be_hashed_cannot() -> None:
    for cls in both(Plain):
        with pytest.raises(TypeError):
            hash(cls(1))


def test_the_hash_is_that_of_the_fields() -> None:
    for said, args in ((Plain, (1, "x")), (Single, ((1,),)), (Empty, ())):
        ours, theirs = both(said, **FROZEN)
        assert hash(ours(*args)) == hash(theirs(*args)) == hash(args)


def test_a_frozen_record_refuses_to_change() -> None:
    for cls in both(Plain, **FROZEN):
        record = cls(1)
        with pytest.raises(dataclasses.FrozenInstanceError, match="cannot assign to field 'one'"):
            record.one = 2
        with pytest.raises(dataclasses.FrozenInstanceError, match="cannot delete field 'one'"):
            del record.one
        assert record.one == 1


@pytest.mark.parametrize("call", [((), {}), ((1, "x", 3), {}), ((1,), {"one": 1}), ((1,), {"none": 1})], ids=str)
def test_a_wrong_call_is_refused(call: Any) -> None:
    said = []
    for cls in both(Plain, **FROZEN):
        with pytest.raises(TypeError) as refused:
            cls(*call[0], **call[1])
        said.append(str(refused.value))
    assert said[0] == said[1]


def test_a_default_may_be_made_anew() -> None:
    for cls in both(Growing):
        first, second = cls("a"), cls("b")
        first.found.append(1)
        assert (first.found, second.found) == ([1], [])
        assert cls("a", [2]).found == [2]


def test_the_standard_library_takes_our_records() -> None:
    ours, theirs = both(Plain, **FROZEN)
    record = ours(1)
    assert dataclasses.is_dataclass(record)
    assert [(one.name, one.type, one.default) for one in dataclasses.fields(ours)] == [
        (one.name, one.type, one.default) for one in dataclasses.fields(theirs)
    ]
    assert dataclasses.replace(record, one=3) == records.replace(record, one=3) == ours(3)
    assert dataclasses.asdict(record) == {"one": 1, "other": "x"}


def test_records_of_one_content_and_different_classes_differ() -> None:
    one, _ = both(Single, **FROZEN)
    other, _ = both(Single, **FROZEN)
    assert one((1,)) != other((1,))


@records.dataclass(frozen=True, slots=True)
class Sent:
    """A record that goes to another process."""

    one: int
    other: tuple[str, ...] = ()


def test_a_record_can_be_sent() -> None:
    assert Sent.__doc__ == "A record that goes to another process."
    assert pickle.loads(pickle.dumps(Sent(1, ("a",)))) == Sent(1, ("a",))
    match Sent(1):
        case Sent(one, other=()):
            assert one == 1
        case _:
            pytest.fail("it did not match")
