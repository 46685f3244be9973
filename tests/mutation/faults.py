"""The faults that are put into a module, one at a time, in its syntax tree.

What never decides a verdict is left alone: annotations, docstrings, texts of messages, assertions (they are there for
readers and the type checker) and `strict=` of zip, which is one too.
"""

import ast
import copy
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, replace
from types import CodeType
from typing import TypeVar

_COMPARED: dict[type[ast.cmpop], type[ast.cmpop]] = {
    ast.Lt: ast.LtE,
    ast.LtE: ast.Lt,
    ast.Gt: ast.GtE,
    ast.GtE: ast.Gt,
    ast.Eq: ast.NotEq,
    ast.NotEq: ast.Eq,
    ast.Is: ast.IsNot,
    ast.IsNot: ast.Is,
    ast.In: ast.NotIn,
    ast.NotIn: ast.In,
}
_COMPUTED: dict[type[ast.operator], type[ast.operator]] = {
    ast.Add: ast.Sub,
    ast.Sub: ast.Add,
    ast.Mult: ast.FloorDiv,
    ast.FloorDiv: ast.Mult,
    ast.Mod: ast.FloorDiv,
    ast.BitOr: ast.BitAnd,
    ast.BitAnd: ast.BitOr,
    ast.LShift: ast.RShift,
}
_CALLED = {"min": "max", "max": "min", "any": "all", "all": "any"}
_LEFT_ALONE = {"annotation", "returns", "decorator_list", "bases", "pattern", "msg"}
_CONDITIONS = (ast.Compare, ast.BoolOp)

Node = TypeVar("Node", bound=ast.AST)
_Function = ast.FunctionDef | ast.AsyncFunctionDef


@dataclass(frozen=True, slots=True)
class Mutant:
    """One fault: where it is and what it changes; `number` counts the mutants of a module."""

    function: str  # its qualified name; empty: at the level of the module or a class
    line: int
    text: str  # of the line
    change: str
    number: int

    @property
    def name(self) -> tuple[str, str, str]:
        """What tells it from all others of its module, wherever its line moves."""
        return self.function, self.text, self.change


@dataclass(frozen=True, slots=True)
class _Place:
    """A child of a node: an attribute, or one entry of a list."""

    node: ast.AST
    field: str
    index: int | None

    def put(self, child: ast.AST | None) -> None:
        if self.index is None:
            setattr(self.node, self.field, child)
        else:
            getattr(self.node, self.field)[self.index] = child


class Module:
    """A module's source and all its mutants."""

    def __init__(self, source: str) -> None:
        self._lines = source.splitlines()
        self._tree = ast.parse(source)
        self._swaps: list[tuple[_Place, ast.AST, ast.AST | None]] = []
        self._found: list[Mutant] = []
        self._owner: _Function | None = None
        self._outermost: _Function | None = None
        self.functions = {"": ""}
        """The source of each function, by qualified name."""
        self._visit(self._tree, "", "")
        self.mutants = _told_apart(self._found)

    def compiled(self, mutant: Mutant, file: str) -> CodeType:
        """The module's code with one fault in it."""
        place, old, new = self._swaps[mutant.number]
        place.put(new)
        try:
            return compile(ast.fix_missing_locations(self._tree), file, "exec")
        finally:
            place.put(old)

    def _visit(self, node: ast.AST, prefix: str, function: str) -> None:
        for place, child in _children(node):
            if _is_left_alone(place, child):
                continue
            where = "" if place.field == "args" and node is self._outermost else function  # defaults are no function's
            for new in self._faulty(child, node):
                self._record(place, child, new, where)
            inner, outer = _names(child, prefix, where)
            if isinstance(child, _Function) and not function:
                self._outermost = child
            if outer != where:
                self.functions[outer] = self.functions.get(outer, "") + ast.unparse(child)
            owner, self._owner = self._owner, child if isinstance(child, _Function) else self._owner
            if not isinstance(child, ast.Raise):  # what it says is a message
                self._visit(child, inner, outer)
            self._owner = owner

    def _record(self, place: _Place, old: ast.AST, new: ast.AST | None, function: str) -> None:
        line = old.lineno if hasattr(old, "lineno") else place.node.lineno  # type: ignore[attr-defined]
        change = f"{_words(old)} -> {_words(new)}"
        self._found.append(Mutant(function, line, self._lines[line - 1].strip(), change, len(self._found)))
        self._swaps.append((place, old, new))

    def _faulty(self, node: ast.AST, parent: ast.AST) -> Iterator[ast.AST | None]:
        if isinstance(node, ast.stmt):
            yield from _faulty_statements(node, self._owner)
        elif isinstance(node, ast.Slice):
            yield from _faulty_slices(node)
        elif isinstance(node, ast.expr):
            yield from _faulty_expressions(node)
            if isinstance(parent, ast.If | ast.While | ast.IfExp) and node is parent.test and _is_plain(node):
                yield _with(ast.UnaryOp(ast.Not(), node), node)
            if isinstance(parent, ast.comprehension) and node in parent.ifs:
                yield _with(ast.Constant(True), node)


def _children(node: ast.AST) -> Iterator[tuple[_Place, ast.AST]]:
    for field, value in ast.iter_fields(node):
        if isinstance(value, list):
            yield from ((_Place(node, field, at), one) for at, one in enumerate(value) if isinstance(one, ast.AST))
        elif isinstance(value, ast.AST):
            yield _Place(node, field, None), value


