"""From the text of a drive-sequence file to the checked drive or library; the only room that knows the parser."""

from seqcheck.language.lines import decode
from seqcheck.language.reading import read, read_any

__all__ = ["decode", "read", "read_any"]
