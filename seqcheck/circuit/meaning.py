"""Whether a row does what its `means` says."""

from collections.abc import Callable

from seqcheck.circuit.levels import Order, supplies
from seqcheck.drive import Purpose, Stage
from seqcheck.effects import Kind, Level, Row, Word

Test = Callable[[Word], bool]


def amiss(stage: Stage, row: Row) -> str:
    """Why a row does not do what it `means`, in a few words; empty where it does."""
    means = row.mode.means
    assert means is not None
    if not stage.windings:
        return "the stage names no winding"
    if any(word.shorts for word in row.words):
        return "it shorts a supply"
    judge = _Judge(stage, row)
    if means.purpose is Purpose.COAST:
        return "" if judge.always(judge.coasts) else "it does not leave every winding free"
    if means.purpose is Purpose.BRAKE:
        return judge.brake()
    if means.purpose is Purpose.LEVEL:
        wanted = means.nodes[0]
        return "" if judge.always(lambda word: judge.all_at(word, wanted)) else f"not every winding is at {wanted}"
    return judge.drive(*means.nodes)


class _Judge:
    def __init__(self, stage: Stage, row: Row) -> None:
        self._row = row
        self._order = Order(stage, row.mode.known)
        self._stiff = supplies(stage)

    def always(self, test: Test) -> bool:
        """Whether every word of the row passes."""
        return all(map(test, self._row.words))

    def by_turns(self, test: Test) -> bool:
        """Whether each alternative has a word that passes."""
        return all(any(map(test, turns)) for turns in self._row.alternatives)

    def coasts(self, word: Word) -> bool:
        """No end held, no winding driven or braked."""
        held = any(node.held for node in word.nodes if node.name not in self._stiff)
        return not held and all(one.kind is Kind.FREE for one in word.windings)

    def all_at(self, word: Word, wanted: str) -> bool:
        """Every end that is no supply itself at one level, that of a supply or of a capacitor's end."""
        plates = {node.name: node.level for node in word.plates}
        level = Level(wanted) if wanted in self._stiff else plates.get(wanted)
        return level is not None and all(node.level == level for node in word.nodes if node.name not in self._stiff)

    def brake(self) -> str:
        """Every winding shorted, at least by turns, and never driven."""
        if not self.by_turns(self._brakes):
            single = all(len(word.nodes) == 1 for word in self._row.words)
            return "only one end of the winding is named" if single else "it does not short every winding"
        return "it drives a winding by turns" if not self.always(lambda word: not self._drives(word)) else ""

    def _brakes(self, word: Word) -> bool:
        lone = self._lone(word)
        if any(one.kind is not Kind.BRAKED for one in word.windings):
            return False
        return len(set(lone)) <= 1 and None not in lone and (bool(word.windings) or len(word.nodes) > 1)

    def _drives(self, word: Word) -> bool:
        levels = {level for level in self._lone(word) if level is not None}
        return len(levels) > 1 or any(one.kind in (Kind.DRIVEN, Kind.STAR) for one in word.windings)

    def _lone(self, word: Word) -> list[Level | None]:
        """The levels of the ends of windings whose other end the file does not name, or leaves to other windings."""
        paired = {end for one in word.windings for end in one.ends}
        return [node.level for node in word.nodes if node.name not in paired]

    def drive(self, upper: str, lower: str) -> str:
        """One node above the other, at least by turns, and never below it."""
        if not self.by_turns(lambda word: self._over(word, upper, lower)):
            return f"it does not hold {upper} above {lower}"
        return f"it holds {lower} above {upper} by turns" if self._ever(lower, upper) else ""

    def _ever(self, upper: str, lower: str) -> bool:
        return any(self._over(word, upper, lower) for word in self._row.words)

    def _over(self, word: Word, upper: str, lower: str) -> bool:
        levels = {node.name: node.level for node in word.nodes}
        levels |= {name: Level(name) for name in (upper, lower) if name in self._stiff}
        one, other = levels.get(upper), levels.get(lower)
        return one is not None and other is not None and self._order.above(one, other)
