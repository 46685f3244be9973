"""A page as a tree, so that every text is escaped by construction, and its style."""

from collections.abc import Iterable, Sequence
from xml.etree.ElementTree import Element, tostring

from seqcheck.reports.drawing.style import PALETTE, PRINTED, RULES
from seqcheck.reports.pieces import visible

_LOOKS = """\
:root{color-scheme:light dark}
body{margin:0 auto;max-width:68rem;padding:1.5rem;background:var(--paper);color:var(--ink);
font:16px/1.5 system-ui,-apple-system,"Segoe UI","DejaVu Sans",sans-serif}
h1{font-size:1.7rem;margin:0}
h2{font-size:1.25rem;margin:2.4rem 0 .6rem;border-bottom:2px solid var(--ink);padding-bottom:.2rem}
h3{font-size:1.05rem;margin:1.6rem 0 .3rem}p{margin:.5rem 0;max-width:52rem}code,td,.mono{font-family:ui-monospace,
"DejaVu Sans Mono",Menlo,Consolas,monospace;font-size:.86rem}
.verdict{border:3px solid var(--ink);padding:.8rem 1rem;margin:1rem 0}.verdict b{font-size:1.35rem;letter-spacing:.02em}
.bad{border-color:var(--bad)}.bad b,.alarm{color:var(--bad)}.alarm{font-weight:700}
.good{border-color:var(--drive-edge)}.open{border-color:var(--held-edge);border-style:dashed}
.caution{border-left:6px double var(--held-edge);padding:.2rem 0 .2rem 1rem}
.faint{color:var(--faint)}nav ul{columns:2;padding-left:1.2rem}a{color:var(--turns-edge)}
table{border-collapse:collapse;margin:.6rem 0}caption{text-align:left;font-weight:700;padding:.3rem 0}
th,td{border-bottom:1px solid var(--rule);padding:.2rem .9rem .2rem 0;text-align:left;vertical-align:top}
th{font-size:.86rem}td.tight{white-space:nowrap}td.long{min-width:17rem}.scroll{overflow-x:auto}
tr.hit td{background:var(--wash)}
svg.sq{display:block;max-width:100%;height:auto;margin:.8rem 0}
section.finding{border-top:1px solid var(--rule);padding-top:.2rem}
footer{margin-top:3rem;border-top:2px solid var(--ink);padding-top:.6rem}
@media print{body{max-width:none;padding:0;font-size:10.5pt}nav{display:none}a{color:inherit;text-decoration:none}
h2,h3,caption{break-after:avoid}tr,svg.sq,.verdict{break-inside:avoid}svg.sq{max-height:22cm}.scroll{overflow:visible}
td,code,th{font-size:8pt}th,td{padding-right:.45rem}td.long{min-width:15rem}@page{margin:16mm}}
"""
_TIGHT = 22  # a cell of fewer letters is never broken into lines
Part = Element | str | None


def node(tag: str, *parts: Part, **attributes: str) -> Element:
    """An element with its contents; `kind` is its class, None leaves a part out."""
    said = {{"kind": "class"}.get(name, name).replace("_", "-"): value for name, value in attributes.items() if value}
    found = Element(tag, said)
    for part in parts:
        if isinstance(part, str):
            _append(found, visible(part))
        elif part is not None:
            found.append(part)
    return found


def _append(found: Element, text: str) -> None:
    if len(found):
        found[-1].tail = (found[-1].tail or "") + text
    else:
        found.text = (found.text or "") + text


def sentence(text: str, kind: str = "") -> Element | None:
    """A paragraph of one sentence, its first letter as it is; nothing for an empty one."""
    return node("p", f"{text}.", kind=kind) if text else None


def table(
    caption: str, heads: Sequence[str], rows: Iterable[Sequence[Part]], marked: frozenset[int] = frozenset()
) -> Element:
    """A table with its caption; the rows of these numbers are marked."""
    body = node("tbody")
    for index, row in enumerate(rows):
        cells = [node("td", one, kind=_cell_kind(one)) for one in row]
        body.append(node("tr", *cells, kind="hit" if index in marked else ""))
    head = node("thead", node("tr", *(node("th", text, scope="col") for text in heads)))
    return node("div", node("table", node("caption", caption), head, body), kind="scroll", tabindex="0")


def _cell_kind(one: Part) -> str:
    if isinstance(one, str):
        return "tight" if len(one) < _TIGHT else ""
    return "long"


def listing(texts: Iterable[str]) -> Element:
    """Texts as a list."""
    return node("ul", *(node("li", text) for text in texts))


def page(title: str, body: Sequence[Element]) -> str:
    """The whole page, with a line end. It holds no script and asks for nothing from elsewhere."""
    style = node("style")
    style.text = PALETTE + PRINTED + _LOOKS + RULES
    policy = node("meta", content="default-src 'none'; style-src 'unsafe-inline'")
    policy.set("http-equiv", "Content-Security-Policy")
    sight = node("meta", name="viewport", content="width=device-width, initial-scale=1")
    head = node("head", node("meta", charset="utf-8"), policy, sight, node("title", title), style)
    root = node("html", head, node("body", *body), lang="en")
    return f"<!DOCTYPE html>\n{tostring(root, encoding='unicode', method='html')}\n"
