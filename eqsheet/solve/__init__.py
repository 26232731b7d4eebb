"""Solving one block: callables and arrays in, values and evidence out.

Takes a `Problem` (residual, Jacobian, bounds, magnitudes) and gives an `Outcome` (status, point, history).
Knows nothing of worksheets, names or units; `ladder.solve_block` is the neutral entry point, every method
can be used alone.
"""
