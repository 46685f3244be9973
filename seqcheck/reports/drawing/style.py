"""How pictures look, in light and in dark: one style sheet, for pictures that stand alone and on a page alike."""

_LIGHT = {
    "paper": "#fdfdfb", "ink": "#1c2530", "faint": "#5b6672", "rule": "#d5dae0", "bad": "#b3201a", "wash": "#f9d9d5",
    "drive": "#cdeae3", "drive-edge": "#17756b", "brake": "#e4dcf6", "brake-edge": "#6546b0",
    "held": "#f5e9c4", "held-edge": "#856308", "free": "#eef0f3", "free-edge": "#66707c",
    "turns": "#d7e8f8", "turns-edge": "#25619c", "short": "#f9d9d5", "short-edge": "#b3201a",
    "sure": "#3f5a73", "doubt": "#dfe6ed", "doubt-edge": "#4d667e",
}  # fmt: skip
_DARK = {
    "paper": "#14181d", "ink": "#e6eaee", "faint": "#9aa6b2", "rule": "#36404a", "bad": "#ff8a80", "wash": "#4a1d1b",
    "drive": "#123f3a", "drive-edge": "#58c9bb", "brake": "#33275a", "brake-edge": "#b59df2",
    "held": "#43360e", "held-edge": "#dcb64a", "free": "#262d35", "free-edge": "#9aa6b2",
    "turns": "#17365a", "turns-edge": "#7db8f0", "short": "#4a1d1b", "short-edge": "#ff8a80",
    "sure": "#8fb0cf", "doubt": "#27323d", "doubt-edge": "#8fa9c2",
}  # fmt: skip
_KINDS = ("drive", "brake", "held", "free", "turns", "short")


def _colours(colours: dict[str, str]) -> str:
    return "".join(f"--{name}:{value};" for name, value in colours.items())


PALETTE = f":root{{{_colours(_LIGHT)}}}\n@media (prefers-color-scheme: dark){{:root{{{_colours(_DARK)}}}}}\n"
PRINTED = f"@media print{{:root{{{_colours(_LIGHT)}}}}}\n"
_FONTS = """\
.sq text{font:12px ui-monospace,"DejaVu Sans Mono",Menlo,Consolas,monospace;fill:var(--ink)}
.sq .strong{font-weight:700}.sq .small{font-size:11px}.sq .faint{fill:var(--faint)}
.sq .alarm{fill:var(--bad);font-weight:700}
.sq .large{font-size:14px;font-weight:700}.sq .mid{text-anchor:middle}.sq .end{text-anchor:end}
.sq .over{paint-order:stroke;stroke:var(--paper);stroke-width:4px;stroke-linejoin:round}
.sq .inverse{fill:var(--paper);font-weight:700;font-size:11px}
"""
_SHAPES = """\
.sq .paper{fill:var(--paper)}
.sq .way{fill:none;stroke:var(--ink);stroke-width:1.3}.sq .trip{stroke-dasharray:6 4}
.sq .never{stroke:var(--faint);stroke-dasharray:1.5 4}
.sq .taken{stroke:var(--bad);stroke-width:3.6}.sq .trip.taken{stroke-dasharray:9 4}
.sq .head{fill:var(--ink)}.sq .head-never{fill:var(--faint)}.sq .head-bad{fill:var(--bad)}
.sq .count{fill:var(--bad);stroke:var(--paper);stroke-width:1.5}
.sq .mode{stroke-width:1.6;stroke-linejoin:round}.sq .bare{fill:var(--paper);stroke:var(--free-edge)}
.sq .lost{stroke-dasharray:3 3}.sq .hit{stroke:var(--bad);stroke-width:4}
.sq .mark{fill:none;stroke-width:1.4}.sq .pill{fill:var(--paper);stroke:var(--faint);stroke-width:1.2}
.sq .edge{fill:none;stroke:var(--ink);stroke-width:1.8;stroke-linejoin:round}
.sq .thin{fill:none;stroke:var(--faint);stroke-width:1}.sq .guide{fill:none;stroke:var(--rule);stroke-width:1}
.sq .origin{stroke:var(--faint);stroke-dasharray:5 3}
.sq .base{fill:none;stroke:var(--doubt-edge);stroke-width:1.2}
.sq .sure{fill:var(--sure);stroke:var(--sure)}.sq .doubt{stroke:var(--doubt-edge);stroke-dasharray:4 2}
.sq .either{stroke:var(--ink);stroke-width:1.2}
.sq .ground-doubt{fill:var(--doubt)}.sq .stripe-doubt{stroke:var(--doubt-edge);stroke-width:1.6}
.sq .ground-either{fill:var(--paper)}.sq .stripe-either{stroke:var(--faint);stroke-width:1.4}
.sq .ground-short{fill:var(--short)}.sq .stripe-short{stroke:var(--bad);stroke-width:1.6;stroke-opacity:.4}
.sq .ground-meet{fill:var(--wash);fill-opacity:.45}
.sq .stripe-meet{stroke:var(--bad);stroke-width:1.4;stroke-opacity:.5}
.sq .meet{stroke:none}.sq .limit{fill:none;stroke:var(--bad);stroke-width:1.2;stroke-dasharray:2 2}
.sq .span{fill:none;stroke:var(--ink);stroke-width:1}.sq .span-bad{fill:none;stroke:var(--bad);stroke-width:1.4}
.sq .moving{stroke:var(--faint);stroke-width:1}.sq .stay{fill:var(--paper);stroke:var(--ink);stroke-width:1.2}
.sq .gap{fill:var(--paper)}.sq .tear{fill:none;stroke:var(--faint);stroke-width:1.2}
"""
RULES = (
    _FONTS
    + _SHAPES
    + "".join(f".sq .{one}{{fill:var(--{one});stroke:var(--{one}-edge)}}\n" for one in _KINDS)
    + "".join(f".sq .mark-{one}{{stroke:var(--{one}-edge)}}\n" for one in _KINDS)
)
STYLE = PALETTE + PRINTED + RULES
