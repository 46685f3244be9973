"""What a row of the switching table does, in words."""

from seqcheck.drive import Means, Purpose
from seqcheck.effects import Kind, Levels, Node, Row, Vector, Word, Wound
from seqcheck.reports.pieces import listed
from seqcheck.reports.wording import condition, flowing, subject

_MOST = 4  # different things that a row with kept cells may do, said one by one


def does(row: Row) -> str:
    """Everything that a row does, its words by turns, what it may do instead after 'or'; without full stop."""
    said = list(dict.fromkeys(_by_turns(turns) for turns in row.alternatives))
    more = len(said) - _MOST
    kept = said[:_MOST] + ([f"{more} other things"] if more > 0 else [])
    return "; or ".join(kept)


def _by_turns(turns: tuple[Word, ...]) -> str:
    return "; by turns ".join(dict.fromkeys(map(word_does, turns)))


def word_does(word: Word) -> str:
    """What one word of switches does."""
    parts = [f"shorts {subject(one)}{_while(condition(one))}" for one in word.shorts]
    if word.shorts and not any(condition(one) for one in word.shorts):
        return listed(parts)  # what a shorted supply does to a winding is anyone's guess
    if word.vector is not None:
        parts.append(f"{_vector(word.vector)}: {', '.join(_node(node) for node in word.nodes)}")
    else:
        paired = {end for one in word.windings for end in one.ends}
        name_them = len(word.windings) + sum(node.name not in paired for node in word.nodes) > 1
        by_name = {node.name: node for node in word.nodes}
        for one in word.windings:
            if one.kind is Kind.STAR:
                parts.append(_star([other for other in word.windings if other.group == one.group]))
                continue
            own = [node for end in one.ends if (node := by_name[end]).level is None and not node.loose]
            ways = [_node(node) for node in own if node.out or node.into] if one.kind is Kind.FREE else []
            parts.append((f"{' '.join(one.ends)} " if name_them else "") + ", ".join([_winding(one), *ways]))
        parts += [_node(node) for node in word.nodes if node.name not in paired]
    if word.stuck:
        parts.append(f"no way for {flowing(word.stuck)}")
    return ", ".join(dict.fromkeys(parts)) or "nothing to a winding"


def _while(said: str) -> str:
    return f" while {said.removeprefix('it carries current while ')}" if said else ""


def _winding(one: Wound) -> str:
    if one.kind is Kind.DRIVEN and not one.ordered:
        return f"driven either way, {one.nodes[0]} at {one.levels[0]}, {one.nodes[1]} at {one.levels[1]}"
    if one.kind is Kind.DRIVEN:
        return f"driven from {one.nodes[0]} to {one.nodes[1]} ({one.levels[0]} to {one.levels[1]})"
    if one.kind is Kind.BRAKED:
        return f"braked, both ends at {one.levels[0]}" if one.levels else "braked, its ends joined"
    if one.kind is Kind.HELD:
        return f"one end held, {one.nodes[0]} at {one.levels[0]}"
    return "free"


def _star(group: list[Wound]) -> str:
    """Windings that are driven by way of each other, their free ends joined."""
    names, levels = [" ".join(one.ends) for one in group], [f"{one.nodes[0]} at {one.levels[0]}" for one in group]
    return f"{listed(names)} driven in {'star' if len(group) > 2 else 'series'}, {', '.join(levels)}"


def _node(node: Node) -> str:
    if node.level is not None:
        return f"{node.name} at {node.level}"
    if node.loose:
        return f"{node.name} free"
    if node.out and node.into:
        return f"{node.name} free between {_several(node.out, 'the highest')} and {_several(node.into, 'the lowest')}"
    if node.out:
        return f"current out of {node.name} from {_several(node.out, 'the highest')}"
    if node.into:
        return f"current into {node.name} to {_several(node.into, 'the lowest')}"
    return f"{node.name} cut off"


def _several(levels: Levels, which: str) -> str:
    names = [str(one) for one in sorted(levels)]
    return names[0] if len(names) == 1 else f"{which} of {listed(names)}"


def _vector(vector: Vector) -> str:
    if vector.degrees is None:
        return "zero vector"
    return f"vector at {vector.degrees} degrees, length {vector.length:.3f}"


def meant(means: Means) -> str:
    """What a row says it means, in the words of the file."""
    if means.purpose is Purpose.DRIVE:
        return f"drive {means.nodes[0]} to {means.nodes[1]}"
    return " ".join([means.purpose.value, *means.nodes])
