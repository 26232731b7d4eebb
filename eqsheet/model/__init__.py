"""Statements to an equation system: names, dimensions, expression tapes, derivatives, generated code.

Takes: a `Document`. Gives: an `EquationSystem`, immutable, with diagnostics; and the evaluators of its tapes.
"""
