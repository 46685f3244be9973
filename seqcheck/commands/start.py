"""`seqcheck start`: a first file of a kind of drive, that proves as it stands and says what to fill in."""

from seqcheck.messages import nearest
from seqcheck.shipped import shipped
from seqcheck.source import printable

KINDS = {
    "half-bridge": "one leg that chops a valve, a coil or a lamp against the lower rail",
    "h-bridge": "two legs and a brushed motor: both directions, brake, coasting",
    "three-phase": "three legs and a brushless motor, commutated in six steps",
    "three-level": "one leg of four switches, clamped to the middle of the supply by diodes",
    "star-delta": "three contactors that start a mains motor in star and run it in delta",
    "matrix": "two inputs put on one load by switches that block both ways, in four steps",
}
"""Every kind with what it is; its file is `start/KIND.dseq` in the folder of grammars."""


def first_file(kind: str) -> str:
    """The first file of a kind. Raises KeyError, with what to say, where there is no such kind."""
    if kind not in KINDS:
        near = nearest(kind, KINDS)
        known = ", ".join(KINDS)
        hint = f"{near} (kinds: {known})" if near.startswith("did") else f"the kinds are {known}"
        raise KeyError(f"there is no kind '{printable(kind)}'; {hint}")
    return shipped(f"start/{kind}.dseq")


def listing() -> str:
    """The kinds, a line each."""
    width = max(map(len, KINDS))
    return "".join(f"{kind.ljust(width)}  {about}\n" for kind, about in KINDS.items())
