"""``python -m eqsheet.app``."""

import sys

from eqsheet.app.main import main

sys.exit(main())
