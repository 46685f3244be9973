"""When a hazard is asked for: what is known of the sources must leave the short one orientation."""

from collections.abc import Callable, Iterable

from seqcheck.drive import Above, Known
from seqcheck.hazards import Hazard


def asked_for(hazard: Hazard) -> Callable[[tuple[Known, ...]], bool]:
    """The test whether `hazard` is asked for while given facts hold."""

    def asked(known: tuple[Known, ...]) -> bool:
        facts = {fact for fact in known if isinstance(fact, Above)}
        return not hazard.needs or any(_orderly(facts | need) for need in hazard.needs)

    return asked


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
