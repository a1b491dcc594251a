"""Run as `python -m tests.bench`."""

import sys

from .run import main

sys.exit(main())
