"""``python -m eqsheet``."""

import sys

from eqsheet.app.main import main

sys.exit(main())
