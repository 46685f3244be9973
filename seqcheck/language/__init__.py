"""From the text of a drive-sequence file to the checked drive; the only room that knows the parser."""

from seqcheck.language.lines import decode
from seqcheck.language.reading import read

__all__ = ["decode", "read"]
