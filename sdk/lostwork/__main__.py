"""``python -m lostwork``: the command, where its script is not on the path."""

import sys

from lostwork.cases.command import main

if __name__ == "__main__":
    sys.exit(main())
