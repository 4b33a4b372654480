"""`python -m contingency` is the command line."""

import sys

from contingency.cli import main

sys.exit(main())
