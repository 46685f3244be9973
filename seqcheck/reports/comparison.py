"""What a change comes to, for a review: what got worse first, then the rest, then what the file says differently."""

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace

from seqcheck.changes import Change, Comparison, Field, How, Moved, Reach, Told, Turn, Turned
from seqcheck.drive import Drive
from seqcheck.hazards import Hazard
from seqcheck.quantities import shown
from seqcheck.reports.acts import told
from seqcheck.reports.pieces import WIDTH, Line, Piece, Tone, counted, line, listed, paragraph, visible
from seqcheck.reports.wording import CAUTION, cure, lasting, stated, stretch, subject
from seqcheck.source import Place
from seqcheck.verdict import WARNINGS, Act, Check, Finding, Safe, Trace, Undecided, Unsafe, Verdict

_MOST_RUNS = 6
"""Moves and trips of a run that are named, the last ones."""


def report(found: Comparison) -> list[Line]:
    """The whole answer as styled lines; the first ones say what matters."""
    title = f'"{found.new.drive.title}"'
    old, new = ("standard input" if one.file == "-" else one.file for one in (found.old, found.new))
    head = line(Piece(f"{old} => {new}", Tone.STRONG), f"  {title}")
    wide = sum(len(piece.text) for piece in head) > WIDTH
    lines = [head[:1] if wide else head]
    lines += paragraph(standing(found), 0, Tone.BAD if found.worse else Tone.DOUBT if found.undecided else Tone.GOOD)
    lines += paragraph(title, 0) if wide else []
    lines += paragraph(said(found), 0)
    for title, block in _blocks(found):
        if block:
            lines += [(), line(Piece(title, Tone.STRONG)), *block]
    return [*lines, (), line(Piece(CAUTION, Tone.FAINT))]


def standing(found: Comparison) -> str:
    """The one sentence that a review needs."""
    asked = [one for one in found.verdicts if not _ruled(one)]
    turns = Counter(one.turn for one in asked if one.turn is not Turn.POSSIBLE or one.worse)
    broken = [one for one in found.verdicts if _ruled(one) and one.worse]
    turns[Turn.UNDECIDED] += sum(_ruled(one) and one.turn is Turn.UNDECIDED for one in found.verdicts)
    checks = [one for one, why in found.broken if one.check not in WARNINGS and why is None]
    mended = [one for one, why in found.mended if one.check not in WARNINGS and why is None]
    texts = [f"{counted(len(checks), 'finding')} came up"] if checks else []
    texts += [f"{counted(len(broken), 'finding')} against the rules came up"] if broken else []
    texts += [] if turns[Turn.POSSIBLE] else ["no hazard became possible"]
    texts[:0] = [f"{counted(number, 'hazard')} {turn.value}" for turn in _TOLD if (number := turns[turn])]
    texts += _moved("margin", [(one.old.slack, one.new.slack) for one in found.margins], "shrank", "grew")
    overlaps = [(_overlap(one.new), _overlap(one.old)) for one in asked if one.turn is Turn.STILL]
    texts += _moved("overlap", overlaps, "grew", "shrank")
    texts += [f"{counted(len(mended), 'finding')} went away"] if mended else []
    less = any(one.shrank for one in found.margins) or any(_above(*pair) for pair in overlaps)
    fair = "less left" if less else "not worse"
    word = "WORSE" if found.worse else "UNDECIDED" if found.undecided else fair
    return f"{word}: {'; '.join(texts)}."


def _ruled(one: Turned) -> bool:
    """Whether it is what a rule of the file asks for, and no hazard by itself."""
    if any(isinstance(said, Unsafe) and said.rule is not None for said in (one.old, one.new)):
        return True
    return one.hazard.asks is not None or not (one.hazard.joins or one.hazard.currents)


_TOLD = (Turn.POSSIBLE, Turn.UNDECIDED, Turn.STILL, Turn.PROVEN)


def _overlap(verdict: Verdict | None) -> int | None:
    return verdict.overlap if isinstance(verdict, Unsafe) else None


def _moved(name: str, pairs: Sequence[tuple[int | None, int | None]], less: str, more: str) -> Iterator[str]:
    """How many became less and how many more, and by how much at most; None is without end."""
    moved = ((less, [pair for pair in pairs if _above(*pair)]), (more, [pair for pair in pairs if _above(*pair[::-1])]))
    for word, changed in moved:
        if changed:
            by = [abs(a - b) for a, b in changed if a is not None and b is not None]
            most = f" by {'up to ' if len(by) > 1 else ''}{shown(max(by))}" if len(by) == len(changed) else ""
            yield f"{counted(len(changed), name)} {word}{most}"


def _above(one: int | None, other: int | None) -> bool:
    return one != other and (one is None or (other is not None and one > other))


def said(found: Comparison) -> str:
    """What the files say differently, in numbers."""
    if found.same:
        return "Both files mean the same."
    kinds = Counter(one.kind for one in found.changes)
    if not kinds:
        return "The files differ by less than a picosecond of what was written."
    return f"Changed: {listed([_kinds(kind, number) for kind, number in kinds.items()])}."


