"""Exit codes: what the program says in one number."""

PROVEN, FOUND, WRONG, UNDECIDED, FAULT = 0, 1, 2, 3, 4
_WORST_FIRST = (FAULT, WRONG, FOUND, UNDECIDED, PROVEN)


def worse(one: int, other: int) -> int:
    """The one that counts where two files differ."""
    return min(one, other, key=_WORST_FIRST.index)
