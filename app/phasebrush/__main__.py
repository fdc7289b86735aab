"""``python -m phasebrush``."""

import sys

from phasebrush.cli import main

sys.exit(main())