def _is_left_alone(place: _Place, child: ast.AST) -> bool:
    if place.field in _LEFT_ALONE or isinstance(child, ast.Assert | ast.JoinedStr | ast.Import | ast.ImportFrom):
        return True
    if isinstance(child, ast.keyword) and child.arg == "strict":
        return True
    if isinstance(child, ast.Assign) and isinstance(place.node, ast.Module):  # an alias of types
        return isinstance(child.value, ast.Subscript | ast.BinOp) and not _is_arithmetic(child.value)
    return isinstance(child, ast.Expr) and isinstance(child.value, ast.Constant)


def _is_arithmetic(node: ast.expr) -> bool:
    return isinstance(node, ast.BinOp) and not isinstance(node.op, ast.BitOr)


def _names(child: ast.AST, prefix: str, function: str) -> tuple[str, str]:
    """The prefix of names within a node, and the outermost function that it is in."""
    if isinstance(child, ast.ClassDef):
        return f"{prefix}{child.name}.", function
    if isinstance(child, _Function) and not function:
        return prefix, f"{prefix}{child.name}"
    return prefix, function


def _faulty_statements(node: ast.stmt, owner: _Function | None) -> Iterator[ast.AST | None]:
    match node:
        case ast.Continue():
            yield _with(ast.Break(), node)
        case ast.Break():
            yield _with(ast.Continue(), node)
        case ast.Return(value=None) | ast.Raise() | ast.Delete():
            yield _with(ast.Pass(), node)
        case ast.Return(value=value) if not (isinstance(value, ast.Constant) and isinstance(value.value, bool | None)):
            yield _with(ast.Return(ast.Constant(None)), node)
        case ast.Expr():
            yield _with(ast.Pass(), node)
        case ast.AugAssign(target=target, op=op, value=value):
            yield _with(ast.Pass(), node)
            if type(op) in _COMPUTED and not isinstance(value, ast.List | ast.ListComp):
                yield _with(ast.AugAssign(target, _COMPUTED[type(op)](), value), node)
        case ast.Assign(targets=targets) if owner is not None and all(_is_known(one, owner) for one in targets):
            yield _with(ast.Pass(), node)


def _is_known(target: ast.expr, owner: _Function) -> bool:
    """Whether what is assigned to is there without this assignment too, so that leaving it out is no mere NameError."""
    if isinstance(target, ast.Attribute):
        return owner.name != "__init__"
    if isinstance(target, ast.Tuple):
        return all(_is_known(one, owner) for one in target.elts)
    if isinstance(target, ast.Name):
        stored = [one for one in ast.walk(owner) if isinstance(one, ast.Name) and isinstance(one.ctx, ast.Store)]
        arguments = [one.arg for one in ast.walk(owner.args) if isinstance(one, ast.arg)]
        return sum(one.id == target.id for one in stored) > 1 or target.id in arguments
    return True


def _faulty_slices(node: ast.Slice) -> Iterator[ast.AST]:
    if node.lower is not None:
        yield _with(ast.Slice(None, node.upper, node.step), node)
    if node.upper is not None:
        yield _with(ast.Slice(node.lower, None, node.step), node)


def _faulty_expressions(node: ast.expr) -> Iterator[ast.AST]:
    match node:
        case ast.Compare(left=left, ops=ops, comparators=comparators):
            for at, op in enumerate(ops):
                changed = [*ops[:at], _COMPARED[type(op)](), *ops[at + 1 :]]
                yield _with(ast.Compare(left, changed, comparators), node)
        case ast.BinOp(left=left, op=op, right=right) if type(op) in _COMPUTED:
            yield _with(ast.BinOp(left, _COMPUTED[type(op)](), right), node)
        case ast.BoolOp(op=op, values=values):
            yield _with(ast.BoolOp(ast.Or() if isinstance(op, ast.And) else ast.And(), values), node)
        case ast.UnaryOp(op=ast.Not(), operand=operand):
            yield operand
        case ast.UnaryOp(op=ast.USub(), operand=operand) if not isinstance(operand, ast.Constant):
            yield operand
        case ast.Constant(value=bool() as value):
            yield _with(ast.Constant(not value), node)
        case ast.Constant(value=int() as value):
            yield _with(ast.Constant(value + 1), node)
            yield _with(ast.Constant(value - 1), node)
        case ast.Call(func=ast.Name(id=name), args=arguments, keywords=keywords) if name in _CALLED:
            yield _with(ast.Call(ast.Name(_CALLED[name], ast.Load()), arguments, keywords), node)


def _is_plain(node: ast.expr) -> bool:
    """Whether a condition has no operator of its own to be changed."""
    return not isinstance(node, _CONDITIONS) and not (isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.Not))


def _with(new: Node, old: ast.AST) -> Node:
    return ast.copy_location(new, old)


def _words(node: ast.AST | None) -> str:
    """A node as text, in one line and not too long."""
    text = "nothing" if node is None else " ".join(ast.unparse(ast.fix_missing_locations(copy.deepcopy(node))).split())
    return text if len(text) <= 100 else f"{text[:60]} ... {text[-35:]}"


def _told_apart(found: list[Mutant]) -> list[Mutant]:
    """The same with a number at those whose names are the same."""
    times = Counter(one.name for one in found)
    seen: Counter[tuple[str, str, str]] = Counter()
    told = []
    for one in found:
        seen[one.name] += 1
        again = times[one.name] > 1
        told.append(replace(one, change=f"{one.change} (#{seen[one.name]})") if again else one)
    return told
