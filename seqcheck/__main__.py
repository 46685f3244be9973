"""`python -m seqcheck` is the same as the command `seqcheck`."""

import sys

from seqcheck.entry import main

if __name__ == "__main__":
    sys.exit(main())
