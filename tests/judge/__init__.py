"""A judge that shares no code with the prover: every behaviour of a small drive, searched picosecond by picosecond."""