def _kinds(kind: str, number: int) -> str:
    return kind if kind.endswith("s") or kind in ("clock", "loop", "start") else counted(number, kind)


def _blocks(found: Comparison) -> Iterator[tuple[str, list[Line]]]:
    for turn in (Turn.POSSIBLE, Turn.UNDECIDED):
        yield turn.value, [row for one in found.verdicts if one.turn is turn for row in _hazard(one, found)]
    yield "findings that came up", [row for one in found.broken for row in _finding(one)]
    yield "margins", [*_items(_margins(found)), *_items(_unmeasured(found))]
    rest = [one for one in found.verdicts if one.turn is Turn.STILL]
    yield Turn.STILL.value, list(_items(_still(one) for one in rest))
    good = (Turn.PROVEN, Turn.NEW, Turn.GONE)
    others = [f"{subject(one.hazard)}: {_good(one)}" for one in found.verdicts if one.turn in good]
    others += [
        f"{subject(one.hazard)}: proven, but no longer however late the firmware is"
        for one in found.verdicts
        if isinstance(one.old, Safe) and isinstance(one.new, Safe) and one.old.however_late > one.new.however_late
    ]
    yield "other hazards", list(_items(others))
    yield "findings that went away", list(_items(f"{_title(one, why)}: {one.text}" for one, why in found.mended))
    yield "can be entered now", list(_items(_reached(found.gained)))
    yield "can no longer be entered", list(_items(_reached(found.lost)))
    yield "what the file says", list(_items(map(change, folded(found.changes))))


def _items(texts: Iterable[str]) -> Iterator[Line]:
    """Each text a paragraph; the lines after its first stand further in."""
    for text in texts:
        rows = paragraph(text, 4)
        yield line("  ", *(piece for piece in rows[0] if piece.text.strip()))
        yield from rows[1:]


# Hazards


def _hazard(turned: Turned, found: Comparison) -> Iterator[Line]:
    if isinstance(turned.new, Undecided):
        text = f"{subject(turned.hazard)}: {before(turned)}. Limit reached: {turned.new.limit}."
        yield from _items([text])
        return
    assert isinstance(turned.new, Unsafe)
    drive, new = found.new.drive, turned.new
    waived = "waived " if turned.new_waived is not None else ""
    yield line(f"  {waived}", Piece(new.check.value.upper(), Tone.BAD), f"  {new.place}")
    yield from paragraph(f"{stated(new)}. {before(turned).capitalize()}.", 4)
    yield from paragraph(f"The run: {run(drive, new.trace)}.", 4)
    last = f"To cure it: {cure(new, drive)}" if turned.new_waived is None else f"Waived because: {turned.new_waived}"
    yield from paragraph(f"{last}.", 4)


def before(turned: Turned) -> str:
    """How a hazard stood in the old file, without full stop."""
    if turned.old is None:
        thin = isinstance(turned.new, Unsafe) and turned.new.check is Check.THIN_MARGIN
        return "kept before, or not asked for" if thin else "not asked for before"
    if isinstance(turned.old, Safe):
        return "kept before" if _ruled(turned) else "proven before"
    if isinstance(turned.old, Undecided):
        return "undecided before"
    return "waived before" if turned.old_waived is not None else f"'{turned.old.check.value}' before"


def run(drive: Drive, trace: Trace) -> str:
    """The moves and trips of a run until all can conduct, as a sentence; of a long one the last."""
    begun = [
        f"{notes[0].text} (line {notes[0].line})"
        for event, notes in told(drive, trace)
        if event.act is Act.BEGINS and event.time <= trace.overlap_from
    ]
    last = begun[-_MOST_RUNS:]
    return "; ".join(["..."] * (len(begun) > len(last)) + last) or f"at rest in '{drive.start}'"


def _good(one: Turned) -> str:
    if not _ruled(one):
        return one.turn.value
    words = {Turn.PROVEN: "kept now", Turn.NEW: "asked for now, and kept"}
    return f"a rule, {words.get(one.turn, 'kept now, or no longer asked for')}"


def _still(one: Turned) -> str:
    old, new = _overlap(one.old), one.new
    assert isinstance(new, Unsafe)
    if _ruled(one) and isinstance(one.old, Unsafe):
        as_before = stated(one.old) == stated(new)
        what = f"{subject(new.hazard)} ({new.check.value} at {new.place}): {stated(new)}"
        return f"{what}, as before" if as_before else f"{what}; before: {stated(one.old)}"
    name, waived = f"{subject(one.hazard)} ({new.check.value} at {new.place})", ", waived" if one.new_waived else ""
    if old == new.overlap:
        return f"{name}{waived}: {lasting(old, new.greatest)} as before"
    word = "grew" if _above(new.overlap, old) else "shrank"
    least = "" if new.greatest else "at least "
    return f"{name}{waived}: the {stretch(new)} {word}, {_length(old)} => {least}{_length(new.overlap)}"


def _length(time: int | None) -> str:
    return "without end" if time is None else shown(time)


# Findings and margins


def _title(finding: Finding, why: str | None) -> str:
    check = finding.check
    return f"{'waived ' if why is not None else 'warning ' if check in WARNINGS else ''}{check.value}"


