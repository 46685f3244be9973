"""The page for a design review: everything there is to know of one file, in the order in which a reviewer asks."""

from collections.abc import Iterator
from xml.etree.ElementTree import Element

from seqcheck.drive import cell_text
from seqcheck.effects import Table
from seqcheck.records import dataclass
from seqcheck.reports.checks import ABOUT
from seqcheck.reports.does import does, meant
from seqcheck.reports.drawing import modes
from seqcheck.reports.drawing.chart import Graph
from seqcheck.reports.page import found as pieces
from seqcheck.reports.page.assumed import assumptions
from seqcheck.reports.page.bars import margins
from seqcheck.reports.page.markup import listing, node, page, sentence, table
from seqcheck.reports.pieces import counted
from seqcheck.reports.standing import Sorted, Standing, sorted_out, worst
from seqcheck.reports.wording import CAUTION, stated, subject
from seqcheck.source import printable
from seqcheck.verdict import Budget, Finding, Outcome, Safe, Undecided, Unsafe, Verdict

_KINDS = {Standing.UNSAFE: "bad", Standing.AMISS: "bad", Standing.UNDECIDED: "open", Standing.PROVEN: "good"}
NOT_COVERED = (
    "Noise and ringing on a gate, a switch or driver that fails, a supply that sags, a wire in the wrong place.",
    "Delays, circuit and clock that are not as the file says: each value above is worth as much as its source.",
    "Firmware that does something else than the table says: a wrong register, a second writer of the same pins.",
    "Currents and voltages: the proof is about which switches can conduct when, not about heat or losses.",
)
CAUTIONS = (
    "A hardware interlock, a current limit and a safe state without firmware come first; this page replaces none.",
    "Local codes, the standards that apply and the judgement of someone licensed to practise come first, too.",
    "Bring up a new bridge with a current-limited supply, and measure the dead time at the gates.",
)


@dataclass(frozen=True, slots=True)
class Review:
    """What the page is made of. `budget` is None where margins could not be told, `unsaid` says why; `digest` is of the
    drive's meaning, `command` the call that wrote the page."""

    outcome: Outcome
    table: Table
    graph: Graph
    budget: Budget | None
    unsaid: str
    digest: str
    version: str
    command: str


def report(review: Review, note: str) -> str:
    """The whole page; `note` says what the marking of the mode graph rests on."""
    outcome = review.outcome
    parts, drive = sorted_out(outcome), outcome.drive
    sections = [
        ("verdict", "Verdict", _verdict(outcome, parts)),
        ("findings", "Findings", _findings(outcome, parts)),
        ("waived", "Waived", _waived(outcome, parts)),
        ("assumptions", "What the proof rests on", assumptions(drive)),
        ("table", "Switching table, and what each row does", _table(review.table)),
        ("modes", "Modes", [modes.picture(review.graph, worst(parts.unsafe) if parts.unsafe else None, note)]),
        ("margins", "Margins", margins(review.budget) if review.budget else [node("p", review.unsaid)]),
        ("not-covered", "What is not covered", [node("p", f"{CAUTION} It knows nothing of:"), listing(NOT_COVERED)]),
        ("cautions", "Before it is switched on", [listing(CAUTIONS)]),
        ("origin", "Where this page comes from", _origin(review)),
    ]
    links = [node("li", node("a", title, href=f"#{name}")) for name, title, _ in sections]
    body = [
        node("header", node("h1", drive.title), node("p", node("code", printable(outcome.file))), _banner(parts)),
        node("nav", node("ul", *links), aria_label="Contents"),
        node("main", *(node("section", node("h2", title, id=name), *some) for name, title, some in sections)),
        node("footer", node("p", CAUTION)),
    ]
    return page(f"{parts.standing.value}: {drive.title}", body)


def _banner(parts: Sorted) -> Element:
    """The verdict first, in a word and a frame; then the one caution."""
    but = " but for what is waived" if parts.waived and parts.standing is Standing.PROVEN else ""
    counts = [
        (len(parts.unsafe), "counterexample", ""),
        (len(parts.findings), "finding", ""),
        (len(parts.undecided), "hazard", " undecided"),
        (len(parts.safe), "hazard", " proven"),
        (len(parts.warnings), "warning", ""),
        (len(parts.waived), "finding", " waived"),
    ]
    said = ", ".join(f"{counted(number, name)}{rest}" for number, name, rest in counts if number)
    mark = node("b", f"{parts.standing.value}{but}")
    kind = f"verdict {_KINDS[parts.standing]}"
    return node("div", node("p", mark), sentence(said or "no hazard was asked for"), node("p", CAUTION), kind=kind)


