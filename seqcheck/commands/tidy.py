"""`seqcheck tidy`: files put in order, or a word about which are not."""

from collections.abc import Callable
from dataclasses import dataclass

from seqcheck.exits import FAULT, FOUND, PROVEN, WRONG, worse
from seqcheck.language import decode
from seqcheck.language.lines import ENDS
from seqcheck.language.tidy import Altered, tidy
from seqcheck.messages import Problems
from seqcheck.source import printable

_STDIN = "-"
_MARK = b"\xef\xbb\xbf"


@dataclass(frozen=True, slots=True)
class World:
    """What the command asks of the outside.

    `read` gives the bytes of a file, or Problems; `fetch` the text of one that `use` names, as `language.read_any`
    wants it. `write` puts text into a file, whole or not at all, or onto standard output for `-`; it gives the exit
    code. `mistaken` says what is wrong with an input, `complain` a sentence of its own.
    """

    read: Callable[[str], bytes]
    fetch: Callable[[str], str]
    write: Callable[[str, str], int]
    mistaken: Callable[[Problems], int]
    complain: Callable[[str], None]


def run(files: list[str], only_say: bool, world: World) -> int:
    """Put the files in order, or only say which are not; the exit code. One that has mistakes is left as it is."""
    if _STDIN in files and len(files) > 1:
        world.complain("error: '-' is tidied from standard input to standard output, so it must stand alone")
        return WRONG
    code = PROVEN
    for file in files:
        code = worse(code, _one(file, only_say, world))
    return code


def _one(file: str, only_say: bool, world: World) -> int:
    try:
        data = world.read(file)
        mark = "\ufeff" if data.startswith(_MARK) else ""
        text = decode(data, file)
        done = tidy(text, file, world.fetch)
    except Problems as problems:
        return world.mistaken(problems)
    except Altered:
        where = printable(file)
        world.complain(f"internal error, please report it with the file: tidied, {where} would say something else")
        return FAULT
    if only_say:
        return _say(file, text, done)
    if file == _STDIN:
        return world.write(mark + done, file)
    if done == text:
        print(f"{printable(file)}: is tidy")
        return PROVEN
    code = world.write(mark + done, file)
    if code == PROVEN:
        print(f"{printable(file)}: tidied")
    return code


def _say(file: str, text: str, done: str) -> int:
    """Say of a file that is not tidy so, and where it first is not."""
    if done == text:
        return PROVEN
    pairs = zip(ENDS.split(text), ENDS.split(done), strict=False)
    line = next((number for number, (one, other) in enumerate(pairs, 1) if one != other), 0)
    where = f"first in line {line}" if line else "at its end or in its line ends"
    print(f"{printable(file)}: not tidy, {where}")
    return FOUND
