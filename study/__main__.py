"""`python -m study` is the same as the command `study`."""

from __future__ import annotations

import sys

from study.cli import main

if __name__ == "__main__":
    sys.exit(main())
