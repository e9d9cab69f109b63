"""Run as `python -m stdfit.cli`."""

import sys

from stdfit.cli import main

sys.exit(main())
