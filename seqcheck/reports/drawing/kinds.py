"""What a row does to the windings in one or two words: what a mode's box in the mode graph is coloured by and says."""

from dataclasses import dataclass
from enum import Enum

from seqcheck.effects import Kind, Row, Word


class Does(Enum):
    """What a mode does to the windings, the worst first; the value is what a legend says."""

    SHORT = "shorts a supply"
    TURNS = "several things, by turns"
    DRIVE = "drives a winding"
    BRAKE = "brakes: ends joined"
    HELD = "holds an end"
    FREE = "leaves all free"


@dataclass(frozen=True, slots=True)
class Said:
    """What a mode does, and that in a few words for its box; `does` is None where there is no winding."""

    does: Does | None
    words: str


_MOST = 26  # letters in a box


def said(row: Row) -> Said:
    """What a row does: one thing, or several by turns or depending on what it keeps."""
    if not any(word.windings or word.nodes or word.shorts for word in row.words):
        return Said(None, "")
    kinds = list(dict.fromkeys(_does(word) for word in row.words))
    if Does.SHORT in kinds:
        return Said(Does.SHORT, "short")
    turned = list(dict.fromkeys(" / ".join(dict.fromkeys(map(_words, turns))) for turns in row.alternatives))
    texts = " or ".join(turned)
    if len(texts) > _MOST:
        texts = " / ".join(kind.name.lower() for kind in kinds)
    return Said(kinds[0] if len(kinds) == 1 else Does.TURNS, texts)


def _does(word: Word) -> Does:
    """What one word of switches does as a whole: driven before braked before held."""
    if word.shorts:
        return Does.SHORT
    kinds = {one.kind for one in word.windings}
    paired = {end for one in word.windings for end in one.ends}
    lone = [node.level for node in word.nodes if node.name not in paired]
    levels = {level for level in lone if level is not None}
    if kinds & {Kind.DRIVEN, Kind.STAR} or len(levels) > 1:
        return Does.DRIVE
    if Kind.BRAKED in kinds or (len(lone) > 1 and len(levels) == 1 and None not in lone):
        return Does.BRAKE
    return Does.HELD if levels or Kind.HELD in kinds else Does.FREE


def _words(word: Word) -> str:
    does = _does(word)
    driven = [one for one in word.windings if one.kind in (Kind.DRIVEN, Kind.STAR)]
    if does is Does.DRIVE and len(driven) == 1 and driven[0].ordered:
        return f"drive {driven[0].nodes[0]} to {driven[0].nodes[1]}"
    if does is Does.DRIVE and word.vector is not None and word.vector.degrees is not None:
        return f"vector {word.vector.degrees} deg"
    if does is Does.HELD and len(word.nodes) == 1 and word.nodes[0].level is not None:
        return f"{word.nodes[0].name} at {word.nodes[0].level}"
    return {Does.HELD: "end held"}.get(does, does.name.lower())
