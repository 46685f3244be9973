"""The words of the language: which begin a line, and which may not be names."""

SECTIONS = ("stage", "parts", "paths", "pins", "carriers", "modes", "moves", "trips", "rules")
SINGLES = ("drive", "clock", "let", "use", "writes", "loop")
STARTS = frozenset(SECTIONS) | frozenset(SINGLES)
REQUIRED = ("stage", "modes", "moves")
SERVING = frozenset({"drive", "clock", "let", "use", "parts", "carriers"})
"""What the lines of a file that only serves `use` begin with, or belong to."""

RESERVED = STARTS | frozenset(
    (
        *("reset", "on", "off", "keep", "free", "any", "all", "but", "set", "wait", "start", "to", "from", "at"),
        *("when", "after", "earliest", "latest", "unbroken", "with", "within", "means", "and", "through"),
        *("interlock", "never", "waive", "margin", "clears", "tolerates", "must", "current"),
    )
)
"""Words that cannot be names. All other words of the language mean something only where a name cannot stand."""

FIRST_WORDS = {
    "paths": ("interlock",),
    "moves": ("start", "set", "wait"),
    "trips": ("set", "wait"),
    "rules": ("margin", "never", "tolerates", "waive"),
}
"""Words with which lines of a section begin where others begin with names."""

NO_QUANTITY = frozenset({"up"})
"""Words that can be names of all but quantities, since `up to D` stands where a quantity can stand."""

CHECKS = (
    "short",
    "overlap",
    "thin-margin",
    "open-winding",
    "together",
    "late-trip",
    "long-on",
    "short-pulse",
    "too-soon",
    "single-fault",
    "unreachable",
    "no-way-back",
    "ambiguous",
    "stalled",
    "row-meaning",
    "idle-waiver",
    "no-path",
    "held-by-interlock",
    "punctual",
)
"""The names of findings and warnings that `waive` may name; a test holds them against the verdicts'."""

LINE_FORMS = {
    "drive": 'drive "TITLE"',
    "clock": "clock F [within R][, late by at most D]",
    "let": "let NAME = EXPRESSION",
    "use": 'use "FILE"',
    "writes": "writes together | one at a time, D to D apart[, ORDER] | by port, D to D apart[, ORDER]",
    "loop": "loop at least D",
    "modes": "modes SWITCH SWITCH ...",
}
"""How a line that begins with the word reads; the heads of the other sections stand alone."""
