"""seqcheck proves that a drive sequence never shorts a leg, or prints the run that does."""

# A constant: reading it from the installed package's metadata would cost more time than a small proof.
__version__ = "0.1.0"
