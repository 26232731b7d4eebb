"""What a solution looks like to people and to programs.

Takes: solutions. Gives: tables of text and JSON objects.
"""
