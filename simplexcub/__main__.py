"""`python -m simplexcub` is the command `simplexcub`."""

import sys

from simplexcub.cli import main

if __name__ == "__main__":
    sys.exit(main())
