"""How large a text may be before it is refused: bounds on time, memory and depth, with their reasons."""

from __future__ import annotations

# A worksheet is written by people; 64 MB is a data file given by mistake.
LARGEST_FILE = 64 * 1024 * 1024

# A statement of 20,000 characters fills five printed pages; nobody reviews it.
LONGEST_STATEMENT = 20_000

# Every later stage walks the tree by recursion, two or three calls a level, and Python allows 1000 calls.
DEEPEST_EXPRESSION = 200

# After this many broken statements the file is hardly a worksheet; more messages help nobody.
MOST_BROKEN_STATEMENTS = 200
