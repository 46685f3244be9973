"""The switching table read back, for people: what each row does, and which rows swap a leg."""

from collections.abc import Sequence

from seqcheck.drive import cell_text
from seqcheck.effects import Row, Swap, Table
from seqcheck.reports.does import does, meant
from seqcheck.reports.pieces import WIDTH, Line, Piece, Tone, counted, line, listed, paragraph, visible, wrapped

_LEAST = 30  # columns in which what a row does reads easily; the cells are left out where they would take these
_GAP = "  "


def report(table: Table) -> list[Line]:
    """The whole answer as styled lines; the first three say what was asked."""
    head = [line(Piece(table.file, Tone.STRONG), f'  "{table.title}"'), *_standing(table), *_meanings(table)]
    found = [*head, (), *_rows(table), *_dead_times(table.rows)]
    if table.swaps:
        found += [(), *_swaps(table)]
    last = "What a row does at rest, by the circuit alone; lint proves the rest."
    return [*found, (), *paragraph(last, 0, Tone.FAINT)]


def shorting(table: Table) -> list[Row]:
    """The rows that short a supply."""
    return [row for row in table.rows if any(word.shorts for word in row.words)]


def _standing(table: Table) -> list[Line]:
    count = f"{counted(len(table.rows), 'row')}, {counted(len(table.ends), 'winding')}"
    shorts = [row.mode.name for row in shorting(table)]
    stuck = [row.mode.name for row in table.rows if any(word.stuck for word in row.words)]
    if shorts:
        return paragraph(f"{count}. A supply is shorted in {listed(shorts)}.", 0, Tone.BAD)
    if stuck:
        return paragraph(f"{count}. No row shorts a supply. Some current has no way in {listed(stuck)}.", 0, Tone.DOUBT)
    ways = "; every current has a way in all" if table.ends else ""
    return paragraph(f"{count}. No row shorts a supply{ways}.", 0, Tone.GOOD)


def _meanings(table: Table) -> list[Line]:
    saying = [row for row in table.rows if row.mode.means]
    wrong = [row.mode.name for row in saying if row.amiss]
    if wrong:
        return paragraph(f"What it 'means' is not what it does in {listed(wrong)}.", 0, Tone.BAD)
    if not saying:
        return paragraph("No row says what it 'means', so none was checked for that.", 0, Tone.FAINT)
    return paragraph(f"{counted(len(saying), 'row')} with 'means', and each does what it says.", 0, Tone.GOOD)


# Rows


def _rows(table: Table) -> list[Line]:
    names = max(len("row"), *(len(row.mode.name) for row in table.rows))
    widths = [
        max(len(name), *(len(_cell(row, place)) for row in table.rows)) for place, name in enumerate(table.columns)
    ]
    left = len(_GAP) + names + len(_GAP)
    cells = sum(width + 1 for width in widths) + 1
    if left + cells > WIDTH - _LEAST:
        widths, cells = [], 0
    head = " ".join(name.ljust(width) for name, width in zip(table.columns, widths, strict=False)) if widths else ""
    found = [line(_GAP, Piece(f"{'row'.ljust(names)}{_GAP}{head.ljust(cells)}does", Tone.FAINT))]
    for row in table.rows:
        shown = " ".join(_cell(row, place).ljust(width) for place, width in enumerate(widths)).ljust(cells)
        texts = wrapped(visible(does(row)), WIDTH - left - cells) or [""]
        tone = Tone.BAD if any(word.shorts for word in row.words) else Tone.PLAIN
        for number, text in enumerate(texts):
            lead = f"{row.mode.name.ljust(names)}{_GAP}{shown}" if number == 0 else " " * (left + cells - len(_GAP))
            found.append(line(_GAP, Piece(lead, Tone.STRONG), Piece(text, tone)))
        if row.amiss and row.mode.means:
            text = f"means {meant(row.mode.means)} (line {row.mode.means.place.line}), but {row.amiss}"
            found += [line(" " * (left + cells), Piece(part, Tone.BAD)) for part in wrapped(text, WIDTH - left - cells)]
    return found


def _cell(row: Row, place: int) -> str:
    return cell_text(row.mode.cells[place])


def _dead_times(rows: Sequence[Row]) -> list[Line]:
    said = [f"{row.mode.name} {row.dead_times}" for row in rows if row.dead_times]
    return [(), *paragraph(f"Dead times in a period of the carrier: {listed(said)}.", 0)] if said else []


# Swaps


def _swaps(table: Table) -> list[Line]:
    pairs: dict[tuple[str, str], list[Swap]] = {}
    for swap in table.swaps:
        pairs.setdefault((swap.first, swap.second), []).append(swap)
    direct = sum(swaps[0].direct for swaps in pairs.values())
    text = f"{counted(len(pairs), 'pair')} of rows swap a leg and need a dead time in between."
    if direct:
        text += f" A move or trip leads straight from one to the other in {direct} of them, marked *."
    found = paragraph(text, 0)
    first, second = (max(len(pair[side]) for pair in pairs) for side in (0, 1))
    for (one, other), swaps in pairs.items():
        lead = f"{_GAP}{'*' if swaps[0].direct else ' '} {one.ljust(first)}{_GAP}{other.ljust(second)}{_GAP}"
        texts = wrapped(", ".join(map(_swap, swaps)), max(WIDTH - len(lead), _LEAST))
        found += [line(lead if number == 0 else " " * len(lead), text) for number, text in enumerate(texts)]
    return found


def _swap(swap: Swap) -> str:
    stays = f" beside {' '.join(swap.stays)}" if swap.stays else ""
    return f"{' '.join(swap.off)} to {' '.join(swap.on)}{stays}"
