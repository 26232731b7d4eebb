"""Arguments and keys to files and exit codes: two thin shells, neither of which imports the other.

Takes: what the user typed. Gives: calls of the conductor, and what it says, written out.
"""
