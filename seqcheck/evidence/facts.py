"""When a hazard is asked for: what is known must leave the short an orientation, the open winding a current."""

from collections.abc import Callable, Iterable

from seqcheck.drive import Above, CurrentInto, CurrentOut, Known
from seqcheck.hazards import Hazard


def asked_for(hazard: Hazard) -> Callable[[tuple[Known, ...]], bool]:
    """The test whether `hazard` is asked for while given facts hold."""

    def asked(known: tuple[Known, ...]) -> bool:
        return not hazard.needs or any(_agree(known, need) for need in hazard.needs)

    return asked


def _agree(known: tuple[Known, ...], need: frozenset[Known]) -> bool:
    """Whether everything can be so at once: no current both ways, no source above itself."""
    facts = need.union(known)
    out = {fact.node for fact in facts if isinstance(fact, CurrentOut)}
    into = {fact.node for fact in facts if isinstance(fact, CurrentInto)}
    return not out & into and _orderly(fact for fact in facts if isinstance(fact, Above))


def _orderly(facts: Iterable[Above]) -> bool:
    """Whether no node is above itself by way of others; nodes that nothing is above are taken away in turn."""
    left = set(facts)
    while left:
        lower = {fact.lower for fact in left}
        kept = {fact for fact in left if fact.upper in lower}
        if kept == left:
            return False
        left = kept
    return True
