"""The run of a counterexample as rows of time."""

from seqcheck.quantities import shown
from seqcheck.records import dataclass
from seqcheck.reports.acts import Note
from seqcheck.reports.instants import Instant
from seqcheck.reports.lanes import Conduct
from seqcheck.reports.pieces import WIDTH, Line, Piece, Tone, line, visible, wrapped
from seqcheck.reports.run import Run

CONDUCT_TONES = {Conduct.NO: Tone.FAINT, Conduct.MAY: Tone.DOUBT, Conduct.YES: Tone.STRONG}
GAP = "  "
_EASY, _LEAST = 24, 16  # columns in which the words of a row read easily, and just so


def scaled(time: int, size: int) -> str:
    """A time exactly, in units of `size` ps (a power of ten), without unit: `-0.4`."""
    whole, rest = divmod(abs(time), size)
    digits = str(size + rest)[1:].rstrip("0") if rest else ""
    return f"{'-' if time < 0 else ''}{whole}{'.' if digits else ''}{digits}"


@dataclass(frozen=True, slots=True)
class Columns:
    """The widths of the columns; 0 where a column is left out."""

    number: int
    whole: int
    part: int
    since: int
    line: int
    what: int
    states: tuple[int, ...]

    @property
    def time(self) -> int:
        """The width of the time, its decimal point under that of the other rows."""
        return self.whole + self.part


def _columns(run: Run) -> Columns:
    times = [scaled(one.time - run.origin, run.size).partition(".") for one in run.instants if one.time is not None]
    whole = max([len(times[0][0]), *(len(before) for before, _, _ in times)])
    part = max(len(point + after) for _, point, after in times)
    whole = max(whole, len(f"t / {run.unit}") - part, len("start") - part)
    notes = [note for one in run.instants for note in one.notes]
    lines = max([len("line"), *(len(str(note.line)) for note in notes if note.line is not None)])
    states = tuple(_state_width(run, index) for index in range(len(run.lanes)))
    since = max([len("since"), *(len(_since(run, index)) for index in range(len(run.instants)))])
    group = max(0, sum(width + 1 for width in states) - 1)
    fixed = len(str(len(run.instants))) + whole + part + lines + group + max(group, len("conducts")) + 6 * len(GAP)
    natural = max(len(visible(note.text)) for note in notes)
    if min(natural, _EASY) > WIDTH - fixed - since - len(GAP):
        since = 0
    room = WIDTH - fixed - (since + len(GAP) if since else 0)
    what = min(natural, max(room, _LEAST))
    longest = max(len(word) for note in notes for word in visible(note.text).split())
    return Columns(len(str(len(run.instants))), whole, part, since, lines, max(what, longest), states)


def _state_width(run: Run, index: int) -> int:
    texts = (_commands(one, index) for one in run.instants)
    least = 3 if len(run.lanes) > 1 else len("command")
    return max(least, len(run.titles[index]), *map(len, texts))


def _commands(instant: Instant, index: int) -> str:
    """What is commanded in an instant; several commands of one instant in their order."""
    return ",".join("any" if one.value == "unknown" else one.value for one in instant.states[index].commands)


def _since(run: Run, index: int) -> str:
    """The time since the row before, nothing where none has passed."""
    since = (run.instants[index].time or 0) - (run.instants[max(0, index - 1)].time or 0)
    return f"+{shown(since)}" if since else ""


def rows(run: Run) -> list[Line]:
    """The whole run, one block of lines an instant, under a head."""
    columns = _columns(run)
    found = _head(run, columns)
    for index in range(len(run.instants)):
        found += _block(run, index, columns)
    return found


def _head(run: Run, columns: Columns) -> list[Line]:
    names = [title.ljust(width) for title, width in zip(run.titles, columns.states, strict=True)]
    group = " ".join(names)
    left = [" " * columns.number, f"t / {run.unit}".rjust(columns.time)]
    left += ["since".ljust(columns.since)] if columns.since else []
    left += ["line".rjust(columns.line), "what happens".ljust(columns.what)]
    if not columns.states:
        return [line(Piece((GAP + GAP.join(left)).rstrip(), Tone.FAINT))]
    over = len(GAP.join(left)) + 2 * len(GAP)
    titles = f"{' ' * over}{'command'.ljust(len(group))}{GAP}conducts".rstrip()
    under = GAP + GAP.join([*left, group, group])
    return [line(Piece(titles, Tone.FAINT)), line(Piece(under.rstrip(), Tone.FAINT))]


def _block(run: Run, index: int, columns: Columns) -> list[Line]:
    instant = run.instants[index]
    notes = instant.notes or (Note(""),)
    noted = [(note, text) for note in notes for text in wrapped(visible(note.text), columns.what) or [""]]
    found: list[Line] = []
    last: Note | None = None
    for note, text in noted:
        source = str(note.line) if note.line is not None and note is not last else ""
        what = [Piece(f"{source.rjust(columns.line)}{GAP}", Tone.FAINT), Piece(text, note.tone)]
        if found:
            found.append(line(" " * len(_left(run, index, columns)), *what))
        else:
            padding = " " * (columns.what - len(text))
            states = (Piece(padding), *_states(instant, columns)) if columns.states else ()
            found.append(line(_left(run, index, columns), *what, *states))
        last = note
    return found


def _left(run: Run, index: int, columns: Columns) -> str:
    """The number, time and time since of an instant."""
    instant = run.instants[index]
    time = "start"
    if instant.time is not None:
        whole, point, part = scaled(instant.time - run.origin, run.size).partition(".")
        time = whole.rjust(columns.whole) + (point + part).ljust(columns.part)
    cells = [str(instant.number).rjust(columns.number), time.rjust(columns.time)]
    cells += [_since(run, index).ljust(columns.since)] if columns.since else []
    return GAP + GAP.join(cells) + GAP


def _states(instant: Instant, columns: Columns) -> list[Piece]:
    """The cells of the switches: first what each is commanded, then what each does."""
    found = []
    for index, width in enumerate(columns.states):
        tone = Tone.FAINT if instant.states[index].command.value == "off" else Tone.STRONG
        found += [Piece(" " if index else GAP), Piece(_commands(instant, index).ljust(width), tone)]
    for index, width in enumerate(columns.states):
        conduct = instant.states[index].conduct
        last = index + 1 == len(columns.states)
        text = conduct.value if last else conduct.value.ljust(width)
        found += [Piece(" " if index else GAP), Piece(text, CONDUCT_TONES[conduct])]
    return found
