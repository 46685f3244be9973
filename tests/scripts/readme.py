"""Put the program's real output into the README, where a comment `output:` asks for it.

    .venv/bin/python tests/scripts/readme.py
"""

import contextlib
import io
import os
import re
from pathlib import Path

from seqcheck.cli import main

ROOT = Path(__file__).parent.parent.parent


def filled(match: re.Match[str]) -> str:
    """The block with the output of its command."""
    with contextlib.redirect_stdout(io.StringIO()) as shown:
        main(match[1].split())
    return f"<!-- output: seqcheck {match[1]} -->\n```\n{shown.getvalue()}```\n"


if __name__ == "__main__":
    os.chdir(ROOT)
    readme = ROOT / "README.md"
    text = readme.read_text(encoding="utf-8")
    pattern = re.compile(r"<!-- output: seqcheck (.+?) -->\n```\n.*?```\n", re.DOTALL)
    readme.write_text(pattern.sub(filled, text), encoding="utf-8")
