"""Text to syntax tree with positions, and back.

Takes: a `Source`. Gives: a `Document` of frozen nodes, with diagnostics; and formatted text.
Knows nothing of units, of names or of what an equation means.
"""
