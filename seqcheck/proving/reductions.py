"""What makes proofs short and changes no answer: each can be left out, to test that and to measure what it is worth."""

from enum import Enum


class Reduction(Enum):
    """One of them, by its name for `--without`."""

    SCREEN = "screen"
    """Least times alone are tried first."""
    FORGET = "forget"
    """Phases of carriers that nobody follows are forgotten first."""
    CUT = "cut"
    """Long stays are cut."""
    FOLLOW = "follow"
    """A run that was found where it proves nothing is looked for along its way where it would."""
