"""`python -m groundroll`."""

import sys

from groundroll.command import main

sys.exit(main())
