"""`python -m a2d`."""

import sys

from a2d.cli import main

sys.exit(main())
