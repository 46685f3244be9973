"""Mutation testing: small faults are put into the proof's rooms, and the tests must notice."""
