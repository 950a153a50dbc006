"""``python -m rateloom``: the command line."""

import sys

from rateloom.cli import main

sys.exit(main())
