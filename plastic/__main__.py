"""``python -m plastic``: the command line."""

from __future__ import annotations

import sys

from plastic.cli import main

if __name__ == "__main__":
    sys.exit(main())
