"""What is wrong with an input: place, class and words; many collected into one answer."""

from collections.abc import Iterable
from difflib import get_close_matches

from seqcheck.records import dataclass
from seqcheck.source import Place


@dataclass(frozen=True, slots=True)
class Problem:
    """One mistake of an input.

    `kind` is a stable class in lower-case words joined by hyphens (`unknown-name`), `text` says what is wrong and
    `way_out` what would put it right. Neither ends in a full stop.
    """

    place: Place
    kind: str
    text: str
    way_out: str = ""

    def line(self) -> str:
        """The mistake on one line: `file:line:column: error: text; way out [kind]`."""
        tail = f"; {self.way_out}" if self.way_out else ""
        return f"{self.place}: error: {self.text}{tail} [{self.kind}]"


class Problems(Exception):  # noqa: N818 - it is a collection of mistakes, raised as one answer
    """All mistakes found in one input, in the order of their places, without repetition."""

    def __init__(self, found: Iterable[Problem]) -> None:
        self.found: tuple[Problem, ...] = tuple(sorted(dict.fromkeys(found), key=lambda one: (one.place, one.text)))
        super().__init__("\n".join(one.line() for one in self.found))


def nearest(name: str, known: Iterable[str]) -> str:
    """A way out for a misspelt name: the nearest known one, or all of them if they are few, or nothing."""
    names = sorted(set(known))
    close = get_close_matches(name, names, n=1, cutoff=0.6)
    folded = [one for one in names if one.lower() == name.lower()]
    if folded or close:
        return f"did you mean '{(folded or close)[0]}'?"
    if 0 < len(names) <= 8:
        return "known are " + ", ".join(f"'{one}'" for one in names)
    return ""
