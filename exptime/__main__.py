"""Run the command line with ``python -m exptime``."""

from __future__ import annotations

import sys

from exptime.cli import main

if __name__ == "__main__":
    sys.exit(main())
