"""What contradicts a hazard: facts under which it is not asked for."""

from collections.abc import Iterable

from seqcheck.drive import Above, CurrentInto, CurrentOut, Known
from seqcheck.hazards import Hazard


def contradicted(hazard: Hazard, facts: Iterable[Known]) -> bool:
    """Whether the hazard cannot happen under these facts: every alternative of its needs is ruled out.

    Current out of a node rules out current into it. `with a above b` and `with b above c` give a above c as well.
    """
    known = frozenset(facts)
    if not hazard.needs or not known:
        return False
    return all(excluded(known, needs) for needs in hazard.needs)


def excluded(known: frozenset[Known], needs: frozenset[Known]) -> bool:
    """Whether what is known leaves no way for all of the needs to be so as well."""
    if any(opposite(one) in known for one in needs):
        return True
    return circular(known | needs)


def circular(facts: Iterable[Known]) -> bool:
    """Whether a source would have to lie above itself."""
    above = {(one.upper, one.lower) for one in facts if isinstance(one, Above)}
    if len(above) < 2:
        return any(upper == lower for upper, lower in above)
    import networkx as nx  # takes longer to load than most proofs, and few drives have sources

    return not nx.is_directed_acyclic_graph(nx.DiGraph(above))


def opposite(fact: Known) -> Known:
    """The fact that cannot hold together with this one."""
    if isinstance(fact, Above):
        return Above(fact.lower, fact.upper)
    return CurrentInto(fact.node) if isinstance(fact, CurrentOut) else CurrentOut(fact.node)
