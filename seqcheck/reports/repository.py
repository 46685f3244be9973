"""The names of files as code hosts know them: relative to the top of the repository."""

import os
from pathlib import Path

from seqcheck.records import dataclass


def plain(name: str) -> str:
    """A file's name with escapes for what is no Unicode text, which JSON and UTF-8 cannot carry."""
    return name.encode("utf-8", "backslashreplace").decode("utf-8")


@dataclass(frozen=True, slots=True)
class Repository:
    """`here` is the folder that names of files start from, `top` the repository's; both absolute.

    Nothing is looked up: names are taken apart and put together as texts.
    """

    here: str
    top: str

    def path(self, file: str) -> str:
        """The path below the top, with slashes; of a file outside, the absolute path."""
        whole = self._whole(file)
        below = whole.is_relative_to(self.top)
        return plain((whole.relative_to(self.top) if below else whole).as_posix())

    def uri(self, file: str) -> str:
        """The same as a relative reference, or a `file:` URI for a file outside."""
        from urllib.parse import quote

        whole = self._whole(file)
        if not whole.is_relative_to(self.top):
            return whole.as_uri()
        return quote(os.fsencode(whole.relative_to(self.top).as_posix()))

    def _whole(self, file: str) -> Path:
        name = "standard-input" if file == "-" else file
        return Path(os.path.normpath(os.path.join(self.here, name)))
