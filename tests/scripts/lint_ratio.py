"""How long a lint takes, as a multiple of importing the three libraries in the same run.

    .venv/bin/python tests/scripts/lint_ratio.py [FILE] [ROUNDS]

Both are whole processes of the interpreter that runs this script, taken in turn; medians. Run it from an ordinary
install (`pip install .`): without byte code on disk every start compiles the program anew.
"""

import subprocess
import sys
import time
from statistics import median

IMPORTS = "import lark, networkx, rich.console, rich.table"


def seconds(command: list[str]) -> float:
    """The time that one process takes."""
    start = time.perf_counter()
    subprocess.run([sys.executable, *command], check=True, stdout=subprocess.DEVNULL)
    return time.perf_counter() - start


def main() -> None:
    """Print both medians and their ratio."""
    file = sys.argv[1] if len(sys.argv) > 1 else "samples/vent.dseq"
    rounds = int(sys.argv[2]) if len(sys.argv) > 2 else 15
    lint = ["-m", "seqcheck", "lint", file]
    seconds(lint)  # the first run may fill a cache
    pairs = [(seconds(["-c", IMPORTS]), seconds(lint)) for _ in range(rounds)]
    imports, lints = median(one for one, _ in pairs), median(one for _, one in pairs)
    print(f"importing lark, networkx and rich: {imports * 1000:.0f} ms")
    print(f"seqcheck lint {file}: {lints * 1000:.0f} ms")
    print(f"ratio: {lints / imports:.2f}")


if __name__ == "__main__":
    main()
