"""What all tests share."""

from __future__ import annotations

import os

from hypothesis import settings

# A change is judged by the same cases each time; at a desk the cases are new ones.
settings.register_profile("judging", derandomize=True)
if os.environ.get("CI"):
    settings.load_profile("judging")
