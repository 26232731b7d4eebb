"""Diagnostics as values: where, what, why and the cure. Imports nothing of ours.

Takes: findings of any stage. Gives: `Diagnostic` values and renderers for them.
"""
