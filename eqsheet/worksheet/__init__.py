"""The one conductor of all stages: text in, solution out. Owns the public `Worksheet` and `Solution`.

Takes: a text. Gives: a `Worksheet`, whose `solve` gives a `Solution`. Keeps the maps from the numbers that
`structure` and `solve` speak in to the names and lines of the worksheet.
"""
