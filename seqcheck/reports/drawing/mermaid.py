"""The mode graph as Mermaid text, which common pages and code hosts render by themselves.

Names become numbered ids (an id must hold no `-`), every other text stands quoted with its special characters as
entities. Pages refuse more than 500 arrows or 50,000 characters: both are kept to, and what is left out is said.
"""

from seqcheck.reports.drawing.chart import Arrow, Chart, Graph, called, chart, labels
from seqcheck.reports.drawing.kinds import Does, said
from seqcheck.reports.pieces import counted, visible
from seqcheck.verdict import Unsafe

_ARROWS, _LETTERS = 500, 50_000
_STYLES = {
    Does.SHORT: "fill:#f9d9d5,stroke:#b3201a,stroke-width:3px,color:#1c2530",
    Does.TURNS: "fill:#d7e8f8,stroke:#25619c,color:#1c2530",
    Does.DRIVE: "fill:#cdeae3,stroke:#17756b,color:#1c2530",
    Does.BRAKE: "fill:#e4dcf6,stroke:#6546b0,color:#1c2530",
    Does.HELD: "fill:#f5e9c4,stroke:#856308,color:#1c2530",
    Does.FREE: "fill:#eef0f3,stroke:#66707c,color:#1c2530",
}
_BOXES = {
    Does.SHORT: ("[[", "]]"), Does.TURNS: ("[[", "]]"), Does.DRIVE: (">", "]"), Does.BRAKE: ("{{", "}}"),
    Does.HELD: ("[/", "/]"), Does.FREE: ("([", "])"), None: ("[", "]"),
}  # fmt: skip


def report(graph: Graph, verdict: Unsafe | None, note: str) -> str:
    """The whole text, with a line end."""
    drawn = chart(graph, verdict)
    names = {name: f"m{number}" for number, name in enumerate((*drawn.modes, *drawn.groups))}
    rows = [f"%% {_comment(graph.drive.title)}", f"%% {_comment(note)}", "flowchart LR"]
    rows += [f"  {names[name]}{_box(graph, drawn, name)}" for name in drawn.modes]
    rows += [f'  {names[name]}(["{_quoted(called(name))}"])' for name in drawn.groups]
    rows += [f"  begins((start)) --> {names[graph.drive.start]}"]
    rows += _styles(graph, drawn, names)
    rows += [f"  %% {counted(drawn.left_out, 'mode')} left out"] if drawn.left_out else []
    arrows = [f"  {names[one.source]} {_arrow(one)} {names[one.target]}" for one in drawn.arrows]
    return "".join(f"{row}\n" for row in _kept(rows, arrows))


def _kept(rows: list[str], arrows: list[str]) -> list[str]:
    """As many arrows as a page takes; the last row says how many it does not."""
    room = _LETTERS - sum(len(row) + 1 for row in rows) - 60
    kept = []
    for row in arrows[: _ARROWS - 1]:
        room -= len(row) + 1
        if room < 0:
            break
        kept.append(row)
    left = len(arrows) - len(kept)
    return [*rows, *kept, *([f"  %% {counted(left, 'arrow')} left out"] if left else [])]


def _box(graph: Graph, drawn: Chart, name: str) -> str:
    own = said(graph.rows[name])
    begin, end = _BOXES[own.does]
    texts = [name, own.words, "" if name in graph.reached else "unreachable"]
    texts.append("UNSAFE HERE" if name == drawn.hit else "")
    return f'{begin}"{"<br/>".join(_quoted(text) for text in texts if text)}"{end}'


def _arrow(arrow: Arrow) -> str:
    """A move is solid, a trip dotted; the unsafe path is thick and has the numbers of its steps."""
    texts = ["trip"] if arrow.trip and arrow.counts else []
    texts += (" ".join(filter(None, labels(run))) for run in arrow.runs)
    if not arrow.possible:
        texts.append("never begins")
    counts = f"[{','.join(map(str, arrow.counts))}] " if arrow.counts else ""
    line = "==>" if arrow.counts else "-.->" if arrow.trip else "-->"
    return f'{line}|"{counts}{"<br/>".join(_quoted(text) for text in texts if text)}"|'


def _styles(graph: Graph, drawn: Chart, names: dict[str, str]) -> list[str]:
    found = []
    for kind, style in _STYLES.items():
        own = [names[name] for name in drawn.modes if said(graph.rows[name]).does is kind]
        if own:
            found += [f"  classDef {kind.name.lower()} {style}", f"  class {','.join(own)} {kind.name.lower()}"]
    return found


def _quoted(text: str) -> str:
    """A text inside quotes: everything but letters, digits and harmless signs as an entity by its number."""
    return "".join(one if one.isalnum() or one in " .,:_/()+" else f"#{ord(one)};" for one in visible(text))


def _comment(text: str) -> str:
    """A text after `%%`: no brace, which would begin a directive."""
    return visible(text).replace("{", "(").replace("}", ")")
