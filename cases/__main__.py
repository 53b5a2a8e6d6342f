"""`python -m cases …` is the command `hairpin …`."""

import sys

from cases.cli import main

sys.exit(main())
