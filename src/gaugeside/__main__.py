"""`python -m gaugeside`."""

import sys

from gaugeside.cli import main

if __name__ == "__main__":
    sys.exit(main())
