"""Incidence of equations and unknowns -> structural verdict and ordered blocks.

Takes integers and adjacency only: *rows* stand for equations, *columns* for unknowns. Gives a
`verdict.Structure`: which rows compete, which columns are free, and the blocks in order of solution.
Entry points: `analyse.analyse` for adjacency lists, `analyse_sparse.analyse_sparse` for index arrays.
"""
