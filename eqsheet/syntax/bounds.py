"""How large a text may be before it is refused: bounds on time, memory and depth, with their reasons."""

from __future__ import annotations

# A worksheet is written by people, and 8 MB is four thousand printed pages: a data file given by mistake.
LARGEST_FILE = 8 * 1024 * 1024

# Statements are read, modelled and solved at some thousands a second; more of them than this come from a program,
# which should write a family or a table, where 100,000 members cost no more than a second or two.
MOST_STATEMENTS = 100_000

# A statement of 20,000 characters fills five printed pages; nobody reviews it.
LONGEST_STATEMENT = 20_000

# Every later stage walks the tree by recursion, two or three calls a level, and Python allows 1000 calls.
DEEPEST_EXPRESSION = 200

# After this many broken statements the file is hardly a worksheet; more messages help nobody.
MOST_BROKEN_STATEMENTS = 200
