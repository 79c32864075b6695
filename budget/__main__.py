"""`python -m budget`: the command line."""

import sys

from budget.commands import main

sys.exit(main())