# Sections


def _verdict(outcome: Outcome, parts: Sorted) -> list[Element]:
    rows = [_hazard(one) for one in outcome.verdicts]
    marked = frozenset(index for index, one in enumerate(outcome.verdicts) if isinstance(one, Unsafe))
    if not rows:
        return [node("p", "The stage has no set of switches that could short it, so there was no hazard to prove.")]
    heads = ("hazard", "verdict", "how", "however late the firmware is")
    found = [table("Every hazard that was asked for", heads, rows, marked)]
    if parts.warnings:
        said = f"{counted(len(parts.warnings), 'warning')} below: read them, the proof may rest on them."
        found.append(node("p", said))
    return found


def _hazard(verdict: Verdict) -> tuple[str, ...]:
    name = subject(verdict.hazard)
    if isinstance(verdict, Safe):
        how = "least times alone" if verdict.method == "screen" else counted(verdict.zones, "zone")
        return name, "possible in no run", how, "yes" if verdict.however_late else "no"
    if isinstance(verdict, Undecided):
        return name, "UNDECIDED, not proven", verdict.limit, ""
    return name, f"UNSAFE ({verdict.check.value})", stated(verdict), ""


def _findings(outcome: Outcome, parts: Sorted) -> list[Element]:
    drive = outcome.drive
    found = [pieces.unsafe(one, drive, f"unsafe-{index}") for index, one in enumerate(parts.unsafe, 1)]
    found += [pieces.undecided(one, f"undecided-{index}") for index, one in enumerate(parts.undecided, 1)]
    others = [*parts.findings, *(one for one in parts.warnings)]
    found += [pieces.finding(one, f"finding-{index}") for index, one in enumerate(others, 1)]
    return found or [node("p", "None.")]


def _waived(outcome: Outcome, parts: Sorted) -> list[Element]:
    found = []
    for index, (one, why) in enumerate(parts.waived, 1):
        name = f"waived-{index}"
        if isinstance(one, Finding):
            found.append(pieces.finding(one, name, why))
        else:
            found.append(pieces.unsafe(one, outcome.drive, name, why))
    asked = [f"{one.check} for {one.name} (line {one.place.line}): {one.reason}" for one in outcome.drive.waivers]
    if not asked:
        return [node("p", "The file waives nothing.")]
    return [*found, node("p", "Waivers of the file:"), listing(asked)]


def _table(read: Table) -> list[Element]:
    heads = ("mode", *read.columns, "means", "what it does to the windings")
    rows = []
    for row in read.rows:
        cells = [cell_text(cell) for cell in row.mode.cells]
        means = meant(row.mode.means) if row.mode.means else ""
        text = does(row) + (f" \u2014 but {row.amiss}" if row.amiss else "")
        rows.append((row.mode.name, *cells, means, text))
    marked = frozenset(
        index for index, row in enumerate(read.rows) if row.amiss or any(word.shorts for word in row.words)
    )
    said = "Read back from the circuit, never from names; marked rows short a supply or do not do what they mean"
    return [table(said, heads, rows, marked), *_swaps(read)]


def _swaps(read: Table) -> Iterator[Element]:
    pairs = dict.fromkeys((one.first, one.second) for one in read.swaps if one.direct)
    if pairs:
        said = ", ".join(f"{one} and {other}" for one, other in pairs)
        yield node("p", f"A move or trip swaps a leg straight between: {said}.")


def _origin(review: Review) -> list[Element]:
    checked = ", ".join(sorted({one.check.value for one in review.outcome.findings if one.check.value in ABOUT}))
    rows = [
        ("file", printable(review.outcome.file)),
        ("digest of its meaning (SHA-256)", review.digest),
        ("program", f"seqcheck {review.version}"),
        ("command", review.command),
        ("checks with something to say", checked or "none"),
    ]
    said = "Comments, layout and the title may change without changing the digest; nothing else may."
    return [table("Enough to make this page again", ("what", "value"), rows), node("p", said, kind="faint")]
