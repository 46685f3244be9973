"""Files that are shipped with the program: its grammar and the schema of its answers."""

from pathlib import Path

PACKAGE = Path(__file__).parent


def shipped(name: str) -> str:
    """The text of a file of `grammars/`: in the package, where a wheel puts it, else beside it, as in a checkout.

    Importing importlib.resources costs more than reading a small file does, so it is asked only where the package is
    no folder, as in a zip file.
    """
    for folder in (PACKAGE, PACKAGE.parent):
        try:
            return (folder / "grammars" / name).read_text("utf-8")
        except OSError:
            continue
    from importlib.resources import files

    return (files("seqcheck") / "grammars" / name).read_text("utf-8")
