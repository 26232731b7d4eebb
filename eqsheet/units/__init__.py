"""Dimensions, the published list of units, and values in units.

Takes: unit symbols with exponents. Gives: `Unit` values, conversions, and numbers written for people.
"""
