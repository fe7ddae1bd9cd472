"""Combination laws, one a file: how contributions of one kind become one figure.

What may live here: ``operands`` (the kinds of operand and which law takes which) and one file for each law. A law
refuses kinds that physics refuses: levels are never combined as root sum of squares, tolerances never as powers.
"""
