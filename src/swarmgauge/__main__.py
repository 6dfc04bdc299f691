"""Lets `python -m swarmgauge` do what `swarmgauge` does."""

import sys

from .cli import main

sys.exit(main())
