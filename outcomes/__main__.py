"""`python -m outcomes` is the same as the command `outcomes`."""

import sys

from outcomes.cli import main

sys.exit(main())
