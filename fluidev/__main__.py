"""``python -m fluidev``: the same as the command ``fluidev``."""

import sys

from fluidev.cli.main import main

if __name__ == "__main__":
    sys.exit(main())
