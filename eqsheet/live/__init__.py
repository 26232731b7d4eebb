"""The edited document: lines, undo, recovery, and the solution kept fresh while they change.

Takes: edits of lines. Gives: the fresh solution, what changed since the last good one, and the file on disk.
"""
