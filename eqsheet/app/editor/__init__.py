"""The interactive editor: a thin shell over `eqsheet.live`, in small parts that are fed with getters.

Takes: keys. Gives: edits of the document, and words about what they did.
"""
