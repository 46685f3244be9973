"""The stage as a directed graph: shorting and opening sets, what contradicts them, and what a row of the table does."""

from seqcheck.circuit.facts import contradicted
from seqcheck.circuit.opening import opening_sets
from seqcheck.circuit.shorting import shorting_sets

__all__ = ["contradicted", "opening_sets", "shorting_sets"]
