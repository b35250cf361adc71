"""Lets ``python -m diskwatch`` do what the ``diskwatch`` command does."""

import sys

from diskwatch.cli import main

if __name__ == "__main__":
    sys.exit(main())