def _finding(one: Told) -> Iterator[Line]:
    finding, why = one
    tone = Tone.DOUBT if finding.check in WARNINGS else Tone.BAD
    yield line("  ", Piece(_title(finding, why), tone), f"  {finding.place}")
    yield from paragraph(f"{finding.text}.", 4)
    if why is not None:
        yield from paragraph(f"Waived because: {why}.", 4)


def _margins(found: Comparison) -> Iterator[str]:
    for one in sorted(found.margins, key=lambda one: not one.shrank):
        old, new = one.old.slack, one.new.slack
        by = "" if old is None or new is None else f" by {shown(abs(old - new))}"
        place = f", by line {one.new.place.line}" if one.new.place else ""
        word = "shrank" if one.shrank else "grew"
        yield f"{_margin(one)}: {word}{by}, {_left(old)} => {_left(new)}{place}"


def _margin(one: Moved) -> str:
    """Which margin it is: of what hazard, after which of its literals."""
    literal = one.new.literal
    return f"{subject(one.new.hazard)}, after {literal.switch} {'can conduct' if literal.on else 'can be off'} no more"


def _left(time: int | None) -> str:
    return "never follows" if time is None else shown(time)


def _unmeasured(found: Comparison) -> Iterator[str]:
    names: dict[tuple[Hazard, str], list[str]] = {}
    for one in found.unmeasured:
        names.setdefault((one.hazard, one.limit), []).append(str(one.after))
    for (hazard, limit), after in names.items():
        yield f"{subject(hazard)}, after {listed(after)}: not measured, the limit was reached: {limit}"


# What can be entered, what the file says


def _reached(reach: Reach) -> Iterator[str]:
    if reach.modes:
        yield f"{'mode' if len(reach.modes) == 1 else 'modes'} {listed(reach.modes)}"
    for way in reach.ways:
        yield f"{way.source} -> {way.target} ({listed(way.by, 'or')})"


def folded(changes: Sequence[Change]) -> list[Change]:
    """The changes, with moves that one line makes from several modes as one."""
    found: dict[object, Change] = {}
    for number, one in enumerate(changes):
        _, arrow, rest = one.name.partition(" -> ")
        key = (one.how, one.fields, one.place, rest) if one.kind == "move" and arrow else number
        if key in found:
            sources, _, _ = found[key].name.partition(" -> ")
            one = replace(one, name=f"{sources}, {one.name}")
        found[key] = one
    return list(found.values())


def change(one: Change) -> str:
    """One thing that is said otherwise, as a sentence without full stop."""
    name = f"{one.kind} {one.name}".strip()
    if one.how is not How.CHANGED:
        return f"{one.how.value}: {name} (line {one.place.line}{' of the old file' if one.how is How.REMOVED else ''})"
    return f"{name} (line {one.place.line}): {'; '.join(map(_field, one.fields))}"


def _field(field: Field) -> str:
    return f"{field.name} {field.old or 'not said'} => {field.new or 'not said'}"


# One line each


def lines(found: Comparison) -> str:
    """Everything as one line each: what got worse is an error, what got closer a warning, all else a note."""
    rows = (f"{place}: {severity}: {text} [{name}]" for place, severity, text, name in _lines(found))
    return "".join(f"{visible(row)}\n" for row in rows)


def _lines(found: Comparison) -> Iterator[tuple[Place, str, str, str]]:
    drive = found.new.drive
    for one in found.verdicts:
        text = f"{one.turn.value}: {subject(one.hazard)}, {before(one)}"
        if one.turn is Turn.UNDECIDED:
            yield drive.place, "error", text, "undecided"
        elif one.turn is Turn.POSSIBLE and isinstance(one.new, Unsafe):
            new = one.new
            text = f"{text}; {stated(new)}; the run: {run(drive, new.trace)}"
            yield new.place, "error" if one.worse else "note", text, new.check.value
        elif one.turn is Turn.STILL and isinstance(one.new, Unsafe):
            worse = _above(one.new.overlap, _overlap(one.old))
            yield one.new.place, "warning" if worse else "note", _still(one), one.new.check.value
        elif one.turn is not Turn.SAME:
            yield drive.place, "note", text, "proven"
    for finding, why in found.broken:
        severity = "note" if why is not None else "warning" if finding.check in WARNINGS else "error"
        yield finding.place, severity, f"came up: {finding.text}", finding.check.value
    for finding, _ in found.mended:
        yield finding.place, "note", f"went away: {finding.text}", finding.check.value
    for one_margin, text in zip(sorted(found.margins, key=lambda one: not one.shrank), _margins(found), strict=True):
        place = one_margin.new.place or drive.place
        yield place, "warning" if one_margin.shrank else "note", text, "margin"
    for text in _unmeasured(found):
        yield drive.place, "note", text, "margin"
    for word, reach in (("can be entered now", found.gained), ("can no longer be entered", found.lost)):
        yield from ((drive.place, "note", f"{word}: {text}", "reach") for text in _reached(reach))
    for one_change in folded(found.changes):
        yield one_change.place, "note", change(one_change), "changed"
