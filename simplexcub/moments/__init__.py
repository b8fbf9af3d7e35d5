"""Exact means over the probability simplex: integer exponents in, :class:`fractions.Fraction` out.

No float enters here. Each measure has two routes or more that share no formula.
"""
